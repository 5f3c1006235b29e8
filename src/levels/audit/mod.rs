//! Audit of a level list: which levels are missing, which are false, where, and how sure that is.

mod decode;
mod explain;
mod noise;
mod prediction;
mod record;
mod search;

pub use prediction::{LeftOut, Prediction};
pub use record::{Predicted, Span};

use crate::dense::Matrix;
use explain::{Setting, explain};
use noise::Waves;
use search::Step;

/// Draft.
pub struct Prepared {
    prediction: Prediction,
    predicted: Predicted,
    waves: Waves,
}

/// Draft.
#[derive(Clone, Debug)]
pub struct Finding {
    /// missing?
    pub missing: bool,
    /// k
    pub k: f64,
    /// error
    pub error: f64,
    /// conf
    pub confidence: f64,
    /// gain
    pub gain: f64,
}

impl Prepared {
    /// Draft.
    pub fn new(prediction: Prediction, from: f64, to: f64) -> Self {
        let span = Span::new(from, to, prediction.max_length);
        let predicted = Predicted::new(&prediction, span);
        let waves = Waves::new(&predicted, prediction.max_length);
        Self {
            prediction,
            predicted,
            waves,
        }
    }

    /// Draft.
    pub fn audit(&self, levels: &[f64], _truth: &[(bool,f64)]) -> Vec<Finding> {
        let predicted = &self.predicted;
        let record: Vec<f64> = predicted
            .of_levels(levels, 0.0)
            .iter()
            .zip(&predicted.staircase)
            .map(|(a, b)| a - b)
            .collect();
        let n = record.len();
        let e = explain(&Setting{prediction:&self.prediction,predicted,waves:&self.waves,fixed:Matrix::zeros(n,n)}, levels, &record);
        e.map_or_else(Vec::new, |e| e.found.iter().map(|f| {
            let nu = 30.0;
            let soft = 0.5 * nu * (1.0 + 2.0 * f.odds.max(0.0) / nu).ln();
            Finding{missing:matches!(f.step,Step::Missing(_)),k:f.k,error:f.error,gain:f.odds,confidence:1.0/(1.0+(-soft).exp())}
        }).collect())
    }
}
