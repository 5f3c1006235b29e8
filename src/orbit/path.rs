//! Closed paths and their length as a function of the bounce points.
//!
//! Only bounces on curved walls are variables. Straight walls are unfolded: a flight that is reflected by straight walls on
//! its way is one straight chord to the image of the next curved bounce. That makes the length smooth also where the path
//! runs into a corner of angle pi/n between straight walls, since the reflections in either order give the same image. A
//! straight bounce adds a positive direction to the full Hessian, so the number of negative eigenvalues is unchanged.

use super::cyclic::{Cyclic, Elimination};
use super::monodromy::Monodromy;
use crate::billiard::{Domain, Frame, Isometry};

/// A bounce on a curved wall.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Bounce {
    pub(crate) wall: usize,
    /// Parameter on the wall.
    pub(crate) t: f64,
}

/// What lies between a curved bounce and the next: the straight walls met in order, and the isometry that takes the next
/// bounce to its unfolded image (with the closing group element in the last link).
#[derive(Clone, Debug)]
pub(crate) struct Link {
    pub(crate) straight: Vec<usize>,
    pub(crate) unfold: Isometry,
}

/// A path closed by a group element.
#[derive(Clone, Debug)]
pub(crate) struct ClosedPath {
    pub(crate) bounces: Vec<Bounce>,
    pub(crate) links: Vec<Link>,
    /// Group element that takes the first point to the last one.
    pub(crate) element: usize,
}

/// Length of a closed path with its derivatives with respect to arc length at the bounces.
#[derive(Clone, Debug, Default)]
pub(crate) struct LengthForm {
    pub(crate) frames: Vec<Frame>,
    /// Unfolded chord lengths.
    pub(crate) chords: Vec<f64>,
    /// Cosine of the angle of incidence at each bounce.
    pub(crate) cosines: Vec<f64>,
    pub(crate) gradient: Vec<f64>,
    pub(crate) hessian: Cyclic,
}

impl LengthForm {
    pub(crate) fn length(&self) -> f64 {
        self.chords.iter().sum()
    }

    pub(crate) fn residual(&self) -> f64 {
        self.gradient
            .iter()
            .fold(0.0, |largest, g| largest.max(g.abs()))
    }
}

impl ClosedPath {
    /// Writes length, gradient and Hessian into `form`; `None` if two consecutive points coincide.
    fn evaluate(&self, domain: &Domain, form: &mut LengthForm) -> Option<()> {
        let n = self.bounces.len();
        form.clear(n);
        form.frames.extend(
            self.bounces
                .iter()
                .map(|bounce| domain.walls[bounce.wall].frame(bounce.t)),
        );
        (0..n).try_for_each(|i| form.add_chord(i, (i + 1) % n, &self.links[i].unfold, domain.size))
    }

    /// Number of bounces on all walls.
    pub(crate) fn count(&self) -> usize {
        self.bounces.len()
            + self
                .links
                .iter()
                .map(|link| link.straight.len())
                .sum::<usize>()
    }

    /// Linearised map along the path, from just after the first bounce to just after its image, in (transverse
    /// displacement, transverse angle); `determinant` is that of the closing group element.
    pub(crate) fn monodromy(&self, form: &LengthForm, determinant: f64) -> Monodromy {
        let n = self.bounces.len();
        let mut map = Monodromy::identity(determinant);
        for i in 0..n {
            let next = (i + 1) % n;
            let flips = if self.links[i].straight.len().is_multiple_of(2) {
                1.0
            } else {
                -1.0
            };
            map.fly(form.chords[i]);
            map.reflect(2.0 * form.frames[next].curvature / form.cosines[next]);
            map.scale(flips);
        }
        map
    }
}

/// Chords shorter than this fraction of the size have no direction.
const SHORTEST_CHORD: f64 = 1e-10;

