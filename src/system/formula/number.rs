//! What a formula can be evaluated with: plain numbers, and truncated Taylor jets that carry derivatives along.

use super::Function;
use std::ops::{Add, Div, Mul, Neg, Sub};

/// A number that formulas compute with. Everything a tape needs is here, so that a new kind of number (a gradient, a Taylor
/// series) is one implementation of this trait.
pub trait Number:
    Clone
    + Add<Output = Self>
    + Sub<Output = Self>
    + Mul<Output = Self>
    + Div<Output = Self>
    + Neg<Output = Self>
{
    /// A number that does not depend on the variables.
    fn constant(value: f64) -> Self;
    /// Its value without derivatives.
    fn value(&self) -> f64;
    /// Elementary function of it.
    #[must_use]
    fn apply(&self, function: Function) -> Self;
    /// Constant power of it.
    #[must_use]
    fn power(&self, exponent: f64) -> Self;

    /// Sine and cosine.
    #[must_use]
    fn sin_cos(&self) -> (Self, Self) {
        (self.apply(Function::Sin), self.apply(Function::Cos))
    }

    /// Product with a constant.
    #[must_use]
    fn scale(&self, factor: f64) -> Self {
        self.clone() * Self::constant(factor)
    }

    /// Sum with a constant.
    #[must_use]
    fn offset(&self, summand: f64) -> Self {
        self.clone() + Self::constant(summand)
    }

    /// Power with an exponent that depends on the variables; the base must be positive.
    #[must_use]
    fn power_of(&self, exponent: &Self) -> Self {
        (exponent.clone() * self.apply(Function::Log)).apply(Function::Exp)
    }

    /// Angle of the point (x, self) in (-pi, pi].
    #[must_use]
    fn atan2(&self, x: &Self) -> Self {
        let angle = self.value().atan2(x.value());
        let turned = if x.value().abs() >= self.value().abs() {
            (self.clone() / x.clone()).apply(Function::Atan)
        } else {
            -(x.clone() / self.clone()).apply(Function::Atan)
        };
        turned.offset(angle - turned.value())
    }

    /// Square root of the sum of the squares.
    #[must_use]
    fn hypot(&self, other: &Self) -> Self {
        (self.clone() * self.clone() + other.clone() * other.clone()).apply(Function::Sqrt)
    }

    /// The smaller of two numbers, by value.
    #[must_use]
    fn minimum(&self, other: &Self) -> Self {
        if other.value() < self.value() {
            other.clone()
        } else {
            self.clone()
        }
    }

    /// The larger of two numbers, by value.
    #[must_use]
    fn maximum(&self, other: &Self) -> Self {
        if other.value() > self.value() {
            other.clone()
        } else {
            self.clone()
        }
    }
}

/// Integer exponents up to this size are multiplied out: as exact as the general power function there, and faster.
const MULTIPLIED_OUT: f64 = 16.0;

/// x to a constant power.
fn power(x: f64, exponent: f64) -> f64 {
    if exponent.fract() != 0.0 || exponent.abs() > MULTIPLIED_OUT {
        return if exponent == 0.5 {
            x.sqrt()
        } else {
            x.powf(exponent)
        };
    }
    let mut left = exponent.abs() as u32;
    let (mut square, mut product) = (x, 1.0);
    while left > 0 {
        if left % 2 == 1 {
            product *= square;
        }
        square *= square;
        left /= 2;
    }
    if exponent < 0.0 {
        1.0 / product
    } else {
        product
    }
}

impl Number for f64 {
    fn constant(value: f64) -> Self {
        value
    }

    fn value(&self) -> f64 {
        *self
    }

    fn apply(&self, function: Function) -> Self {
        function.value(*self)
    }

    fn power(&self, exponent: f64) -> Self {
        power(*self, exponent)
    }

    fn sin_cos(&self) -> (Self, Self) {
        f64::sin_cos(*self)
    }

