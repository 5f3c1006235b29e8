//! Small multiples: one outline and one orbit in each panel.

use super::canvas::{
    Anchor, BORDER, Canvas, LEADING, Lettering, Stroke, TEXT, WIDTH, number, palette, polyline,
    wrap,
};
use super::legend::{Sample, legend};
use super::outline::{View, bounds};
use crate::billiard::{Domain, Role, Vec2};
use std::collections::{BTreeMap, BTreeSet};

/// Orbits that one picture holds; further ones are left out, and the picture says so.
pub const LARGEST_GRID: usize = 24;
/// Space between two panels, points.
const GAP: f64 = 12.0;
/// Largest height of one outline, points: an orbit is easy to follow at this size.
const LARGEST_HEIGHT: f64 = 115.0;
/// Height of the whole grid, points, that still fits on a printed page (240 mm).
const PAGE: f64 = 680.0;
/// Panels beside each other, at most: with more, labels of ordinary length do not fit below them.
const MOST_COLUMNS: usize = 5;
/// Part of the largest possible size that an outline may give up for a picture with fewer rows.
const NEARLY: f64 = 0.85;
/// White border around an outline within its panel, points.
const RIM: f64 = 2.0;

/// Bounces above which no dots are drawn: they would hide the orbit.
const MOST_DOTS: usize = 40;

/// Walls behind an orbit.
const OUTLINE: Stroke = Stroke::solid(palette::GREY, 0.8);

/// How an orbit's line is drawn: by what it is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum OrbitStroke {
    /// Isolated orbit: solid.
    Isolated,
    /// Orbit along an axis of symmetry: dash-dotted.
    Axis,
    /// One member of a family: dashed.
    Family,
    /// Orbit through a joint: dotted.
    Joint,
}

impl OrbitStroke {
    const ALL: [Self; 4] = [Self::Isolated, Self::Axis, Self::Family, Self::Joint];

    fn stroke(self) -> Stroke {
        match self {
            Self::Isolated => Stroke::solid(palette::BLUE, 1.1),
            Self::Axis => Stroke::broken(palette::VERMILLION, 1.1, "8 2.5 1.5 2.5"),
            Self::Family => Stroke::broken(palette::GREEN, 1.1, "5 3"),
            Self::Joint => Stroke::broken(palette::BLACK, 1.3, "1.5 2.5"),
        }
    }

    fn meaning(self) -> &'static str {
        match self {
            Self::Isolated => "isolated orbit",
            Self::Axis => "orbit on an axis of symmetry",
            Self::Family => "one orbit of a family",
            Self::Joint => "orbit through a joint",
        }
    }
}

/// One orbit to be drawn.
#[derive(Clone, Debug)]
pub struct OrbitDrawing<'a> {
    /// What is written below it, such as `#3  L = 4.8284\n4 bounces`; a line too long for its panel is broken.
    pub label: String,
    /// Bounce points of the full orbit, in order; the last one is joined to the first.
    pub path: &'a [Vec2],
    /// How its line is drawn.
    pub stroke: OrbitStroke,
}

