//! Directly computed levels of a billiard.
//!
//! -Laplace u = k^2 u, with u = 0 on Dirichlet walls and a vanishing normal derivative on Neumann walls, is solved by finite
//! elements of high polynomial degree on triangles with exactly curved edges, in layers of shrinking size around corners
//! (Babuska & Guo, SIAM J. Numer. Anal. 25 (1988) 837). In a window of k all levels are found by a shift-inverted block
//! Lanczos iteration, and they are counted independently of it by the inertia of the factorised matrix at both ends of the
//! window (Grimes, Lewis & Simon, SIAM J. Matrix Anal. Appl. 15 (1994) 228). Every level has an error that is estimated from
//! its residual in a richer space.
//!
//! ```text
//! Domain, Symmetry -> Cell -> Mesh -> Space -> Dissection -> Factor -> Lanczos pairs -> Estimator -> Levels
//! ```

mod discretisation;
mod dissection;
mod elements;
mod estimate;
mod factor;
mod fields;
mod join;
mod lanczos;
mod mesh;
mod plan;
mod space;
mod waves;

pub use join::{Level, Levels, WindowLevels};
pub use mesh::MeshError;
pub use plan::Window;
pub use waves::{Grid, WallPlace, WaveValues, wall_places};

use crate::baseline::{Weyl, weyl};
use crate::billiard::{
    Condition, Domain, Irrep, Symmetry, Vec2, build, centroid, is_rotationally_invariant,
};
use discretisation::{Discretisation, Found};
use fields::Fields;
use mesh::Cell;
use rayon::prelude::*;
use thiserror::Error;

/// Relative accuracy of k that is aimed at where nothing else is asked for.
pub const DEFAULT_ACCURACY: f64 = 1e-11;
/// A corner with a smaller inner angle than this (radians) is taken for a cusp of angle zero.
const SMALLEST_ANGLE: f64 = 1e-3;
/// Unknowns that fit into the memory of an ordinary machine.
const MOST_UNKNOWNS: f64 = 3e6;
/// Wedges narrower than those of a group with this many rotations make bad elements; a subgroup is used where it can be.
const MOST_ROTATIONS: usize = 6;
/// Where errors of levels exceed the wanted accuracy by this factor, a higher polynomial degree is tried.
const MISSED: f64 = 3.0;

/// Why levels could not be computed.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum SolverError {
    /// Two walls meet without an angle between them.
    #[error(
        "the walls meet in a cusp of angle zero at ({}, {}): levels are computed only for shapes whose corners have an inner \
         angle of more than {SMALLEST_ANGLE} radians", .at.x, .at.y
    )]
    ZeroAngle {
        /// Where.
        at: Vec2,
    },
    /// The shape cannot be meshed.
    #[error(transparent)]
    Mesh(#[from] MeshError),
    /// The window lies too high.
    #[error(
        "levels up to k = {k} need about {unknowns:.1e} unknowns, more than the {MOST_UNKNOWNS:.0e} that are allowed: take a lower \
         window, or one symmetry class"
    )]
    TooLarge {
        /// Upper end of the window.
        k: f64,
        /// Unknowns it needs.
        unknowns: f64,
    },
}

/// One symmetry class on the cell.
#[derive(Clone, Debug)]
struct Sector {
    fields: Fields,
    /// Smooth count of its levels, degenerate ones counted as often as they are.
    weyl: Weyl,
}

/// Computes levels of one domain, or of one of its symmetry classes.
#[derive(Clone, Debug)]
pub struct Solver {
    cell: Cell,
    sectors: Vec<Sector>,
    weyl: Weyl,
    accuracy: f64,
    domain: Domain,
    group: Symmetry,
    /// Are all walls Neumann walls, so that a constant is a wave of k = 0?
    constant: bool,
}

impl Solver {
    /// Prepares the levels of the class, or all levels.
    ///
    /// All levels of a symmetric shape are computed class by class, so that degenerate ones are told apart from close ones.
    ///
    /// # Errors
    /// Corners of angle zero.
    pub fn new(
        domain: &Domain,
        symmetry: &Symmetry,
        class: Option<&Irrep>,
    ) -> Result<Self, SolverError> {
        if let Some(vertex) = domain.vertices.iter().find(|v| v.angle < SMALLEST_ANGLE) {
            return Err(SolverError::ZeroAngle { at: vertex.point });
        }
        let group = match class {
            None if is_rotationally_invariant(domain) => {
                build(centroid(domain), MOST_ROTATIONS, Some(0.0))
            }
            None => manageable(symmetry),
            Some(_) => symmetry.clone(),
        };
        let irreps: Vec<Option<&Irrep>> = match class {
            Some(class) => vec![Some(class)],
            None if group.order() == 1 => vec![None],
            None => group.irreps.iter().map(Some).collect(),
        };
        let sectors = irreps
            .into_iter()
            .map(|irrep| Sector {
                fields: irrep.map_or_else(
                    || Fields::plain(domain),
                    |irrep| Fields::of_class(domain, &group, irrep),
                ),
                weyl: weyl(domain, &group, irrep),
            })
            .collect();
        Ok(Self {
            cell: Cell::fundamental(domain, &group),
            sectors,
            weyl: weyl(domain, symmetry, class),
            accuracy: DEFAULT_ACCURACY,
            domain: domain.clone(),
            group,
            constant: domain.length_under(Condition::Dirichlet) == 0.0,
        })
    }

