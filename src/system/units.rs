//! Units of levels and lengths, and the way from a user's level to the wave number k and back.

use std::f64::consts::PI;

/// Speed of light in vacuum, m/s, exact (SI).
pub const SPEED_OF_LIGHT: f64 = 299_792_458.0;
/// Reduced Planck constant, J s, exact (SI; CODATA 2018: h = 6.626 070 15e-34 J s over 2 pi).
pub const HBAR: f64 = 6.626_070_15e-34 / (2.0 * PI);
/// Electron mass, kg (CODATA 2018).
pub const ELECTRON_MASS: f64 = 9.109_383_701_5e-31;
/// One millielectronvolt in joules, exact (SI; CODATA 2018: e = 1.602 176 634e-19 C).
pub const MILLIELECTRONVOLT: f64 = 1.602_176_634e-22;

/// Length units by their names in system files, in metres.
pub(super) const LENGTHS: [(&str, f64); 5] = [
    ("m", 1.0),
    ("cm", 1e-2),
    ("mm", 1e-3),
    ("um", 1e-6),
    ("nm", 1e-9),
];

/// Words for `levels` in system files.
pub(super) const LEVELS: [&str; 5] = ["k", "energy", "GHz", "Hz", "meV"];

/// A unit of length.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LengthUnit {
    /// Name, such as mm.
    pub name: &'static str,
    /// Its size in metres.
    pub metres: f64,
}

/// What a level of the user is.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum LevelUnit {
    /// Wave number k, one over the length unit.
    Wavenumber,
    /// k squared, as finite-element codes write it.
    Energy,
    /// Frequency of a flat microwave cavity.
    Gigahertz {
        /// Relative permittivity of what fills it.
        permittivity: f64,
        /// Distance of its plates, metres.
        height: Option<f64>,
    },
    /// Frequency of a membrane or a gas.
    Hertz {
        /// Speed of its waves, m/s.
        wave_speed: f64,
    },
    /// Energy of a particle in a quantum dot.
    Millielectronvolt {
        /// Effective mass, electron masses.
        mass: f64,
    },
}

/// Units of one system: what `[units]` says, or none.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Units {
    /// Unit of all lengths; without one they are pure numbers.
    pub length: Option<LengthUnit>,
    /// What levels are.
    pub level: LevelUnit,
}

/// Levels above a limit that the flat model does not describe.
#[derive(Clone, Copy, Debug, PartialEq, thiserror::Error)]
#[error(
    "above {limit:.6} GHz = c/(2 height sqrt(permittivity)) the cavity is no longer flat: further modes appear that this count leaves out"
)]
pub struct NotFlat {
    /// The limit, GHz.
    pub limit: f64,
}

impl Default for Units {
    /// Pure numbers, levels given as k.
    fn default() -> Self {
        Self {
            length: None,
            level: LevelUnit::Wavenumber,
        }
    }
}

impl Units {
    /// Metres per length unit; 1 where lengths are pure numbers.
    fn metres(&self) -> f64 {
        self.length.map_or(1.0, |unit| unit.metres)
    }

    /// k = factor * value for frequencies, k = sqrt(factor * value) for energies.
    fn factor(&self) -> f64 {
        let metres = self.metres();
        match self.level {
            LevelUnit::Wavenumber | LevelUnit::Energy => 1.0,
            // f = c k / (2 pi sqrt(permittivity))
            LevelUnit::Gigahertz { permittivity, .. } => {
                2.0 * PI * 1e9 * permittivity.sqrt() / SPEED_OF_LIGHT * metres
            }
            // f = v k / (2 pi)
            LevelUnit::Hertz { wave_speed } => 2.0 * PI / wave_speed * metres,
            // E = hbar^2 k^2 / (2 m)
            LevelUnit::Millielectronvolt { mass } => {
                2.0 * mass * ELECTRON_MASS * MILLIELECTRONVOLT / (HBAR * HBAR) * metres * metres
            }
        }
    }

    fn is_quadratic(&self) -> bool {
        matches!(
            self.level,
            LevelUnit::Energy | LevelUnit::Millielectronvolt { .. }
        )
    }

    /// Wave number k, one over the length unit, of a level in the user's unit (not negative).
    #[must_use]
    pub fn k(&self, value: f64) -> f64 {
        let scaled = self.factor() * value;
        if self.is_quadratic() {
            scaled.sqrt()
        } else {
            scaled
        }
    }

    /// Level in the user's unit of a wave number.
    #[must_use]
    pub fn value(&self, k: f64) -> f64 {
        if self.is_quadratic() {
            k * k / self.factor()
        } else {
            k / self.factor()
        }
    }

    /// Error of a level in the user's unit that belongs to an error of its wave number.
    #[must_use]
    pub fn error(&self, k: f64, error: f64) -> f64 {
        if self.is_quadratic() {
            (2.0 * k + error) * error / self.factor()
        } else {
            error / self.factor()
        }
    }

