//! Noise and faults of a record, found together.
//!
//! How probable a set of faults is depends on the noise, and what noise there is shows only when the faults have been taken out.
//! So both are found in turns: first with all expected errors of the orbit sum enlarged by one factor, from a large one down to
//! where the record becomes most probable; then with the spectrum of the noise learned from what the faults leave.

use super::decode::{Effort, decode};
use super::noise::{Expected, Noise, Waves};
use super::prediction::Prediction;
use super::record::Predicted;
use super::scene::{Ban, Explanation, Scene, Step, Steps};
use crate::dense::{Cholesky, Matrix};

/// Factors of the expected variances that are tried, in descending order.
const HEATS: [f64; 5] = [1e4, 1e3, 1e2, 1e1, 1.0];
/// Rounds of learning the noise.
const ROUNDS: usize = 6;
/// Rounds in which the faults are decoded anew besides being improved.
const DECODED: usize = 2;
/// Gain in evidence, in natural units, below which learning has settled.
const SETTLED: f64 = 1.0;
/// Noise, in levels, above which decoding has to be thorough.
const LOUD: f64 = 0.1;
/// Where the noise is loud, a fault must also be found from scratch under noise with these factors of its variance; if not, the
/// logarithm of its odds is no more than the second number (a probability of 0.73).
const OTHER_NOISE: [f64; 2] = [0.4, 2.5];
const UNSTABLE: f64 = 1.0;
/// An explanation that is worse than another by more than this, in natural units of likelihood, is not worth a search.
const PROMISING: f64 = 30.0;
/// Rounds of questioning single faults, each of which may turn up a better explanation.
const QUESTIONS: usize = 8;
/// Mean spacings about a fault within which another of its kind is taken for the same one.
pub(super) const SAME: f64 = 0.5;

/// Missing levels closer than this many mean spacings are neighbours, of which the number counts; no other is put in within the
/// second distance to see whether one fewer would do.
const BESIDE: f64 = 1.75;
const ABOUT: f64 = 4.0;

/// What the explanation of a record needs besides the levels.
pub(super) struct Setting<'a> {
    pub(super) prediction: &'a Prediction,
    pub(super) predicted: &'a Predicted,
    pub(super) waves: &'a Waves,
    /// Covariance of the record that is known beforehand: errors of the levels, trends that are to be allowed.
    pub(super) fixed: Matrix,
}

/// A fault, as the search sees it.
#[derive(Clone, Copy, Debug)]
pub(super) struct Found {
    pub(super) step: Step,
    pub(super) k: f64,
    /// Standard deviation of k; of a false level, as if it could be anywhere.
    pub(super) error: f64,
    /// The same if nothing else were open.
    pub(super) single_error: f64,
    /// Logarithm of the odds against the best explanation without it.
    pub(super) odds: f64,
    /// Whether it is one of several neighbours, whose number is known better than their places.
    pub(super) of_several: bool,
}

/// A record with its faults and its noise.
pub(super) struct Explained {
    pub(super) found: Vec<Found>,
    /// The record without the faults.
    pub(super) rest: Vec<f64>,
    /// Standard deviation of the noise at the points.
    pub(super) noise: Vec<f64>,
    /// Standard deviation of single levels, in mean spacings, as it shows in the record.
    pub(super) level_error: f64,
    /// Logarithm of the probability of the record, up to a constant of the points.
    pub(super) evidence: f64,
    /// Standard deviation of the place of a single missing level at the points.
    pub(super) place_errors: Vec<f64>,
    pub(super) whitener: Cholesky,
}

struct Best<'a> {
    steps: Vec<Step>,
    evidence: f64,
    noise: Noise<'a>,
}

