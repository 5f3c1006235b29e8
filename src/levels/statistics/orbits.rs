//! What the orbits say about correlations between levels.

use super::reference::{Reference, line_filter};
use crate::trace::{Statistics, Term, waves};
use serde::Serialize;
use std::f64::consts::PI;

/// Longest orbits of a chaotic shape that are summed, in Heisenberg times of a sequence: the correction for correlations between
/// orbits is 20 % there, and is known for the mean over orbits only.
const DIAGONAL: f64 = 0.25;
/// Longest orbits that are summed whatever the shape, in Heisenberg times of the list: those beyond add less than 0.01 to the rigidity.
const LONGEST: f64 = 10.0;

/// Orbits of the shape that a list belongs to.
#[derive(Clone, Copy, Debug)]
pub struct Orbits<'a> {
    /// Length of the shortest one.
    pub shortest: f64,
    /// Terms of all orbits up to `max_length`, in the staircase of the list's levels (its class, if it is of one); may be empty.
    pub terms: &'a [Term],
    /// Length up to which the terms are complete.
    pub max_length: f64,
    /// Places that represent the list, such as every tenth part of it: curves are averaged over them.
    pub places: &'a [Place],
}

/// A place in the spectrum.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Place {
    /// Wave number.
    pub k: f64,
    /// Expected density of levels in k, those that are missing included.
    pub density: f64,
}

/// How far the statistics of random levels hold, and what becomes of them beyond.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Saturation {
    /// Length in mean spacings from which on number variance and rigidity saturate: 2 pi density/(shortest length), in the middle of the
    /// list (Berry, Proc. R. Soc. A 400 (1985) 229).
    pub length: f64,
    /// The rigidity of long windows.
    pub rigidity: f64,
    /// The value about which the number variance of long windows oscillates, twice that.
    pub number_variance: f64,
    /// Are these from the terms of the orbits? If not, from the form factor of random levels, cut off at the shortest orbit.
    pub from_terms: bool,
}

/// The orbits of a list as waves over its unfolded levels.
pub(super) struct Correlations<'a> {
    expected: &'a Reference,
    places: Vec<Waves>,
    from_terms: bool,
}

/// Waves near one place, up to a time beyond which random levels stand for them. Times are Heisenberg times.
struct Waves {
    waves: Vec<Wave>,
    shortest: f64,
    cut: f64,
    /// Time up to which all terms are known.
    known: f64,
}

/// Orbits of one length.
struct Wave {
    tau: f64,
    /// Mean square in the staircase by themselves.
    diagonal: f64,
    /// The same lowered by what correlations between orbits do on the average, [`Reference::beside_diagonal`]: that makes the curves
    /// join those of random levels wherever the orbits are cut off.
    corrected: f64,
}

impl<'a> Correlations<'a> {
    /// `mean_spacing` is that of the list in units of the expected one: levels that are missing make it longer. None where no place has
    /// levels or there is no shortest orbit.
    pub(super) fn new(
        orbits: &Orbits<'_>,
        mean_spacing: f64,
        expected: &'a Reference,
    ) -> Option<Self> {
        let limit = diagonal_limit(expected);
        let places: Vec<Waves> = orbits
            .places
            .iter()
            .filter(|place| place.density > 0.0 && place.density.is_finite() && place.k > 0.0)
            .map(|place| {
                let heisenberg = 2.0 * PI * place.density / mean_spacing;
                let shortest = orbits.shortest / heisenberg;
                let known = orbits.max_length / heisenberg;
                Waves {
                    waves: waves(orbits.terms, place.k)
                        .into_iter()
                        .filter(|wave| wave.length > 0.0)
                        .map(|wave| {
                            let tau = wave.length / heisenberg;
                            Wave {
                                tau,
                                diagonal: wave.mean_square,
                                corrected: wave.mean_square * expected.beside_diagonal(tau),
                            }
                        })
                        .collect(),
                    cut: if orbits.terms.is_empty() {
                        shortest
                    } else {
                        known.min(limit.max(shortest)).min(LONGEST)
                    },
                    shortest,
                    known,
                }
            })
            .collect();
        let usable = !places.is_empty() && orbits.shortest > 0.0 && orbits.shortest.is_finite();
        usable.then_some(Self {
            expected,
            places,
            from_terms: !orbits.terms.is_empty(),
        })
    }

    /// Mean over the places.
    fn mean(&self, value: impl Fn(&Waves) -> f64) -> f64 {
        self.places.iter().map(value).sum::<f64>() / self.places.len() as f64
    }

    /// Number variance: a wave of mean square m changes over L by one of mean square 4 m sin^2(pi L tau).
    pub(super) fn number_variance(&self, length: f64) -> f64 {
        self.mean(|place| {
            place.sum(|tau| 4.0 * (PI * length * tau).sin().powi(2))
                + self.expected.number_variance_beyond(length, place.cut)
        })
    }

    /// Rigidity: of a wave remains what no straight line takes away.
    pub(super) fn rigidity(&self, length: f64) -> f64 {
        self.mean(|place| {
            place.sum(|tau| line_filter(PI * length * tau))
                + self.expected.rigidity_beyond(length, place.cut)
        })
    }

    pub(super) fn saturation(&self) -> Saturation {
        let rigidity = self.mean(|place| place.sum(|_| 1.0) + self.expected.saturation(place.cut));
        let middle = &self.places[self.places.len() / 2];
        Saturation {
            length: 1.0 / middle.shortest,
            rigidity,
            number_variance: 2.0 * rigidity,
            from_terms: self.from_terms,
        }
    }

    /// Diagonal form factor averaged over a bin: a wave of mean square m has the power 2 pi^2 tau^2 m at its time. None where orbits
    /// that long are not known.
    pub(super) fn form_factor(&self, from: f64, to: f64) -> Option<f64> {
        let known = self.places.iter().all(|place| to <= place.known);
        (self.from_terms && known).then(|| {
            self.mean(|place| {
                let power: f64 = place
                    .waves
                    .iter()
                    .filter(|wave| (from..to).contains(&wave.tau))
                    .map(|wave| 2.0 * (PI * wave.tau).powi(2) * wave.diagonal)
                    .sum();
                power / (to - from)
            })
        })
    }
}

impl Waves {
    fn sum(&self, filter: impl Fn(f64) -> f64) -> f64 {
        self.waves
            .iter()
            .filter(|wave| wave.tau <= self.cut)
            .map(|wave| wave.corrected * filter(wave.tau))
            .sum()
    }
}

/// Time up to which orbits are summed: the mean of the sequences' own limits. Uncorrelated levels have no such limit.
fn diagonal_limit(expected: &Reference) -> f64 {
    let chaotic = expected
        .sequences
        .iter()
        .filter(|part| part.statistics == Statistics::Orthogonal);
    let (weight, inverse) = chaotic.fold((0.0, 0.0), |(weight, inverse), part| {
        let own = (part.multiplicity * part.multiplicity) as f64;
        (weight + own, inverse + own / part.density())
    });
    if weight > 0.0 {
        DIAGONAL * weight / inverse
    } else {
        f64::INFINITY
    }
}