/// Draws up to [`LARGEST_GRID`] orbits, each in its own outline with its label below.
#[must_use]
pub fn orbits_picture(domain: &Domain, orbits: &[OrbitDrawing<'_>], title: &str) -> String {
    let shown = &orbits[..orbits.len().min(LARGEST_GRID)];
    let mut canvas = Canvas::new(title, &description(shown, orbits.len()));
    let mut top = canvas.heading() + 2.0;
    if shown.len() < orbits.len() || orbits.is_empty() {
        let text = if orbits.is_empty() {
            "no orbit to draw".to_owned()
        } else {
            format!("the first {} of {} orbits", shown.len(), orbits.len())
        };
        top = canvas.paragraph(&text, top, Lettering::plain(Anchor::Start));
    }
    let kinds: Vec<OrbitStroke> = OrbitStroke::ALL
        .into_iter()
        .filter(|kind| shown.iter().any(|orbit| orbit.stroke == *kind))
        .collect();
    if kinds.len() > 1 {
        let entries: Vec<_> = kinds
            .iter()
            .map(|kind| (Sample::Line(kind.stroke()), kind.meaning().to_owned()))
            .collect();
        top = legend(&mut canvas, &entries, BORDER, WIDTH - BORDER, top);
    }
    let bottom = draw_grid(&mut canvas, domain, shown, top + 6.0);
    canvas.finish(bottom + BORDER)
}

/// Draws the panels row by row; returns the height of the lower edge.
fn draw_grid(canvas: &mut Canvas, domain: &Domain, orbits: &[OrbitDrawing<'_>], top: f64) -> f64 {
    let frame = bounds(domain);
    let grid = Grid::for_labels(frame, orbits);
    let height = (frame.1.y - frame.0.y) * grid.scale + 2.0 * RIM;
    let mut top = top;
    for row in orbits.chunks(grid.columns) {
        let mut lines = 0;
        for (column, orbit) in row.iter().enumerate() {
            let left = BORDER + column as f64 * (grid.cell + GAP);
            let center = Vec2::new(left + 0.5 * grid.cell, top + 0.5 * height);
            draw_orbit(
                canvas,
                domain,
                orbit,
                &View::centered(frame, grid.scale, center),
            );
            let label = label_lines(&orbit.label, grid.cell);
            lines = lines.max(label.len());
            for (index, line) in label.iter().enumerate() {
                let base = top + height + TEXT + 2.0 + index as f64 * LEADING * TEXT;
                canvas.text(
                    Vec2::new(center.x, base),
                    Lettering::plain(Anchor::Middle),
                    line,
                );
            }
        }
        top += height + 2.0 + lines as f64 * LEADING * TEXT + GAP;
    }
    top - GAP
}

/// Lines of a label below a panel of some width.
fn label_lines(label: &str, cell: f64) -> Vec<String> {
    label
        .lines()
        .flat_map(|line| wrap(line, cell + 0.5 * GAP, TEXT))
        .collect()
}

/// How the panels share the sheet.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Grid {
    /// Panels beside each other.
    columns: usize,
    /// Width of one, points.
    cell: f64,
    /// Points per unit of length.
    scale: f64,
}

impl Grid {
    /// The largest number of columns with which the outlines become (nearly) as large as one page allows.
    fn for_labels(frame: (Vec2, Vec2), orbits: &[OrbitDrawing<'_>]) -> Self {
        let columns = orbits.len().clamp(1, MOST_COLUMNS);
        let grids: Vec<Self> = (1..=columns)
            .map(|columns| Self::with_columns(columns, frame, orbits))
            .collect();
        let largest = grids.iter().map(|grid| grid.scale).fold(0.0, f64::max);
        let compact = grids
            .into_iter()
            .rev()
            .find(|grid| grid.scale >= NEARLY * largest);
        compact.unwrap_or_else(|| Self::with_columns(1, frame, orbits))
    }

    fn with_columns(columns: usize, frame: (Vec2, Vec2), orbits: &[OrbitDrawing<'_>]) -> Self {
        let cell = (WIDTH - 2.0 * BORDER - GAP * (columns - 1) as f64) / columns as f64;
        let rows = orbits.len().div_ceil(columns).max(1) as f64;
        let lines = orbits
            .iter()
            .map(|orbit| label_lines(&orbit.label, cell).len())
            .max();
        let below = 2.0 + lines.unwrap_or(0) as f64 * LEADING * TEXT + GAP;
        // However long the labels, an outline keeps the height of two lines of text.
        let height = (PAGE / rows - below - 2.0 * RIM).clamp(2.0 * TEXT, LARGEST_HEIGHT);
        Self {
            columns,
            cell,
            scale: View::scale_for(frame, cell - 2.0 * RIM, height),
        }
    }
}

fn draw_orbit(canvas: &mut Canvas, domain: &Domain, orbit: &OrbitDrawing<'_>, view: &View) {
    for chain in &domain.loops {
        let path = view.loop_path(domain, chain);
        if chain.role == Role::Hole {
            canvas.area(&path, palette::LIGHT_GREY);
        }
        canvas.path(&path, OUTLINE);
    }
    let points: Vec<Vec2> = orbit
        .path
        .iter()
        .filter(|point| point.x.is_finite() && point.y.is_finite())
        .map(|point| view.place(*point))
        .collect();
    canvas.path(&trail(&points), orbit.stroke.stroke());
    if points.len() <= MOST_DOTS {
        let dots: BTreeMap<Place, Vec2> =
            points.iter().map(|point| (spot(*point), *point)).collect();
        for dot in dots.values() {
            canvas.circle(*dot, 1.7, orbit.stroke.stroke().color, None);
        }
    }
}

/// A point as it is written.
type Place = (String, String);

fn spot(point: Vec2) -> Place {
    (number(point.x), number(point.y))
}

/// Path data of a closed orbit, every chord once: dashes of a chord that runs there and back would fill each other's gaps.
fn trail(points: &[Vec2]) -> String {
    let mut chords: BTreeSet<(Place, Place)> = BTreeSet::new();
    let mut data = String::new();
    let mut runs: Vec<Vec<Vec2>> = Vec::new();
    let mut joined = false;
    for index in 0..points.len() {
        let (from, to) = (points[index], points[(index + 1) % points.len()]);
        let (a, b) = (spot(from), spot(to));
        let chord = if a <= b { (a, b) } else { (b, a) };
        if !chords.insert(chord) {
            joined = false;
        } else if let (true, Some(run)) = (joined, runs.last_mut()) {
            run.push(to);
        } else {
            runs.push(vec![from, to]);
            joined = true;
        }
    }
    for run in runs {
        data.push_str(&polyline(&run));
    }
    data
}

fn description(shown: &[OrbitDrawing<'_>], count: usize) -> String {
    let labels: Vec<&str> = shown.iter().map(|orbit| orbit.label.as_str()).collect();
    format!(
        "Periodic orbits in the outline of the domain, one in each panel, {} of {count}: {}.",
        shown.len(),
        labels.join("; ")
    )
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::super::testing::{checked, keep, mixed_polygon, ring, stadium};
    use super::*;

    /// Chords of a regular star, not real orbits: a picture does not ask.
    fn star(count: usize) -> Vec<Vec2> {
        (0..count)
            .map(|index| {
                let angle = 2.0 * std::f64::consts::TAU * index as f64 / count as f64;
                Vec2::new(angle.cos(), angle.sin())
            })
            .collect()
    }

    fn drawing(path: &[Vec2], index: usize) -> OrbitDrawing<'_> {
        OrbitDrawing {
            label: format!(
                "#{}  L = {:.4}\n{} bounces",
                index + 1,
                4.0 + 0.2 * index as f64,
                path.len()
            ),
            path,
            stroke: OrbitStroke::ALL[index % 4],
        }
    }

    #[test]
    fn full_grids_are_well_formed_and_say_what_they_leave_out() {
        let paths: Vec<Vec<Vec2>> = (0..30).map(|index| star(index + 2)).collect();
        let orbits: Vec<_> = paths
            .iter()
            .enumerate()
            .map(|(index, path)| drawing(path, index))
            .collect();
        for (name, domain) in [("stadium", stadium()), ("ring", ring())] {
            let picture = orbits_picture(&domain, &orbits, name);
            keep(&format!("orbits-{name}"), &picture);
            let texts = checked(&picture);
            assert!(texts.contains(&"the first 24 of 30 orbits".to_owned()));
            assert_eq!(picture, orbits_picture(&domain, &orbits, name));
            assert!(picture.len() < 200_000, "{}", picture.len());
        }
        let picture = orbits_picture(&stadium(), &orbits[..5], "five");
        keep("orbits-five", &picture);
        checked(&picture);
    }

    #[test]
    fn grids_fit_on_a_page() {
        let path = star(5);
        for (low, high) in [
            ([0.0, 0.0], [1.0, 1.0]),
            ([0.0, 0.0], [9.0, 1.0]),
            ([0.0, 0.0], [1.0, 9.0]),
        ] {
            let frame = (Vec2::from(low), Vec2::from(high));
            for count in 1..=LARGEST_GRID {
                let orbits: Vec<_> = (0..count).map(|index| drawing(&path, index)).collect();
                let grid = Grid::for_labels(frame, &orbits);
                let rows = count.div_ceil(grid.columns) as f64;
                let row = high[1] * grid.scale + 2.0 * (RIM + 1.0 + LEADING * TEXT) + GAP;
                assert!(rows * row <= PAGE + 1e-9, "{count}: {grid:?}");
                assert!(high[0] * grid.scale <= grid.cell);
            }
        }
    }

    #[test]
    fn chords_run_there_and_back_are_drawn_once() {
        let [a, b, c] = [[0.0, 0.0], [1.0, 0.0], [1.0, 2.0]].map(Vec2::from);
        assert_eq!(trail(&[a, b]), "M0 0L1 0");
        assert_eq!(trail(&[a, b, c, b]), "M0 0L1 0 1 2");
        assert_eq!(trail(&[a, b, c]), "M0 0L1 0 1 2 0 0");
        assert_eq!(trail(&[a, b, a, c]), "M0 0L1 0M0 0L1 2");
        assert_eq!(trail(&[]), "");
    }

    #[test]
    fn nothing_one_point_and_no_number_give_a_picture() {
        let domain = mixed_polygon();
        assert!(
            checked(&orbits_picture(&domain, &[], "none")).contains(&"no orbit to draw".to_owned())
        );
        let broken = [Vec2::new(f64::NAN, 0.0), Vec2::new(10.0, 10.0)];
        for path in [&broken[..0], &broken[..1], &broken[1..], &broken[..]] {
            let orbit = OrbitDrawing {
                label: "a < b & c".into(),
                path,
                stroke: OrbitStroke::Isolated,
            };
            let texts = checked(&orbits_picture(&domain, &[orbit], ""));
            assert!(texts.contains(&"a &lt; b &amp; c".to_owned()));
        }
    }
}