/// Finds faults and noise. Nothing comes back where no noise model could be factorised (numbers that are not finite).
pub(super) fn explain(setting: &Setting<'_>, levels: &[f64], record: &[f64]) -> Option<Explained> {
    let predicted = setting.predicted;
    let span = predicted.span;
    let weyl = &setting.prediction.weyl;
    let density = |k: f64| positive_density(weyl.density(k, 0.0), span.to - span.from);
    let expected = Expected {
        prediction: setting.prediction,
        middle: 0.5 * (span.from + span.to),
    };
    let single = shifts(predicted, levels, &density);
    let all_steps = Steps::new(span, &predicted.points, levels);
    let all_scene = |whitener: &Cholesky| {
        Scene::new(
            span,
            &predicted.points,
            &all_steps,
            record,
            levels,
            whitener,
            &density,
        )
    };
    let max_length = setting.prediction.max_length;
    let mut noise = Noise::new(
        setting.waves,
        predicted,
        &expected,
        setting.fixed.clone(),
        single,
    );
    let mut best: Option<Best> = None;
    let mut steps = Vec::new();
    for heat in HEATS {
        noise.heat(heat, max_length);
        let whitener = noise.whitener()?;
        let scene = all_scene(&whitener);
        let found = scene.search(steps, None);
        if best.is_some() && scene.is_hopeless(&found) {
            break;
        }
        let evidence = found.value - 0.5 * whitener.log_determinant();
        steps = found.steps;
        if best.as_ref().is_some_and(|best| best.evidence >= evidence) {
            break;
        }
        best = Some(Best {
            steps: steps.clone(),
            evidence,
            noise: noise.clone(),
        });
    }
    let mut best = best?;
    noise = best.noise.clone();
    steps = best.steps.clone();
    let effort = if typical(&best.noise.deviations()) > LOUD {
        Effort::THOROUGH
    } else {
        Effort::USUAL
    };
    let mut in_vain = 0;
    for round in 0..ROUNDS {
        let whitener = noise.whitener()?;
        let scene = all_scene(&whitener);
        let mut found = scene.search(steps, None);
        if round < DECODED {
            found = with_decoded(&scene, found, effort);
        }
        let evidence = found.value - 0.5 * whitener.log_determinant();
        let rest = scene.rest_of(record, &found.steps);
        steps = found.steps;
        if evidence > best.evidence + SETTLED {
            in_vain = 0;
        } else {
            in_vain += usize::from(round > 0);
        }
        if evidence > best.evidence {
            best = Best {
                steps: steps.clone(),
                evidence,
                noise: noise.clone(),
            };
        }
        if in_vain == 2 {
            break;
        }
        noise.learn(&whitener, &rest);
    }
    let whitener = best.noise.whitener()?;
    let scene = all_scene(&whitener);
    let found = with_decoded(&scene, scene.search(best.steps, None), effort);
    let (found, odds) = questioned(&scene, found, &density);
    let errors = scene.errors(&found);
    let stable: Vec<bool> = if typical(&best.noise.deviations()) > LOUD {
        let mut stable = vec![true; found.steps.len()];
        for factor in OTHER_NOISE {
            let whitener = best.noise.scaled(factor).whitener()?;
            let other = all_scene(&whitener);
            let start = other.search(Vec::new(), None);
            let again = with_decoded(&other, start, effort);
            for (stable, &step) in stable.iter_mut().zip(&found.steps) {
                *stable &= has_counterpart(&scene, step, &again.steps, &density);
            }
        }
        stable
    } else {
        vec![true; found.steps.len()]
    };
    Some(Explained {
        rest: scene.rest_of(record, &found.steps),
        noise: best.noise.deviations(),
        level_error: best.noise.level_error(),
        evidence: found.value - 0.5 * whitener.log_determinant(),
        found: found
            .steps
            .iter()
            .zip(errors.iter().zip(odds))
            .zip(stable)
            .map(|((&step, (&error, (odds, of_several))), stable)| {
                let odds = if stable { odds } else { odds.min(UNSTABLE) };
                let k = scene.place(step);
                // A missing level would be as far from its predicted place as the listed ones are.
                let own = best.noise.level_error() / density(k);
                Found {
                    step,
                    k,
                    error: error.hypot(own),
                    single_error: scene.place_error(k).hypot(own),
                    odds,
                    of_several,
                }
            })
            .collect(),
        place_errors: predicted
            .points
            .iter()
            .map(|&k| scene.place_error(k))
            .collect(),
        whitener,
    })
}

