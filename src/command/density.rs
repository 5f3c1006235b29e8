//! `density`: density and staircase from the orbits, beside those of levels from a list or computed directly.

mod present;

use super::answer::Answer;
use super::arguments::Density;
use super::error::CommandError;
use super::given::GivenLevels;
use super::limits::{self, Plan, Wishes};
use super::options::Options;
use super::orbits;
use super::progress;
use super::subject::Subject;
use orbitsum::levels::{Residual, ResidualWindow, density, residual_rms, staircase};
use orbitsum::orbit::{Catalogue, ClassWeights, terms};
use orbitsum::trace::{OrbitSum, Term, UniformGrid, sum_on_grid};

/// Points per standard deviation of the Gaussian: more than the five that the rms of a residual needs, for smooth pictures.
const POINTS_PER_WIDTH: f64 = 8.0;
/// Least number of points.
const LEAST_POINTS: usize = 401;
/// Largest number of points: a table of this length is the most that other programs read in.
const MOST_POINTS: usize = 2_000_000;
/// Error of the orbit sum relative to the sum of its amplitudes.
const ACCURACY: f64 = 1e-10;

pub(super) fn run(typed: &Density, options: &Options) -> Result<Answer, CommandError> {
    let subject = Subject::load(&typed.system, options)?;
    let wishes = Wishes::of_density(typed, &subject)?;
    subject.check_class_of_orbits()?;
    let given = typed
        .levels
        .as_deref()
        .map(|path| GivenLevels::read(path, &subject))
        .transpose()?;
    let last = given.as_ref().map(GivenLevels::last);
    let plan = limits::plan(&subject, &wishes, last)?;
    let grid = grid(&subject, &plan)?;
    let given = match given {
        None if typed.direct => Some(GivenLevels::compute(&subject, &plan, options)?),
        given => given,
    };
    let catalogue = orbits::find(&subject, plan.limits, options);
    let terms = terms(
        &catalogue,
        &ClassWeights::new(&subject.symmetry, subject.class.as_ref()),
    );
    let curves = progress::during(options, "summing", || {
        Curves::new(&subject, &plan, &grid, &terms)
    });
    let comparison = given.map(|given| Comparison::new(&plan, &curves, given));
    Ok(present::answer(&Findings {
        subject: &subject,
        plan: &plan,
        catalogue: &catalogue,
        terms: terms.len(),
        curves: &curves,
        comparison: comparison.as_ref(),
    }))
}

/// All that is to be presented.
struct Findings<'a> {
    subject: &'a Subject,
    plan: &'a Plan,
    catalogue: &'a Catalogue,
    terms: usize,
    curves: &'a Curves,
    comparison: Option<&'a Comparison>,
}

/// Points over the window, evenly spaced in k.
fn grid(subject: &Subject, plan: &Plan) -> Result<UniformGrid, CommandError> {
    let units = &subject.system.units;
    let (from, to) = (units.k(plan.window.from), units.k(plan.window.to));
    let widths = (to - from) / plan.width;
    let points = (widths * POINTS_PER_WIDTH).ceil() + 1.0;
    if points > MOST_POINTS as f64 {
        return Err(CommandError::TooManyPoints {
            widths,
            points,
            limit: MOST_POINTS,
        });
    }
    let count = (points as usize).max(LEAST_POINTS);
    Ok(UniformGrid {
        start: from,
        step: (to - from) / (count - 1) as f64,
        count,
    })
}

/// Density and staircase over the grid.
struct Curves {
    /// k of the points.
    k: Vec<f64>,
    /// The points in the file's unit.
    at: Vec<f64>,
    /// dk/d(file's unit): what turns densities over k into densities over the file's unit.
    slope: Vec<f64>,
    /// Smooth parts; densities over k.
    density_smooth: Vec<f64>,
    staircase_smooth: Vec<f64>,
    orbits: OrbitSum,
}

impl Curves {
    fn new(subject: &Subject, plan: &Plan, grid: &UniformGrid, terms: &[Term]) -> Self {
        let weyl = subject.weyl();
        let units = &subject.system.units;
        let k = grid.points();
        let at: Vec<f64> = k.iter().map(|&k| units.value(k)).collect();
        Self {
            slope: at.iter().map(|&value| units.derivative(value)).collect(),
            density_smooth: k.iter().map(|&k| weyl.density(k, plan.width)).collect(),
            staircase_smooth: k.iter().map(|&k| weyl.count(k, plan.width)).collect(),
            orbits: sum_on_grid(terms, grid, plan.width, ACCURACY),
            at,
            k,
        }
    }

    fn density(&self, index: usize) -> f64 {
        self.density_smooth[index] + self.orbits.density[index]
    }

    fn staircase(&self, index: usize) -> f64 {
        self.staircase_smooth[index] + self.orbits.staircase[index]
    }
}

/// A list beside the prediction.
struct Comparison {
    given: GivenLevels,
    /// Smoothed like the prediction; density over k.
    density: Vec<f64>,
    staircase: Vec<f64>,
    /// Levels less prediction, at all points.
    residual: Vec<f64>,
    /// Its size where the list reaches.
    size: Residual,
    /// Size of levels less smooth part: what the orbits have to explain.
    before: Residual,
}

impl Comparison {
    fn new(plan: &Plan, curves: &Curves, given: GivenLevels) -> Self {
        let staircase = staircase(&given.k, &curves.k, plan.width);
        let residual: Vec<f64> = staircase
            .iter()
            .enumerate()
            .map(|(index, levels)| levels - curves.staircase(index))
            .collect();
        let fluctuation: Vec<f64> = staircase
            .iter()
            .zip(&curves.staircase_smooth)
            .map(|(levels, smooth)| levels - smooth)
            .collect();
        let window = ResidualWindow {
            from: curves.k[0],
            to: curves.k[curves.k.len() - 1],
            list_end: given.end,
            smoothing: plan.width,
        };
        Self {
            density: density(&given.k, &curves.k, plan.width),
            size: residual_rms(&curves.k, &residual, &window),
            before: residual_rms(&curves.k, &fluctuation, &window),
            staircase,
            residual,
            given,
        }
    }

    /// Does the list reach far enough for this point to be compared?
    fn counts(&self, k: f64) -> bool {
        k <= self.size.used_to
    }
}
