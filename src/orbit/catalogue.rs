//! Everything that contributes to the orbit sum of one domain, up to given limits.

use super::analyse::Setting;
use super::periodic::Orbit;
use super::phase::Comparison;
use super::search::{Pass, curved_orbits, insert, sort};
use super::strip::{Strip, flat_orbits};
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
    /// Strips of parallel orbits, shortest first.
    pub strips: Vec<Strip>,
    /// What the passes of the search from curved walls did.
    pub passes: Vec<Pass>,
    /// What the passes of the search for strips and flat orbits did.
    pub flat_passes: Vec<Pass>,
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
        let (mut orbits, passes) = curved_orbits(&setting);
        let flat = flat_orbits(&setting);
        for orbit in flat.orbits {
            insert(&setting, &mut orbits, orbit);
        }
        sort(&mut orbits);
        Self {
            limits,
            orbits,
            strips: flat.strips,
            passes,
            flat_passes: flat.passes,
        }
    }
}