impl LengthForm {
    /// Makes room for n bounces, all derivatives zero.
    fn clear(&mut self, n: usize) {
        self.frames.clear();
        self.chords.clear();
        for values in [
            &mut self.cosines,
            &mut self.gradient,
            &mut self.hessian.diagonal,
            &mut self.hessian.off,
        ] {
            values.clear();
            values.resize(n, 0.0);
        }
    }

    /// Adds the chord from bounce i to the unfolded image of bounce j: l = |E q_j - q_i|, its first and second derivatives
    /// along the walls.
    fn add_chord(&mut self, i: usize, j: usize, unfold: &Isometry, size: f64) -> Option<()> {
        let (from, to) = (self.frames[i], self.frames[j]);
        let chord = unfold.apply(to.point) - from.point;
        let length = chord.norm();
        if length.is_nan() || length < SHORTEST_CHORD * size {
            return None;
        }
        let e = chord / length;
        let (near, far) = (from.tangent, unfold.linear * to.tangent);
        let (near_along, far_along) = (e.dot(&near), e.dot(&far));
        let near_normal = e.dot(&from.normal());
        let far_normal = e.dot(&(unfold.linear * to.normal()));
        self.gradient[i] -= near_along;
        self.gradient[j] += far_along;
        self.hessian.diagonal[i] +=
            (1.0 - near_along * near_along) / length - from.curvature * near_normal;
        self.hessian.diagonal[j] +=
            (1.0 - far_along * far_along) / length + to.curvature * far_normal;
        self.hessian.off[i] -= (near.dot(&far) - near_along * far_along) / length;
        self.cosines[i] = near_normal;
        self.chords.push(length);
        Some(())
    }
}

/// Largest residual gradient of an orbit that counts as found.
pub(crate) const LARGEST_RESIDUAL: f64 = 1e-11;
/// Newton steps; convergence is quadratic, so more only help a start that is far off.
const LARGEST_STEPS: usize = 9;
/// Longest step of a bounce point, as a fraction of the domain's size: longer ones leave the region where the quadratic
/// form means anything.
const LONGEST_STEP: f64 = 0.12;
/// A bounce point may leave its wall by this fraction of the wall during the iteration.
const OVERSHOOT: f64 = 0.25;

/// Memory that the refinement of one path after another uses again.
#[derive(Default)]
pub(crate) struct Workspace {
    pub(crate) form: LengthForm,
    step: Vec<f64>,
    elimination: Elimination,
}

/// Newton's method on the length function; `None` if it does not converge to a path on the walls. The length form of the
/// path found is left in the workspace.
pub(crate) fn refine(domain: &Domain, path: &mut ClosedPath, space: &mut Workspace) -> Option<()> {
    let mut polished = false;
    for _ in 0..LARGEST_STEPS {
        path.evaluate(domain, &mut space.form)?;
        let form = &space.form;
        let residual = form.residual();
        // One more step after the residual is small takes it to rounding.
        if residual < LARGEST_RESIDUAL && polished {
            return Some(());
        }
        polished = residual < LARGEST_RESIDUAL;
        form.hessian
            .solve(&form.gradient, &mut space.elimination, &mut space.step);
        let longest = space
            .step
            .iter()
            .fold(0.0f64, |largest, s| largest.max(s.abs()));
        if !longest.is_finite() {
            return None;
        }
        let damping = (LONGEST_STEP * domain.size / longest).min(1.0);
        for (i, s) in space.step.iter().enumerate() {
            let bounce = &mut path.bounces[i];
            let extent = domain.walls[bounce.wall].extent();
            bounce.t -= damping * s / form.frames[i].speed;
            if domain.next(bounce.wall) == bounce.wall {
                bounce.t = bounce.t.rem_euclid(extent);
            } else if bounce.t < -OVERSHOOT * extent || bounce.t > (1.0 + OVERSHOOT) * extent {
                return None;
            }
        }
    }
    path.evaluate(domain, &mut space.form)?;
    (space.form.residual() < LARGEST_RESIDUAL).then_some(())
}
