//! What is expected of a list: independent sequences of random levels, of which some may be missing.

use super::gap::{Gap, GapCurve};
use super::orthogonal;
use crate::baseline::orthogonal_form_factor;
use crate::billiard::quadrature;
use crate::trace::{ClassDensity, Statistics};
use serde::Serialize;
use std::f64::consts::PI;

/// Panels of ten nodes for integrals over the form factor, per oscillation of what it is multiplied with.
const PANELS_PER_OSCILLATION: f64 = 1.0;
/// Latest time up to which contributions are taken away, Heisenberg times: what follows is below 1e-4.
const LATEST: f64 = 1000.0;

/// One sequence of random levels inside a list.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Sequence {
    /// Fraction of the list's levels that belong to it, copies included.
    pub share: f64,
    /// How often each of its levels stands in the list: the dimension of its symmetry class.
    pub multiplicity: usize,
    /// How its levels are spread.
    pub statistics: Statistics,
}

impl Sequence {
    /// Distinct levels per level of the list.
    pub(super) fn density(&self) -> f64 {
        self.share / self.multiplicity as f64
    }

    /// Weight of its number variance in that of the list.
    fn weight(&self) -> f64 {
        (self.multiplicity * self.multiplicity) as f64
    }
}

/// Expected statistics of an unfolded list (density 1): a superposition of independent sequences.
///
/// Uncorrelated levels are those of integrable shapes (Berry & Tabor, Proc. R. Soc. A 356 (1977) 375), levels of the Gaussian orthogonal
/// ensemble those of one symmetry class of a chaotic shape (Bohigas, Giannoni & Schmit, Phys. Rev. Lett. 52 (1984) 1). Curves of a
/// superposition follow from those of its parts: gap probabilities multiply, number variances and rigidities add (Mehta, Random
/// Matrices; Berry & Robnik, J. Phys. A 17 (1984) 2413). All curves are exact for infinite matrices, not surmises.
///
/// Of a thinned reference each level is missing by itself with the same probability (Bohigas & Pato, Phys. Lett. B 595 (2004) 171).
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Reference {
    /// The parts; their shares add up to 1.
    pub sequences: Vec<Sequence>,
    /// Fraction of the levels that are in the list, 1 if none is missing.
    pub observed: f64,
}

impl Reference {
    /// Levels without correlations.
    #[must_use]
    pub fn uncorrelated() -> Self {
        Self::of(&[(1.0, Statistics::Uncorrelated)])
    }

    /// Levels of the Gaussian orthogonal ensemble.
    #[must_use]
    pub fn orthogonal() -> Self {
        Self::of(&[(1.0, Statistics::Orthogonal)])
    }

    /// A regular part of the given share beside a chaotic one (Berry & Robnik, as above).
    #[must_use]
    pub fn berry_robnik(regular: f64) -> Self {
        Self::of(&[
            (regular, Statistics::Uncorrelated),
            (1.0 - regular, Statistics::Orthogonal),
        ])
    }

    /// A list of several symmetry classes, each spread alike by itself; classes without levels are left out. None if no class has any.
    #[must_use]
    pub fn superposition(classes: &[ClassDensity], statistics: Statistics) -> Option<Self> {
        let present = || {
            classes
                .iter()
                .filter(|class| class.density > 0.0 && class.dimension > 0)
        };
        let total: f64 = present().map(|class| class.density).sum();
        let sequences: Vec<Sequence> = present()
            .map(|class| Sequence {
                share: class.density / total,
                multiplicity: class.dimension,
                statistics,
            })
            .collect();
        (!sequences.is_empty() && total.is_finite()).then_some(Self {
            sequences,
            observed: 1.0,
        })
    }

    fn of(parts: &[(f64, Statistics)]) -> Self {
        let sequences = parts
            .iter()
            .filter(|(share, _)| *share > 0.0)
            .map(|&(share, statistics)| Sequence {
                share,
                multiplicity: 1,
                statistics,
            })
            .collect();
        Self {
            sequences,
            observed: 1.0,
        }
    }

    /// The same of which only a fraction of the levels is in the list, the rest missing at random.
    #[must_use]
    pub fn thinned(&self, observed: f64) -> Self {
        Self {
            sequences: self.sequences.clone(),
            observed,
        }
    }

