//! Everything that contributes to the orbit sum of one domain, up to given limits.

use super::analyse::Setting;
use super::periodic::Orbit;
use super::phase::Comparison;
use super::search::{Pass, curved_orbits};
use crate::billiard::{Domain, Symmetry, Tracer};

/// How far orbits are looked for. Both bound the reduced orbit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Limits {
    /// Largest length.
    pub max_length: f64,
    /// Largest number of bounces on walls.
    pub max_bounces: usize,
}

/// Orbits and families of a domain.
#[derive(Clone, Debug)]
pub struct Catalogue {
    /// The limits it is complete to.
    pub limits: Limits,
    /// Isolated orbits, shortest first.
    pub orbits: Vec<Orbit>,
    /// What the passes of the search did.
    pub passes: Vec<Pass>,
}

impl Catalogue {
    /// Finds all orbits and families up to the limits.
    #[must_use]
    pub fn find(domain: &Domain, symmetry: &Symmetry, limits: Limits) -> Self {
        let tracer = Tracer::new(domain);
        let setting = Setting {
            domain,
            symmetry,
            tracer: &tracer,
            comparison: Comparison::new(domain, symmetry),
            max_length: limits.max_length,
            max_bounces: limits.max_bounces,
        };
        let (orbits, passes) = curved_orbits(&setting);
        Self {
            limits,
            orbits,
            passes,
        }
    }
}
