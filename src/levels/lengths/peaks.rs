//! Peaks of the levels, and where levels and terms differ.

use super::noise::{Measured, Noise};
use super::spectrum::LengthSpectrum;
use super::taper::Taper;
use num_complex::Complex64;

/// Waves of fewer levels than this are not listed: leading-order sums are no better where they are best.
const LEAST: f64 = 0.005;
/// Part of a peak by which leading-order terms may be off, and do not count as wrong: corrections are of order 1/(k l).
const TOLERANCE: f64 = 0.1;
/// Part of a peak above which a difference leaves nothing of the agreement.
const HALF: f64 = 0.5;

/// How well the terms explain a peak of the levels.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Agreement {
    /// But for noise, or a tenth of the height.
    Full,
    /// The difference is less than half of the larger side.
    Part,
    /// It is not.
    None,
}

/// A peak of the levels.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Peak {
    /// Where it is.
    pub length: f64,
    /// Its height, in levels.
    pub amplitude: f64,
    /// Height of the terms there.
    pub orbits: f64,
    /// Modulus of the complex difference there.
    pub difference: f64,
    /// How well the terms explain it; `None` where longer orbits than those known may matter.
    pub agreement: Option<Agreement>,
}

/// Which side is the larger where the two differ.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Side {
    /// The levels show what the terms do not have.
    Levels,
    /// The terms have what the levels do not show.
    Orbits,
    /// Heights are alike, phases are not.
    Phase,
}

/// A peak of the difference.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Misfit {
    /// Where it is.
    pub length: f64,
    /// Modulus of the complex difference, in levels.
    pub size: f64,
    /// Height of the levels there.
    pub levels: f64,
    /// Height of the terms there.
    pub orbits: f64,
    /// Which is the larger.
    pub side: Side,
}

/// What a comparison of the two spectra says.
#[derive(Clone, Debug, PartialEq)]
pub struct LengthComparison {
    /// Noise of the list.
    pub noise: Noise,
    /// Length up to which the two are compared: beyond it orbits matter that are longer than those known.
    pub compared_to: f64,
    /// Peaks of the levels, shortest first.
    pub peaks: Vec<Peak>,
    /// Where levels and terms differ, shortest first.
    pub misfits: Vec<Misfit>,
    /// Part of the squared spectrum of the levels that the terms explain: 1 if all, 0 or below if they are of no use.
    pub explained: Option<f64>,
}

impl LengthComparison {
    /// What peaks and differences at a length must pass to be listed, but for side lobes.
    #[must_use]
    pub fn least_listed(&self, length: f64) -> f64 {
        self.noise.threshold(length).max(LEAST)
    }
}

impl LengthSpectrum {
    /// Compares levels and terms. `shortest` is the smallest length at which anything is expected, of a term or of what is known
    /// to be left out; `known_to` the length up to which all terms are there.
    #[must_use]
    pub fn compare(&self, shortest: f64, known_to: f64) -> LengthComparison {
        let compared_to = known_to - self.taper.main_lobe();
        let difference: Vec<f64> = moduli(&self.difference());
        let (levels, orbits) = (moduli(&self.levels), moduli(&self.orbits));
        let noise = Noise::measure(&Measured {
            taper: self.taper,
            lengths: &self.lengths,
            difference: &difference,
            shortest,
            known_to: compared_to,
            least: self.error_noise,
        });
        let limits = |sizes: &[f64]| -> Vec<f64> {
            let lobes = self.side_lobes(sizes);
            self.lengths
                .iter()
                .map(|&length| noise.threshold(length).max(lobes / length).max(LEAST))
                .collect()
        };
        let (least_peak, least_misfit) = (limits(&levels), limits(&difference));
        let peaks = maxima(&self.lengths, &levels)
            .into_iter()
            .filter(|top| top.height > least_peak[top.index])
            .map(|top| Peak {
                length: top.place,
                amplitude: top.height,
                orbits: top.value(&orbits),
                difference: top.value(&difference),
                agreement: (top.place <= compared_to).then(|| {
                    agreement(
                        top.value(&difference),
                        top.height.max(top.value(&orbits)),
                        least_misfit[top.index],
                    )
                }),
            })
            .collect();
        let misfits = maxima(&self.lengths, &difference)
            .into_iter()
            .filter(|top| top.place <= compared_to)
            .filter(|top| {
                let larger = top.value(&levels).max(top.value(&orbits));
                agreement(top.height, larger, least_misfit[top.index]) != Agreement::Full
            })
            .map(|top| Misfit {
                length: top.place,
                size: top.height,
                levels: top.value(&levels),
                orbits: top.value(&orbits),
                side: side(top.value(&levels), top.value(&orbits), top.height),
            })
            .collect();
        LengthComparison {
            noise,
            compared_to,
            peaks,
            misfits,
            explained: self.explained(&difference, &levels, compared_to),
        }
    }