    /// Are all sequences those of the Gaussian orthogonal ensemble?
    pub(super) fn is_orthogonal(&self) -> bool {
        self.sequences
            .iter()
            .all(|part| part.statistics == Statistics::Orthogonal)
    }

    /// Does each level stand once?
    pub(super) fn is_simple(&self) -> bool {
        self.sequences.iter().all(|part| part.multiplicity == 1)
    }

    /// The curves of nearest-neighbour spacings. (Levels that stand several times are either seen in all copies or in none.)
    #[must_use]
    pub fn spacings(&self) -> SpacingCurve {
        SpacingCurve {
            observed: self.observed,
            orthogonal: self
                .sequences
                .iter()
                .any(|part| part.statistics == Statistics::Orthogonal)
                .then(|| GapCurve::new(self.observed)),
            sequences: self.sequences.clone(),
        }
    }

    /// Variance of the number of levels in an interval of `length` mean spacings.
    ///
    /// A thinned sequence has (1 - f) L + f^2 Sigma^2(L/f): given n levels, f n of them are seen, with variance f (1 - f) n.
    #[must_use]
    pub fn number_variance(&self, length: f64) -> f64 {
        self.combined(length, 1.0, |part, own| match part {
            Statistics::Uncorrelated => own,
            Statistics::Orthogonal => orthogonal::number_variance(own),
        })
    }

    /// Spectral rigidity: mean square distance of the staircase from the best straight line over `length` mean spacings.
    ///
    /// A thinned sequence has (1 - f) L/15 + f^2 Delta3(L/f), by the linear relation between number variance and rigidity.
    #[must_use]
    pub fn rigidity(&self, length: f64) -> f64 {
        self.combined(length, 15.0, |part, own| match part {
            Statistics::Uncorrelated => own / 15.0,
            Statistics::Orthogonal => orthogonal::rigidity(own),
        })
    }

    /// Form factor at tau, in units of the Heisenberg time of the whole list: 1 - f + f K(f tau) for a thinned sequence.
    #[must_use]
    pub fn form_factor(&self, tau: f64) -> f64 {
        let complete: f64 = self
            .sequences
            .iter()
            .map(|part| {
                let density = part.density();
                let own = match part.statistics {
                    Statistics::Uncorrelated => 1.0,
                    Statistics::Orthogonal => orthogonal_form_factor(self.observed * tau / density),
                };
                part.weight() * density * own
            })
            .sum();
        1.0 - self.observed + self.observed * complete
    }

    /// Form factor of the complete sequences over its diagonal approximation, 2 tau for chaotic ones: correlations between orbits
    /// lower it, by tau ln(1 + 2 tau) on the average.
    pub(super) fn beside_diagonal(&self, tau: f64) -> f64 {
        let (mut whole, mut diagonal) = (0.0, 0.0);
        for part in &self.sequences {
            let own = tau / part.density();
            let weight = part.weight() * part.density();
            let (exact, linear) = match part.statistics {
                Statistics::Uncorrelated => (1.0, 1.0),
                Statistics::Orthogonal => (orthogonal_form_factor(own), 2.0 * own),
            };
            whole += weight * exact;
            diagonal += weight * linear;
        }
        whole / diagonal
    }

    /// Sum over the sequences of a quadratic measure, thinned; `poisson` is L over the measure of uncorrelated levels.
    fn combined(&self, length: f64, poisson: f64, measure: impl Fn(Statistics, f64) -> f64) -> f64 {
        let complete: f64 = self
            .sequences
            .iter()
            .map(|part| {
                let own = part.density() * length / self.observed;
                part.weight() * measure(part.statistics, own)
            })
            .sum();
        (1.0 - self.observed) * length / poisson + self.observed * self.observed * complete
    }

    /// Number variance without the contributions of times below `from` (in Heisenberg times of the whole list): the form factor is
    /// zero there.
    ///
    /// Sigma^2 = (2/pi^2) integral of K(tau) sin^2(pi L tau)/tau^2 dtau (Berry, Proc. R. Soc. A 400 (1985) 229).
    #[must_use]
    pub fn number_variance_beyond(&self, length: f64, from: f64) -> f64 {
        let kernel = |tau: f64| 4.0 * (PI * length * tau).sin().powi(2);
        (self.number_variance(length) - self.below(length, from, kernel)).max(0.0)
    }

