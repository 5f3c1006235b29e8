//! What a user should know about a result.

use super::text::{counted, significant};
use orbitsum::levels::ListNote;
use orbitsum::system::NotFlat;
use std::fmt;

/// A remark or a warning. Each names the likely cause or the option that helps.
#[derive(Clone, Debug)]
pub(super) enum Note {
    /// How a list was read.
    List(ListNote),
    /// A list was converted.
    Converted {
        from: &'static str,
        to: &'static str,
    },
    /// The list is taken to hold the levels of the class alone.
    ListOfClass { class: String },
    /// The list does not begin at the lowest level.
    ListBegins { first: String, expected_below: f64 },
    /// The list does not hold as many levels as the smooth count.
    CountOff { found: usize, expected: f64 },
    /// The terms explain nothing of a length spectrum.
    NothingExplained,
    /// There is no room below the shortest orbit in which the noise could be measured.
    NoiseUnmeasured { shortest: String, needed: String },
    /// What might be wrong with a list, and is not certain enough to be a finding.
    Suspicions { words: String },
    /// Parts of a list in which single missing levels would not be seen.
    NotAuditable { ranges: String },
    /// A list that is not one of the shape.
    Foreign,
    /// There are no statistics of a list.
    NoStatistics { reason: String },
    /// The list ends inside the window.
    ListEnds { end: String, used_to: String },
    /// The list ends before the window begins.
    ListTooShort { end: String },
    /// The cavity is not flat up to the end of the window.
    NotFlat(NotFlat),
    /// The residual is as large as a whole level somewhere.
    LargeResidual { from: String, size: f64 },
    /// Neighbouring levels are closer than their errors.
    Unresolved { pairs: usize },
    /// Levels agree within their errors beyond what symmetry forces.
    Degenerate {
        levels: usize,
        first: String,
        error: String,
    },
    /// The mean of the staircase is off the smooth count.
    OffSmoothCount { mean: f64, expected: f64 },
    /// The directly computed levels are not all that were counted.
    NotComplete { found: usize, counted: usize },
    /// Only the first rows are shown.
    MoreRows {
        /// Such as `shortest`.
        which: &'static str,
        shown: usize,
        all: usize,
    },
    /// The smoothing is too narrow for the known orbits.
    TooNarrow { product: f64, enough: f64 },
    /// The smoothing is wider than the window.
    WiderThanWindow,
    /// The Gaussian reaches down to k = 0.
    NearZero { reach: String },
    /// The search did not settle.
    NotSettled { added: usize, passes: usize },
    /// The default length was cut to what can be found at once.
    ShortOrbits { wanted: String, taken: String },
    /// Corners that the orbit sum leaves out.
    Diffracts { corners: usize },
    /// A cavity is flat up to a frequency.
    FlatUpTo { limit: String },
    /// Something is left out of the smooth count.
    SmoothPart(&'static str),
    /// What the orbit sum leaves out.
    LeftOut {
        what: String,
        count: usize,
        length: String,
        /// In levels.
        size: f64,
    },
}

/// What is left out, or too large, by this many levels makes the orbit sum unusable.
const UNUSABLE: f64 = 0.5;

impl Note {
    /// Is it more than a remark?
    pub(super) fn is_warning(&self) -> bool {
        matches!(
            self,
            Self::ListBegins { .. }
                | Self::CountOff { .. }
                | Self::NothingExplained
                | Self::ListTooShort { .. }
                | Self::LargeResidual { .. }
                | Self::NotFlat(_)
                | Self::TooNarrow { .. }
                | Self::WiderThanWindow
                | Self::NotSettled { .. }
                | Self::OffSmoothCount { .. }
                | Self::NotComplete { .. }
                | Self::NotAuditable { .. }
                | Self::Foreign
        ) || matches!(self, Self::LeftOut { size, .. } if *size >= UNUSABLE)
    }

