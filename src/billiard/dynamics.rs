//! How chaotic the motion in a billiard is: mean chord, Lyapunov exponent, prediction horizon.

use super::start::{Random, Starts};
use super::{Domain, Ending, Event, Lanes, Ray, Rays, Tracer, Vec2, flight, incidence, reflection};
use rayon::prelude::*;

/// Independent blocks of trajectories; the scatter of their means gives the errors.
const BLOCKS: usize = 32;
/// Bounces of one trajectory where the budget allows: long against the decay of correlations of common billiards.
const TRAJECTORY: usize = 256;
/// Bounces between two renormalisations of a tangent vector: its growth stays far inside the range of numbers.
const RENORMALISE: usize = 8;
/// Rays traced side by side where the walls are lines and arcs.
const LANES: usize = 8;
/// Relative precision with which the start of a trajectory can be known in double precision.
pub const KNOWN_TO: f64 = 1e-14;
/// The exponent is compatible with zero within this many standard errors. Four: the question is asked for many shapes, and
/// the scatter of 32 blocks is itself known to an eighth only.
const STANDARD_ERRORS: f64 = 4.0;

/// Averages over the whole phase space (all starts, regular and chaotic alike, in the invariant measure of the bounce map:
/// uniform in arc length and in the sine of the angle from the normal). Errors are standard errors of the mean.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Dynamics {
    /// Mean length of the flight between two bounces; pi A/L in every billiard (Santalo).
    pub mean_chord: f64,
    /// Its error.
    pub mean_chord_error: f64,
    /// Largest Lyapunov exponent per bounce.
    pub lyapunov_per_bounce: f64,
    /// Its error.
    pub lyapunov_error: f64,
    /// Largest Lyapunov exponent per unit of length: per bounce, divided by the mean chord (Abramov's formula).
    pub lyapunov_per_length: f64,
    /// Bounces after which a start known to [`KNOWN_TO`] of the domain's size is lost; none where the exponent is
    /// compatible with zero.
    pub horizon_bounces: Option<f64>,
    /// Trajectories that ended in a corner that diffracts.
    pub stopped: usize,
    /// Trajectories that left through the walls (never seen; reported, not hidden).
    pub escaped: usize,
    /// Trajectories in all.
    pub trajectories: usize,
}

/// Follows trajectories with `bounces` bounces in all (rounded up to at least eight short trajectories per block).
///
/// Deterministic, and independent of the number of threads. The exponent is the growth of a tangent vector of random
/// direction over the second half of each trajectory; in mixed phase space it is the average over all of it, so smaller
/// than that of the chaotic part. A tangent vector also grows (linearly) where the motion is regular. Whether the exponent
/// is compatible with zero is therefore asked of a difference that vanishes for growth by any power of the time and is the
/// exponent where the growth is exponential: with growth G(n), (ln G(n)/G(n/2) - ln G(n/2)/G(n/4))/(n/4).
///
/// Rays into corners of angle pi/n that do not diffract are continued; those into other corners end there.
#[must_use]
pub fn dynamics(domain: &Domain, tracer: &Tracer, bounces: usize) -> Dynamics {
    let starts = Starts::new(domain);
    let per_block = bounces.div_ceil(BLOCKS).max(4);
    let groups = per_block.div_ceil(LANES * TRAJECTORY);
    let trajectories = LANES * groups;
    let length = 4 * (per_block / trajectories).div_ceil(4).max(1);
    let lanes = Lanes::new(domain, tracer);
    let blocks: Vec<Block> = (0..BLOCKS)
        .into_par_iter()
        .map(|block| {
            let mut random = Random::new(block as u64);
            let mut sum = Block::default();
            for _ in 0..groups {
                let rays: [Ray; LANES] = std::array::from_fn(|_| starts.draw(&mut random));
                let angles: [f64; LANES] =
                    std::array::from_fn(|_| std::f64::consts::TAU * random.uniform());
                match (&lanes, Rays::new(&rays)) {
                    (Some(lanes), Ok(rays)) => {
                        let motion = Motion {
                            size: tracer.size(),
                            length,
                        };
                        motion.follow_lanes(lanes, rays, &angles, &mut sum);
                    }
                    _ => {
                        for (ray, angle) in rays.into_iter().zip(angles) {
                            follow(tracer, ray, angle, length, &mut sum);
                        }
                    }
                }
            }
            sum
        })
        .collect();
    let (mean_chord, mean_chord_error) =
        mean(blocks.iter().map(|block| block.chord / block.chords));
    let exponents = |growth: fn(&Block) -> f64| {
        mean(
            blocks
                .iter()
                .filter(|block| block.complete > 0.0)
                .map(move |block| growth(block) / (block.complete * (length / 4) as f64)),
        )
    };
    let (lyapunov, lyapunov_error) = exponents(|block| 0.5 * block.second_half);
    let (difference, difference_error) =
        exponents(|block| block.second_half - block.second_quarter);
    let regular = difference <= STANDARD_ERRORS * difference_error;
    Dynamics {
        mean_chord,
        mean_chord_error,
        lyapunov_per_bounce: if regular { difference } else { lyapunov },
        lyapunov_error: if regular {
            difference_error
        } else {
            lyapunov_error
        },
        lyapunov_per_length: if regular { difference } else { lyapunov } / mean_chord,
        horizon_bounces: (!regular).then(|| -KNOWN_TO.ln() / lyapunov),
        stopped: blocks.iter().map(|block| block.stopped).sum(),
        escaped: blocks.iter().map(|block| block.escaped).sum(),
        trajectories: BLOCKS * trajectories,
    }
}

