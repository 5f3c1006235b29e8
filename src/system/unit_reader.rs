//! Reads `[units]`.

use super::error::{Problem, SystemError};
use super::reader::{Reader, Table, Value, span, word};
use super::units::{LENGTHS, LEVELS, LengthUnit, LevelUnit, Units};

/// Keys of `[units]`.
const KEYS: &[&str] = &[
    "length",
    "levels",
    "permittivity",
    "height",
    "wave_speed",
    "mass",
];
/// Words for `length`, as in [`LENGTHS`].
const LENGTH_NAMES: &[&str] = &["m", "cm", "mm", "um", "nm"];

/// Units of the file, pure numbers if it has none.
pub(super) fn read(value: Option<Value<'_>>, reader: Reader<'_>) -> Result<Units, SystemError> {
    let Some(value) = value else {
        return Ok(Units::default());
    };
    let table = Table::of(value, "[units]", KEYS)?;
    let length = table
        .get("length")
        .map(|value| word(value, "length", LENGTH_NAMES))
        .transpose()?
        .map(|index| LengthUnit {
            name: LENGTHS[index].0,
            metres: LENGTHS[index].1,
        });
    let levels = table
        .get("levels")
        .map_or(Ok(0), |value| word(value, "levels", &LEVELS))?;
    let (own, needed): (&[&str], Option<(&'static str, &'static str)>) = match LEVELS[levels] {
        "GHz" => (&["permittivity", "height"], None),
        "Hz" => (
            &["wave_speed"],
            Some(("wave_speed", "wave_speed = 343.0 (metres per second)")),
        ),
        "meV" => (&["mass"], Some(("mass", "mass = 0.067 (electron masses)"))),
        _ => (&[], None),
    };
    for key in ["permittivity", "height", "wave_speed", "mass"] {
        if let Some(value) = table.get(key)
            && !own.contains(&key)
        {
            let levels = LEVELS[levels].to_owned();
            return Err(SystemError::at(
                span(value),
                Problem::UnitKey { key, levels },
            ));
        }
    }
    if !matches!(LEVELS[levels], "k" | "energy") && length.is_none() {
        return Err(missing(table, "length", "length = \"mm\"", levels));
    }
    if let Some((key, example)) = needed
        && table.get(key).is_none()
    {
        return Err(missing(table, key, example, levels));
    }
    let positive = |key: &'static str| {
        table
            .get(key)
            .map(|value| reader.positive(value, key))
            .transpose()
    };
    let metres = length.map_or(1.0, |unit| unit.metres);
    let level = match LEVELS[levels] {
        "k" => LevelUnit::Wavenumber,
        "energy" => LevelUnit::Energy,
        "GHz" => LevelUnit::Gigahertz {
            permittivity: positive("permittivity")?.unwrap_or(1.0),
            height: positive("height")?.map(|height| height * metres),
        },
        "Hz" => LevelUnit::Hertz {
            wave_speed: positive("wave_speed")?.unwrap_or(1.0),
        },
        _ => LevelUnit::Millielectronvolt {
            mass: positive("mass")?.unwrap_or(1.0),
        },
    };
    Ok(Units { length, level })
}

fn missing(
    table: Table<'_>,
    key: &'static str,
    example: &'static str,
    levels: usize,
) -> SystemError {
    SystemError::at(
        table.span,
        Problem::UnitMissing {
            key,
            levels: LEVELS[levels].to_owned(),
            example,
        },
    )
}
