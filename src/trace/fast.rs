//! The fast sum over a uniform grid.
//!
//! With N = k^p sum_n (k_0/k)^n Re F_n(k), F_n(k) = sum_j c_jn exp(i k l_j), every F_n is a nonuniform Fourier transform from the
//! lengths to the grid. Staircase and density come from the same transform: the staircase is its real part, the density
//! its imaginary part, which makes each term a source at l and one at -l.

use num_complex::Complex64;
use rayon::prelude::*;

use super::nufft::{Strength, Transform};
use super::plan::{FastClass, TRANSFORM_SHARE};
use super::series::Leading;
use super::smoothed::{MAX_PHASE, SmoothedTerm, SmoothedTerms};
use super::sum::{Target, UniformGrid};

/// Points that one thread does at a time.
const CHUNK: usize = 1 << 13;

/// Adds the terms of one class at every point of the grid.
pub(super) fn add(
    terms: &SmoothedTerms,
    class: &FastClass,
    grid: &UniformGrid,
    accuracy: f64,
    target: &mut Target,
) {
    let chosen = class.terms.par_iter();
    let sources: Vec<Source> = chosen
        .map(|&(index, orders)| Source::new(&terms.terms[index], orders, class, grid))
        .collect();
    let turns: Vec<f64> = sources
        .iter()
        .map(|source| source.turns(grid.step))
        .collect();
    let transform = Transform::new(&turns, grid.count, TRANSFORM_SHARE * accuracy);
    let orders = sources.iter().map(Source::orders).max().unwrap_or(0);
    let mut part = vec![Complex64::ZERO; if orders > 1 { grid.count } else { 0 }];
    let buffer = || vec![Complex64::ZERO; CHUNK];
    // Horner's rule in k_0/k; the last step goes straight into the target.
    for order in (0..orders).rev() {
        let packed = Packed::new(&sources, class.leading, order, grid.start);
        let spectrum = transform.run(&packed.strengths);
        let unpack = 1.0 / packed.scale;
        if order > 0 {
            part.par_chunks_mut(CHUNK).enumerate().for_each_init(
                buffer,
                |buffer, (chunk, part)| {
                    let begin = chunk * CHUNK;
                    let modes = &mut buffer[..part.len()];
                    transform.read(&spectrum, begin, modes);
                    for (offset, (sum, mode)) in part.iter_mut().zip(modes).enumerate() {
                        let u = grid.start / grid.point(begin + offset);
                        *sum = (*sum + Complex64::new(mode.re, mode.im * unpack)) * u;
                    }
                },
            );
            continue;
        }
        let chunks = target
            .staircase
            .par_chunks_mut(CHUNK)
            .zip(target.density.par_chunks_mut(CHUNK));
        chunks
            .enumerate()
            .for_each_init(buffer, |buffer, (chunk, (staircase, density))| {
                let begin = chunk * CHUNK;
                let modes = &mut buffer[..staircase.len()];
                transform.read(&spectrum, begin, modes);
                modes.iter_mut().for_each(|mode| mode.im *= unpack);
                if let Some(sums) = part.get(begin..) {
                    modes
                        .iter_mut()
                        .zip(sums)
                        .for_each(|(mode, sum)| *mode += sum);
                }
                if class.leading == Leading::SquareRoot {
                    let powers = (begin..).map(|index| grid.point(index).sqrt());
                    modes
                        .iter_mut()
                        .zip(powers)
                        .for_each(|(mode, power)| *mode *= power);
                }
                staircase
                    .iter_mut()
                    .zip(&*modes)
                    .for_each(|(sum, mode)| *sum += mode.re);
                density
                    .iter_mut()
                    .zip(&*modes)
                    .for_each(|(sum, mode)| *sum += mode.im);
            });
    }
}

/// A term as a source of the transforms.
struct Source {
    length: f64,
    /// exp(i k l) at the middle of the grid.
    wave: Complex64,
    first: Complex64,
    rest: Vec<Complex64>,
    /// Whether the density needs one power more than the staircase.
    extra: bool,
}

