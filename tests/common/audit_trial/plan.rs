//! What is planted in a list.

use super::subject::Subject;
use orbitsum::levels::audit::FaultKind;

#[path = "../random_levels.rs"]
mod random_levels;
use random_levels::Random;

/// Levels that lie closer together (relative) are one level of a higher multiplicity.
const SAME: f64 = 1e-9;
/// The closest pairs of a list from which one level is removed, one pair in each list in turn.
const CLOSEST: usize = 20;
/// Levels that are kept between two runs of removed ones.
const BETWEEN_RUNS: usize = 10;

/// Which levels are removed.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum Removal {
    /// So many at random.
    Random(usize),
    /// So many runs of so many neighbours at random places.
    Runs { runs: usize, length: usize },
    /// One of one of the closest pairs of unequal levels.
    ClosestPair,
    /// One near the middle of the list.
    Middle,
}

/// What is done to a true list.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Plan {
    pub(crate) name: &'static str,
    pub(crate) removal: Removal,
    /// Levels added at random places, evenly by the smooth count.
    pub(crate) added: usize,
    /// Standard deviation of the displacement of every level, in local mean spacings.
    pub(crate) jitter: f64,
    /// Does the audit know the orbits, or the smooth count alone?
    pub(crate) orbits: bool,
}

impl Plan {
    /// Five levels removed, two added.
    pub(crate) const STANDARD: Self = Self {
        name: "standard",
        removal: Removal::Random(5),
        added: 2,
        jitter: 0.0,
        orbits: true,
    };
    /// The same, audited with the smooth count alone.
    pub(crate) const SMOOTH_COUNT_ALONE: Self = Self {
        name: "smooth count alone",
        orbits: false,
        ..Self::STANDARD
    };
    /// The same in lists that are not exact.
    pub(crate) const JITTERED: Self = Self {
        name: "jittered by 0.05",
        jitter: 0.05,
        ..Self::STANDARD
    };
    /// One level in ten removed.
    pub(crate) const MANY: Self = Self {
        name: "30 removed",
        removal: Removal::Random(30),
        ..Self::CLEAN
    };
    /// Two runs of three neighbours removed.
    pub(crate) const RUNS: Self = Self {
        name: "runs of three",
        removal: Removal::Runs { runs: 2, length: 3 },
        ..Self::CLEAN
    };
    /// One of a near-degenerate pair removed.
    pub(crate) const NEAR_DEGENERATE: Self = Self {
        name: "one of a close pair",
        removal: Removal::ClosestPair,
        ..Self::CLEAN
    };
    /// One level in the middle removed.
    pub(crate) const ONE: Self = Self {
        name: "one in the middle",
        removal: Removal::Middle,
        ..Self::CLEAN
    };
    /// Nothing removed, nothing added.
    pub(crate) const CLEAN: Self = Self {
        name: "clean",
        removal: Removal::Random(0),
        added: 0,
        jitter: 0.0,
        orbits: true,
    };

    /// The same in a list that is not exact.
    pub(crate) const CLEAN_JITTERED: Self = Self {
        name: "clean, jittered by 0.05",
        jitter: 0.05,
        ..Self::CLEAN
    };

    /// The list with this number: the same for every plan with the same faults.
    pub(crate) fn corrupt(&self, subject: &Subject, number: u64) -> Corrupted {
        let mut random = Random::new(seed(&subject.name, number));
        let truth = &subject.truth;
        let (removed, runs) = self.removed(truth, number, &mut random);
        let added = self.places(subject, &mut random);
        let listed = |(index, &k): (usize, &f64)| {
            let place = k + self.jitter * subject.spacing(k) * random.normal();
            (!removed.contains(&index)).then_some(place)
        };
        let mut levels: Vec<f64> = truth.iter().enumerate().filter_map(listed).collect();
        levels.extend(&added);
        levels.sort_by(f64::total_cmp);
        let missing = removed.iter().map(|&index| Planted::missing(truth[index]));
        let mut planted: Vec<Planted> = missing
            .chain(added.into_iter().map(Planted::wrong))
            .collect();
        planted.sort_by(|a, b| a.k.total_cmp(&b.k));
        Corrupted {
            levels,
            planted,
            runs,
        }
    }

