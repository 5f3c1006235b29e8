//! The Weyl expansion of a domain and of its symmetry classes.
//!
//! N(k) = A k^2/(4 pi) - (L_D - L_N) k/(4 pi) + (1/(12 pi)) integral of curvature ds + sum of corner constants + c/k.
//!
//! Sources: Kac, Amer. Math. Monthly 73 (1966) 1; McKean & Singer, J. Diff. Geom. 1 (1967) 43; Stewartson & Waechter, Proc. Camb. Phil. Soc.
//! 69 (1971) 353; Baltes & Hilf, Spectra of Finite Systems (1976). Classes: N_m = (1/|G|) sum over g of weight_m(g) N_g, see
//! Lauritzen & Whelan, Ann. Phys. 244 (1995) 112.

use super::axis::{ElementCount, element_count};
use super::boundary::{corner_constant, corner_inverse, smooth_inverse, turning};
use crate::billiard::{Condition, Domain, Irrep, Symmetry};
use std::f64::consts::PI;

/// Named parts of the smooth count.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Contribution {
    /// A k^2/(4 pi).
    Area,
    /// Dirichlet walls, and symmetry axes on which the class is odd.
    PerimeterDirichlet,
    /// Neumann walls, and symmetry axes on which the class is even.
    PerimeterNeumann,
    /// Integral of the curvature over 12 pi.
    Curvature,
    /// Corners, changes of condition, ends of symmetry axes, centres of rotation.
    Corners,
    /// The term c/k, where it is known.
    InverseK,
}

impl Contribution {
    /// Name used in output.
    #[must_use]
    pub fn name(self) -> &'static str {
        match self {
            Self::Area => "area",
            Self::PerimeterDirichlet => "perimeter_dirichlet",
            Self::PerimeterNeumann => "perimeter_neumann",
            Self::Curvature => "curvature",
            Self::Corners => "corners",
            Self::InverseK => "inverse_k",
        }
    }
}

/// One part of the smooth count: coefficient * k^power.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WeylTerm {
    /// What it comes from.
    pub contribution: Contribution,
    /// Power of k: 2, 1, 0 or -1.
    pub power: i32,
    /// Coefficient, in the length unit of the domain to the power `power`.
    pub coefficient: f64,
}

impl WeylTerm {
    /// Value at k after convolution with a Gaussian of standard deviation `smoothing` in k, which takes k^2 to
    /// k^2 + smoothing^2 and leaves k and 1 alone. (1/k is left alone too: its change, s^2/k^3, is of higher order.)
    #[must_use]
    pub fn value(&self, k: f64, smoothing: f64) -> f64 {
        match self.power {
            2 => self.coefficient * (k * k + smoothing * smoothing),
            power => self.coefficient * k.powi(power),
        }
    }

    /// Mean value from `from` to `to`, both above 0.
    fn mean(&self, from: f64, to: f64) -> f64 {
        let integral = match self.power {
            -1 => (to / from).ln(),
            power => (to.powi(power + 1) - from.powi(power + 1)) / f64::from(power + 1),
        };
        self.coefficient * integral / (to - from)
    }

    fn slope(&self, k: f64) -> f64 {
        f64::from(self.power) * self.coefficient * k.powi(self.power - 1)
    }
}

/// What the expansion leaves out.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Omission {
    /// The term c/k is not known: some corner has curved walls and is not a right angle, or there is a cusp.
    InverseK,
    /// A corner of inner angle zero, whose contribution (of other powers of k) is left out.
    ZeroAngle {
        /// Vertex (number of the wall that begins there).
        vertex: usize,
    },
}

/// Smooth count of levels below k.
#[derive(Clone, Debug, PartialEq)]
pub struct Weyl {
    /// Its parts, highest power first.
    pub terms: Vec<WeylTerm>,
    /// What is left out.
    pub omissions: Vec<Omission>,
}

/// Smooth count of all levels of the domain, or of one class of its symmetry group (each level of a two-dimensional class counted
/// twice, as it is in the count of all levels).
#[must_use]
pub fn weyl(domain: &Domain, symmetry: &Symmetry, class: Option<&Irrep>) -> Weyl {
    let mut expansion = whole(domain);
    if let Some(irrep) = class {
        let order = symmetry.order() as f64;
        let share = |element: usize| irrep.weights[element] / order;
        expansion.scale(share(0));
        for element in 1..symmetry.order() {
            if irrep.weights[element] != 0.0 {
                expansion.add(share(element), element_count(domain, symmetry, element));
            }
        }
    }
    expansion.finished()
}

/// Expansion under construction.
struct Expansion {
    area: f64,
    dirichlet: f64,
    neumann: f64,
    curvature: f64,
    corners: f64,
    inverse: Option<f64>,
    omissions: Vec<Omission>,
}

fn whole(domain: &Domain) -> Expansion {
    let corners: Vec<Option<f64>> = domain
        .vertices
        .iter()
        .map(|vertex| corner_constant(domain, vertex))
        .collect();
    let at_corners: Option<f64> = domain
        .vertices
        .iter()
        .map(|vertex| corner_inverse(domain, vertex))
        .sum();
    Expansion {
        area: domain.area / (4.0 * PI),
        dirichlet: -domain.length_under(Condition::Dirichlet) / (4.0 * PI),
        neumann: domain.length_under(Condition::Neumann) / (4.0 * PI),
        curvature: domain.walls.iter().map(turning).sum::<f64>() / (12.0 * PI),
        corners: corners.iter().flatten().sum(),
        inverse: smooth_inverse(domain)
            .zip(at_corners)
            .map(|(walls, corners)| walls + corners),
        omissions: corners
            .iter()
            .enumerate()
            .filter(|(_, constant)| constant.is_none())
            .map(|(vertex, _)| Omission::ZeroAngle { vertex })
            .collect(),
    }
}

