//! What the checks of integrable shapes against exact levels share.
//!
//! A residual is the rms over a window of exact staircase - smooth part - terms, all smoothed with the same Gaussian.

#[path = "../common/tables.rs"]
mod tables;

use orbitsum::levels::staircase;
use orbitsum::orbit::tori::{Integrable, TorusLimits, terms};
use orbitsum::trace::{Amplitude, Term, sum_at};
use std::f64::consts::PI;
#[allow(
    unused_imports,
    reason = "each file of checks uses its own part of what they share"
)]
pub(crate) use tables::{levels, levels_of_orders, table};

/// Smooth count A k^2/(4 pi) - L k/(4 pi) + C + D/k with L = L_D - L_N.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Weyl {
    pub(crate) area: f64,
    pub(crate) length: f64,
    pub(crate) constant: f64,
    pub(crate) inverse_k: f64,
}

impl Weyl {
    /// Convolved with a Gaussian of standard deviation s: k^2 -> k^2 + s^2.
    pub(crate) fn at(&self, k: f64, s: f64) -> f64 {
        self.area * (k * k + s * s) / (4.0 * PI) - self.length * k / (4.0 * PI)
            + self.constant
            + self.inverse_k / k
    }

    /// Standard deviation in k of so many mean spacings 2 pi/(A k) in the middle of a window.
    pub(crate) fn spacings(&self, count: f64, window: (f64, f64)) -> f64 {
        count * 2.0 * PI / (self.area * 0.5 * (window.0 + window.1))
    }
}

/// Smoothing at which a residual is taken.
#[derive(Clone, Copy, Debug)]
pub(crate) enum Smoothing {
    /// In mean spacings at the middle of the window.
    Spacings(f64),
    /// In k.
    Width(f64),
}

/// One row of expectations: the most that leading order and next order may leave in a window.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Bound {
    pub(crate) window: (f64, f64),
    pub(crate) smoothing: Smoothing,
    pub(crate) leading: f64,
    pub(crate) next: f64,
}

/// Windows of k in which residuals are taken.
pub(crate) const WINDOWS: [(f64, f64); 3] = [(20.0, 30.0), (30.0, 45.0), (45.0, 60.0)];

/// Bounds (leading, next) in the three windows at one smoothing.
pub(crate) fn bounds(smoothing: Smoothing, values: [(f64, f64); 3]) -> Vec<Bound> {
    WINDOWS
        .iter()
        .zip(values)
        .map(|(&window, (leading, next))| Bound {
            window,
            smoothing,
            leading,
            next,
        })
        .collect()
}

/// Exact levels with everything known about their domain.
pub(crate) struct Case<'a> {
    pub(crate) name: &'a str,
    pub(crate) shape: Integrable,
    pub(crate) levels: Vec<f64>,
    pub(crate) weyl: Weyl,
}

impl Case<'_> {
    /// Residuals (leading, next) in a window.
    pub(crate) fn residuals(&self, window: (f64, f64), smoothing: Smoothing) -> (f64, f64) {
        let s = match smoothing {
            Smoothing::Spacings(count) => self.weyl.spacings(count, window),
            Smoothing::Width(width) => width,
        };
        let of = |order| {
            residual(
                &self.levels,
                &self.weyl,
                &all_terms(&self.shape, s, order),
                window,
                s,
            )
        };
        (of(Order::Leading), of(Order::Next))
    }

    /// Asserts bounds.
    pub(crate) fn check(&self, bounds: &[Bound]) {
        for bound in bounds {
            let (leading, next) = self.residuals(bound.window, bound.smoothing);
            let what = format!(
                "{} {:?} {:?}: leading {leading:.5}, next {next:.5}",
                self.name, bound.window, bound.smoothing
            );
            assert!(
                leading <= bound.leading && next <= bound.next,
                "{what} but allowed {} and {}",
                bound.leading,
                bound.next
            );
        }
    }
}

/// Which phases of next order are kept.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Order {
    Leading,
    Next,
}

/// Terms up to s L = 5, so that the cut in length does not matter.
pub(crate) fn all_terms(shape: &Integrable, s: f64, order: Order) -> Vec<Term> {
    let mut found = terms(shape, &TorusLimits::up_to(5.0 / s)).terms;
    if order == Order::Leading {
        for term in &mut found {
            term.amplitude = match term.amplitude {
                Amplitude::Torus { .. } => Amplitude::Torus { slope: 0.0 },
                Amplitude::CorrectedConstant { .. } => Amplitude::Constant,
                other => other,
            };
        }
    }
    found
}

/// Root mean square over the window of levels - smooth part - terms, all smoothed with standard deviation s.
pub(crate) fn residual(
    levels: &[f64],
    weyl: &Weyl,
    terms: &[Term],
    window: (f64, f64),
    s: f64,
) -> f64 {
    let steps = ((window.1 - window.0) / (s / 5.0)).ceil() as usize;
    let points: Vec<f64> = (0..=steps)
        .map(|i| window.0 + (window.1 - window.0) * i as f64 / steps as f64)
        .collect();
    let exact = staircase(levels, &points, s);
    let orbits = sum_at(terms, &points, s).staircase;
    let squares: f64 = (0..points.len())
        .map(|i| (exact[i] - weyl.at(points[i], s) - orbits[i]).powi(2))
        .sum();
    (squares / points.len() as f64).sqrt()
}
