//! Orbits with a bounce at a joint, where the curvature of the outline jumps.
//!
//! The length is quadratic near the orbit, with one quadratic form where the bounce point lies on one wall and another where
//! it lies on the other. The stationary-phase integral over the bounce points is then a sum over the sides of the joints,
//! each the integral of a Gaussian over a half line (one hit) or a quadrant (two hits); all other bounce points are
//! integrated over the whole line first. One hit gives half of the isolated term of each side.

use super::analyse::Setting;
use super::path::{ClosedPath, LengthForm};
use crate::billiard::VertexKind;
use nalgebra::DMatrix;
use num_complex::Complex64;
use std::f64::consts::{FRAC_PI_2, PI};

/// A bounce of a path that lies at a joint.
struct JointHit {
    /// Index of the bounce.
    bounce: usize,
    /// +1 if the bounce's own wall lies towards increasing parameter, -1 if towards decreasing.
    orientation: f64,
    /// What the Hessian's diagonal gains where the bounce is on the other wall.
    change: f64,
}

/// Forms closer to zero than this fraction of their largest entry have no Gaussian integral.
const DEGENERATE: f64 = 1e-9;
/// Bounces closer than this fraction of the size to a joint are hits of it.
const NEAR: f64 = 1e-8;

/// The factor |det(M - 1)|^(-1/2) exp(-i (pi/2) nu) of an orbit with hits of joints, for its repetition closed with `sign`
/// (-1: by a reflection that fixes the orbit). `None` for more than two hits, and where a form is degenerate.
pub(crate) fn amplitude(
    setting: &Setting,
    path: &ClosedPath,
    form: &LengthForm,
    repetition: usize,
    sign: f64,
) -> Option<Complex64> {
    let hits = joint_hits(setting, path, form);
    let total = hits.len() * repetition;
    if !(1..=2).contains(&total) {
        return None;
    }
    let n = path.bounces.len();
    let hessian = form.hessian.repeated(repetition, sign).dense();
    let at: Vec<(usize, &JointHit)> = (0..repetition)
        .flat_map(|copy| hits.iter().map(move |hit| (copy * n + hit.bounce, hit)))
        .collect();
    let indices: Vec<usize> = at.iter().map(|(index, _)| *index).collect();
    let (rest, reduced) = eliminate_others(&hessian, &indices)?;
    let sides = (0..1usize << total).map(|pattern| {
        let other = |j: usize| pattern >> j & 1 == 1;
        // Coordinates are turned so that the side in question is where they are positive.
        let turn = |j: usize| {
            if other(j) {
                -at[j].1.orientation
            } else {
                at[j].1.orientation
            }
        };
        let entry = |i: usize, j: usize| {
            let change = if i == j && other(i) {
                at[i].1.change
            } else {
                0.0
            };
            (reduced[(i, j)] + change) * turn(i) * turn(j)
        };
        if total == 1 {
            half_line(entry(0, 0))
        } else {
            quadrant(entry(0, 0), entry(0, 1), entry(1, 1))
        }
    });
    let sum = sides.sum::<Option<Complex64>>()?;
    Some(rest * sum * scale(form).powi(repetition as i32))
}

/// sqrt of |det(M - 1)|/|det(Hessian)|^(-1): product of cos(theta_i)/sqrt(l_i).
fn scale(form: &LengthForm) -> f64 {
    let cosines: f64 = form.cosines.iter().product();
    let chords: f64 = form.chords.iter().product();
    cosines / chords.sqrt()
}

fn joint_hits(setting: &Setting, path: &ClosedPath, form: &LengthForm) -> Vec<JointHit> {
    let domain = setting.domain;
    path.bounces
        .iter()
        .enumerate()
        .filter_map(|(bounce, place)| {
            let frame = form.frames[bounce];
            let vertex = domain.vertices.iter().find(|vertex| {
                vertex.kind == VertexKind::Joint
                    && (vertex.point - frame.point).norm() < NEAR * domain.size
            })?;
            let (orientation, curvature) = if vertex.after == place.wall {
                let wall = &domain.walls[vertex.before];
                (1.0, wall.frame(wall.extent()).curvature)
            } else {
                (-1.0, domain.walls[vertex.after].frame(0.0).curvature)
            };
            Some(JointHit {
                bounce,
                orientation,
                change: 2.0 * (frame.curvature - curvature) * form.cosines[bounce],
            })
        })
        .collect()
}

/// Integrates exp(i s H s/2)/(2 pi i)^(m/2) over all coordinates but those in `kept`: the factor, and the form that is left.
fn eliminate_others(hessian: &DMatrix<f64>, kept: &[usize]) -> Option<(Complex64, DMatrix<f64>)> {
    let others: Vec<usize> = (0..hessian.nrows()).filter(|i| !kept.contains(i)).collect();
    let part = |rows: &[usize], columns: &[usize]| {
        DMatrix::from_fn(rows.len(), columns.len(), |i, j| {
            hessian[(rows[i], columns[j])]
        })
    };
    let own = part(kept, kept);
    if others.is_empty() {
        return Some((Complex64::ONE, own));
    }
    let inner = part(&others, &others);
    let values = inner.clone().symmetric_eigenvalues();
    let largest = values.amax();
    if values
        .iter()
        .any(|value| value.abs() < DEGENERATE * largest)
    {
        return None;
    }
    let negative = values.iter().filter(|value| **value < 0.0).count();
    let factor = Complex64::from_polar(
        1.0 / values
            .iter()
            .map(|value| value.abs())
            .product::<f64>()
            .sqrt(),
        -FRAC_PI_2 * negative as f64,
    );
    let between = part(&others, kept);
    let reduced = own - between.transpose() * inner.lu().solve(&between)?;
    Some((factor, reduced))
}

