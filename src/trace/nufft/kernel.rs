//! The spreading kernel exp(beta (sqrt(1 - t^2) - 1)) on |t| <= 1.

use std::f64::consts::{FRAC_PI_2, PI};

use rayon::prelude::*;

use crate::billiard::quadrature::integrate;

/// Widest kernel in cells.
pub(super) const MAX_WIDTH: usize = 20;

/// Aliasing error of the kernel in units of exp(-pi (w - 1) sqrt(1 - 1/sigma)). Computed from the kernel's transform at the last
/// mode for 1.25, 1.5 and 2 cells per mode and widths up to 16, it lies between 1.5 and 6.8.
const ALIASING: f64 = 8.0;

/// Share of the accuracy that the polynomials may use up.
const POLYNOMIAL_SHARE: f64 = 0.1;

/// beta is this fraction of the largest value for which the kernel's transform has decayed at the first aliased frequency
/// (Barnett, Magland & af Klinteberg, section 4: best in practice, with the error at its smallest).
const BETA_FRACTION: f64 = 0.97;

/// Panels of the quadrature for the kernel's transform. Its integrand is entire with at most 3 oscillations: ten points in
/// each of 8 panels give all digits.
const PANELS: usize = 8;

/// Degree above the width at which the kernel's polynomials are exact to rounding; what is not needed of it is cut off.
const EXTRA_DEGREE: usize = 6;

/// Degree of the polynomials for the correction and their number; together exact to 1e-14 (the transform of a width of 20
/// cells turns by 10 pi over the range).
const CORRECTION_DEGREE: usize = 9;
const CORRECTION_PIECES: usize = 64;

/// A kernel of a width in cells, tabulated as one polynomial per cell.
pub(super) struct Kernel {
    /// Width in cells.
    pub(super) width: usize,
    beta: f64,
    /// Width rounded up to an even number: vector instructions take cells in pairs.
    pub(super) padded: usize,
    /// Coefficients of the polynomials in y (the place within the cell, from -1 to 1): for every degree, from the highest,
    /// those of all cells.
    pub(super) polynomials: Vec<f64>,
}

impl Kernel {
    /// The kernel for a fine grid of `upsampling` cells per mode and errors below `accuracy`.
    pub(super) fn new(upsampling: f64, accuracy: f64) -> Self {
        let width = Self::width_for(upsampling, accuracy).min(MAX_WIDTH);
        let beta = BETA_FRACTION * PI * width as f64 * (1.0 - 0.5 / upsampling);
        let padded = width + width % 2;
        let mut kernel = Self {
            width,
            beta,
            padded,
            polynomials: Vec::new(),
        };
        // The division by the transform at the last mode enlarges errors of the kernel most.
        let last = kernel.transform(0.5 * PI * width as f64 / upsampling);
        kernel.polynomials = kernel.tabulate(POLYNOMIAL_SHARE * accuracy * last);
        kernel
    }

    /// Width in cells that an accuracy needs (same paper, theorem 7, with the factor as computed).
    pub(super) fn width_for(upsampling: f64, accuracy: f64) -> usize {
        let rate = PI * (1.0 - 1.0 / upsampling).sqrt();
        ((ALIASING / accuracy).ln() / rate).ceil() as usize + 1
    }

    fn value(&self, t: f64) -> f64 {
        let square = 1.0 - t * t;
        if square < 0.0 {
            0.0
        } else {
            (self.beta * (square.sqrt() - 1.0)).exp()
        }
    }

    /// The kernel at the cell with number `cell` of its support, the source lying `y` (-1 to 1) along its own cell.
    fn value_in_cell(&self, cell: usize, y: f64) -> f64 {
        let width = self.width as f64;
        self.value(2.0 * (cell as f64 + 0.5 * (y + 1.0)) / width - 1.0)
    }

