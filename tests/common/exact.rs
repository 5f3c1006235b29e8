//! Smoothed staircases of shapes with exactly known levels against the sum over their orbits, which is exact for them.
#![allow(dead_code)]

use orbitsum::baseline::weyl;
use orbitsum::billiard::{Domain, Irrep, Symmetry};
use orbitsum::levels::{ResidualWindow, residual_rms, staircase};
use orbitsum::orbit::{Catalogue, ClassWeights, Limits, terms};
use orbitsum::trace::{DEFAULT_ACCURACY, UniformGrid, sum_on_grid};
use std::f64::consts::PI;

/// Number of the level in the middle of the window (of the whole domain, by its area).
const MIDDLE_LEVEL: f64 = 50.0;
/// Window of wave numbers, as factors of the middle.
const WINDOW: [f64; 2] = [0.65, 1.35];
/// Smoothing in mean spacings of the whole domain at the middle of the window; symmetry classes, whose levels are fewer,
/// are smoothed by the same width.
const SPACINGS: f64 = 2.0;
/// Longest orbit times smoothing: leaves exp(-6.6^2/2) = 3.5e-10 of the first term left out.
const REACH: f64 = 6.6;
/// Levels this many smoothing widths above the window no longer matter: erfc gives 1e-19.
const MARGIN: f64 = 9.0;

/// A domain with its orbits, in a window around its fiftieth level.
pub(crate) struct ExactSum<'a> {
    domain: &'a Domain,
    symmetry: &'a Symmetry,
    pub(crate) catalogue: Catalogue,
    middle: f64,
    smoothing: f64,
}

impl<'a> ExactSum<'a> {
    pub(crate) fn new(domain: &'a Domain, symmetry: &'a Symmetry) -> Self {
        // N = A k^2/(4 pi)
        let middle = (4.0 * PI * MIDDLE_LEVEL / domain.area).sqrt();
        let smoothing = SPACINGS * weyl(domain, symmetry, None).mean_spacing(middle);
        let limits = Limits::up_to(REACH / smoothing, domain);
        Self {
            domain,
            symmetry,
            catalogue: Catalogue::find(domain, symmetry, limits),
            middle,
            smoothing,
        }
    }

    /// Wave number below which all levels are needed.
    pub(crate) fn list_end(&self) -> f64 {
        WINDOW[1] * self.middle + (MARGIN + 1.0) * self.smoothing
    }

    /// rms of smoothed staircase of `levels` minus smooth count minus orbit sum, in levels.
    pub(crate) fn residual(&self, levels: &[f64], class: Option<&Irrep>) -> f64 {
        let smooth = weyl(self.domain, self.symmetry, class);
        let [from, to] = WINDOW.map(|factor| factor * self.middle);
        let step = self.smoothing / 8.0;
        let grid = UniformGrid {
            start: from,
            step,
            count: ((to - from) / step) as usize + 1,
        };
        let points = grid.points();
        let weights = ClassWeights::new(self.symmetry, class);
        let orbits = sum_on_grid(
            &terms(&self.catalogue, &weights),
            &grid,
            self.smoothing,
            DEFAULT_ACCURACY,
        )
        .staircase;
        let exact = staircase(levels, &points, self.smoothing);
        let difference: Vec<f64> = (0..points.len())
            .map(|i| exact[i] - smooth.count(points[i], self.smoothing) - orbits[i])
            .collect();
        let window = ResidualWindow {
            from,
            to,
            list_end: self.list_end(),
            smoothing: self.smoothing,
        };
        residual_rms(&points, &difference, &window)
            .rms
            .expect("points in the window")
    }
}

/// Wave numbers below `end` that `value` gives for pairs of whole numbers chosen by `wanted`, ascending; a pair with a
/// larger number has a larger value.
pub(crate) fn levels(
    end: f64,
    value: impl Fn(f64, f64) -> f64,
    wanted: impl Fn(i32, i32) -> bool,
) -> Vec<f64> {
    let mut list = Vec::new();
    for m in (0..).take_while(|&m| value(f64::from(m), 0.0) < end) {
        for n in (0..).take_while(|&n| value(f64::from(m), f64::from(n)) < end) {
            if wanted(m, n) {
                list.push(value(f64::from(m), f64::from(n)));
            }
        }
    }
    list.sort_by(f64::total_cmp);
    list
}

/// Levels of the a x b rectangle: pi hypot((m + x)/a, (n + y)/b), x and y being 1/2 between unlike walls, else 0.
pub(crate) fn box_value(a: f64, b: f64, x: f64, y: f64) -> impl Fn(f64, f64) -> f64 {
    move |m, n| PI * ((m + x) / a).hypot((n + y) / b)
}

/// Levels of the equilateral triangle of side 1: (4 pi/3) sqrt(m^2 + m n + n^2) (Lame 1852).
pub(crate) fn equilateral_value(m: f64, n: f64) -> f64 {
    4.0 * PI / 3.0 * (m * m + m * n + n * n).sqrt()
}