/// Integral of exp(i q x^2/2)/sqrt(2 pi i) over x > 0: half of the whole line's.
fn half_line(q: f64) -> Option<Complex64> {
    let phase = if q < 0.0 { -FRAC_PI_2 } else { 0.0 };
    (q != 0.0).then(|| Complex64::from_polar(0.5 / q.abs().sqrt(), phase))
}

/// Integral of exp(i (a x^2 + 2 b x y + c y^2)/2)/(2 pi i) over the quadrant x, y > 0.
///
/// In polar coordinates the radial part gives (1/2 pi) times the integral over u = tan(phi) from 0 to infinity of
/// du/(a + 2 b u + c u^2 + i0), which is a difference of logarithms of the roots, real roots being moved off the axis by the
/// i0.
fn quadrant(a: f64, b: f64, c: f64) -> Option<Complex64> {
    let largest = a.abs().max(b.abs()).max(c.abs());
    let discriminant = b * b - a * c;
    if c.abs() < DEGENERATE * largest {
        return None;
    }
    if discriminant.abs() < DEGENERATE * largest * largest {
        // A double root -b/c: harmless outside the quadrant.
        return (b * c > 0.0).then(|| Complex64::from(1.0 / (2.0 * PI * b)));
    }
    let root = Complex64::from(discriminant).sqrt();
    // Logarithm of -u for the root u = (-b +- root)/c; for a real root u moves by -i0/(2 c u + 2 b) = -i0/(+-2 root).
    let log = |side: f64| {
        let minus = (Complex64::from(b) - root * side) / c;
        if discriminant > 0.0 && minus.re < 0.0 {
            // -u is negative and lies above the axis for side > 0.
            Complex64::new((-minus.re).ln(), PI * side)
        } else {
            minus.ln()
        }
    };
    let difference = root * (2.0 / c);
    Some((log(-1.0) - log(1.0)) / (difference * c) / (2.0 * PI))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Quadrants of a form without a joint add to the whole plane: 1/sqrt(det), with -i for one negative eigenvalue and -1
    /// for two.
    #[test]
    fn four_quadrants_are_the_plane() {
        let cases = [
            (2.0, 0.3, 1.0, Complex64::ONE),
            (2.0, -1.2, 1.0, Complex64::ONE),
            (-2.0, 0.3, -1.0, -Complex64::ONE),
            (2.0, 0.4, -1.0, -Complex64::I),
            (-0.5, 0.7, 2.0, -Complex64::I),
            (1.0, 3.0, 2.0, -Complex64::I),
            (-1.0, 3.0, -2.0, -Complex64::I),
        ];
        for (a, b, c, phase) in cases {
            let whole = phase / f64::abs(a * c - b * b).sqrt();
            let quarter = |b: f64| quadrant(a, b, c).expect("not degenerate");
            let sum = (quarter(b) + quarter(-b)) * 2.0;
            assert!(
                (sum - whole).norm() < 1e-12,
                "{a} {b} {c}: {sum} and {whole}"
            );
        }
    }

    /// Orthant probability of two correlated Gaussians, 1/4 + asin(r)/(2 pi) (Sheppard 1899, from memory).
    #[test]
    fn definite_quadrant_is_sheppards() {
        for (a, b, c) in [(2.0, 0.3, 1.0), (1.0, -0.9, 1.0), (3.0, 1.5, 1.0)] {
            let correlation: f64 = -b / f64::sqrt(a * c);
            let expected = (0.25 + correlation.asin() / (2.0 * PI)) / f64::sqrt(a * c - b * b);
            let found = quadrant(a, b, c).expect("definite");
            assert!((found - expected).norm() < 1e-12, "{found} and {expected}");
        }
    }

    /// The chain of two hits of one joint with itself (D = 1, arc parameter c) from quadrants: 4 pi J_2 = A + 2 B - 1, with
    /// the flat strip taken out, has the imaginary part -1/(4 sqrt c) for c >= 1.
    #[test]
    fn mixed_quadrants_of_the_chain() {
        for c in [1.5, 2.0, 3.0, 5.0] {
            // Two flights couple the points twice: form 2 s^2 + 2 s'^2 - 4 s s' less the arcs' 2 c s^2.
            let (flat, arc) = (2.0, 2.0 - 2.0 * c);
            let both = quadrant(arc, -2.0, arc).expect("not degenerate");
            let mixed = quadrant(arc, 2.0, flat).expect("not degenerate") * 2.0;
            let imaginary = (both + mixed).im;
            assert!(
                (imaginary + 0.25 / c.sqrt()).abs() < 1e-12,
                "{c}: {imaginary}"
            );
        }
    }
}
