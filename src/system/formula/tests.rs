use super::*;
use num_complex::Complex64;
use proptest::prelude::*;

fn value(text: &str) -> f64 {
    constant(text, &Scope::default()).expect("a formula without mistakes")
}

fn mistake(text: &str) -> (FormulaProblem, &str) {
    let mut scope = Scope::default();
    scope.insert("R", 1.0);
    let error = constant(text, &scope).expect_err("a mistake");
    (error.problem, &text[error.span.start..error.span.end])
}

fn tape(text: &str) -> Tape {
    let scope = Scope::default();
    let builder = Builder::new(&scope, &["t"]).formula(text);
    builder.expect("a formula without mistakes").finish()
}

#[test]
fn precedence_is_that_of_mathematics() {
    for (text, expected) in [
        ("1 + 2*3", 7.0),
        ("-2^2", -4.0),
        ("(-2)^2", 4.0),
        ("2^3^2", 512.0),
        ("2^-1", 0.5),
        ("2^-2^2", 0.0625),
        ("8/4/2", 1.0),
        ("8-4-2", 2.0),
        ("2*-3 + 1", -5.0),
        ("-2*3", -6.0),
        ("- -2", 2.0),
        ("+2", 2.0),
        ("6/2*3", 9.0),
        ("1e-3*2E+3", 2.0),
        (".5 + 1.", 1.5),
        ("cos(pi)", -1.0),
        ("atan2(1, -1)", 0.75 * std::f64::consts::PI),
        ("hypot(3, 4)", 5.0),
        ("min(1, 2) + max(1, 2)", 3.0),
        ("log(exp(2))", 2.0),
        ("cbrt(-8)", -2.0),
        ("((((1))))", 1.0),
        ("4^0.5", 2.0),
        ("2^-3", 0.125),
    ] {
        assert_eq!(value(text), expected, "{text}");
    }
}

#[test]
fn mistakes_have_their_place() {
    use FormulaProblem as P;
    assert!(matches!(mistake("1 + "), (P::Expected { .. }, "")));
    assert!(matches!(mistake("1 + )"), (P::Expected { .. }, ")")));
    assert!(matches!(mistake("(1 + 2"), (P::Expected { .. }, "")));
    assert!(matches!(mistake("2R"), (P::Expected { .. }, "R")));
    assert!(matches!(
        mistake("1 # 2"),
        (P::Character { character: '#' }, "#")
    ));
    assert!(matches!(mistake("1 − 2"), (P::Character { .. }, "−")));
    assert!(matches!(mistake("1.2.3"), (P::Number { .. }, "1.2.3")));
    assert!(matches!(mistake("2**3"), (P::DoubleStar, "**")));
    assert!(matches!(mistake("1 + q"), (P::UnknownName { .. }, "q")));
    assert!(matches!(
        mistake("ln(2)"),
        (P::UnknownFunction { .. }, "ln")
    ));
    assert!(matches!(mistake("R(2)"), (P::NotAFunction { .. }, "R")));
    assert!(matches!(mistake("2*sin"), (P::NoArguments { .. }, "sin")));
    assert!(matches!(
        mistake("1 + sin(1, 2)"),
        (
            P::ArgumentCount {
                expected: 1,
                found: 2,
                ..
            },
            "sin(1, 2)"
        )
    ));
    assert!(matches!(
        mistake("atan2()"),
        (
            P::ArgumentCount {
                expected: 2,
                found: 0,
                ..
            },
            "atan2()"
        )
    ));
    assert!(matches!(
        mistake("1 + 2/(R - 1)"),
        (P::DivisionByZero, "2/(R - 1)")
    ));
    assert!(matches!(
        mistake("2*sqrt(-1)"),
        (P::NotFinite { .. }, "sqrt(-1)")
    ));
    assert!(matches!(
        mistake("1 + 1e999"),
        (P::NotFinite { .. }, "1e999")
    ));
    assert!(matches!(
        mistake("(-8)^0.5"),
        (P::NotFinite { .. }, "(-8)^0.5")
    ));
    assert!(matches!(mistake("  "), (P::Empty, _)));
    assert!(matches!(mistake("exp"), (P::NoArguments { .. }, "exp")));
}

#[test]
fn deep_nesting_is_refused_and_long_chains_are_not() {
    let limits = |text: String| constant(&text, &Scope::default()).map_err(|e| e.problem);
    for nested in [
        "(".repeat(10_000) + "1",
        "-".repeat(10_000) + "1",
        "2^".repeat(5_000) + "1",
        "sin(".repeat(4_000) + "1",
    ] {
        assert!(matches!(
            limits(nested),
            Err(FormulaProblem::TooDeep { .. })
        ));
    }
    assert_eq!(limits("1+".repeat(5_000) + "1"), Ok(5_001.0));
    assert!(matches!(
        limits("1+".repeat(50_000) + "1"),
        Err(FormulaProblem::TooLong { .. })
    ));
    assert_eq!(limits("(".repeat(90) + "1" + &")".repeat(90)), Ok(1.0));
}