    /// Aims at another relative accuracy of k: coarser is faster. The error of every level is estimated all the same.
    #[must_use]
    pub fn with_accuracy(mut self, accuracy: f64) -> Self {
        self.accuracy = accuracy;
        self
    }

    /// The windows that levels from `from` up to `to` are computed in, one after the other.
    ///
    /// # Errors
    /// More unknowns than fit into memory.
    pub fn windows(&self, from: f64, to: f64) -> Result<Vec<Window>, SolverError> {
        let unknowns = Discretisation::expected_unknowns(self.cell.area, to, self.accuracy);
        if unknowns > MOST_UNKNOWNS {
            return Err(SolverError::TooLarge { k: to, unknowns });
        }
        Ok(plan::windows(&self.sectors, from, to))
    }

    /// All levels with from <= k < to.
    ///
    /// # Errors
    /// A shape that cannot be meshed, or more unknowns than fit into memory.
    pub fn levels(&self, from: f64, to: f64) -> Result<Levels, SolverError> {
        let mut levels = Levels::new(from, to);
        self.run(&self.windows(from, to)?, |window| {
            levels.append(window);
            true
        })?;
        levels.finish(&self.weyl);
        Ok(levels)
    }

    /// Computes the given windows (in ascending order) and hands on their levels one window after the other, until `deliver`
    /// returns false.
    ///
    /// # Errors
    /// A shape that cannot be meshed.
    pub fn run(
        &self,
        windows: &[Window],
        mut deliver: impl FnMut(WindowLevels) -> bool,
    ) -> Result<(), SolverError> {
        for band in plan::bands(windows) {
            let mut meshes = vec![self.discretise(band.k, 0)?];
            let mut lower = None;
            for chunk in band.windows.chunks(rayon::current_num_threads().max(1)) {
                let mut results = self.chunk(&meshes[0], chunk, &mut lower);
                // Each window by itself: its levels must not depend on which others are computed beside or before it.
                for attempt in 1..Discretisation::ATTEMPTS {
                    let missed: Vec<usize> = (0..results.len())
                        .filter(|&index| self.missed(&results[index..=index]))
                        .collect();
                    if missed.is_empty() {
                        break;
                    }
                    if meshes.len() == attempt {
                        meshes.push(self.discretise(band.k, attempt)?);
                    }
                    let again: Vec<WindowLevels> = missed
                        .par_iter()
                        .flat_map(|&index| {
                            self.chunk(&meshes[attempt], &chunk[index..=index], &mut None)
                        })
                        .collect();
                    for (index, result) in missed.into_iter().zip(again) {
                        results[index] = result;
                    }
                }
                for result in results {
                    if !deliver(result) {
                        return Ok(());
                    }
                }
            }
        }
        Ok(())
    }

    /// The mesh for waves up to k.
    fn discretise(&self, k: f64, attempt: usize) -> Result<Discretisation, SolverError> {
        Ok(Discretisation::new(
            &self.cell,
            &self.sectors,
            k,
            self.accuracy,
            attempt,
        )?)
    }

    /// Levels of neighbouring windows; `lower` are the counts at the lower end of the first if they are known, and become
    /// those at the upper end of the last.
    fn chunk(
        &self,
        grid: &Discretisation,
        windows: &[Window],
        lower: &mut Option<Vec<usize>>,
    ) -> Vec<WindowLevels> {
        let found = self.found(grid, windows, lower);
        windows
            .iter()
            .zip(&found)
            .map(|(window, found)| join::window(*window, &self.sectors, found, self.constant))
            .collect()
    }

    /// What is found in neighbouring windows, one entry per sector in each.
    fn found(
        &self,
        grid: &Discretisation,
        windows: &[Window],
        lower: &mut Option<Vec<usize>>,
    ) -> Vec<Vec<Found>> {
        let sectors = self.sectors.len();
        let mut ends: Vec<f64> = windows.iter().map(|window| window.energies()[0]).collect();
        ends.extend(windows.last().map(|window| window.energies()[1]));
        let known = lower.take().unwrap_or_default();
        let counts: Vec<usize> = (0..ends.len() * sectors)
            .into_par_iter()
            .map(|index| match known.get(index) {
                Some(&count) => count,
                None => grid.count(index % sectors, ends[index / sectors]),
            })
            .collect();
        *lower = Some(counts[windows.len() * sectors..].to_vec());
        let mut found: Vec<Found> = (0..windows.len() * sectors)
            .into_par_iter()
            .map(|index| {
                let (window, sector) = (index / sectors, index % sectors);
                let counts = [counts[index], counts[index + sectors]];
                grid.levels(sector, windows[window].energies(), counts, self.accuracy)
            })
            .collect();
        let mut by_window = Vec::new();
        while !found.is_empty() {
            let rest = found.split_off(sectors);
            by_window.push(found);
            found = rest;
        }
        by_window
    }

    fn missed(&self, results: &[WindowLevels]) -> bool {
        results
            .iter()
            .flat_map(|result| &result.levels)
            .any(|level| level.error > MISSED * self.accuracy * level.k)
    }
}

/// The group, or a subgroup whose fundamental cell is not too narrow.
fn manageable(symmetry: &Symmetry) -> Symmetry {
    let rotations = symmetry.rotations();
    if rotations <= MOST_ROTATIONS {
        return symmetry.clone();
    }
    let divisor = (1..=MOST_ROTATIONS)
        .rev()
        .find(|divisor| rotations.is_multiple_of(*divisor));
    symmetry.subgroup(divisor.unwrap_or(1))
}
