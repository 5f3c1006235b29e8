//! Passes of a search, each with a finer start set than the one before, until one adds nothing.

use super::analyse::Setting;
use super::fan::{Resolution, Source};
use crate::billiard::{Symmetry, Vec2};

/// What one pass of the search did.
#[derive(Clone, Copy, Debug)]
pub struct Pass {
    /// Points on the walls from which fans were shot.
    pub sources: usize,
    /// Smallest angle between neighbouring rays, radians.
    pub smallest_gap: f64,
    /// Rays followed.
    pub rays: usize,
    /// Orbits that no earlier pass had found.
    pub added: usize,
}

/// The first pass of a search.
pub(crate) struct Plan {
    /// Sources on one symmetry copy of the walls.
    pub(crate) sources: usize,
    /// How finely their fans are resolved.
    pub(crate) resolution: Resolution,
    /// Start from straight walls (or else from curved ones).
    pub(crate) straight: bool,
}

/// What a pass brought.
pub(crate) struct Gain {
    pub(crate) rays: usize,
    pub(crate) added: usize,
}

/// Number of passes after which a search gives up on settling; what is still being added then is said in the output.
const MOST_PASSES: usize = 5;
/// Each pass has this many times the sources of the one before, and gaps smaller by the same factor.
const REFINEMENT: f64 = 1.7;

/// Runs passes until one after the first adds nothing.
pub(crate) fn until_settled(
    setting: &Setting,
    plan: &Plan,
    mut run: impl FnMut(&[Source], &Resolution) -> Gain,
) -> Vec<Pass> {
    let mut passes = Vec::new();
    for pass in 0..MOST_PASSES {
        let factor = REFINEMENT.powi(pass as i32);
        let resolution = Resolution {
            rays: (plan.resolution.rays as f64 * factor.sqrt()) as usize,
            smallest_gap: plan.resolution.smallest_gap / factor,
            ..plan.resolution
        };
        let wanted = (plan.sources as f64 * factor).round() as usize;
        let sources = sources(setting, wanted, plan.straight);
        let Gain { rays, added } = run(&sources, &resolution);
        passes.push(Pass {
            sources: sources.len(),
            smallest_gap: resolution.smallest_gap,
            rays,
            added,
        });
        if pass > 0 && added == 0 {
            break;
        }
    }
    passes
}

/// Direction (generic on purpose) by which one of the symmetric copies of a point is chosen.
const GENERIC: Vec2 = Vec2::new(0.803_142_9, 0.595_779_3);
/// Sources sit at this fraction of their cell: a generic one, so that no ray is aimed at a corner or along an axis.
const OFFSET: f64 = 0.381_966;

/// About `wanted` points on one symmetry copy of the straight or of the curved walls, evenly spaced in arc length.
pub(crate) fn sources(setting: &Setting, wanted: usize, straight: bool) -> Vec<Source> {
    let Setting {
        domain, symmetry, ..
    } = *setting;
    let chosen: Vec<usize> = (0..domain.walls.len())
        .filter(|&wall| domain.walls[wall].is_straight() == straight)
        .collect();
    let total: f64 = chosen.iter().map(|&wall| domain.lengths[wall]).sum();
    let spacing = total / (wanted * symmetry.order()) as f64;
    let mut sources = Vec::new();
    for wall in chosen {
        let count = (domain.lengths[wall] / spacing).ceil().max(2.0) as usize;
        let extent = domain.walls[wall].extent();
        for i in 0..count {
            let t = extent * (i as f64 + OFFSET) / count as f64;
            let frame = domain.walls[wall].frame(t);
            if is_chosen_copy(symmetry, frame.point) {
                sources.push(Source {
                    wall,
                    t,
                    point: frame.point,
                    tangent: frame.tangent,
                    spacing: frame.speed * extent / count as f64,
                });
            }
        }
    }
    sources
}

fn is_chosen_copy(symmetry: &Symmetry, point: Vec2) -> bool {
    let height = |p: Vec2| (p - symmetry.center).dot(&GENERIC);
    let own = height(point);
    (1..symmetry.order()).all(|g| height(symmetry.apply(g, point)) <= own)
}