/// Is there a fault of the same kind within half a mean spacing among other steps?
fn has_counterpart(
    scene: &Scene<'_>,
    step: Step,
    steps: &[Step],
    density: &dyn Fn(f64) -> f64,
) -> bool {
    let place = scene.place(step);
    steps.iter().any(|&other| {
        matches!(step, Step::Missing(_)) == matches!(other, Step::Missing(_))
            && (scene.place(other) - place).abs() * density(place) < SAME
    })
}

/// The median.
fn typical(values: &[f64]) -> f64 {
    let mut values = values.to_vec();
    values.sort_by(f64::total_cmp);
    values.get(values.len() / 2).copied().unwrap_or(0.0)
}

/// The better one of an explanation and of what decoding leads to. Decoding tries places on a grid; where the noise is so small that
/// the grid shows, it explains the record far worse, and is not followed up.
fn with_decoded(scene: &Scene<'_>, found: Explanation, effort: Effort) -> Explanation {
    let decoded = scene.settled(decode(scene, effort), None);
    if decoded.value < found.value - PROMISING {
        return found;
    }
    let decoded = scene.search(decoded.steps, None);
    if decoded.value > found.value {
        decoded
    } else {
        found
    }
}

/// Looks for the best explanation without each fault in turn; one that turns out better than the explanation replaces it.
fn questioned(
    scene: &Scene<'_>,
    mut found: Explanation,
    density: &dyn Fn(f64) -> f64,
) -> (Explanation, Vec<(f64, bool)>) {
    let mut odds = Vec::new();
    for _ in 0..QUESTIONS {
        if scene.is_hopeless(&found) {
            break;
        }
        odds.clear();
        let mut replaced = None;
        for (index, &step) in found.steps.iter().enumerate() {
            let mut others = found.steps.clone();
            others.remove(index);
            let ban = Ban {
                step,
                reach: SAME / density(scene.place(step)),
                may_enter: false,
            };
            let without = scene.search(others, Some(ban));
            if without.value > found.value {
                replaced = Some(without);
                break;
            }
            let single = found.value - without.value;
            odds.push(match one_of_several(scene, &found.steps, index, density) {
                Some(counted) => (single.max(found.value - counted), true),
                None => (single, false),
            });
        }
        match replaced {
            Some(better) => found = scene.search(better.steps, None),
            None => break,
        }
    }
    odds.resize(found.steps.len(), (0.0, false));
    (found, odds)
}

/// For a missing level with another one beside it, the value of the best explanation with one fewer there: which of several
/// neighbours is left out means nothing, but their number does.
fn one_of_several(
    scene: &Scene<'_>,
    steps: &[Step],
    index: usize,
    density: &dyn Fn(f64) -> f64,
) -> Option<f64> {
    let Step::Missing(x) = steps[index] else {
        return None;
    };
    let spacing = 1.0 / density(x);
    let has_neighbour = steps.iter().enumerate().any(|(other, step)| {
        other != index && matches!(step, Step::Missing(y) if (x - y).abs() < BESIDE * spacing)
    });
    if !has_neighbour {
        return None;
    }
    let mut others = steps.to_vec();
    others.remove(index);
    let ban = Ban {
        step: steps[index],
        reach: ABOUT * spacing,
        may_enter: true,
    };
    Some(scene.search(others, Some(ban)).value)
}

/// What a shift of each level by its mean spacing does to the record.
fn shifts(predicted: &Predicted, levels: &[f64], density: &dyn Fn(f64) -> f64) -> Matrix {
    let mut columns = Matrix::zeros(predicted.points.len(), levels.len());
    for (column, &level) in levels.iter().enumerate() {
        let spacing = 1.0 / density(level);
        let column = columns.col_as_slice_mut(column);
        for (value, &k) in column.iter_mut().zip(&predicted.points) {
            *value = spacing * predicted.span.step_slope(level, k);
        }
    }
    columns
}

/// The smooth density, where it is one: close to k = 0 it falls below zero, and a level there counts as one in the whole span.
pub(super) fn positive_density(density: f64, width: f64) -> f64 {
    density.max(1.0 / width)
}
