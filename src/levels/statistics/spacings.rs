//! Nearest-neighbour spacings: histogram, curves, fits.

use super::fit::{Fit, most_likely};
use super::reference::{Reference, SpacingCurve};
use serde::Serialize;

/// Bounds of the width of a bin, mean spacings: finer ones would cut up the curves' own structure, coarser ones hide it.
const BIN_WIDTHS: [f64; 2] = [0.05, 0.5];
/// Widths of bins are multiples of this, for round edges.
const BIN_STEP: f64 = 0.05;
/// The curves are given up to here, mean spacings, and at this distance: all but 1 in 50 of uncorrelated spacings are below.
const LAST_POINT: f64 = 4.0;
const POINT_STEP: f64 = 0.05;
/// Range of the Brody parameter: below 0 levels attract each other, beyond 1 they repel each other more than the ensemble's.
const BRODY_RANGE: [f64; 2] = [-0.5, 4.0];
/// Smallest density that a likelihood counts with: the curves are exact to a tenth of this.
pub(super) const LEAST_DENSITY: f64 = 1e-9;

/// Nearest-neighbour spacings of a list, in units of their mean.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Spacings {
    /// Number of spacings.
    pub count: usize,
    /// How many of them are zero: repeated levels. The fits leave them out.
    pub repeated: usize,
    /// Histogram; the last bin ends at or beyond the largest spacing.
    pub histogram: Vec<SpacingBin>,
    /// Curves over an even grid of spacings.
    pub curves: Vec<SpacingPoint>,
    /// Largest distance between the measured cumulative function and each curve (Kolmogorov's). As a guide, a complete list of the kind
    /// that the curve stands for exceeds 1.36/sqrt(count) in one case of twenty, or less often, as neighbours are correlated.
    pub distance: SpacingCurves,
    /// Brody's parameter, 0 for uncorrelated levels and about 0.95 for the orthogonal ensemble (T. A. Brody, Lett. Nuovo Cimento 7 (1973)
    /// 482), by maximum likelihood. Correlations between neighbours are not in the error.
    pub brody: Fit,
    /// Regular fraction of phase space, from the spacings' distribution of Berry & Robnik (J. Phys. A 17 (1984) 2413) with the exact
    /// gap probability of the orthogonal ensemble, by maximum likelihood. A small chaotic part changes the spacings with its square
    /// only: values of 0.8 to 1 can hardly be told from 1 in a list of a thousand levels.
    pub regular_fraction: Fit,
}

/// One value for each curve that is compared with.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize)]
pub struct SpacingCurves {
    /// Uncorrelated levels.
    pub uncorrelated: f64,
    /// Gaussian orthogonal ensemble, exact.
    pub orthogonal: f64,
    /// What is expected of the list.
    pub expected: f64,
    /// Brody's distribution with the fitted parameter.
    pub brody: f64,
    /// Berry and Robnik's with the fitted fraction.
    pub berry_robnik: f64,
}

/// A bin of the histogram.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct SpacingBin {
    /// Lower edge, which belongs to the bin.
    pub from: f64,
    /// Upper edge, which does not.
    pub to: f64,
    /// Number of spacings in it.
    pub count: usize,
    /// Fraction of spacings in it divided by its width.
    pub density: f64,
    /// The same for the curves.
    pub curves: SpacingCurves,
}

/// The curves at one spacing.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct SpacingPoint {
    /// Where.
    pub spacing: f64,
    /// Measured fraction of spacings up to here.
    pub cumulative: f64,
    /// Fraction of spacings up to here for the curves.
    pub cumulative_curves: SpacingCurves,
    /// Probability densities of the curves.
    pub density_curves: SpacingCurves,
}

/// Spacings of ascending positions (at least two, not all equal), in units of their mean, ascending.
pub(super) fn sorted_spacings(positions: &[f64]) -> Vec<f64> {
    let mean = (positions[positions.len() - 1] - positions[0]) / (positions.len() - 1) as f64;
    let mut spacings: Vec<f64> = positions
        .windows(2)
        .map(|pair| (pair[1] - pair[0]) / mean)
        .collect();
    spacings.sort_by(f64::total_cmp);
    spacings
}

