//! What an audit says.

use serde::Serialize;

/// What is wrong with a level.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum FaultKind {
    /// The list lacks a level.
    Missing,
    /// A listed level is none.
    False,
    /// A listed level lies elsewhere: a false one with a missing one beside it.
    Shifted,
    /// A listed level with a width stands for two that lie closer together than that.
    Unresolved,
}

impl FaultKind {
    /// The word in tables.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Missing => "missing",
            Self::False => "false",
            Self::Shifted => "shifted",
            Self::Unresolved => "unresolved",
        }
    }
}

/// One finding.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Fault {
    /// What is wrong.
    pub kind: FaultKind,
    /// Where, in k: the estimated place of a missing level, the true place of a shifted one, the listed value of a false one.
    pub k: f64,
    /// Standard deviation of the place, in k.
    pub k_error: f64,
    /// The same in local mean spacings.
    pub spacings_error: f64,
    /// Probability, under the noise model, that there is such a fault within half a mean spacing; of several missing neighbours,
    /// whose number is known better than their places, that there are so many.
    pub confidence: f64,
    /// Number of levels at this place (2: two missing ones that cannot be told apart).
    pub count: usize,
    /// Number in the list (from 1) of the level that is false, shifted or unresolved; none for a missing one.
    pub listed: Option<usize>,
    /// Where to search again, in k: from, to.
    pub window: [f64; 2],
}

/// A trend of the residual over the whole list.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Trend {
    /// What kind of trend explains the record best.
    pub kind: TrendKind,
    /// How much more probable the record is with the trend than without, in natural units of likelihood.
    pub odds: f64,
    /// Listed levels are taken to be true ones times 1 + factor (k/last)^power.
    pub factor: f64,
    /// Standard deviation of `factor`.
    pub factor_error: f64,
    /// Power of k; 0 is a wrong scale.
    pub power: f64,
    /// The k from which on levels are off by more than a tenth of a mean spacing, where there is one.
    pub noticed_from: Option<f64>,
    /// Shift of the last level in mean spacings, positive where listed levels are too high.
    pub at_end: f64,
}

/// Kinds of trend.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum TrendKind {
    /// No trend is needed.
    None,
    /// Levels drift away with a power of k, as those of an under-resolved solver do.
    Drift,
    /// Area or perimeter are not those of the file: the list comes from another shape or size.
    Geometry,
}

/// A measure of the shape from the list.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Measured {
    /// Value in the file.
    pub file: f64,
    /// Value that the list has.
    pub list: f64,
    /// Standard deviation of it.
    pub error: f64,
}

/// Measures of the shape that show in the smooth count of the list.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Measures {
    /// Area (of the class, where the list is one of a class).
    pub area: Measured,
    /// Length of Dirichlet walls less that of Neumann walls.
    pub perimeter: Measured,
    /// Factor by which the size in the file is to be multiplied.
    pub scale: Measured,
}

/// Bounds on the number of levels in a part of the list, in the manner of Turing's method.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Part {
    /// Begin of the part in k.
    pub from: f64,
    /// End of the part in k.
    pub to: f64,
    /// Levels listed in it.
    pub listed: usize,
    /// Fewest levels that agree with the mean of the residual.
    pub least: usize,
    /// Most levels that agree with it.
    pub most: usize,
}

/// A level of the corrected list.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Corrected {
    /// The level in k.
    pub k: f64,
    /// Its error; none where the list gives none.
    pub error: Option<f64>,
    /// Whether it was put in by the audit, at an estimated place.
    pub estimated: bool,
}

/// Why a list cannot be audited as wanted.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum Verdict {
    /// The list was audited; single levels are resolved.
    Audited,
    /// The noise is so large that single missing levels cannot be seen, in the k given (from, to).
    Unresolved {
        /// Places where a missing level would not be seen, as ranges of k.
        ranges: Vec<[f64; 2]>,
    },
    /// The list is not one of this shape.
    Foreign,
}

/// All that an audit says of a list.
#[derive(Clone, Debug, Serialize)]
pub struct Findings {
    /// First and last k that were compared.
    pub span: [f64; 2],
    /// Standard deviation of the Gaussian in the pictures, in k.
    pub smoothing: f64,
    /// Number of true levels below the first one of the list: 0 for a list that begins with the lowest.
    pub below: usize,
    /// Findings, in ascending order of k.
    pub faults: Vec<Fault>,
    /// Suspicions that are not certain enough to be findings.
    pub doubts: Vec<Fault>,
    /// Whether the list could be audited.
    pub verdict: Verdict,
    /// Trend over the whole list.
    pub trend: Trend,
    /// Area, perimeter and scale from the list.
    pub measures: Option<Measures>,
    /// Standard deviation of single levels about their predicted places, in mean spacings, as far as it shows.
    pub level_error: f64,
    /// Bounds on the number of levels in parts of the list.
    pub parts: Vec<Part>,
    /// Points of the curves, in k.
    pub points: Vec<f64>,
    /// Smoothed staircase of the list less the prediction.
    pub before: Vec<f64>,
    /// The same after the findings (and a trend) have been taken out.
    pub after: Vec<f64>,
    /// Standard deviation of the noise that the audit assumes.
    pub noise: Vec<f64>,
    /// The list with the findings corrected.
    pub corrected: Vec<Corrected>,
}
