//! The two transforms.

use super::taper::Taper;
use super::transform::transform;
use crate::trace::{DEFAULT_ACCURACY, Term, UniformGrid, sum_on_grid};
use num_complex::Complex64;
use std::f64::consts::PI;

/// Main lobes by which the first alias of a sampled wave is kept away: its side lobes are below 1e-7 there.
const ALIAS: f64 = 10.0;

/// What a length spectrum is made from; levels, window and density in k, lengths in its inverse.
#[derive(Clone, Copy)]
pub struct LengthInput<'a> {
    /// Levels, ascending.
    pub levels: &'a [f64],
    /// Uncertainty of each, where it is known.
    pub errors: Option<&'a [f64]>,
    /// Smooth density of levels at k.
    pub density: &'a dyn Fn(f64) -> f64,
    /// Terms of the orbit sum.
    pub terms: &'a [Term],
    /// Window and weight.
    pub taper: Taper,
    /// Largest length wanted.
    pub longest: f64,
}

/// Length spectra of levels and of an orbit sum, see the [module](super).
#[derive(Clone, Debug)]
pub struct LengthSpectrum {
    /// The window.
    pub taper: Taper,
    /// Levels in it.
    pub count: usize,
    /// The lengths, ascending and evenly spaced.
    pub lengths: Vec<f64>,
    /// Spectrum of the levels less their smooth density.
    pub levels: Vec<Complex64>,
    /// Spectrum of the terms.
    pub orbits: Vec<Complex64>,
    /// Standard deviation of real and imaginary part that the stated errors of the levels cause, 0 if none are stated.
    pub(super) error_noise: f64,
}

impl LengthSpectrum {
    /// Computes both; `None` if the window is too narrow to tell any length up to `longest` from the smooth density.
    #[must_use]
    pub fn new(input: &LengthInput<'_>) -> Option<Self> {
        let taper = input.taper;
        let grid = taper.lengths(input.longest)?;
        let inside = inside(input.levels, &taper);
        let levels: Vec<(f64, f64)> = input.levels[inside.clone()]
            .iter()
            .map(|&k| (k, taper.weight(k)))
            .collect();
        let points = sampling(input, &taper);
        let sampled = |values: &mut dyn Iterator<Item = f64>| -> Vec<(f64, f64)> {
            values
                .enumerate()
                .map(|(index, value)| {
                    let k = points.point(index);
                    (k, points.step * taper.weight(k) * value)
                })
                .collect()
        };
        let smooth = sampled(&mut points.points().into_iter().map(input.density));
        let orbits = sum_on_grid(input.terms, &points, 0.0, DEFAULT_ACCURACY).density;
        let orbits = sampled(&mut orbits.into_iter());
        let lengths = grid.points();
        let scaled = |sums: Vec<Complex64>| -> Vec<Complex64> {
            sums.iter()
                .zip(&lengths)
                .map(|(sum, l)| sum * Complex64::new(0.0, -2.0 / (l * taper.area())))
                .collect()
        };
        let smooth = transform(&smooth, &grid);
        let difference = transform(&levels, &grid)
            .iter()
            .zip(&smooth)
            .map(|(levels, smooth)| levels - smooth)
            .collect();
        // A level that is off by e changes F by 2/(i l W) w (-i l e) exp(-i k l).
        let error_noise = input.errors.map_or(0.0, |errors| {
            let sum: f64 = levels
                .iter()
                .zip(&errors[inside])
                .map(|((_, weight), error)| (weight * error).powi(2))
                .sum();
            2.0 / taper.area() * (0.5 * sum).sqrt()
        });
        Some(Self {
            taper,
            count: levels.len(),
            levels: scaled(difference),
            orbits: scaled(transform(&orbits, &grid)),
            lengths,
            error_noise,
        })
    }

    /// Levels less terms.
    #[must_use]
    pub fn difference(&self) -> Vec<Complex64> {
        self.levels
            .iter()
            .zip(&self.orbits)
            .map(|(levels, orbits)| levels - orbits)
            .collect()
    }
}

/// The levels inside the window.
fn inside(levels: &[f64], taper: &Taper) -> std::ops::Range<usize> {
    let begin = levels.partition_point(|&k| k < taper.from);
    let end = levels.partition_point(|&k| k <= taper.to);
    begin..end.max(begin)
}

/// Points over the window that sample the terms' density times exp(-i k l) without aliases: the trapezoidal rule is then exact
/// up to the side lobes of the window.
fn sampling(input: &LengthInput<'_>, taper: &Taper) -> UniformGrid {
    let longest = input
        .terms
        .iter()
        .map(|term| term.length)
        .fold(input.longest, f64::max);
    let highest = longest + input.longest + ALIAS * taper.main_lobe();
    let intervals = ((taper.to - taper.from) * highest / (2.0 * PI)).ceil();
    UniformGrid {
        start: taper.from,
        step: (taper.to - taper.from) / intervals,
        count: intervals as usize + 1,
    }
}
