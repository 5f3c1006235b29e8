//! What the checks of integrable shapes against exact levels share.

use orbitsum::levels::staircase;
use orbitsum::orbit::tori::{Integrable, TorusLimits, terms};
use orbitsum::trace::{Amplitude, Term, sum_at};
use std::f64::consts::PI;
use std::path::Path;

/// Levels of a committed table (columns named in its second line), each as often as its multiplicity says.
pub(crate) fn levels(name: &str) -> Vec<f64> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("data/reference").join(name);
    let mut reader = csv::ReaderBuilder::new().comment(Some(b'#')).from_path(path).expect("table exists");
    let headers = reader.headers().expect("table has a header").clone();
    let column = |wanted: &str| headers.iter().position(|name| name == wanted);
    let value = column("k").expect("column k");
    let multiplicity = column("multiplicity");
    let mut levels = Vec::new();
    for row in reader.records() {
        let row = row.expect("row is csv");
        let copies = multiplicity.map_or(1, |i| row[i].parse().expect("a number"));
        levels.extend(std::iter::repeat_n(row[value].parse::<f64>().expect("a number"), copies));
    }
    levels
}

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
        self.area * (k * k + s * s) / (4.0 * PI) - self.length * k / (4.0 * PI) + self.constant + self.inverse_k / k
    }

    /// Standard deviation in k of so many mean spacings 2 pi/(A k) in the middle of a window.
    pub(crate) fn spacings(&self, count: f64, window: (f64, f64)) -> f64 {
        count * 2.0 * PI / (self.area * 0.5 * (window.0 + window.1))
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
pub(crate) fn residual(levels: &[f64], weyl: &Weyl, terms: &[Term], window: (f64, f64), s: f64) -> f64 {
    let steps = ((window.1 - window.0) / (s / 5.0)).ceil() as usize;
    let points: Vec<f64> = (0..=steps).map(|i| window.0 + (window.1 - window.0) * i as f64 / steps as f64).collect();
    let exact = staircase(levels, &points, s);
    let orbits = sum_at(terms, &points, s).staircase;
    let squares: f64 = (0..points.len())
        .map(|i| (exact[i] - weyl.at(points[i], s) - orbits[i]).powi(2))
        .sum();
    (squares / points.len() as f64).sqrt()
}