/// Measures the spacings of ascending positions and compares them with `expected`.
pub(super) fn measure(positions: &[f64], expected: &Reference) -> Spacings {
    let sorted = sorted_spacings(positions);
    let repeated = sorted.partition_point(|spacing| *spacing <= 0.0);
    let distinct = Distinct::new(&sorted[repeated..], sorted.len());
    let brody = distinct.brody();
    let regular_fraction = distinct.regular_fraction();
    let curves = Curves {
        uncorrelated: Reference::uncorrelated().spacings(),
        orthogonal: Reference::orthogonal().spacings(),
        expected: expected.spacings(),
        brody: brody.value,
        berry_robnik: Reference::berry_robnik(regular_fraction.value).spacings(),
        share: distinct.share,
    };
    Spacings {
        count: sorted.len(),
        repeated,
        histogram: histogram(&sorted, &curves),
        curves: points(&sorted, &curves),
        distance: curves.distance(&sorted),
        brody,
        regular_fraction,
    }
}

/// The spacings that are not zero, in units of their own mean.
struct Distinct {
    spacings: Vec<f64>,
    /// Their fraction of all spacings, which is also the ratio of the two means.
    share: f64,
}

impl Distinct {
    fn new(positive: &[f64], count: usize) -> Self {
        let share = positive.len() as f64 / count as f64;
        Self {
            spacings: positive.iter().map(|spacing| spacing * share).collect(),
            share,
        }
    }

    fn brody(&self) -> Fit {
        let [low, high] = BRODY_RANGE;
        most_likely(low, high, |parameter| {
            let curve = Brody::new(parameter);
            self.spacings
                .iter()
                .map(|spacing| curve.log_density(*spacing))
                .sum()
        })
    }

    fn regular_fraction(&self) -> Fit {
        most_likely(0.0, 1.0, |regular| {
            log_likelihood(&self.spacings, &Reference::berry_robnik(regular).spacings())
        })
    }
}

/// Log-likelihood of independent spacings.
pub(super) fn log_likelihood(spacings: &[f64], curve: &SpacingCurve) -> f64 {
    spacings
        .iter()
        .map(|spacing| curve.density(*spacing).max(LEAST_DENSITY).ln())
        .sum()
}

/// Kolmogorov's distance between sorted spacings and a cumulative function.
pub(super) fn distance(sorted: &[f64], cumulative: impl Fn(f64) -> f64) -> f64 {
    let count = sorted.len() as f64;
    let mut below = 0;
    let mut largest = 0.0_f64;
    for equal in sorted.chunk_by(|a, b| a == b) {
        let value = cumulative(equal[0]);
        let above = below + equal.len();
        // At zero the curve jumps too, where levels stand several times by force.
        if equal[0] > 0.0 {
            largest = largest.max((value - below as f64 / count).abs());
        }
        largest = largest.max((value - above as f64 / count).abs());
        below = above;
    }
    largest
}

/// Brody's distribution, p = (1 + w) b s^w exp(-b s^(1 + w)) with b = Gamma((w + 2)/(w + 1))^(1 + w).
#[derive(Clone, Copy, Debug)]
struct Brody {
    power: f64,
    log_scale: f64,
}

impl Brody {
    fn new(parameter: f64) -> Self {
        let power = 1.0 + parameter;
        Self {
            power,
            log_scale: power * libm::lgamma(1.0 + 1.0 / power),
        }
    }

    fn log_density(self, s: f64) -> f64 {
        let exponent = (self.log_scale + self.power * s.ln()).exp();
        self.power.ln() + self.log_scale + (self.power - 1.0) * s.ln() - exponent
    }

    fn cumulative(self, s: f64) -> f64 {
        if s <= 0.0 {
            return 0.0;
        }
        -(-(self.log_scale + self.power * s.ln()).exp()).exp_m1()
    }
}

/// The curves that spacings are compared with. The fitted ones are those of the distinct levels, among which the repeated ones
/// are counted in.
struct Curves {
    uncorrelated: SpacingCurve,
    orthogonal: SpacingCurve,
    expected: SpacingCurve,
    brody: f64,
    berry_robnik: SpacingCurve,
    share: f64,
}

impl Curves {
    fn cumulative(&self, s: f64) -> SpacingCurves {
        let fitted = |cumulative: f64| 1.0 - self.share + self.share * cumulative;
        SpacingCurves {
            uncorrelated: self.uncorrelated.cumulative(s),
            orthogonal: self.orthogonal.cumulative(s),
            expected: self.expected.cumulative(s),
            brody: fitted(Brody::new(self.brody).cumulative(self.share * s)),
            berry_robnik: fitted(self.berry_robnik.cumulative(self.share * s)),
        }
    }

