//! The system that a command is about, with its symmetry and the class that was asked for.

use super::error::CommandError;
use super::options::Options;
use orbitsum::baseline::{Weyl, weyl};
use orbitsum::billiard::{
    Irrep, Symmetry, SymmetryError, check_declared, detect, is_rotationally_invariant,
};
use orbitsum::orbit::tori::{Integrable, recognise};
use orbitsum::orbit::torus_classes_known;
use orbitsum::system::{System, load};
use serde_json::{Map, Value, json};
use std::path::Path;

/// A validated system, ready for any command.
#[derive(Debug)]
pub(super) struct Subject {
    /// What the file says.
    pub(super) system: System,
    /// Its symmetry group, the declared one if the file declares one.
    pub(super) symmetry: Symmetry,
    /// The class that was asked for.
    pub(super) class: Option<Irrep>,
    /// The integrable shape that it is, if it is a disk, annulus, sector or ellipse.
    pub(super) integrable: Option<Integrable>,
}

impl Subject {
    /// Reads the system and looks up the class.
    pub(super) fn load(path: &Path, options: &Options) -> Result<Self, CommandError> {
        Self::with_settings(path, &options.settings, options.class.as_deref())
    }

    /// The same with the given parameters and class.
    pub(super) fn with_settings(
        path: &Path,
        settings: &[(String, String)],
        class_name: Option<&str>,
    ) -> Result<Self, CommandError> {
        let system = load(path, settings)?;
        let symmetry = symmetry(&system)?;
        let class = class_name
            .map(|name| class(&system, &symmetry, name))
            .transpose()?;
        Ok(Self {
            integrable: recognise(&system.domain),
            system,
            symmetry,
            class,
        })
    }

    /// The smooth count of the levels that were asked for.
    pub(super) fn weyl(&self) -> Weyl {
        weyl(&self.system.domain, &self.symmetry, self.class.as_ref())
    }

    /// A level in the file's unit for people.
    pub(super) fn level(&self, value: f64, digits: usize) -> String {
        super::text::with_unit(value, digits, &self.system.units.level_label())
    }

    /// A length for people.
    pub(super) fn length(&self, value: f64, digits: usize) -> String {
        super::text::with_unit(value, digits, self.system.units.length_label())
    }

    /// Name with the class, for headings.
    pub(super) fn title(&self) -> String {
        match &self.class {
            Some(irrep) => format!("{}, class {}", self.system.name, class_name(irrep)),
            None => self.system.name.clone(),
        }
    }

    /// Name, what it is and parameters, for people.
    pub(super) fn heading(&self) -> String {
        let parameters: Vec<String> = self
            .system
            .parameters
            .iter()
            .map(|(name, value)| format!("{name} = {}", super::text::significant(*value, 10)))
            .collect();
        if parameters.is_empty() {
            format!("{}\n", self.title())
        } else {
            format!("{} ({})\n", self.title(), parameters.join(", "))
        }
    }

    /// What every file of results says about the system.
    pub(super) fn metadata(&self, command: &str) -> Map<String, Value> {
        let parameters: Map<String, Value> = self
            .system
            .parameters
            .iter()
            .map(|(name, value)| (name.clone(), json!(value)))
            .collect();
        let units = &self.system.units;
        let class = self.class.as_ref().map(|irrep| {
            json!({ "name": irrep.name, "aliases": irrep.aliases, "dimension": irrep.dimension })
        });
        let mut map = Map::new();
        map.insert("command".into(), command.into());
        map.insert("system".into(), self.system.name.as_str().into());
        map.insert(
            "file".into(),
            self.system.source.display().to_string().into(),
        );
        map.insert("parameters".into(), parameters.into());
        map.insert("symmetry".into(), self.symmetry.name.as_str().into());
        map.insert("class".into(), class.into());
        map.insert(
            "units".into(),
            json!({
                "length": units.length_label(),
                "levels": units.column(),
                "level_unit": units.level_label(),
            }),
        );
        map
    }
}

/// The group that the file declares, which the shape must have, or the one found.
fn symmetry(system: &System) -> Result<Symmetry, CommandError> {
    let found = detect(&system.domain);
    match &system.declared_symmetry {
        None => Ok(found),
        Some(declared) => check_declared(&found, declared).map_err(|error| {
            let name = match &error {
                SymmetryError::NotPresent { detected, .. } => detected,
                SymmetryError::Unknown { .. } => &found.name,
            };
            system.symmetry_error(name).into()
        }),
    }
}

fn class(system: &System, symmetry: &Symmetry, name: &str) -> Result<Irrep, CommandError> {
    if let Some(irrep) = symmetry.class(name) {
        return Ok(irrep.clone());
    }
    let known = if is_rotationally_invariant(&system.domain) {
        "it is symmetric under all rotations, and its levels are not sorted into classes: leave --class out".to_owned()
    } else if symmetry.order() == 1 {
        "it has no symmetry, and all its levels are in one class: leave --class out".to_owned()
    } else {
        let classes: Vec<String> = symmetry.irreps.iter().map(class_name).collect();
        format!(
            "its symmetry is `{}` with the classes {}",
            symmetry.name,
            classes.join(", ")
        )
    };
    Err(CommandError::UnknownClass {
        name: name.to_owned(),
        known,
    })
}

/// Name of a class with its other names: `B1 (odd,even)`.
pub(super) fn class_name(irrep: &Irrep) -> String {
    if irrep.aliases.is_empty() {
        irrep.name.clone()
    } else {
        format!("{} ({})", irrep.name, irrep.aliases.join("; "))
    }
}

impl Subject {
    /// Refuses a class where the orbit sum does not know single classes.
    pub(super) fn check_class_of_orbits(&self) -> Result<(), CommandError> {
        match (&self.class, &self.integrable) {
            (Some(_), Some(shape)) if !torus_classes_known(shape) => {
                Err(CommandError::ClassUnavailable {
                    reason: "the tori of this integrable shape are summed for all levels together: leave --class out; `weyl` \
                             counts single classes",
                })
            }
            _ => Ok(()),
        }
    }
}