    /// The polynomials of all cells, with errors that add up to at most `tolerance`.
    fn tabulate(&self, tolerance: f64) -> Vec<f64> {
        let highest = self.width + EXTRA_DEGREE;
        let series: Vec<Vec<f64>> = (0..self.width)
            .map(|cell| chebyshev(highest, |y| self.value_in_cell(cell, y)))
            .collect();
        // Leaving out a Chebyshev polynomial costs at most its coefficient.
        let cut = |order: usize| series.iter().map(|series| series[order].abs()).sum::<f64>();
        let mut degree = highest;
        let mut error = 0.0;
        while degree > 1 && error + cut(degree) <= tolerance {
            error += cut(degree);
            degree -= 1;
        }
        let mut table = vec![0.0; (degree + 1) * self.padded];
        for (cell, series) in series.iter().enumerate() {
            for (power, coefficient) in Polynomial::of(&series[..=degree])
                .coefficients
                .iter()
                .enumerate()
            {
                table[(degree - power) * self.padded + cell] = *coefficient;
            }
        }
        table
    }

    /// The factors that undo the kernel: 1/sum over the cells of (kernel times exp(2 pi i m g/cells)) for the modes m = 0, 1,
    /// .., `count` - 1.
    pub(super) fn correction(&self, count: usize, cells: usize) -> Vec<f64> {
        let last = count.max(2) as f64 - 1.0;
        let pieces: Vec<Polynomial> = (0..CORRECTION_PIECES)
            .map(|piece| {
                let series = chebyshev(CORRECTION_DEGREE, |y| {
                    let mode = (piece as f64 + 0.5 * (y + 1.0)) * last / CORRECTION_PIECES as f64;
                    1.0 / self.transform(PI * self.width as f64 * mode / cells as f64)
                });
                Polynomial::of(&series)
            })
            .collect();
        let scale = CORRECTION_PIECES as f64 / last;
        let factor = |mode: usize| {
            let place = mode as f64 * scale;
            let piece = (place as usize).min(CORRECTION_PIECES - 1);
            pieces[piece].value(2.0 * (place - piece as f64) - 1.0)
        };
        (0..count).into_par_iter().map(factor).collect()
    }

    /// (w/2) int exp(beta (sqrt(1 - t^2) - 1)) cos(frequency t) dt over -1 <= t <= 1, with t = sin(theta).
    fn transform(&self, frequency: f64) -> f64 {
        let integrand = |theta: f64| {
            let cosine = theta.cos();
            (self.beta * (cosine - 1.0)).exp() * (frequency * theta.sin()).cos() * cosine
        };
        self.width as f64 * integrate(0.0, FRAC_PI_2, PANELS, integrand)
    }
}

/// Coefficients of the Chebyshev polynomials up to `degree` in the interpolation of `value` at the Chebyshev points.
fn chebyshev(degree: usize, value: impl Fn(f64) -> f64) -> Vec<f64> {
    let count = degree + 1;
    let angle = |index: usize| PI * (index as f64 + 0.5) / count as f64;
    let values: Vec<f64> = (0..count).map(|index| value(angle(index).cos())).collect();
    let coefficient = |order: usize| {
        let terms = values
            .iter()
            .enumerate()
            .map(|(index, value)| value * (order as f64 * angle(index)).cos());
        terms.sum::<f64>() * if order == 0 { 1.0 } else { 2.0 } / count as f64
    };
    (0..count).map(coefficient).collect()
}

/// A polynomial on -1 <= y <= 1.
struct Polynomial {
    /// Of y^0, y^1, ...
    coefficients: Vec<f64>,
}

impl Polynomial {
    /// A sum of Chebyshev polynomials in powers of y.
    fn of(chebyshev: &[f64]) -> Self {
        let count = chebyshev.len();
        let mut coefficients = vec![0.0; count];
        // T_n and T_(n-1) in powers of y
        let (mut current, mut previous) = (vec![0.0; count], vec![0.0; count]);
        current[0] = 1.0;
        for (order, weight) in chebyshev.iter().enumerate() {
            for (coefficient, power) in coefficients.iter_mut().zip(&current) {
                *coefficient += weight * power;
            }
            // T_(n+1) = 2 y T_n - T_(n-1), T_1 = y
            let factor = if order == 0 { 1.0 } else { 2.0 };
            let shifted = |power: usize| {
                if power == 0 {
                    0.0
                } else {
                    factor * current[power - 1]
                }
            };
            let next = (0..count)
                .map(|power| shifted(power) - previous[power])
                .collect();
            previous = std::mem::replace(&mut current, next);
        }
        Self { coefficients }
    }

    fn value(&self, y: f64) -> f64 {
        self.coefficients
            .iter()
            .rev()
            .fold(0.0, |sum, coefficient| sum * y + coefficient)
    }
}