impl Expansion {
    fn scale(&mut self, factor: f64) {
        for value in [
            &mut self.area,
            &mut self.dirichlet,
            &mut self.neumann,
            &mut self.curvature,
            &mut self.corners,
        ] {
            *value *= factor;
        }
        self.inverse = self.inverse.map(|value| value * factor);
    }

    fn add(&mut self, share: f64, count: ElementCount) {
        // An axis on which the class is even counts like a Neumann wall, one on which it is odd like a Dirichlet wall.
        let linear = share * count.linear;
        if linear >= 0.0 {
            self.neumann += linear;
        } else {
            self.dirichlet += linear;
        }
        self.corners += share * count.constant;
        self.inverse = self
            .inverse
            .zip(count.inverse)
            .map(|(sum, value)| sum + share * value);
    }

    fn finished(mut self) -> Weyl {
        let mut terms = vec![
            (Contribution::Area, 2, self.area),
            (Contribution::PerimeterDirichlet, 1, self.dirichlet),
            (Contribution::PerimeterNeumann, 1, self.neumann),
            (Contribution::Curvature, 0, self.curvature),
            (Contribution::Corners, 0, self.corners),
        ];
        match self.inverse {
            Some(inverse) => terms.push((Contribution::InverseK, -1, inverse)),
            None => self.omissions.push(Omission::InverseK),
        }
        Weyl {
            terms: terms
                .into_iter()
                .map(|(contribution, power, coefficient)| WeylTerm {
                    contribution,
                    power,
                    coefficient,
                })
                .collect(),
            omissions: self.omissions,
        }
    }
}

/// Newton steps for the inverse of the count: the start solves all but the term in 1/k.
const NEWTON_STEPS: usize = 8;

impl Weyl {
    /// Smooth number of levels below k > 0, convolved with a Gaussian of standard deviation `smoothing` in k.
    #[must_use]
    pub fn count(&self, k: f64, smoothing: f64) -> f64 {
        self.terms.iter().map(|term| term.value(k, smoothing)).sum()
    }

    /// Mean of the unsmoothed count over from..to (0 < from < to).
    #[must_use]
    pub fn mean_count(&self, from: f64, to: f64) -> f64 {
        self.terms.iter().map(|term| term.mean(from, to)).sum()
    }

    /// Smooth density of levels in k; the convolution with a Gaussian does not change it to the order kept here.
    #[must_use]
    pub fn density(&self, k: f64, _smoothing: f64) -> f64 {
        self.terms.iter().map(|term| term.slope(k)).sum()
    }

    /// Named parts of the count at k, without smoothing.
    #[must_use]
    pub fn contributions(&self, k: f64) -> Vec<(&'static str, f64)> {
        self.terms
            .iter()
            .map(|term| (term.contribution.name(), term.value(k, 0.0)))
            .collect()
    }

    /// Mean distance of neighbouring levels in k, infinite below the k at which the density turns positive.
    #[must_use]
    pub fn mean_spacing(&self, k: f64) -> f64 {
        let density = self.density(k, 0.0);
        if density > 0.0 {
            1.0 / density
        } else {
            f64::INFINITY
        }
    }

    /// The k at which the count reaches n, on the rising branch; where it exceeds n everywhere, the k at which it begins to
    /// rise.
    #[must_use]
    pub fn k_at_count(&self, n: f64) -> f64 {
        let (a, b, c) = (
            self.coefficient(2),
            self.coefficient(1),
            self.coefficient(0),
        );
        let lowest = (-b / (2.0 * a)).max(0.0);
        let root = (b * b - 4.0 * a * (c - n)).max(0.0).sqrt();
        let start = ((root - b) / (2.0 * a)).max(lowest);
        let mut k = start;
        for _ in 0..NEWTON_STEPS {
            let step = (self.count(k, 0.0) - n) / self.density(k, 0.0);
            // Below the first levels the term in 1/k takes over and the expansion means nothing: stay with the start there.
            if !step.is_finite() || step.abs() > 0.5 * start {
                return start;
            }
            k -= step;
        }
        k
    }

    /// Constant term of the count: curvature and corners.
    #[must_use]
    pub fn constant(&self) -> f64 {
        self.coefficient(0)
    }

    /// Sum of the coefficients of one power of k.
    #[must_use]
    pub fn coefficient(&self, power: i32) -> f64 {
        self.terms
            .iter()
            .filter(|term| term.power == power)
            .map(|term| term.coefficient)
            .sum()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_mean_count_is_the_integral() {
        let term = |power, coefficient| WeylTerm {
            contribution: Contribution::Area,
            power,
            coefficient,
        };
        let weyl = Weyl {
            terms: vec![term(2, 0.3), term(1, -0.7), term(0, 0.2), term(-1, 0.05)],
            omissions: Vec::new(),
        };
        let (from, to, points) = (2.0, 9.0, 100_000);
        // Midpoint rule: its error is step^2/24 times the change of the slope, 1e-9 here.
        let sum: f64 = (0..points)
            .map(|i| from + (to - from) * (f64::from(i) + 0.5) / f64::from(points))
            .map(|k| weyl.count(k, 0.0))
            .sum();
        assert!((weyl.mean_count(from, to) - sum / f64::from(points)).abs() < 1e-8);
    }
}