    fn power_of(&self, exponent: &Self) -> Self {
        power(*self, *exponent)
    }

    fn atan2(&self, x: &Self) -> Self {
        f64::atan2(*self, *x)
    }

    fn hypot(&self, other: &Self) -> Self {
        f64::hypot(*self, *other)
    }
}

/// A value with its first three derivatives with respect to one variable (forward-mode differentiation; Griewank & Walther,
/// Evaluating Derivatives, 2008, chapter 13).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Jet(pub [f64; 4]);

impl Jet {
    /// The variable itself at a value.
    #[must_use]
    pub fn variable(value: f64) -> Self {
        Self([value, 1.0, 0.0, 0.0])
    }

    /// Jet of f(self), given f and its derivatives at the value (Faa di Bruno).
    fn compose(&self, f: [f64; 4]) -> Self {
        let [_, x1, x2, x3] = self.0;
        Self([
            f[0],
            f[1] * x1,
            f[2] * x1 * x1 + f[1] * x2,
            f[3] * x1 * x1 * x1 + 3.0 * f[2] * x1 * x2 + f[1] * x3,
        ])
    }
}

impl Add for Jet {
    type Output = Self;
    fn add(self, other: Self) -> Self {
        Self(std::array::from_fn(|i| self.0[i] + other.0[i]))
    }
}

impl Sub for Jet {
    type Output = Self;
    fn sub(self, other: Self) -> Self {
        Self(std::array::from_fn(|i| self.0[i] - other.0[i]))
    }
}

impl Neg for Jet {
    type Output = Self;
    fn neg(self) -> Self {
        Self(self.0.map(|value| -value))
    }
}

impl Mul for Jet {
    type Output = Self;
    fn mul(self, other: Self) -> Self {
        let ([a0, a1, a2, a3], [b0, b1, b2, b3]) = (self.0, other.0);
        Self([
            a0 * b0,
            a1 * b0 + a0 * b1,
            a2 * b0 + 2.0 * a1 * b1 + a0 * b2,
            a3 * b0 + 3.0 * (a2 * b1 + a1 * b2) + a0 * b3,
        ])
    }
}

impl Div for Jet {
    type Output = Self;
    fn div(self, other: Self) -> Self {
        let ([a0, a1, a2, a3], [b0, b1, b2, b3]) = (self.0, other.0);
        // q b = a, differentiated and solved for the highest derivative of q.
        let q0 = a0 / b0;
        let q1 = (a1 - q0 * b1) / b0;
        let q2 = (a2 - 2.0 * q1 * b1 - q0 * b2) / b0;
        let q3 = (a3 - 3.0 * (q2 * b1 + q1 * b2) - q0 * b3) / b0;
        Self([q0, q1, q2, q3])
    }
}

impl Number for Jet {
    fn constant(value: f64) -> Self {
        Self([value, 0.0, 0.0, 0.0])
    }

    fn value(&self) -> f64 {
        self.0[0]
    }

    fn apply(&self, function: Function) -> Self {
        self.compose(function.derivatives(self.0[0]))
    }

    fn sin_cos(&self) -> (Self, Self) {
        let (sin, cos) = self.0[0].sin_cos();
        (
            self.compose([sin, cos, -sin, -cos]),
            self.compose([cos, -sin, -cos, sin]),
        )
    }

    fn power(&self, exponent: f64) -> Self {
        let x = self.0[0];
        let mut factor = 1.0;
        self.compose(std::array::from_fn(|order| {
            let order = order as f64;
            // The falling factorial becomes zero for small whole exponents; the power of zero beside it need not exist.
            let value = if factor == 0.0 {
                0.0
            } else {
                factor * power(x, exponent - order)
            };
            factor *= exponent - order;
            value
        }))
    }

    fn scale(&self, factor: f64) -> Self {
        Self(self.0.map(|value| value * factor))
    }

    fn offset(&self, summand: f64) -> Self {
        let mut sum = *self;
        sum.0[0] += summand;
        sum
    }
}
