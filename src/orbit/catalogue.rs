//! Everything that contributes to the orbit sum of one domain, up to given limits.

use super::analyse::Setting;
use super::omission::{Found, Omission, omissions};
use super::passes::Pass;
use super::periodic::Orbit;
use super::phase::Comparison;
use super::search::{Curved, CurvedFamily, curved_orbits, insert, scout, sort};
use super::strip::{Strip, flat_orbits};
use super::tori::{self, Integrable, TorusLimits, TorusSum};
use crate::billiard::{Domain, Shape, Symmetry, Tracer, Wall};

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
    /// Families with curved bounces, which are not in the sum.
    pub families: Vec<CurvedFamily>,
    /// The integrable shape, if the domain is one whose tori are known; then the search for orbits is not needed.
    pub integrable: Option<Integrable>,
    /// Tori of the integrable shape with their terms (whole domain).
    pub tori: TorusSum,
    /// What the sum leaves out.
    pub omissions: Vec<Omission>,
    /// What the passes of the search from curved walls did.
    pub passes: Vec<Pass>,
    /// What the passes of the search for strips and flat orbits did.
    pub flat_passes: Vec<Pass>,
}

impl Catalogue {
    /// Finds all orbits and families up to the limits.
    #[must_use]
    pub fn find(domain: &Domain, symmetry: &Symmetry, limits: Limits) -> Self {
        match tori::recognise(domain) {
            Some(shape) => Self::of_tori(shape, limits),
            None => Self::search(&domain.joined(), symmetry, limits),
        }
    }

    fn of_tori(shape: Integrable, limits: Limits) -> Self {
        let tori = tori::terms(&shape, &limits.for_tori());
        Self {
            limits,
            orbits: Vec::new(),
            strips: Vec::new(),
            families: Vec::new(),
            integrable: Some(shape),
            omissions: tori.left_out.iter().map(Omission::from).collect(),
            tori,
            passes: Vec::new(),
            flat_passes: Vec::new(),
        }
    }

    fn search(domain: &Domain, symmetry: &Symmetry, limits: Limits) -> Self {
        let tracer = Tracer::new(domain);
        let setting = Setting {
            domain,
            symmetry,
            tracer: &tracer,
            comparison: Comparison::new(domain, symmetry),
            max_length: limits.max_length,
            max_bounces: limits.max_bounces,
        };
        let Curved {
            mut orbits,
            families,
            passes,
        } = curved_orbits(&setting);
        let flat = flat_orbits(&setting);
        for orbit in flat.orbits {
            insert(&setting, &mut orbits, orbit);
        }
        sort(&mut orbits);
        Self {
            limits,
            omissions: omissions(
                domain,
                &tracer,
                &Found {
                    orbits: &orbits,
                    strips: &flat.strips,
                    families: &families,
                    max_bounces: limits.max_bounces,
                },
            ),
            orbits,
            strips: flat.strips,
            families,
            integrable: None,
            tori: TorusSum::default(),
            passes,
            flat_passes: flat.passes,
        }
    }
}

/// Bounces up to which isolated orbits are looked for unless the user says otherwise: whispering-gallery orbits with more
/// have small terms of alternating phase, and the search grows with the number.
const DEFAULT_BOUNCES: usize = 24;
/// Bounces allowed per mean chord of the longest orbit: in polygons strips of many short chords count in full.
const BOUNCES_PER_CHORD: f64 = 4.0;

/// Length of the first coarse search in mean chords, and growth from one to the next.
const FIRST_SCOUT: f64 = 2.0;
const SCOUT_STEP: f64 = 1.2;
/// Orbits and rays of a coarse search above which the full one takes more than about a second.
const MANY_ORBITS: usize = 250;
const MANY_RAYS: usize = 10_000;
/// A ray among formula curves costs this many times one among lines and arcs.
const CURVE_COST: usize = 4;

impl Limits {
    /// Limits for all orbits up to a length, with a number of bounces that suits the domain.
    #[must_use]
    pub fn up_to(max_length: f64, domain: &Domain) -> Self {
        let max_bounces = if tori::recognise(domain).is_some() {
            tori::DEFAULT_MAX_BOUNCES as usize
        } else if domain.walls.iter().all(Wall::is_straight) {
            let mean_chord = std::f64::consts::PI * domain.area / domain.perimeter;
            (BOUNCES_PER_CHORD * max_length / mean_chord).ceil() as usize
        } else {
            DEFAULT_BOUNCES
        };
        Self {
            max_length,
            max_bounces,
        }
    }

    /// These limits, or shorter ones if the orbits up to them would take long to find: coarse searches at growing lengths
    /// stop where they find very many orbits or follow very many rays. For a domain with curved walls that is not
    /// integrable; the numbers of strips and tori grow slowly.
    #[must_use]
    pub fn affordable(self, domain: &Domain, symmetry: &Symmetry) -> Self {
        if tori::recognise(domain).is_some() || domain.walls.iter().all(Wall::is_straight) {
            return self;
        }
        let domain = &domain.joined();
        let tracer = Tracer::new(domain);
        let chord = std::f64::consts::PI * domain.area / domain.perimeter;
        let is_curve = |wall: &Wall| matches!(wall.shape, Shape::Curve(_));
        let cost = if domain.walls.iter().any(is_curve) {
            CURVE_COST
        } else {
            1
        };
        let mut affordable = FIRST_SCOUT * chord;
        while affordable < self.max_length {
            let next = (affordable * SCOUT_STEP).min(self.max_length);
            let setting = Setting {
                domain,
                symmetry,
                tracer: &tracer,
                comparison: Comparison::new(domain, symmetry),
                max_length: next,
                max_bounces: self.max_bounces,
            };
            let (orbits, rays) = scout(&setting);
            if orbits > MANY_ORBITS || rays * cost > MANY_RAYS {
                break;
            }
            affordable = next;
        }
        Self {
            max_length: affordable.min(self.max_length),
            ..self
        }
    }

    pub(crate) fn for_tori(self) -> TorusLimits {
        TorusLimits {
            max_length: self.max_length,
            max_bounces: u32::try_from(self.max_bounces).unwrap_or(u32::MAX),
        }
    }
}
