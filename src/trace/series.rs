//! Smoothed terms as series in 1/k.
//!
//! The Gaussian mean of (k + t)^alpha exp(i (k + t) l) over t of standard deviation s, with the binomial series of
//! (k + t)^alpha and E[t^m exp(i t l)] = (i s)^m He_m(s l) exp(-(s l)^2/2), is
//!
//! ```text
//! exp(i k l) sum_m binom(alpha, m) (i s)^m He_m(s l) exp(-(s l)^2/2) k^(alpha - m).
//! ```
//!
//! That is the same as exp(i k l) exp(-(s l)^2/2) E[(k + i s^2 l + s xi)^alpha], arranged so that k and l separate: every
//! power of k multiplies one exponential sum. Strips join in through Hankel's expansion (DLMF 10.17.5),
//!
//! ```text
//! k J1(k l) = Re[k H1(k l)],  k H1(k l) = sqrt(2/(pi l)) exp(-3 pi i/4) sum_j i^j a_j(1) l^-j k^(1/2 - j) exp(i k l).
//! ```
//!
//! Both series are asymptotic: they are cut before the term that can fall below the accuracy soonest, and they hold from the
//! k at which that term does.

use std::f64::consts::{FRAC_2_PI, PI};
use std::sync::LazyLock;

use num_complex::Complex64;

use super::term::{Amplitude, Term};

/// Longest series kept. Up to here the asymptotic series reach 1e-15 for all k that they can serve at all: their smallest
/// terms lie at orders 2 k l (Hankel) and (k/s)^2 (Gaussian), both near 35 where that term is 1e-15.
const MAX_ORDER: usize = 48;

/// Bound kappa of |He_m(x)| <= kappa sqrt(m!) exp(x^2/4) (Cramer; Abramowitz & Stegun 22.14.17).
const CRAMER: f64 = 1.086_435;

/// The error of an asymptotic series is taken as this many times its first omitted term.
const OMITTED_TERMS: f64 = 8.0;

/// Power of k in front of a series.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Leading {
    /// k^0.
    Constant,
    /// k^(1/2).
    SquareRoot,
}

impl Leading {
    /// The exponent itself.
    pub(super) fn exponent(self) -> f64 {
        match self {
            Self::Constant => 0.0,
            Self::SquareRoot => 0.5,
        }
    }
}

/// The amplitude of a smoothed term, without its phase correction: k^p sum_n c_n (reference/k)^n for k >= `valid_from`.
#[derive(Clone, Debug)]
pub(super) struct PowerSeries {
    /// The power p in front.
    pub(super) leading: Leading,
    /// c_0; the Gaussian's factor exp(-(s l)^2/2) is inside all of them.
    pub(super) first: Complex64,
    /// c_1, c_2, ...
    pub(super) rest: Vec<Complex64>,
    /// The k at which the powers of 1/k are 1.
    pub(super) reference: f64,
    /// Smallest k for which the accuracy asked for holds; infinite where the series cannot reach it.
    pub(super) valid_from: f64,
    /// Size of c_0 before smoothing, to which accuracies refer.
    pub(super) unsmoothed: f64,
}

impl PowerSeries {
    /// The series of `term` smoothed with standard deviation `smoothing`, with errors below `accuracy` of the unsmoothed
    /// amplitude.
    pub(super) fn new(term: &Term, smoothing: f64, accuracy: f64) -> Self {
        match term.amplitude {
            Amplitude::Constant | Amplitude::CorrectedConstant { .. } => Self {
                leading: Leading::Constant,
                first: term.coefficient * gaussian(smoothing * term.length),
                rest: Vec::new(),
                reference: 1.0,
                valid_from: 0.0,
                unsmoothed: term.coefficient.norm(),
            },
            Amplitude::Torus { .. } => {
                let gaussian = GaussianPowers::new(term.length, smoothing);
                Self::truncated(
                    term.coefficient,
                    gaussian.series(0).collect(),
                    gaussian.bounds(0).collect(),
                    smoothing,
                    accuracy,
                )
            }
            Amplitude::Strip => Self::strip(term, smoothing, accuracy),
        }
    }

    fn strip(term: &Term, smoothing: f64, accuracy: f64) -> Self {
        let gaussian = GaussianPowers::new(term.length, smoothing);
        let mut coefficients = vec![Complex64::ZERO; MAX_ORDER + 1];
        let mut bounds = vec![0.0; MAX_ORDER + 1];
        // i^j a_j(1) l^-j, j = 0, 1, ...
        let mut hankel = Complex64::ONE;
        for j in 0..=MAX_ORDER {
            let orders = gaussian.series(j).zip(gaussian.bounds(j));
            for (m, (coefficient, bound)) in orders.take(MAX_ORDER + 1 - j).enumerate() {
                coefficients[j + m] += hankel * coefficient;
                bounds[j + m] += hankel.norm() * bound;
            }
            let next = (j + 1) as f64;
            let odd = 2.0 * next - 1.0;
            hankel *= Complex64::I * ((4.0 - odd * odd) / (8.0 * next * term.length));
        }
        let front = Complex64::from_polar((FRAC_2_PI / term.length).sqrt(), -0.75 * PI);
        Self::truncated(
            front * term.coefficient.re,
            coefficients,
            bounds,
            smoothing,
            accuracy,
        )
    }

