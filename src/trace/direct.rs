//! Direct sums over a uniform grid.

use num_complex::Complex64;
use rayon::prelude::*;

use super::smoothed::{SmoothedTerm, SmoothedTerms};
use super::sum::{Target, UniformGrid};

/// Points that one thread does at a time.
const CHUNK: usize = 1024;

/// Points that share one table of exp(i j step l): short enough that the table costs little, long enough that the exponentials
/// at its beginning do.
const BLOCK: usize = 32;

/// Adds the terms with numbers `chosen` at every point of the grid.
pub(super) fn add(
    terms: &SmoothedTerms,
    chosen: &[usize],
    grid: &UniformGrid,
    target: &mut Target,
) {
    if chosen.is_empty() {
        return;
    }
    let chunks = target
        .staircase
        .par_chunks_mut(CHUNK)
        .zip(target.density.par_chunks_mut(CHUNK));
    chunks
        .enumerate()
        .for_each(|(index, (staircase, density))| {
            let part = UniformGrid {
                start: grid.point(index * CHUNK),
                step: grid.step,
                count: staircase.len(),
            };
            let mut target = Target { staircase, density };
            for &index in chosen {
                let term = &terms.terms[index];
                if term.is_plain_wave() {
                    add_wave(term, &part, &mut target);
                } else {
                    add_term(term, terms.smoothing(), &part, &mut target);
                }
            }
        });
}

/// Any term, point by point.
fn add_term(term: &SmoothedTerm, smoothing: f64, grid: &UniformGrid, target: &mut Target) {
    let sums = target.staircase.iter_mut().zip(target.density.iter_mut());
    for (index, (staircase, density)) in sums.enumerate() {
        let value = term.at(grid.point(index), smoothing);
        *staircase += value.staircase;
        *density += value.density;
    }
}

/// Re[c exp(i k l)] and its derivative, with exp(i k l) = exp(i k_0 l) exp(i j step l) in blocks of points.
fn add_wave(term: &SmoothedTerm, grid: &UniformGrid, target: &mut Target) {
    let length = term.term.length;
    let (mut cosines, mut sines) = ([0.0; BLOCK], [0.0; BLOCK]);
    for (index, (cosine, sine)) in cosines.iter_mut().zip(&mut sines).enumerate() {
        (*sine, *cosine) = (index as f64 * grid.step * length).sin_cos();
    }
    let blocks = target
        .staircase
        .chunks_mut(BLOCK)
        .zip(target.density.chunks_mut(BLOCK));
    for (block, (staircase, density)) in blocks.enumerate() {
        let wave = term.series.first * Complex64::cis(grid.point(block * BLOCK) * length);
        let slope = Complex64::I * length * wave;
        let waves = cosines.iter().zip(&sines);
        for ((staircase, density), (cosine, sine)) in staircase.iter_mut().zip(density).zip(waves) {
            *staircase += wave.re * cosine - wave.im * sine;
            *density += slope.re * cosine - slope.im * sine;
        }
    }
}