/// Sums over the trajectories of a block.
#[derive(Clone, Copy, Debug, Default)]
struct Block {
    chord: f64,
    chords: f64,
    /// Logarithmic growth from a quarter to half of the complete trajectories.
    second_quarter: f64,
    /// Logarithmic growth over the second half of the complete trajectories.
    second_half: f64,
    /// Trajectories that came to their end.
    complete: f64,
    stopped: usize,
    escaped: usize,
}

/// A tangent vector (displacement, angle) with the logarithm of its growth so far.
struct Tangent {
    vector: Vec2,
    growth: f64,
}

impl Tangent {
    fn renormalise(&mut self, size: f64) {
        let norm = (self.vector.x / size).hypot(self.vector.y);
        self.growth += norm.ln();
        self.vector /= norm;
    }
}

fn follow(tracer: &Tracer, mut ray: Ray, angle: f64, length: usize, sum: &mut Block) {
    let size = tracer.size();
    let mut tangent = Tangent {
        vector: Vec2::new(size * angle.cos(), angle.sin()),
        growth: 0.0,
    };
    let mut growth = [0.0; 2];
    for bounce in 1..=length {
        match tracer.next(&ray) {
            Event::Wall(hit) => {
                let cosine = incidence(ray.direction, &hit);
                let step = reflection(hit.curvature, cosine) * flight(hit.distance);
                tangent.vector = step * tangent.vector;
                sum.chord += hit.distance;
                ray = Tracer::reflect(ray.direction, &hit);
            }
            Event::Corner { vertex, hit } => {
                sum.chord += hit.distance;
                sum.chords += 1.0;
                // The curvature of an arc at such a corner is left out of the tangent map: no start set meets it twice.
                tangent.vector = flight(hit.distance) * tangent.vector;
                match tracer.pass_corner(ray.direction, vertex, hit.point) {
                    Some((next, _)) => ray = next,
                    None => {
                        sum.stopped += 1;
                        return;
                    }
                }
                sum.chords -= 1.0;
            }
            Event::Escaped => {
                sum.escaped += 1;
                return;
            }
        }
        sum.chords += 1.0;
        if bounce % RENORMALISE == 0 || bounce % (length / 4) == 0 {
            tangent.renormalise(size);
        }
        if bounce == length / 4 {
            growth[0] = tangent.growth;
        } else if bounce == length / 2 {
            growth[1] = tangent.growth;
        }
    }
    sum.second_quarter += growth[1] - growth[0];
    sum.second_half += tangent.growth - growth[1];
    sum.complete += 1.0;
}

/// How trajectories are followed.
#[derive(Clone, Copy, Debug)]
struct Motion {
    size: f64,
    length: usize,
}

impl Motion {
    /// The same as [`follow`], for rays side by side. A corner that is passed counts with the bounce after it.
    fn follow_lanes(
        &self,
        lanes: &Lanes<'_>,
        mut rays: Rays<LANES>,
        angles: &[f64; LANES],
        sum: &mut Block,
    ) {
        let mut displacement = angles.map(|angle| angle.cos());
        let mut turn = angles.map(f64::sin);
        let mut growth = [0.0; LANES];
        let mut checkpoints = [[0.0; LANES]; 2];
        let mut alive = [1.0; LANES];
        let mut chord = [0.0; LANES];
        let mut chords = [0.0; LANES];
        for bounce in 1..=self.length {
            let endings = lanes.bounce(&mut rays);
            for l in 0..LANES {
                // The displacement in units of the size: flight, then reflection.
                let moved = displacement[l] + rays.distance[l] / self.size * turn[l];
                let focus = 2.0 * rays.curvature[l] * self.size / rays.cosine[l];
                displacement[l] = -moved;
                turn[l] = focus * moved - turn[l];
                chord[l] += alive[l] * rays.distance[l];
                chords[l] += alive[l];
            }
            if endings != [None; LANES] {
                self.bury(&endings, &mut alive, sum);
            }
            if bounce % RENORMALISE == 0 || bounce % (self.length / 4) == 0 {
                for l in 0..LANES {
                    let norm = displacement[l].hypot(turn[l]);
                    growth[l] += norm.ln();
                    displacement[l] /= norm;
                    turn[l] /= norm;
                }
            }
            if bounce == self.length / 4 {
                checkpoints[0] = growth;
            } else if bounce == self.length / 2 {
                checkpoints[1] = growth;
            }
        }
        for l in 0..LANES {
            sum.chord += chord[l];
            sum.chords += chords[l];
            if alive[l] == 1.0 {
                sum.second_quarter += checkpoints[1][l] - checkpoints[0][l];
                sum.second_half += growth[l] - checkpoints[1][l];
                sum.complete += 1.0;
            }
        }
    }

    /// Lanes whose rays have ended no longer count.
    fn bury(&self, endings: &[Option<Ending>; LANES], alive: &mut [f64; LANES], sum: &mut Block) {
        for (lane, ending) in endings.iter().enumerate() {
            let counter = match ending {
                Some(Ending::Stopped) => &mut sum.stopped,
                Some(Ending::Escaped) => &mut sum.escaped,
                None => continue,
            };
            if alive[lane] == 1.0 {
                *counter += 1;
            }
            alive[lane] = 0.0;
        }
    }
}

/// Mean and its standard error.
fn mean(values: impl Iterator<Item = f64> + Clone) -> (f64, f64) {
    let count = values.clone().count() as f64;
    let mean = values.clone().sum::<f64>() / count;
    let variance = values.map(|value| (value - mean).powi(2)).sum::<f64>() / (count - 1.0);
    (mean, (variance / count).sqrt())
}