#[test]
fn constants_are_folded_and_repeated_parts_computed_once() {
    let mut scope = Scope::default();
    scope.insert("R", 2.0);
    let builder = Builder::new(&scope, &["t"]);
    let tape = builder
        .formula("(R + 1)^2*cos(t)")
        .and_then(|builder| builder.formula("(R + 1)^2*cos(t) + sin(2*pi)*0 + sin(t)"))
        .expect("formulas without mistakes")
        .finish();
    // cos, scale, offset by sin(2 pi) * 0, sin, sum
    assert_eq!(tape.operations.len(), 5);
    let [x, _] = tape.evaluate(&[0.3]);
    assert_eq!(x, 9.0 * 0.3f64.cos());
}

#[test]
fn kinks_and_poles_are_seen_from_sample_to_sample() {
    let passes = |text: &str, from: f64, to: f64| {
        let tape = tape(text);
        let mut pieces = tape.pieces();
        (0..=64).any(|i| {
            let t = from + (to - from) * f64::from(i) / 64.0;
            tape.next_piece(&mut pieces, &[t]).is_some()
        })
    };
    for (text, from, to, expected) in [
        ("abs(t)", -1.0, 1.0, true),
        ("abs(t)", 0.0, 1.0, false),
        ("abs(t - 0.3)", 0.0, 1.0, true),
        ("max(t, 0.5)", 0.0, 1.0, true),
        ("1/(t - 0.51)", 0.0, 1.0, true),
        ("tan(t)", 0.0, 3.0, true),
        ("tan(t)", -1.5, 1.5, false),
        ("atan2(t, -1)", -1.0, 1.0, true),
        ("atan2(sin(t), cos(t))", -3.0, 3.0, false),
        ("t^(-1)", -1.0, 1.01, true),
        ("t^3", -1.0, 1.0, false),
    ] {
        assert_eq!(passes(text, from, to), expected, "{text}");
    }
}

/// Complex numbers, for derivatives by an independent route.
impl Number for Complex64 {
    fn constant(value: f64) -> Self {
        Self::new(value, 0.0)
    }

    fn value(&self) -> f64 {
        self.re
    }

    fn apply(&self, function: Function) -> Self {
        match function {
            Function::Sin => self.sin(),
            Function::Cos => self.cos(),
            Function::Tan => self.tan(),
            Function::Asin => self.asin(),
            Function::Acos => self.acos(),
            Function::Atan => self.atan(),
            Function::Sinh => self.sinh(),
            Function::Cosh => self.cosh(),
            Function::Tanh => self.tanh(),
            Function::Asinh => self.asinh(),
            Function::Acosh => self.acosh(),
            Function::Atanh => self.atanh(),
            Function::Exp => self.exp(),
            Function::Log => self.ln(),
            Function::Sqrt => self.sqrt(),
            Function::Cbrt => self.cbrt(),
            Function::Abs => self * self.re.signum(),
        }
    }

    fn power(&self, exponent: f64) -> Self {
        self.powf(exponent)
    }

    /// The analytic continuation: exp(i angle) = (x + i y)/sqrt(x^2 + y^2).
    fn atan2(&self, x: &Self) -> Self {
        let i = Self::i();
        -i * ((x + i * self) / (x * x + self * self).sqrt()).ln()
    }
}

/// Value and three derivatives from Cauchy's integral over a circle around t: independent of every rule of differentiation.
fn by_contour(t: f64, f: impl Fn(Complex64) -> Complex64) -> [f64; 4] {
    const POINTS: usize = 32;
    const RADIUS: f64 = 0.01;
    let mut derivatives = [0.0; 4];
    for point in 0..POINTS {
        let turn = Complex64::cis(std::f64::consts::TAU * point as f64 / POINTS as f64);
        let value = f(t + turn * RADIUS);
        let mut factor = 1.0;
        for (order, derivative) in derivatives.iter_mut().enumerate() {
            *derivative += factor * (value * turn.powi(-(order as i32))).re / POINTS as f64;
            factor *= (order + 1) as f64 / RADIUS;
        }
    }
    derivatives
}

/// Rounding of the contour integral for derivative number `order`, a few times eps/radius^order, with some room.
const CONTOUR_ERROR: [f64; 4] = [1e-14, 1e-12, 1e-10, 1e-7];

