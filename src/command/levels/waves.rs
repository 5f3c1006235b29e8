//! Files of waves: values on a grid, values on the walls, a picture.

use crate::command::arguments::Levels as Typed;
use crate::command::direct::Direct;
use crate::command::error::CommandError;
use crate::command::options::Options;
use crate::command::output::Folder;
use crate::command::progress::Steps;
use crate::command::subject::Subject;
use crate::command::table::{Cell, Table};
use crate::command::text::counted;
use crate::command::value;
use orbitsum::report::{WaveDrawing, wave_picture};
use orbitsum::solver::{Grid, Level, Solver, WallPlace, WaveValues, Window, wall_places};
use std::f64::consts::PI;

/// Waves that files are written for at once: three files each, some megabytes.
const MOST_WAVES: usize = 200;
/// Points per wavelength on the grid and along the walls: enough for integrals over a wave to a few thousandths.
const POINTS_PER_WAVELENGTH: f64 = 12.0;
/// Points along the longer side of the grid: fewer would not show the shape, more make files that are no good to anybody.
const GRID_POINTS: [f64; 2] = [160.0, 320.0];

/// Where waves are written, and which.
#[derive(Debug)]
pub(super) struct WaveFiles {
    folder: Folder,
    /// Numbers of levels, ascending; all of the window where nothing is said.
    only: Option<Vec<usize>>,
}

impl WaveFiles {
    /// What was asked for, with the folder made.
    pub(super) fn from_arguments(typed: &Typed) -> Result<Option<Self>, CommandError> {
        let Some(folder) = &typed.vectors else {
            return Ok(None);
        };
        let only = typed
            .only
            .as_deref()
            .map(|text| value::numbers("only", text, MOST_WAVES))
            .transpose()?;
        let folder = Folder::prepare("vectors", folder)?;
        Ok(Some(Self { folder, only }))
    }

    /// Refuses to write files for all levels of a long window, before it is computed: by the smooth count.
    pub(super) fn check_number(
        &self,
        subject: &Subject,
        window: Window,
    ) -> Result<(), CommandError> {
        let weyl = subject.weyl();
        let below = |k: f64| if k > 0.0 { weyl.count(k, 0.0) } else { 0.0 };
        let expected = below(window.to) - below(window.from);
        if self.only.is_none() && expected > MOST_WAVES as f64 {
            return Err(CommandError::TooManyWaves {
                expected,
                most: MOST_WAVES,
            });
        }
        Ok(())
    }

    /// Computes and writes the waves; returns the names of the pictures.
    pub(super) fn write(
        &self,
        subject: &Subject,
        solver: &Solver,
        computed: &Direct,
        options: &Options,
    ) -> Result<Vec<String>, CommandError> {
        let wanted = self.wanted(computed)?;
        let windows = windows_of(computed, &wanted);
        let steps = Steps::new(options, "waves of window", 0, windows.len());
        let mut written = Vec::new();
        for window in windows {
            let sampling = Sampling::new(subject, window.to);
            let (levels, waves) = solver.waves(window, &sampling.grid, &sampling.walls)?;
            for (index, wave) in waves.iter().enumerate() {
                let number = levels.below + index + 1;
                if wanted.binary_search(&number).is_ok() {
                    let level = &levels.levels[wave.level];
                    written.push(self.write_one(subject, &sampling, wave, number, level)?);
                }
            }
            steps.advance(counted(written.len(), "wave", "waves"));
        }
        Ok(written)
    }

    /// Numbers of the levels, all of them in the window.
    fn wanted(&self, computed: &Direct) -> Result<Vec<usize>, CommandError> {
        let levels = &computed.levels;
        let (first, last) = (levels.first, levels.first + levels.found() - 1);
        match &self.only {
            None => Ok((first..=last).collect()),
            Some(numbers) => match numbers.iter().find(|n| !(first..=last).contains(n)) {
                Some(&number) => Err(CommandError::NoSuchLevel {
                    number,
                    first,
                    last,
                }),
                None => Ok(numbers.clone()),
            },
        }
    }

    fn write_one(
        &self,
        subject: &Subject,
        sampling: &Sampling,
        wave: &WaveValues,
        number: usize,
        level: &Level,
    ) -> Result<String, CommandError> {
        let name = format!("wave-{number:06}");
        let file =
            |ending: &str, content: &str| self.folder.write(&(name.clone() + ending), content);
        file(".csv", &sampling.inside(wave).csv())?;
        file("-walls.csv", &sampling.on_walls(wave).csv())?;
        file(
            ".svg",
            &wave_picture(&WaveDrawing {
                title: &format!("{}, level {number}", subject.title()),
                domain: &subject.system.domain,
                length_unit: Some(subject.system.units.length_label())
                    .filter(|unit| !unit.is_empty()),
                origin: sampling.grid.origin,
                step: sampling.grid.step,
                columns: sampling.grid.columns,
                values: &wave.grid,
                caption: &caption(subject, level),
            }),
        )?;
        Ok(name + ".svg")
    }
}

fn caption(subject: &Subject, level: &Level) -> String {
    let units = &subject.system.units;
    let value = subject.level(units.value(level.k), 8);
    let multiplicity = match level.multiplicity {
        1 => String::new(),
        copies => format!("; one of {copies} waves of this level"),
    };
    format!("{} = {value}{multiplicity}.", units.column())
}

/// The windows that hold the levels with the given numbers.
fn windows_of(computed: &Direct, wanted: &[usize]) -> Vec<Window> {
    let levels = &computed.levels;
    let mut number = levels.first;
    let mut places = Vec::new();
    for level in &levels.levels {
        let copies = number..number + level.multiplicity;
        number = copies.end;
        if copies.into_iter().any(|n| wanted.binary_search(&n).is_ok()) {
            places.push(level.k);
        }
    }
    computed
        .windows
        .iter()
        .filter(|window| places.iter().any(|k| (window.from..window.to).contains(k)))
        .copied()
        .collect()
}

/// Where waves are evaluated.
#[derive(Debug)]
struct Sampling {
    grid: Grid,
    walls: Vec<WallPlace>,
}

impl Sampling {
    /// Places that are dense enough for waves up to k.
    fn new(subject: &Subject, k: f64) -> Self {
        let domain = &subject.system.domain;
        let per_length = POINTS_PER_WAVELENGTH * k / (2.0 * PI);
        let [fewest, most] = GRID_POINTS;
        let points = (domain.size * per_length).clamp(fewest, most);
        Self {
            grid: Grid::over(domain, points as usize),
            walls: wall_places(domain, per_length),
        }
    }

    /// Values at the points inside.
    fn inside(&self, wave: &WaveValues) -> Table {
        let mut table = Table::new(&["x", "y", "u"]);
        for (point, value) in self.grid.points().iter().zip(&wave.grid) {
            if value.is_finite() {
                table.push(vec![point.x.into(), point.y.into(), (*value).into()]);
            }
        }
        table
    }

    /// Values and outward normal derivatives at the places on the walls, walls numbered from 1 as in the words of orbits.
    fn on_walls(&self, wave: &WaveValues) -> Table {
        let mut table = Table::new(&["wall", "t", "x", "y", "u", "normal_derivative"]);
        for (place, [value, derivative]) in self.walls.iter().zip(&wave.walls) {
            let wall: Cell = (place.wall + 1).into();
            let numbers = [place.t, place.point.x, place.point.y, *value, *derivative];
            let cells = numbers.iter().map(|&number| Cell::from(number));
            table.push(std::iter::once(wall).chain(cells).collect());
        }
        table
    }
}