    /// Rigidity without the contributions of times below `from`.
    ///
    /// Delta3 = (1/(2 pi^2)) integral of K(tau) G(pi L tau)/tau^2 dtau, where G(y) = 1 - F^2 - 3 F'^2 and F = sin(y)/y (Berry, as
    /// above).
    #[must_use]
    pub fn rigidity_beyond(&self, length: f64, from: f64) -> f64 {
        let kernel = |tau: f64| line_filter(PI * length * tau);
        (self.rigidity(length) - self.below(length, from, kernel)).max(0.0)
    }

    /// What the rigidity tends to for long intervals when times below `from` contribute nothing; the number variance oscillates about
    /// twice as much.
    #[must_use]
    pub fn saturation(&self, from: f64) -> f64 {
        let complete: f64 = self
            .sequences
            .iter()
            .map(|part| {
                // One sequence of density g: integral of K(tau/g) g/tau^2 = integral of K(t)/t^2 dt from t = from/g.
                let own = self.observed * from / part.density();
                part.weight()
                    * match part.statistics {
                        Statistics::Uncorrelated => 1.0 / (2.0 * PI * PI * own),
                        Statistics::Orthogonal => {
                            crate::baseline::saturation_fluctuation(1.0, 2.0 * PI * own).powi(2)
                        }
                    }
            })
            .sum();
        (1.0 - self.observed) / (2.0 * PI * PI * from) + self.observed * self.observed * complete
    }

    /// (1/(2 pi^2)) integral of K kernel/tau^2 from 0 to `to`.
    fn below(&self, length: f64, to: f64, kernel: impl Fn(f64) -> f64) -> f64 {
        let to = to.min(LATEST);
        // The form factor of each sequence has a kink at its own Heisenberg time.
        let mut kinks: Vec<f64> = self
            .sequences
            .iter()
            .map(|part| part.density() / self.observed)
            .filter(|kink| *kink < to)
            .collect();
        kinks.push(to);
        kinks.sort_by(f64::total_cmp);
        let mut from = 0.0;
        let mut sum = 0.0;
        for kink in kinks {
            let panels = 2 + (PANELS_PER_OSCILLATION * length * (kink - from)).ceil() as usize;
            sum += quadrature::integrate(from, kink, panels, |tau| {
                self.form_factor(tau) * kernel(tau) / (tau * tau)
            });
            from = kink;
        }
        sum / (2.0 * PI * PI)
    }
}

/// Part of a wave's mean square that is left when the best straight line is taken away, the wave having the phase y at the ends
/// of the interval (and -y at the other one): 1 - (sin y/y)^2 - 3 (d/dy (sin y/y))^2 (Berry, Proc. R. Soc. A 400 (1985) 229).
pub(super) fn line_filter(y: f64) -> f64 {
    if y.abs() < 1e-3 {
        return y.powi(4) / 45.0;
    }
    let mean = y.sin() / y;
    let slope = (y.cos() - mean) / y;
    1.0 - mean * mean - 3.0 * slope * slope
}

/// Curves of nearest-neighbour spacings, prepared once and evaluated anywhere; spacings are in mean spacings of the list.
#[derive(Clone, Debug)]
pub struct SpacingCurve {
    sequences: Vec<Sequence>,
    observed: f64,
    orthogonal: Option<GapCurve>,
}

impl SpacingCurve {
    /// Density of the spacings that are not zero by force: the second derivative of the gap probability.
    #[must_use]
    pub fn density(&self, s: f64) -> f64 {
        self.gap(s).curvature.max(0.0)
    }

    /// Fraction of spacings up to s: 1 plus the first derivative of the gap probability.
    #[must_use]
    pub fn cumulative(&self, s: f64) -> f64 {
        (1.0 + self.gap(s).slope).clamp(0.0, 1.0)
    }

    /// Probability that an interval of s mean spacings holds no level.
    #[must_use]
    pub fn gap_probability(&self, s: f64) -> f64 {
        self.gap(s).value
    }

    fn gap(&self, s: f64) -> Gap {
        let one = Gap {
            value: 1.0,
            slope: 0.0,
            curvature: 0.0,
        };
        self.sequences.iter().fold(one, |gap, part| {
            let density = part.density();
            gap.times(match (part.statistics, &self.orthogonal) {
                (Statistics::Orthogonal, Some(curve)) => {
                    let scale = density / self.observed;
                    curve.at(scale * s).scaled(scale)
                }
                _ => Gap::uncorrelated(density * s).scaled(density),
            })
        })
    }
}
