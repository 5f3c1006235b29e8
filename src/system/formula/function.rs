//! The elementary functions of one variable that formulas know, with their first three derivatives.

/// An elementary function of one variable.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Function {
    /// Sine.
    Sin,
    /// Cosine.
    Cos,
    /// Tangent.
    Tan,
    /// Inverse sine.
    Asin,
    /// Inverse cosine.
    Acos,
    /// Inverse tangent.
    Atan,
    /// Hyperbolic sine.
    Sinh,
    /// Hyperbolic cosine.
    Cosh,
    /// Hyperbolic tangent.
    Tanh,
    /// Inverse hyperbolic sine.
    Asinh,
    /// Inverse hyperbolic cosine.
    Acosh,
    /// Inverse hyperbolic tangent.
    Atanh,
    /// Exponential.
    Exp,
    /// Natural logarithm.
    Log,
    /// Square root.
    Sqrt,
    /// Real cube root.
    Cbrt,
    /// Absolute value.
    Abs,
}

impl Function {
    /// All functions with the names that formulas use.
    pub const NAMES: [(&'static str, Self); 17] = [
        ("sin", Self::Sin),
        ("cos", Self::Cos),
        ("tan", Self::Tan),
        ("asin", Self::Asin),
        ("acos", Self::Acos),
        ("atan", Self::Atan),
        ("sinh", Self::Sinh),
        ("cosh", Self::Cosh),
        ("tanh", Self::Tanh),
        ("asinh", Self::Asinh),
        ("acosh", Self::Acosh),
        ("atanh", Self::Atanh),
        ("exp", Self::Exp),
        ("log", Self::Log),
        ("sqrt", Self::Sqrt),
        ("cbrt", Self::Cbrt),
        ("abs", Self::Abs),
    ];

    /// Name in formulas.
    #[must_use]
    pub fn name(self) -> &'static str {
        Self::NAMES
            .iter()
            .find(|(_, function)| *function == self)
            .map_or("?", |(name, _)| name)
    }

    /// Value at x.
    #[must_use]
    pub fn value(self, x: f64) -> f64 {
        match self {
            Self::Sin => x.sin(),
            Self::Cos => x.cos(),
            Self::Tan => x.tan(),
            Self::Asin => x.asin(),
            Self::Acos => x.acos(),
            Self::Atan => x.atan(),
            Self::Sinh => x.sinh(),
            Self::Cosh => x.cosh(),
            Self::Tanh => x.tanh(),
            Self::Asinh => x.asinh(),
            Self::Acosh => x.acosh(),
            Self::Atanh => x.atanh(),
            Self::Exp => x.exp(),
            Self::Log => x.ln(),
            Self::Sqrt => x.sqrt(),
            Self::Cbrt => x.cbrt(),
            Self::Abs => x.abs(),
        }
    }

    /// Value and first three derivatives at x.
    #[must_use]
    pub fn derivatives(self, x: f64) -> [f64; 4] {
        let value = || self.value(x);
        match self {
            Self::Sin => {
                let (s, c) = x.sin_cos();
                [s, c, -s, -c]
            }
            Self::Cos => {
                let (s, c) = x.sin_cos();
                [c, -s, -c, s]
            }
            Self::Tan => {
                let t = value();
                let q = 1.0 + t * t;
                [t, q, 2.0 * t * q, 2.0 * q * (1.0 + 3.0 * t * t)]
            }
            Self::Asin => {
                let [first, second, third] = asin_slopes(x);
                [value(), first, second, third]
            }
            Self::Acos => {
                let [first, second, third] = asin_slopes(x);
                [value(), -first, -second, -third]
            }
            Self::Atan => {
                let q = 1.0 / (1.0 + x * x);
                [
                    value(),
                    q,
                    -2.0 * x * q * q,
                    (6.0 * x * x - 2.0) * q * q * q,
                ]
            }
            Self::Sinh => [x.sinh(), x.cosh(), x.sinh(), x.cosh()],
            Self::Cosh => [x.cosh(), x.sinh(), x.cosh(), x.sinh()],
            Self::Tanh => {
                let t = value();
                let q = 1.0 / (x.cosh() * x.cosh());
                [t, q, -2.0 * t * q, q * (6.0 * t * t - 2.0)]
            }
            Self::Asinh => {
                let [a, b, c] = half_powers(1.0 + x * x);
                [value(), a, -x * b, (2.0 * x * x - 1.0) * c]
            }
            Self::Acosh => {
                let [a, b, c] = half_powers((x - 1.0) * (x + 1.0));
                [value(), a, -x * b, (2.0 * x * x + 1.0) * c]
            }
            Self::Atanh => {
                let q = 1.0 / ((1.0 - x) * (1.0 + x));
                [value(), q, 2.0 * x * q * q, (2.0 + 6.0 * x * x) * q * q * q]
            }
            Self::Exp => [value(); 4],
            Self::Log => [value(), 1.0 / x, -1.0 / (x * x), 2.0 / (x * x * x)],
            Self::Sqrt => {
                let s = value();
                [s, 0.5 / s, -0.25 / (s * x), 0.375 / (s * x * x)]
            }
            Self::Cbrt => {
                let c = value();
                [
                    c,
                    c / (3.0 * x),
                    -2.0 * c / (9.0 * x * x),
                    10.0 * c / (27.0 * x * x * x),
                ]
            }
            Self::Abs => [x.abs(), if x == 0.0 { 0.0 } else { x.signum() }, 0.0, 0.0],
        }
    }
}

/// q^(-1/2), q^(-3/2), q^(-5/2).
fn half_powers(q: f64) -> [f64; 3] {
    let a = 1.0 / q.sqrt();
    [a, a / q, a / (q * q)]
}

/// First three derivatives of the inverse sine.
fn asin_slopes(x: f64) -> [f64; 3] {
    let [a, b, c] = half_powers((1.0 - x) * (1.0 + x));
    [a, x * b, (1.0 + 2.0 * x * x) * c]
}