    /// Cuts a series in front of the term that falls below the accuracy first as k grows, and scales it.
    fn truncated(
        front: Complex64,
        coefficients: Vec<Complex64>,
        bounds: Vec<f64>,
        smoothing: f64,
        accuracy: f64,
    ) -> Self {
        let tolerance = accuracy / OMITTED_TERMS;
        let mut omitted = MAX_ORDER;
        let mut valid_from = f64::INFINITY;
        // The series know nothing of the branch point at k = 0, whose part in the mean is exp(-(k/s)^2/2), also where the
        // wave itself is smoothed away.
        let clear_of_zero = smoothing * (-2.0 * tolerance.min(1.0).ln()).sqrt();
        for (order, bound) in bounds.iter().enumerate().skip(1) {
            let from = (bound / tolerance).powf(1.0 / order as f64);
            if from < valid_from {
                (omitted, valid_from) = (order, from);
            }
        }
        valid_from = valid_from.max(clear_of_zero);
        if !front.is_finite() {
            valid_from = f64::INFINITY;
        }
        // Without smoothing a torus needs one power only, from k = 0 on: nothing is there to scale.
        let reference = if valid_from > 0.0 && valid_from.is_finite() {
            valid_from
        } else {
            1.0
        };
        let mut scale = 1.0;
        let scaled = coefficients
            .iter()
            .take(omitted)
            .skip(1)
            .map(|coefficient| {
                scale /= reference;
                front * coefficient * scale
            });
        Self {
            leading: Leading::SquareRoot,
            first: front * coefficients[0],
            rest: scaled.collect(),
            reference,
            valid_from,
            unsmoothed: front.norm(),
        }
    }

    /// Whether the series holds at k.
    pub(super) fn holds_at(&self, k: f64) -> bool {
        self.leading == Leading::Constant || (k > 0.0 && k >= self.valid_from)
    }

    /// The amplitude A(k) and its derivative.
    pub(super) fn amplitude(&self, k: f64) -> (Complex64, Complex64) {
        if self.leading == Leading::Constant {
            return (self.first, Complex64::ZERO);
        }
        let exponent = self.leading.exponent();
        let u = self.reference / k;
        let (mut sum, mut slope) = (Complex64::ZERO, Complex64::ZERO);
        for (order, coefficient) in self.rest.iter().enumerate().rev() {
            sum = (sum + coefficient) * u;
            slope = (slope + coefficient * (exponent - (order + 1) as f64)) * u;
        }
        let power = k.powf(exponent);
        (
            (sum + self.first) * power,
            (slope + self.first * exponent) * (power / k),
        )
    }

    /// How many powers matter for k >= `from`: the others are below `tolerance` of the unsmoothed amplitude. 0 if none does.
    pub(super) fn orders(&self, from: f64, tolerance: f64) -> usize {
        let limit = tolerance * self.unsmoothed;
        let u = self.reference / from;
        let mut power = 1.0;
        let mut orders = usize::from(self.first.l1_norm() > limit);
        for (order, coefficient) in self.rest.iter().enumerate() {
            power *= u;
            if coefficient.l1_norm() * power > limit {
                orders = order + 2;
            }
        }
        orders
    }

    /// The first `orders` coefficients scaled to another reference.
    pub(super) fn rescaled(&self, reference: f64, orders: usize) -> Vec<Complex64> {
        let u = self.reference / reference;
        let mut power = 1.0;
        let rest = self.rest.iter().map(|coefficient| {
            power *= u;
            coefficient * power
        });
        std::iter::once(self.first)
            .chain(rest)
            .take(orders)
            .collect()
    }
}

/// exp(-x^2/2).
pub(super) fn gaussian(x: f64) -> f64 {
    (-0.5 * x * x).exp()
}

/// The parts of the Gaussian mean of k^(1/2 - j) exp(i k l) that all j share.
struct GaussianPowers {
    /// (i s)^m He_m(s l) exp(-(s l)^2/2).
    moments: Vec<Complex64>,
    /// Bounds of their sizes.
    bounds: Vec<f64>,
}

impl GaussianPowers {
    fn new(length: f64, smoothing: f64) -> Self {
        let x = smoothing * length;
        let (mut before, mut hermite) = (0.0, gaussian(x));
        let mut factor = Complex64::ONE;
        let mut bound = CRAMER * gaussian(x).sqrt();
        let mut moments = Vec::with_capacity(MAX_ORDER + 1);
        let mut bounds = Vec::with_capacity(MAX_ORDER + 1);
        for m in 0..=MAX_ORDER {
            moments.push(factor * hermite);
            bounds.push(bound);
            // He_(m+1)(x) = x He_m(x) - m He_(m-1)(x)
            (before, hermite) = (hermite, x * hermite - m as f64 * before);
            factor *= Complex64::I * smoothing;
            bound *= smoothing * ((m + 1) as f64).sqrt();
        }
        Self { moments, bounds }
    }

    /// binom(1/2 - j, m) times the moments.
    fn series(&self, j: usize) -> impl Iterator<Item = Complex64> {
        self.moments
            .iter()
            .zip(&BINOMIALS[j])
            .map(|(moment, binomial)| moment * binomial)
    }

    fn bounds(&self, j: usize) -> impl Iterator<Item = f64> {
        self.bounds
            .iter()
            .zip(&BINOMIALS[j])
            .map(|(bound, binomial)| bound * binomial.abs())
    }
}

/// binom(1/2 - j, m), by j and m.
static BINOMIALS: LazyLock<Vec<Vec<f64>>> = LazyLock::new(|| {
    let row = |j: usize| {
        let mut value = 1.0;
        let next = |m: usize| {
            let binomial = value;
            value *= (0.5 - j as f64 - m as f64) / (m as f64 + 1.0);
            binomial
        };
        (0..=MAX_ORDER).map(next).collect()
    };
    (0..=MAX_ORDER).map(row).collect()
});