    /// dk/d(value) at a level in the user's unit: a density over k times this is a density over the user's unit.
    #[must_use]
    pub fn derivative(&self, value: f64) -> f64 {
        if self.is_quadratic() {
            0.5 * self.factor() / self.k(value)
        } else {
            self.factor()
        }
    }

    /// Name of the window option (without its dashes) and of the column of levels: k, energy or frequency.
    #[must_use]
    pub fn window_option(&self) -> &'static str {
        match self.level {
            LevelUnit::Wavenumber => "k",
            LevelUnit::Energy | LevelUnit::Millielectronvolt { .. } => "energy",
            LevelUnit::Gigahertz { .. } | LevelUnit::Hertz { .. } => "frequency",
        }
    }

    /// Name of the column of levels in tables.
    #[must_use]
    pub fn column(&self) -> &'static str {
        self.window_option()
    }

    /// Unit of levels for people: 1/mm, 1/mm^2, GHz, Hz, meV, or nothing where they are pure numbers.
    #[must_use]
    pub fn level_label(&self) -> String {
        let length = self.length_label();
        match self.level {
            LevelUnit::Gigahertz { .. } => "GHz".to_owned(),
            LevelUnit::Hertz { .. } => "Hz".to_owned(),
            LevelUnit::Millielectronvolt { .. } => "meV".to_owned(),
            _ if length.is_empty() => String::new(),
            LevelUnit::Wavenumber => format!("1/{length}"),
            LevelUnit::Energy => format!("1/{length}^2"),
        }
    }

    /// Unit of lengths for people, or nothing.
    #[must_use]
    pub fn length_label(&self) -> &'static str {
        self.length.map_or("", |unit| unit.name)
    }

    /// Level above which a cavity of the given height is no longer flat: c/(2 height), in a filled cavity less by the square
    /// root of the permittivity.
    #[must_use]
    pub fn flat_limit(&self) -> Option<f64> {
        match self.level {
            LevelUnit::Gigahertz {
                permittivity,
                height: Some(height),
            } => Some(SPEED_OF_LIGHT / (2.0 * height * permittivity.sqrt()) * 1e-9),
            _ => None,
        }
    }

    /// Does a window that ends at this level (user's unit) reach beyond the flat cavity?
    #[must_use]
    pub fn warning(&self, to: f64) -> Option<NotFlat> {
        self.flat_limit()
            .filter(|&limit| to > limit)
            .map(|limit| NotFlat { limit })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn millimetres(level: LevelUnit) -> Units {
        Units {
            length: Some(LengthUnit {
                name: "mm",
                metres: 1e-3,
            }),
            level,
        }
    }

    #[test]
    fn one_gigahertz_is_a_wavelength_of_c_over_f() {
        let units = millimetres(LevelUnit::Gigahertz {
            permittivity: 1.0,
            height: Some(8e-3),
        });
        // c / 1 GHz = 299.792458 mm
        assert!((units.k(1.0) - 2.0 * PI / 299.792_458).abs() < 1e-16);
        // c / (2 * 8 mm) = 18.737028625 GHz
        assert!((units.flat_limit().expect("height given") - 18.737_028_625).abs() < 1e-12);
        assert!(units.warning(18.0).is_none() && units.warning(19.0).is_some());
        assert_eq!(units.column(), "frequency");
    }

    #[test]
    fn an_electron_in_a_well_has_the_energy_of_the_handbook() {
        // hbar^2/(2 m_e) = 3.80998212 eV angstrom^2 (from CODATA 2018 values): k = 1/nm has 38.0998212 meV.
        let units = Units {
            length: Some(LengthUnit {
                name: "nm",
                metres: 1e-9,
            }),
            level: LevelUnit::Millielectronvolt { mass: 1.0 },
        };
        assert!((units.value(1.0) - 38.099_821_2).abs() < 1e-6);
    }

    #[test]
    fn levels_come_back_and_slopes_are_right() {
        let levels = [
            LevelUnit::Wavenumber,
            LevelUnit::Energy,
            LevelUnit::Gigahertz {
                permittivity: 2.1,
                height: None,
            },
            LevelUnit::Hertz { wave_speed: 343.0 },
            LevelUnit::Millielectronvolt { mass: 0.067 },
        ];
        for level in levels {
            let units = millimetres(level);
            for k in [0.1, 1.0, 37.0] {
                let value = units.value(k);
                assert!((units.k(value) / k - 1.0).abs() < 1e-14);
                let power = if units.is_quadratic() { 0.5 } else { 1.0 };
                assert!((units.derivative(value) * value / (power * k) - 1.0).abs() < 1e-14);
                let error = units.value(k + 1e-3 * k) - value;
                assert!((units.error(k, 1e-3 * k) / error - 1.0).abs() < 1e-12);
            }
        }
    }
}
