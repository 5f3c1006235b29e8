//! Levels of all classes and windows put together: order, multiplicities, counts.

use super::Sector;
use super::discretisation::Found;
use super::plan::Window;
use crate::baseline::Weyl;

/// Levels that agree within their errors are one level with a multiplicity if the errors are below this part of the mean
/// spacing: two levels come so close by chance once in a million.
const CHANCE: f64 = 1e-6;

/// A computed level.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Level {
    /// Wave number.
    pub k: f64,
    /// Error of k, estimated.
    pub error: f64,
    /// How many waves have this k: above 1 where symmetry forces it, or where levels agree within errors far below the mean
    /// spacing.
    pub multiplicity: usize,
    /// The multiplicity that symmetry forces.
    pub forced: usize,
}

/// Levels of one window.
#[derive(Clone, Debug, PartialEq)]
pub struct WindowLevels {
    /// The window.
    pub window: Window,
    /// Its levels, ascending.
    pub levels: Vec<Level>,
    /// Number of levels below the window, counted by inertia.
    pub below: usize,
    /// Number of levels in the window, counted by inertia.
    pub counted: usize,
    /// Does the number of levels that were found agree with the count?
    pub complete: bool,
}

impl WindowLevels {
    /// Number of levels that were found, with multiplicities.
    #[must_use]
    pub fn found(&self) -> usize {
        self.levels.iter().map(|level| level.multiplicity).sum()
    }
}

/// All levels from..to.
#[derive(Clone, Debug, PartialEq)]
pub struct Levels {
    /// Lower end in k.
    pub from: f64,
    /// Upper end in k.
    pub to: f64,
    /// The levels, ascending.
    pub levels: Vec<Level>,
    /// Number of the first level: one more than there are below `from`.
    pub first: usize,
    /// Number of levels by inertia.
    pub counted: usize,
    /// Was every window complete?
    pub complete: bool,
    /// Windows in which found and counted levels do not agree.
    pub disagreeing: Vec<Window>,
    /// Pairs of neighbours in the list that are closer than their errors.
    pub unresolved: usize,
    started: bool,
}

impl Levels {
    /// An empty list.
    #[must_use]
    pub fn new(from: f64, to: f64) -> Self {
        Self {
            from,
            to,
            levels: Vec::new(),
            first: 1,
            counted: 0,
            complete: true,
            disagreeing: Vec::new(),
            unresolved: 0,
            started: false,
        }
    }

    /// Adds the next window.
    pub fn append(&mut self, window: WindowLevels) {
        if !self.started {
            self.first = window.below + 1;
            self.started = true;
        }
        self.counted += window.counted;
        self.complete &= window.complete;
        if !window.complete {
            self.disagreeing.push(window.window);
        }
        self.levels.extend(window.levels);
    }

    /// Joins levels that coincide and counts those that cannot be told apart.
    pub fn finish(&mut self, weyl: &Weyl) {
        let mut joined: Vec<Level> = Vec::with_capacity(self.levels.len());
        for level in self.levels.drain(..) {
            match joined.last_mut() {
                Some(last) if coincide(last, &level, weyl) => join(last, &level),
                _ => joined.push(level),
            }
        }
        self.unresolved = joined
            .windows(2)
            .filter(|pair| pair[1].k - pair[0].k <= pair[0].error + pair[1].error)
            .count();
        self.levels = joined;
    }

    /// Number of levels that were found, with multiplicities.
    #[must_use]
    pub fn found(&self) -> usize {
        self.levels.iter().map(|level| level.multiplicity).sum()
    }
}

fn coincide(a: &Level, b: &Level, weyl: &Weyl) -> bool {
    let errors = a.error + b.error;
    let spacing = weyl.mean_spacing(0.5 * (a.k + b.k));
    (b.k - a.k).abs() <= errors && errors < CHANCE * spacing
}

fn join(a: &mut Level, b: &Level) {
    let total = (a.multiplicity + b.multiplicity) as f64;
    a.k = (a.k * a.multiplicity as f64 + b.k * b.multiplicity as f64) / total;
    a.error = a.error.max(b.error);
    a.multiplicity += b.multiplicity;
    a.forced = a.forced.max(b.forced);
}

/// Levels of all classes of a window.
pub(super) fn window(
    window: Window,
    sectors: &[Sector],
    found: &[Found],
    constant: bool,
) -> WindowLevels {
    let mut levels = Vec::new();
    let (mut below, mut counted, mut complete) = (0, 0, true);
    for (sector, found) in sectors.iter().zip(found) {
        let copies = sector.fields.copies;
        below += copies * found.below;
        counted += copies * found.counted;
        let near_ends = near_ends(window, found);
        complete &= found.values.len().abs_diff(found.counted) <= near_ends;
        levels.extend(levels_of(sector, found, constant));
    }
    levels.sort_by(|a, b| a.k.total_cmp(&b.k));
    WindowLevels {
        window,
        levels,
        below,
        counted,
        complete,
    }
}

/// Levels of one class in the order in which they were found.
pub(super) fn levels_of(sector: &Sector, found: &Found, constant: bool) -> Vec<Level> {
    let copies = sector.fields.copies;
    let pairs = found.values.iter().zip(&found.errors);
    pairs
        .map(|(&value, &error)| Level {
            multiplicity: copies,
            forced: copies.max(sector.fields.forced),
            ..level(value, error, constant)
        })
        .collect()
}

/// How many levels are nearer to an end of the window than their errors, so that the count may place them on either side.
fn near_ends(window: Window, found: &Found) -> usize {
    let [from, to] = window.energies();
    let pairs = found.values.iter().zip(&found.errors);
    pairs
        .filter(|(value, error)| (*value - from).abs() <= **error || (*value - to).abs() <= **error)
        .count()
}

/// k and its error from k^2 and its error.
fn level(value: f64, error: f64, constant: bool) -> Level {
    let (k, error) = if value > error {
        (value.sqrt(), 0.5 * error / value.sqrt())
    } else if constant {
        // The constant wave, whose k is known.
        (0.0, 0.0)
    } else {
        (value.max(0.0).sqrt(), error.sqrt())
    };
    Level {
        k,
        error,
        multiplicity: 1,
        forced: 1,
    }
}
