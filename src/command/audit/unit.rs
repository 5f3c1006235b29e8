//! What a list is that does not fit as it stands: energies for wave numbers, another unit, another class, another size.
//!
//! Every reading turns the numbers of the list into other wave numbers; it is right if the smooth count at the n-th of them is n - 1/2
//! all along the list.

use crate::command::given::GivenLevels;
use crate::command::subject::{Subject, class_name};
use crate::command::text::significant;
use orbitsum::baseline::{Weyl, weyl};
use orbitsum::system::{LengthUnit, LevelUnit, Units};

/// Root mean square of count less number that still fits: this many levels, and this part of all. The count of a list in another unit
/// is off by a factor.
const FIT: (f64, f64) = (3.0, 0.03);
/// Misfits of readings by the same factor differ by rounding only.
const SAME: f64 = 1e-6;
/// Distinct levels of a list of copies that can be compared with anything.
const FEWEST_DISTINCT: usize = 10;
/// Range of sizes beside the one of the file that are worth naming: beyond, it is a unit or nothing.
const SIZES: std::ops::RangeInclusive<f64> = 0.05..=20.0;
/// Units of length with their size in metres, for lists of frequencies beside files without units.
const LENGTHS: [(&str, f64); 5] = [
    ("m", 1.0),
    ("cm", 1e-2),
    ("mm", 1e-3),
    ("um", 1e-6),
    ("nm", 1e-9),
];

/// What a list seems to be, and what to do about it.
pub(super) struct Like {
    pub(super) what: String,
    pub(super) cure: String,
}

/// A reading of the list: wave number = `factor` x number^`power`.
struct Reading {
    factor: f64,
    power: f64,
    like: Like,
}

/// What a list seems to be that fits as something else, if it does.
pub(super) fn recognise(subject: &Subject, given: &GivenLevels) -> Option<Like> {
    let own = subject.weyl();
    let numbers: Vec<f64> = given.k.iter().map(|&k| given.unit.value(k)).collect();
    row_numbers(&numbers)
        .or_else(|| repeated(&own, &given.k))
        .or_else(|| in_another_unit(subject, given, &numbers))
        .or_else(|| of_class(subject, &given.k))
        .or_else(|| of_size(&own, &given.k))
}

/// The first of the readings that fit best.
fn in_another_unit(subject: &Subject, given: &GivenLevels, numbers: &[f64]) -> Option<Like> {
    let own = subject.weyl();
    let fitting: Vec<(f64, Reading)> = readings(&given.unit, &subject.system.units)
        .into_iter()
        .map(|reading| {
            let k: Vec<f64> = numbers
                .iter()
                .map(|number| reading.factor * number.powf(reading.power))
                .collect();
            (late_misfit(&own, &k), reading)
        })
        .filter(|(misfit, _)| fits(*misfit, numbers.len()))
        .collect();
    let best = fitting
        .iter()
        .map(|(misfit, _)| *misfit)
        .fold(f64::INFINITY, f64::min);
    fitting
        .into_iter()
        .find(|(misfit, _)| *misfit <= best * (1.0 + SAME))
        .map(|(_, reading)| reading.like)
}

/// The numbers of rows instead of levels.
fn row_numbers(numbers: &[f64]) -> Option<Like> {
    let consecutive = numbers.windows(2).all(|pair| pair[1] - pair[0] == 1.0);
    let whole = numbers.first().is_some_and(|first| first.fract() == 0.0);
    (consecutive && whole).then(|| Like {
        what: "the numbers of rows".into(),
        cure: "give the levels, or name their column `k`, `energy` or `frequency`".into(),
    })
}

/// Root mean square of smooth count less number of the level.
fn misfit(weyl: &Weyl, k: &[f64]) -> f64 {
    root_mean_square(&offsets(weyl, k))
}

/// The same for a list that may begin above the lowest level.
fn late_misfit(weyl: &Weyl, k: &[f64]) -> f64 {
    let offsets = offsets(weyl, k);
    let below = (offsets.iter().sum::<f64>() / offsets.len() as f64).max(0.0);
    let rest: Vec<f64> = offsets.iter().map(|off| off - below).collect();
    root_mean_square(&rest)
}