    /// Numbers of the levels that are removed, and runs of them as first and last k and their number.
    fn removed(
        &self,
        truth: &[f64],
        number: u64,
        random: &mut Random,
    ) -> (Vec<usize>, Vec<([f64; 2], usize)>) {
        let count = truth.len();
        let mut any = |below: usize| ((random.uniform() * below as f64) as usize).min(below - 1);
        let mut removed: Vec<usize> = Vec::new();
        let mut runs = Vec::new();
        match self.removal {
            Removal::Random(wanted) => {
                while removed.len() < wanted {
                    let index = any(count);
                    if !removed.contains(&index) {
                        removed.push(index);
                    }
                }
            }
            Removal::Runs {
                runs: wanted,
                length,
            } => {
                while runs.len() < wanted {
                    let first = any(count - length + 1);
                    let near = |&other: &usize| other.abs_diff(first) < length + BETWEEN_RUNS;
                    if !removed.iter().any(near) {
                        removed.extend(first..first + length);
                        runs.push(([truth[first], truth[first + length - 1]], length));
                    }
                }
            }
            Removal::ClosestPair => {
                let pairs = closest_pairs(truth);
                let pair = pairs[number as usize % pairs.len()];
                removed.push(pair + any(2));
            }
            Removal::Middle => removed.push(count / 3 + any(count / 3)),
        }
        (removed, runs)
    }

    fn places(&self, subject: &Subject, random: &mut Random) -> Vec<f64> {
        let weyl = &subject.prediction.weyl;
        let count = subject.truth.len() as f64;
        (0..self.added)
            .map(|_| weyl.k_at_count(1.0 + random.uniform() * (count - 1.5)))
            .collect()
    }
}

/// Numbers of the lower levels of the closest pairs, in units of the smooth spacing (which goes as 1/k), closest first.
fn closest_pairs(truth: &[f64]) -> Vec<usize> {
    let distance = |index: usize| (truth[index + 1] - truth[index]) * truth[index];
    let mut pairs: Vec<usize> = (0..truth.len() - 1)
        .filter(|&index| truth[index + 1] - truth[index] > SAME * truth[index])
        .collect();
    pairs.sort_by(|&a, &b| distance(a).total_cmp(&distance(b)));
    pairs.truncate(CLOSEST);
    pairs
}

/// A seed for every shape and list (the hash of Fowler, Noll and Vo, from memory; any fixed one serves).
fn seed(name: &str, number: u64) -> u64 {
    name.bytes()
        .chain(number.to_le_bytes())
        .fold(0xcbf2_9ce4_8422_2325, |hash: u64, byte| {
            (hash ^ u64::from(byte)).wrapping_mul(0x0100_0000_01b3)
        })
}

/// A planted fault.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Planted {
    /// Missing or false.
    pub(crate) kind: FaultKind,
    /// The true place of a missing level, the listed place of a false one.
    pub(crate) k: f64,
}

impl Planted {
    pub(crate) fn missing(k: f64) -> Self {
        Self {
            kind: FaultKind::Missing,
            k,
        }
    }

    pub(crate) fn wrong(k: f64) -> Self {
        Self {
            kind: FaultKind::False,
            k,
        }
    }
}

/// A list with planted faults.
#[derive(Clone, Debug)]
pub(crate) struct Corrupted {
    /// Ascending.
    pub(crate) levels: Vec<f64>,
    /// Ascending.
    pub(crate) planted: Vec<Planted>,
    /// Runs of removed neighbours: first and last k, number.
    pub(crate) runs: Vec<([f64; 2], usize)>,
}

impl Corrupted {
    /// Does a planted level lie above everything that is listed? Nothing in the list alone tells that it goes on.
    pub(crate) fn is_beyond(&self, planted: &Planted) -> bool {
        planted.k > self.levels[self.levels.len() - 1]
    }
}