    /// With its heading.
    pub(super) fn line(&self) -> String {
        let heading = if self.is_warning() { "warning" } else { "note" };
        format!("{heading}: {self}")
    }
}

impl fmt::Display for Note {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::List(note) => write!(f, "level list: {note}"),
            Self::Converted { from, to } => {
                write!(f, "level list: its column `{from}` was converted to {to}")
            }
            Self::ListOfClass { class } => write!(
                f,
                "the level list is taken to hold the levels of class {class} only"
            ),
            Self::ListBegins {
                first,
                expected_below,
            } => write!(
                f,
                "the level list begins at {first}, where about {} levels are expected below: a staircase needs the list \
                 to begin with the lowest level",
                significant(*expected_below, 3)
            ),
            Self::CountOff { found, expected } => write!(
                f,
                "the list holds {found} levels in the window, where the smooth count is {}: levels are missing or false, and every \
                 length shows their noise",
                significant(*expected, 4)
            ),
            Self::NothingExplained => f.write_str(
                "the orbits explain nothing of what the levels show: the list belongs to another shape or class, or terms are far \
                 too large (orbits near a bifurcation)",
            ),
            Self::NoiseUnmeasured { shortest, needed } => write!(
                f,
                "the noise of the list could not be measured below the shortest orbit ({shortest}), which takes a length of {needed}: \
                 it is taken from the lower quartile of the difference, and some of what is listed may be noise; a wider window helps"
            ),
            Self::Suspicions { words } => {
                write!(f, "not certain enough to be told as findings: {words}")
            }
            Self::NotAuditable { ranges } => write!(
                f,
                "the list cannot be audited at this resolution {ranges}: what the orbit sum leaves out there hides single levels"
            ),
            Self::Foreign => f.write_str(
                "the list does not follow the prediction at all: it belongs to another shape, size, class or unit, and nothing that is                  said about single levels means anything",
            ),
            Self::NoStatistics { reason } => write!(f, "no statistics of the list: {reason}"),
            Self::ListEnds { end, used_to } => write!(
                f,
                "the level list ends at {end}: the comparison ends five smoothing widths before, at {used_to}"
            ),
            Self::ListTooShort { end } => write!(
                f,
                "the level list ends at {end}, before the window or within five smoothing widths of its beginning: there is \
                 nothing to compare; choose a lower window"
            ),
            Self::LargeResidual { from, size } => write!(
                f,
                "the residual passes half a level at {from} and reaches {}: a lasting step of -1 marks a missing level and of +1 a false one; values \
                 far larger belong to a list of another shape, class or unit",
                significant(*size, 2)
            ),
            Self::MoreRows { which, shown, all } => write!(
                f,
                "the table shows the {shown} {which} of {all}; --format csv or --out gives all"
            ),
            Self::Unresolved { pairs } => write!(
                f,
                "{} of neighbouring levels closer than their errors: their order and distance are not known; a smaller \
                 --accuracy may tell them apart",
                counted(*pairs, "pair", "pairs")
            ),
            Self::Degenerate {
                levels,
                first,
                error,
            } => write!(
                f,
                "{} (the first one {first}) stand for several waves that symmetry does not force to agree, but whose levels \
                 do within errors of {error}: degenerate, or closer than the error",
                counted(*levels, "row", "rows")
            ),
            Self::OffSmoothCount { mean, expected } => write!(
                f,
                "the staircase is off the smooth count by {} levels in the mean, where {} is expected: levels below the \
                 window or in it may be counted wrongly, or the smooth count is rough there; compare with another \
                 --accuracy or a wider window",
                significant(*mean, 2),
                significant(*expected, 2)
            ),
            Self::NotComplete { found, counted } => write!(
                f,
                "of {counted} levels that were counted {found} were found: the comparison rests on an incomplete list"
            ),
            Self::NotFlat(warning) => warning.fmt(f),
            Self::TooNarrow { product, enough } => write!(
                f,
                "smoothing width x longest orbit = {}, below {enough}: orbits that were not looked for would still show; \
                 raise --max-length or the smoothing",
                significant(*product, 3)
            ),
            Self::WiderThanWindow => f.write_str(
                "the smoothing is wider than the window: little but the smooth part is left; raise --max-length or choose a \
                 wider window",
            ),
            Self::NearZero { reach } => write!(
                f,
                "below {reach} the Gaussian reaches levels below 0, where the smooth count means nothing"
            ),
            Self::NotSettled { added, passes } => write!(
                f,
                "after {passes} passes the last and finest one still found {}: the list may not be complete; lower \
                 --max-length or --max-bounces",
                counted(*added, "new orbit", "new orbits")
            ),
            Self::ShortOrbits { wanted, taken } => write!(
                f,
                "all orbits up to length {wanted} would be too many to find at once, so only those up to {taken} are taken; \
                 --max-length asks for more, --class needs fewer"
            ),
            Self::Diffracts { corners } => write!(
                f,
                "{}: their waves are left out of the orbit sum; `orbits` and `density` estimate their size",
                counted(*corners, "corner diffracts", "corners diffract")
            ),
            Self::FlatUpTo { limit } => write!(
                f,
                "the cavity is flat up to {limit}: further modes, which this program leaves out, appear above"
            ),
            Self::SmoothPart(what) => f.write_str(what),
            Self::LeftOut {
                what,
                count,
                length,
                size,
            } => {
                write!(f, "left out or rough: {what}")?;
                if *count > 1 {
                    write!(f, " ({count} contributions)")?;
                }
                write!(
                    f,
                    ", from length {length} on, about {} level each at most",
                    significant(*size, 1)
                )
            }
        }
    }
}