    /// What the side lobes of the largest peak may reach, times the length: beside a peak the spectrum falls as 1/l.
    fn side_lobes(&self, sizes: &[f64]) -> f64 {
        let largest = self
            .lengths
            .iter()
            .zip(sizes)
            .map(|(length, size)| length * size)
            .fold(0.0, f64::max);
        Taper::side_lobe() * largest
    }

    fn explained(&self, difference: &[f64], levels: &[f64], to: f64) -> Option<f64> {
        let count = self.lengths.partition_point(|&length| length <= to);
        let square = |sizes: &[f64]| -> f64 { sizes[..count].iter().map(|size| size * size).sum() };
        let all = square(levels);
        (all > 0.0).then(|| 1.0 - square(difference) / all)
    }
}

fn moduli(values: &[Complex64]) -> Vec<f64> {
    values.iter().map(|value| value.norm()).collect()
}

fn agreement(difference: f64, larger: f64, least: f64) -> Agreement {
    if difference <= least.max(TOLERANCE * larger) {
        Agreement::Full
    } else if difference < HALF * larger {
        Agreement::Part
    } else {
        Agreement::None
    }
}

fn side(levels: f64, orbits: f64, difference: f64) -> Side {
    if (levels - orbits).abs() < HALF * difference {
        Side::Phase
    } else if levels > orbits {
        Side::Levels
    } else {
        Side::Orbits
    }
}

/// A local maximum of length x size, where waves have theirs: beside a peak the size itself falls as 1/l, which would draw its maximum
/// towards shorter lengths.
struct Maximum {
    /// Number of the middle one of three points.
    index: usize,
    /// Place of the maximum of the parabola through them.
    place: f64,
    /// The same as a part of the distance to the next point.
    shift: f64,
    /// Size there.
    height: f64,
}

impl Maximum {
    /// Another modulus at the place, by the parabola through its three points.
    fn value(&self, sizes: &[f64]) -> f64 {
        let (before, here, after) = (
            sizes[self.index - 1],
            sizes[self.index],
            sizes[self.index + 1],
        );
        let slope = 0.5 * (after - before);
        let bend = 0.5 * (before - 2.0 * here + after);
        (here + (slope + bend * self.shift) * self.shift).max(0.0)
    }
}

fn maxima(lengths: &[f64], sizes: &[f64]) -> Vec<Maximum> {
    let weighted: Vec<f64> = lengths
        .iter()
        .zip(sizes)
        .map(|(length, size)| length * size)
        .collect();
    let mut found = Vec::new();
    for (index, window) in weighted.windows(3).enumerate() {
        let &[before, top, after] = window else {
            continue;
        };
        if !(before < top && top >= after) {
            continue;
        }
        let bend = before - 2.0 * top + after;
        let shift = 0.5 * (before - after) / bend;
        let step = lengths[index + 2] - lengths[index + 1];
        let place = lengths[index + 1] + shift * step;
        found.push(Maximum {
            index: index + 1,
            place,
            shift,
            height: (top - 0.25 * (before - after) * shift) / place,
        });
    }
    found
}