fn assert_close(found: [f64; 4], expected: [f64; 4], what: &str) {
    let scale = expected.iter().fold(1.0f64, |scale, x| scale.max(x.abs()));
    for order in 0..4 {
        let difference = (found[order] - expected[order]).abs();
        assert!(
            difference <= CONTOUR_ERROR[order] * scale,
            "{what}, derivative {order}: {} and {}",
            found[order],
            expected[order]
        );
    }
}

#[test]
fn derivatives_of_all_functions() {
    for (name, function) in Function::NAMES {
        for x in [-1.7, -0.4, 0.3, 0.8, 1.5, 2.2] {
            let domain = match function {
                Function::Asin | Function::Acos | Function::Atanh => f64::abs(x) < 1.0,
                Function::Acosh => x > 1.0,
                Function::Log | Function::Sqrt | Function::Cbrt => x > 0.0,
                _ => true,
            };
            if domain {
                let expected = by_contour(x, |z| z.apply(function));
                assert_close(function.derivatives(x), expected, name);
                assert_eq!(function.derivatives(x)[0], function.value(x), "{name}");
            }
        }
    }
}

#[test]
fn derivatives_of_everything_else() {
    for text in [
        "t^3",
        "t^0",
        "t^1",
        "t^2.5",
        "t^(-2)",
        "t^20",
        "2^t",
        "t^t",
        "1/t",
        "t/(1 + t^2)",
        "atan2(t, 2)",
        "atan2(2, t)",
        "atan2(-t, -0.1)",
        "hypot(t, 1 - t)",
        "min(t, 2)",
        "max(3*t, t^2)",
        "abs(t)*t",
        "t - 1/t + (t - 3)*(2 - t)",
    ] {
        let tape = tape(text);
        for t in [0.4, 1.3, 2.1] {
            let [Jet(found)] = tape.evaluate(&[Jet::variable(t)]);
            let expected = by_contour(t, |z| {
                let [value] = tape.evaluate(&[z]);
                value
            });
            assert_close(found, expected, text);
            let [plain] = tape.evaluate(&[t]);
            assert!(
                (plain - found[0]).abs() <= 4.0 * f64::EPSILON * plain.abs(),
                "{text}"
            );
        }
    }
}

#[test]
fn powers_at_zero_have_their_derivatives() {
    let at_zero = |text: &str| {
        let [Jet(derivatives)] = tape(text).evaluate(&[Jet::variable(0.0)]);
        derivatives
    };
    assert_eq!(at_zero("t^2"), [0.0, 0.0, 2.0, 0.0]);
    assert_eq!(at_zero("t^3"), [0.0, 0.0, 0.0, 6.0]);
    assert_eq!(at_zero("t^0"), [1.0, 0.0, 0.0, 0.0]);
}

/// Random formulas that are analytic near the real axis, written so that they also test the parser.
fn formulas() -> impl Strategy<Value = String> {
    let leaf = prop_oneof![
        Just("t".to_owned()),
        (-3.0..3.0).prop_map(|c: f64| format!("({c:.3})")),
        Just("pi".to_owned()),
    ];
    leaf.prop_recursive(4, 24, 2, |inner| {
        prop_oneof![
            (inner.clone(), inner.clone()).prop_map(|(a, b)| format!("{a} + {b}")),
            (inner.clone(), inner.clone()).prop_map(|(a, b)| format!("({a}) - ({b})")),
            (inner.clone(), inner.clone()).prop_map(|(a, b)| format!("({a})*sin({b})")),
            (inner.clone(), inner.clone()).prop_map(|(a, b)| format!("({a})/(3 + cos({b}))")),
            inner.clone().prop_map(|a| format!("-sin({a})^2")),
            inner.clone().prop_map(|a| format!("cos({a})^3")),
            inner.clone().prop_map(|a| format!("exp(sin({a}))")),
            inner.clone().prop_map(|a| format!("log(3 + sin({a}))")),
            inner.clone().prop_map(|a| format!("sqrt(2 + cos({a}))")),
            inner.clone().prop_map(|a| format!("atan(sin({a})/2)")),
            inner.prop_map(|a| format!("(2 + sin({a}))^1.5")),
        ]
    })
}

proptest! {
    #[test]
    fn jets_agree_with_contour_integrals(text in formulas(), t in -1.0..1.0f64) {
        let tape = tape(&text);
        let [Jet(found)] = tape.evaluate(&[Jet::variable(t)]);
        let expected = by_contour(t, |z| {
            let [value] = tape.evaluate(&[z]);
            value
        });
        assert_close(found, expected, &text);
    }

    #[test]
    fn no_text_makes_the_parser_panic(text in "[-+*/^()., 0-9a-zA-Zé∞_]{0,40}") {
        let scope = Scope::default();
        if let Err(error) = Builder::new(&scope, &["t"]).formula(&text) {
            prop_assert!(text.get(error.span.start..error.span.end).is_some());
        }
    }
}
