//! The expected fluctuation of the staircase for a subject: short orbits by themselves, the rest from random levels.

use super::options::Options;
use super::orbits;
use super::subject::Subject;
use orbitsum::baseline::weyl;
use orbitsum::billiard::{VertexKind, Wall};
use orbitsum::orbit::{ClassWeights, Limits, terms};
use orbitsum::trace::{ClassDensity, Statistics, Term, expected_fluctuation, mean_fluctuation};
use std::f64::consts::PI;

/// Longest orbits that are looked for, in mean chords of the shape: enough to see its families, and found at once.
const CHORDS: f64 = 5.0;

/// What is needed to estimate fluctuations of one subject.
pub(super) struct Fluctuation<'a> {
    subject: &'a Subject,
    terms: Vec<Term>,
    max_length: f64,
    statistics: Statistics,
}

impl<'a> Fluctuation<'a> {
    /// Finds the short orbits.
    pub(super) fn new(subject: &'a Subject, options: &Options) -> Self {
        let domain = &subject.system.domain;
        let max_length = CHORDS * PI * domain.area / domain.perimeter;
        let terms = if subject.check_class_of_orbits().is_ok() {
            let catalogue = orbits::find(subject, Limits::up_to(max_length, domain), options);
            terms(
                &catalogue,
                &ClassWeights::new(&subject.symmetry, subject.class.as_ref()),
            )
        } else {
            Vec::new()
        };
        Self {
            subject,
            terms,
            max_length,
            statistics: statistics(subject),
        }
    }

    /// Is there an estimate? Not for single classes of shapes whose tori are known for all classes together only.
    pub(super) fn is_known(&self) -> bool {
        self.subject.check_class_of_orbits().is_ok()
    }

    /// Root mean square of the staircase about the smooth count near k, in levels.
    pub(super) fn at(&self, k: f64) -> Option<f64> {
        self.is_known().then(|| {
            expected_fluctuation(
                &self.terms,
                k,
                self.max_length,
                &classes(self.subject, k),
                self.statistics,
            )
        })
    }

    /// Root mean square, in levels, of the mean over from..to (in k) of the staircase less the smooth count.
    pub(super) fn of_mean(&self, from: f64, to: f64) -> Option<f64> {
        self.is_known().then(|| {
            mean_fluctuation(
                &self.terms,
                [from, to],
                self.max_length,
                &classes(self.subject, 0.5 * (from + to)),
                self.statistics,
            )
        })
    }

    /// Where the estimate comes from, for people.
    pub(super) fn source(&self) -> String {
        let statistics = match self.statistics {
            Statistics::Uncorrelated => "uncorrelated levels",
            Statistics::Orthogonal => "the Gaussian orthogonal ensemble",
        };
        format!(
            "expected rms of the unsmoothed staircase about the smooth count, from the orbits up to length {} and {statistics} \
             beyond",
            self.subject.length(self.max_length, 3)
        )
    }
}

/// The classes among the levels, with their densities near k.
pub(super) fn classes(subject: &Subject, k: f64) -> Vec<ClassDensity> {
    let density =
        |class| weyl(&subject.system.domain, &subject.symmetry, Some(class)).density(k, 0.0);
    subject
        .symmetry
        .irreps
        .iter()
        .filter(|irrep| {
            subject
                .class
                .as_ref()
                .is_none_or(|class| class.name == irrep.name)
        })
        .map(|irrep| ClassDensity {
            density: density(irrep),
            dimension: irrep.dimension,
        })
        .collect()
}

/// How the levels of one class are spread.
pub(super) fn statistics(subject: &Subject) -> Statistics {
    if is_integrable(subject) {
        Statistics::Uncorrelated
    } else {
        Statistics::Orthogonal
    }
}

/// Is it one of the shapes with tori, or a polygon in which every corner only reflects?
pub(super) fn is_integrable(subject: &Subject) -> bool {
    let domain = &subject.system.domain;
    let reflects_only = domain.walls.iter().all(Wall::is_straight)
        && domain
            .vertices
            .iter()
            .all(|vertex| matches!(vertex.kind, VertexKind::Regular { .. } | VertexKind::Smooth));
    subject.integrable.is_some() || reflects_only
}