fn offsets(weyl: &Weyl, k: &[f64]) -> Vec<f64> {
    k.iter()
        .enumerate()
        .map(|(index, &k)| {
            let count = if k > 0.0 { weyl.count(k, 0.0) } else { 0.0 };
            count - (index as f64 + 0.5)
        })
        .collect()
}

fn root_mean_square(values: &[f64]) -> f64 {
    let sum: f64 = values.iter().map(|value| value * value).sum();
    (sum / values.len() as f64).sqrt()
}

fn fits(misfit: f64, levels: usize) -> bool {
    misfit <= FIT.0 + FIT.1 * levels as f64
}

/// A list in which every level stands equally often, more than once.
fn repeated(weyl: &Weyl, k: &[f64]) -> Option<Like> {
    let chunks: Vec<&[f64]> = k.chunk_by(|a, b| a == b).collect();
    let times = chunks.first()?.len();
    let single: Vec<f64> = chunks.iter().map(|chunk| chunk[0]).collect();
    let alike = times > 1
        && single.len() >= FEWEST_DISTINCT
        && chunks.iter().all(|chunk| chunk.len() == times);
    (alike && fits(misfit(weyl, &single), single.len())).then(|| Like {
        what: format!("a list in which every level stands {times} times"),
        cure: "remove the copies".into(),
    })
}

/// Readings in other units. `unit` is how the numbers were read, `own` that of the file.
fn readings(unit: &Units, own: &Units) -> Vec<Reading> {
    let mut readings = Vec::new();
    let mut add = |factor: f64, power: f64, what: String, cure: String| {
        readings.push(Reading {
            factor,
            power,
            like: Like { what, cure },
        });
    };
    let inverse = match own.length_label() {
        "" => String::new(),
        label => format!(" (1/{label})"),
    };
    if unit.level != LevelUnit::Wavenumber {
        add(
            1.0,
            1.0,
            format!("wave numbers k{inverse}"),
            "name the column `k`".into(),
        );
    }
    if unit.level != LevelUnit::Energy {
        let cure = match own.level {
            LevelUnit::Wavenumber | LevelUnit::Energy => "name the column `energy`",
            _ => "give their square roots in a column `k`",
        };
        add(1.0, 0.5, "energies k^2".into(), cure.into());
    }
    if unit.level != own.level && own.level != LevelUnit::Wavenumber {
        add(
            own.k(1.0),
            power_of(own),
            format!("levels in {}", own.level_label()),
            format!("name the column `{}`", own.column()),
        );
    }
    for (name, times) in other_units(unit.level) {
        // Levels are read by their own unit, with the numbers brought to it.
        let by = if times < 1.0 {
            format!("divide them by {}", significant(times.recip(), 4))
        } else {
            format!("multiply them by {}", significant(times, 4))
        };
        add(
            unit.k(times),
            power_of(unit),
            format!("levels in {name} where {} is expected", unit.level_label()),
            by,
        );
    }
    if unit.level != LevelUnit::Wavenumber {
        for (name, ratio) in other_lengths(own) {
            add(
                ratio,
                1.0,
                format!("wave numbers in 1/{name}"),
                format!(
                    "multiply them by {} and name the column `k`",
                    significant(ratio, 4)
                ),
            );
        }
    }
    lengths(unit, own, &mut add);
    readings
}

/// The power of a level that its wave number goes with: 1/2 for energies.
fn power_of(unit: &Units) -> f64 {
    (unit.k(4.0) / unit.k(1.0)).log2() / 2.0
}

/// Other units of the same kind: name, and their size in the unit that was expected.
fn other_units(level: LevelUnit) -> Vec<(&'static str, f64)> {
    match level {
        LevelUnit::Gigahertz { .. } => {
            vec![("Hz", 1e-9), ("kHz", 1e-6), ("MHz", 1e-3), ("THz", 1e3)]
        }
        LevelUnit::Hertz { .. } => vec![("kHz", 1e3), ("MHz", 1e6), ("GHz", 1e9)],
        LevelUnit::Millielectronvolt { .. } => vec![("ueV", 1e-3), ("eV", 1e3)],
        LevelUnit::Wavenumber | LevelUnit::Energy => Vec::new(),
    }
}

