//! How much of a length spectrum is noise of the list.
//!
//! Levels that are missing or false at random add a white noise to the density, which falls as 1/l in the spectrum; errors of
//! levels add the same at all lengths. Below the shortest orbit no classical path contributes: whatever is left there between levels
//! and smooth density is noise (and the error of the smooth density). How it goes on to longer lengths is read off the lower
//! quartile of the difference there, which orbits that are wrong or missing hardly raise, within the two laws.

use super::taper::Taper;

/// Cells of noise below the shortest orbit that make a measurement: with two, their root mean square is good to a third.
const LEAST_CELLS: f64 = 2.0;
/// Lower quartile of the modulus of complex noise in its standard deviations (real and imaginary part each): sqrt(2 ln(4/3)).
const LOWER_QUARTILE: f64 = 0.758_528;
/// Probability that noise of known size passes the threshold anywhere. Its size is known to a fifth only, which makes it about a
/// hundred times as frequent: one list in a hundred.
const FALSE_ALARM: f64 = 1e-4;

/// Noise of a length spectrum.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Noise {
    /// Length at which it was measured.
    pub reference: f64,
    /// Standard deviation of real and imaginary part there, in levels.
    pub size: f64,
    /// Power of the length with which it goes on.
    pub power: f64,
    /// What the stated errors of the levels make at least, at all lengths.
    pub least: f64,
    /// Independent values below the shortest orbit; fewer than two where the quartile alone had to do.
    pub cells: f64,
    /// Standard deviations that noise alone passes nowhere, but for one list in a hundred.
    pub factor: f64,
}

/// What a noise is measured on.
pub(super) struct Measured<'a> {
    pub(super) taper: Taper,
    pub(super) lengths: &'a [f64],
    /// Modulus of the difference at the lengths.
    pub(super) difference: &'a [f64],
    /// Shortest length at which anything is expected.
    pub(super) shortest: f64,
    /// Length up to which the orbits are known.
    pub(super) known_to: f64,
    /// Standard deviation from stated errors.
    pub(super) least: f64,
}

impl Noise {
    /// Standard deviation of real and imaginary part at a length, in levels.
    #[must_use]
    pub fn at(&self, length: f64) -> f64 {
        (self.size * (length / self.reference).powf(self.power)).max(self.least)
    }

    /// What noise alone does not pass at a length, in levels.
    #[must_use]
    pub fn threshold(&self, length: f64) -> f64 {
        self.factor * self.at(length)
    }

    /// Was it measured below the shortest orbit?
    #[must_use]
    pub fn is_measured(&self) -> bool {
        self.cells >= LEAST_CELLS
    }

    /// Shortest orbit below which it can be measured.
    #[must_use]
    pub fn shortest_measurable(&self, taper: &Taper) -> f64 {
        2.0 * taper.main_lobe() + LEAST_CELLS * taper.cell()
    }

    pub(super) fn measure(data: &Measured<'_>) -> Self {
        let begin = data.lengths.first().copied().unwrap_or(0.0);
        let cells = ((data.known_to - begin) / data.taper.cell()).max(1.0);
        let quiet_to = data.shortest.min(data.known_to) - data.taper.main_lobe();
        let quiet = part(data, begin, quiet_to);
        let extent = (quiet_to - begin) / data.taper.cell();
        let long_from =
            0.5 * (data.shortest.clamp(begin, data.known_to.max(begin)) + data.known_to);
        let long = part(data, long_from, data.known_to);
        let mut noise = Self {
            reference: mean(&long, |(length, _)| length).unwrap_or(data.known_to),
            size: quartile(&long) / LOWER_QUARTILE,
            power: 0.0,
            least: data.least,
            cells: extent.max(0.0),
            factor: (2.0 * (cells / FALSE_ALARM).ln()).sqrt(),
        };
        if noise.is_measured()
            && let (Some(square), Some(reference)) = (
                mean(&quiet, |(_, size)| size * size),
                mean(&quiet, |(length, _)| length),
            )
        {
            noise.goes_through(reference, (0.5 * square).sqrt(), extent);
        }
        noise
    }

    /// Makes this noise, known at long lengths, the one measured over some cells about a shorter length as well: between a constant and
    /// 1/l, and never growing with the length.
    fn goes_through(&mut self, reference: f64, size: f64, cells: f64) {
        // The root mean square of n complex values is too small by its part n^(-1/2) once in forty times.
        let most = size / (1.0 - cells.sqrt().recip());
        let at_long = self.size.min(most);
        let ratio = (self.reference / reference).ln();
        if at_long < size && ratio > 0.0 {
            self.power = ((at_long / size).ln() / ratio).max(-1.0);
        }
        self.size = size.max(at_long);
        self.reference = reference;
    }
}

/// Lengths and differences between two lengths.
fn part(data: &Measured<'_>, from: f64, to: f64) -> Vec<(f64, f64)> {
    data.lengths
        .iter()
        .copied()
        .zip(data.difference.iter().copied())
        .filter(|(length, _)| (from..=to).contains(length))
        .collect()
}

fn mean(values: &[(f64, f64)], of: impl Fn((f64, f64)) -> f64) -> Option<f64> {
    (!values.is_empty())
        .then(|| values.iter().map(|&pair| of(pair)).sum::<f64>() / values.len() as f64)
}

fn quartile(values: &[(f64, f64)]) -> f64 {
    let mut sizes: Vec<f64> = values.iter().map(|(_, size)| *size).collect();
    sizes.sort_by(f64::total_cmp);
    sizes.get(sizes.len() / 4).copied().unwrap_or(0.0)
}