    fn density(&self, s: f64) -> SpacingCurves {
        let fitted = |density: f64| self.share * self.share * density;
        SpacingCurves {
            uncorrelated: self.uncorrelated.density(s),
            orthogonal: self.orthogonal.density(s),
            expected: self.expected.density(s),
            // At zero the density is infinite for a negative parameter; the smallest spacing drawn stands for it.
            brody: fitted(
                Brody::new(self.brody)
                    .log_density(self.share * s.max(1e-6))
                    .exp(),
            ),
            berry_robnik: fitted(self.berry_robnik.density(self.share * s)),
        }
    }

    fn distance(&self, sorted: &[f64]) -> SpacingCurves {
        let to = |pick: fn(SpacingCurves) -> f64| distance(sorted, |s| pick(self.cumulative(s)));
        SpacingCurves {
            uncorrelated: to(|curves| curves.uncorrelated),
            orthogonal: to(|curves| curves.orthogonal),
            expected: to(|curves| curves.expected),
            brody: to(|curves| curves.brody),
            berry_robnik: to(|curves| curves.berry_robnik),
        }
    }
}

fn points(sorted: &[f64], curves: &Curves) -> Vec<SpacingPoint> {
    let count = (LAST_POINT / POINT_STEP).round() as usize;
    (0..=count)
        .map(|index| {
            let spacing = index as f64 * POINT_STEP;
            let below = sorted.partition_point(|other| *other <= spacing);
            SpacingPoint {
                spacing,
                cumulative: below as f64 / sorted.len() as f64,
                cumulative_curves: curves.cumulative(spacing),
                density_curves: curves.density(spacing),
            }
        })
        .collect()
}

fn histogram(sorted: &[f64], curves: &Curves) -> Vec<SpacingBin> {
    let width = bin_width(sorted);
    let largest = sorted[sorted.len() - 1].min(2.0 * LAST_POINT);
    let bins = ((largest / width) as usize + 1).max((LAST_POINT / width).ceil() as usize);
    (0..bins)
        .map(|index| {
            let (from, to) = (index as f64 * width, (index + 1) as f64 * width);
            let below = |s: f64| sorted.partition_point(|spacing| *spacing < s);
            let count = below(to) - below(from);
            let (low, high) = (curves.cumulative(from), curves.cumulative(to));
            // What is at zero belongs to the first bin.
            let start = |value: f64| if index == 0 { 0.0 } else { value };
            let mean = |low: f64, high: f64| (high - start(low)) / width;
            SpacingBin {
                from,
                to,
                count,
                density: count as f64 / (sorted.len() as f64 * width),
                curves: SpacingCurves {
                    uncorrelated: mean(low.uncorrelated, high.uncorrelated),
                    orthogonal: mean(low.orthogonal, high.orthogonal),
                    expected: mean(low.expected, high.expected),
                    brody: mean(low.brody, high.brody),
                    berry_robnik: mean(low.berry_robnik, high.berry_robnik),
                },
            }
        })
        .collect()
}

/// 3.49 standard deviations over the cube root of the number (Scott, Biometrika 66 (1979) 605), rounded.
fn bin_width(sorted: &[f64]) -> f64 {
    let count = sorted.len() as f64;
    let mean = sorted.iter().sum::<f64>() / count;
    let variance = sorted.iter().map(|s| (s - mean).powi(2)).sum::<f64>() / count;
    let width = 3.49 * variance.sqrt() / count.cbrt();
    ((width / BIN_STEP).round() * BIN_STEP).clamp(BIN_WIDTHS[0], BIN_WIDTHS[1])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn brody_runs_from_poisson_to_wigner() {
        let wigner = |s: f64| 1.0 - (-std::f64::consts::FRAC_PI_4 * s * s).exp();
        for s in [0.1, 0.7, 2.0] {
            assert!((Brody::new(0.0).cumulative(s) - (1.0 - (-s).exp())).abs() < 1e-14);
            assert!((Brody::new(1.0).cumulative(s) - wigner(s)).abs() < 1e-14);
            let curve = Brody::new(0.4);
            let slope = (curve.cumulative(s + 1e-5) - curve.cumulative(s - 1e-5)) / 2e-5;
            assert!((slope / curve.log_density(s).exp() - 1.0).abs() < 1e-8);
        }
    }

    #[test]
    fn distances_are_those_of_steps() {
        let uniform = |s: f64| s.clamp(0.0, 1.0);
        assert!((distance(&[0.25, 0.75], uniform) - 0.25).abs() < 1e-15);
        assert!((distance(&[0.5, 0.5], uniform) - 0.5).abs() < 1e-15);
        assert!((distance(&[0.0, 0.0, 1.0], uniform) - 2.0 / 3.0).abs() < 1e-15);
    }
}