/// Units of length beside the file's own, with what wave numbers in 1/name are multiplied by to be in the file's unit.
fn other_lengths(own: &Units) -> Vec<(&'static str, f64)> {
    own.length.map_or_else(Vec::new, |length| {
        LENGTHS
            .iter()
            .filter(|(name, _)| *name != length.name)
            .map(|(name, metres)| (*name, length.metres / metres))
            .collect()
    })
}

/// Readings in which a length is in another unit than the file says, and frequencies where the file knows no units.
fn lengths(unit: &Units, own: &Units, add: &mut dyn FnMut(f64, f64, String, String)) {
    if let Some(length) = own.length {
        for (name, ratio) in other_lengths(own) {
            let (factor, what, cure) = if unit.level == LevelUnit::Wavenumber {
                (
                    ratio,
                    format!(
                        "wave numbers in 1/{name} where 1/{} is expected",
                        length.name
                    ),
                    format!("multiply them by {}", significant(ratio, 4)),
                )
            } else {
                // The shape has its lengths in the other unit: wave numbers in the file's unit of length are as much larger.
                (
                    unit.k(1.0) / ratio,
                    format!(
                        "levels of a shape whose lengths are in {name}, not in {}",
                        length.name
                    ),
                    format!("look at `length` in [units]: \"{name}\" would fit"),
                )
            };
            add(factor, power_of(unit), what, cure);
        }
    } else if unit.level == LevelUnit::Wavenumber {
        for (name, metres) in LENGTHS {
            let gigahertz = Units {
                length: Some(LengthUnit { name, metres }),
                level: LevelUnit::Gigahertz {
                    permittivity: 1.0,
                    height: None,
                },
            };
            add(
                gigahertz.k(1.0),
                1.0,
                format!("frequencies in GHz of a flat cavity with lengths in {name}"),
                format!(
                    "put [units] with length = \"{name}\" and levels = \"GHz\" into the system file"
                ),
            );
        }
    }
}

/// A list of another class, or of all.
fn of_class(subject: &Subject, k: &[f64]) -> Option<Like> {
    if subject.symmetry.order() == 1 {
        return None;
    }
    let of = |class| weyl(&subject.system.domain, &subject.symmetry, class);
    let all = (
        misfit(&of(None), k),
        Like {
            what: "a list of the levels of all symmetry classes".into(),
            cure: "leave --class out".into(),
        },
    );
    let single = subject.symmetry.irreps.iter().map(|irrep| {
        (
            misfit(&of(Some(irrep)), k),
            Like {
                what: format!("a list of the levels of class {} alone", class_name(irrep)),
                cure: format!("give --class {}", irrep.name),
            },
        )
    });
    std::iter::once(all)
        .chain(single)
        .filter(|(misfit, _)| fits(*misfit, k.len()))
        .min_by(|a, b| a.0.total_cmp(&b.0))
        .map(|(_, like)| like)
}

/// A list of the same shape in another size, or of a shape with the same area.
fn of_size(weyl: &Weyl, k: &[f64]) -> Option<Like> {
    // The upper half, where fluctuations of the staircase count least.
    let first = k.len() / 2;
    let ratios: f64 = (first..k.len())
        .map(|index| weyl.k_at_count(index as f64 + 0.5) / k[index])
        .sum();
    let size = ratios / (k.len() - first) as f64;
    let read: Vec<f64> = k.iter().map(|k| size * k).collect();
    (SIZES.contains(&size) && fits(misfit(weyl, &read), k.len())).then(|| Like {
        what: format!(
            "a list of a shape like this with all lengths {} times as long, or of another one of about that area",
            significant(size, 3)
        ),
        cure: "compare shape, size and unit of the file with what the list comes from".into(),
    })
}