impl Source {
    fn new(term: &SmoothedTerm, orders: usize, class: &FastClass, grid: &UniformGrid) -> Self {
        let length = term.term.length;
        let middle = grid.point(grid.count / 2);
        let wave = Complex64::cis(middle * length);
        if term.is_plain_wave() {
            return Self {
                length,
                wave,
                first: term.series.first,
                rest: Vec::new(),
                extra: false,
            };
        }
        let reference = grid.start;
        let mut coefficients = term.series.rescaled(reference, orders);
        let slope = term.slope();
        if slope.abs() > MAX_PHASE * reference {
            let phase = Complex64::cis(MAX_PHASE.copysign(slope));
            coefficients
                .iter_mut()
                .for_each(|coefficient| *coefficient *= phase);
        } else if slope != 0.0 {
            coefficients = with_phase(&coefficients, slope / reference, orders);
        }
        let last = coefficients.len() - 1;
        let factor = class.leading.exponent() - last as f64;
        let limit = class.tolerance * length * term.series.unsmoothed;
        Self {
            length,
            wave,
            extra: (factor * coefficients[last] / reference).norm() > limit,
            first: coefficients[0],
            rest: coefficients.split_off(1),
        }
    }

    /// Phase advance per step of the grid, in turns from -1/2 to 1/2.
    fn turns(&self, step: f64) -> f64 {
        let turns = step * self.length / (2.0 * std::f64::consts::PI);
        turns - turns.round()
    }

    /// Number of powers of 1/k, that of the density included.
    fn orders(&self) -> usize {
        1 + self.rest.len() + usize::from(self.extra)
    }

    fn coefficient(&self, order: usize) -> Complex64 {
        match order.checked_sub(1) {
            None => self.first,
            Some(index) => self.rest.get(index).copied().unwrap_or_default(),
        }
    }

    /// Coefficients of one power of 1/k in staircase and density.
    ///
    /// The derivative of k^(p - n) exp(i k l) is (i l k^(p - n) + (p - n) k^(p - n - 1)) exp(i k l).
    fn pair(&self, order: usize, leading: Leading, reference: f64) -> (Complex64, Complex64) {
        let staircase = self.coefficient(order);
        let mut density = Complex64::I * self.length * staircase;
        let below_last = order < 1 + self.rest.len() || self.extra;
        if let Some(before) = order.checked_sub(1).filter(|_| below_last) {
            let factor = (leading.exponent() - before as f64) / reference;
            density += self.coefficient(before) * factor;
        }
        (staircase * self.wave, density * self.wave)
    }
}

/// The coefficients times exp(i x u) = sum_q (i x u)^q/q!, as a series in u of the given length.
fn with_phase(coefficients: &[Complex64], x: f64, orders: usize) -> Vec<Complex64> {
    let mut product = vec![Complex64::ZERO; orders];
    let mut factor = Complex64::ONE;
    for shift in 0..orders {
        for (target, coefficient) in product[shift..].iter_mut().zip(coefficients) {
            *target += factor * coefficient;
        }
        factor *= Complex64::I * x / (shift + 1) as f64;
    }
    product
}

/// Strengths of all sources for one power of 1/k, staircase and density packed together.
struct Packed {
    strengths: Vec<Strength>,
    /// The density stands in the imaginary part times this, so that both parts have the same size and so the same accuracy.
    scale: f64,
}

impl Packed {
    fn new(sources: &[Source], leading: Leading, order: usize, reference: f64) -> Self {
        let pairs: Vec<_> = sources
            .iter()
            .map(|source| source.pair(order, leading, reference))
            .collect();
        let (staircase, density) = pairs.iter().fold((0.0, 0.0), |sum: (f64, f64), pair| {
            (sum.0 + pair.0.l1_norm(), sum.1 + pair.1.l1_norm())
        });
        let scale = if staircase > 0.0 && density > 0.0 {
            staircase / density
        } else {
            1.0
        };
        // Re[a w] + i Re[b w] = ((a + i b) w + conj((a - i b) w))/2
        let strength = |(a, b): &(Complex64, Complex64)| {
            let b = Complex64::I * scale * b;
            Strength {
                source: 0.5 * (a + b),
                mirror: 0.5 * (a - b).conj(),
            }
        };
        Self {
            strengths: pairs.iter().map(strength).collect(),
            scale,
        }
    }
}
