//! Spectral form factor of a list.

use num_complex::Complex64;
use rayon::prelude::*;
use serde::Serialize;
use std::f64::consts::TAU;

/// Levels in one section at most. Sections keep the cost in bounds and the density within one nearly constant.
const SECTION: usize = 512;
/// Sections that are looked at, at most, spread evenly over the list: their scatter is below one percent by then.
const MOST_SECTIONS: usize = 200;
/// Largest time, in Heisenberg times: the form factors of random levels are 1 to a few percent from here on.
const LAST: f64 = 2.0;
/// Independent values that are averaged in a bin, where the list is long enough for bins of the least width.
const VALUES_PER_BIN: f64 = 16.0;
/// Bounds of the width of a bin, Heisenberg times.
const BIN_WIDTHS: [f64; 2] = [0.05, 0.5];

/// Squared sizes |sum exp(2 pi i tau x)|^2/n at tau = m/n, m = 1, 2, ..., for sections of a list of density 1. At these times the smooth
/// density contributes nothing, and values at different times are nearly independent.
#[derive(Clone, Debug)]
pub(super) struct Periodogram {
    /// Time and value.
    pub(super) values: Vec<(f64, f64)>,
    /// Number of levels in one section.
    section: usize,
    /// Number of sections.
    sections: usize,
}

impl Periodogram {
    /// The values for ascending positions of density 1.
    pub(super) fn new(positions: &[f64]) -> Self {
        let count = positions.len().div_ceil(SECTION);
        let section = positions.len() / count;
        let sections = count.min(MOST_SECTIONS);
        let values = (0..sections)
            .into_par_iter()
            .flat_map_iter(|index| {
                let first = index * count / sections * section;
                section_values(&positions[first..first + section])
            })
            .collect();
        Self {
            values,
            section,
            sections,
        }
    }

    /// Means over bins, without any curve.
    pub(super) fn bins(&self) -> Vec<FormFactorBin> {
        let independent = (self.section * self.sections) as f64;
        let wanted = (VALUES_PER_BIN / independent).clamp(BIN_WIDTHS[0], BIN_WIDTHS[1]);
        let count = (LAST / wanted).floor() as usize;
        let width = LAST / count as f64;
        (0..count)
            .filter_map(|index| {
                let (from, to) = (index as f64 * width, (index + 1) as f64 * width);
                let inside: Vec<f64> = self
                    .values
                    .iter()
                    .filter(|(tau, _)| (from..to).contains(tau))
                    .map(|(_, value)| *value)
                    .collect();
                let number = inside.len() as f64;
                let mean = inside.iter().sum::<f64>() / number;
                // The values are distributed exponentially: their standard deviation is their mean.
                (number > 0.0).then(|| FormFactorBin {
                    from,
                    to,
                    value: mean,
                    error: mean / number.sqrt(),
                    ..FormFactorBin::default()
                })
            })
            .collect()
    }
}

fn section_values(positions: &[f64]) -> Vec<(f64, f64)> {
    let count = positions.len() as f64;
    let span = positions[positions.len() - 1] - positions[0];
    // Half a spacing is added at each end.
    let length = span * count / (count - 1.0);
    let times = (LAST * count).ceil() as usize;
    let mut sums = vec![Complex64::ZERO; times];
    for position in positions {
        let turn = Complex64::cis(TAU * (position - positions[0]) / length);
        let mut wave = Complex64::ONE;
        for sum in &mut sums {
            wave *= turn;
            *sum += wave;
        }
    }
    sums.iter()
        .enumerate()
        .map(|(index, sum)| ((index + 1) as f64 / count, sum.norm_sqr() / count))
        .collect()
}

/// The form factor averaged over a bin of times.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize)]
pub struct FormFactorBin {
    /// Lower end of the bin, in Heisenberg times 2 pi density of the list.
    pub from: f64,
    /// Upper end.
    pub to: f64,
    /// Mean over the bin.
    pub value: f64,
    /// Its standard error.
    pub error: f64,
    /// Mean over the bin for what is expected of the list.
    pub expected: f64,
    /// The same for one sequence of the Gaussian orthogonal ensemble; it is 1 for uncorrelated levels.
    pub orthogonal: f64,
    /// Diagonal sum over orbits, where their terms are given and reach to the end of the bin.
    pub diagonal: Option<f64>,
}

#[cfg(test)]
mod tests {
    use super::*;

    /// An even sequence has no power but at the whole numbers.
    #[test]
    fn a_picket_fence_has_its_power_at_whole_times() {
        let positions: Vec<f64> = (0..1024).map(f64::from).collect();
        let periodogram = Periodogram::new(&positions);
        assert_eq!((periodogram.section, periodogram.sections), (512, 2));
        for (tau, value) in &periodogram.values {
            let expected = if tau.fract() == 0.0 { 512.0 } else { 0.0 };
            assert!((value - expected).abs() < 1e-6, "{tau}: {value}");
        }
    }
}
