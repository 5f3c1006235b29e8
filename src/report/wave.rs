//! A wave in its domain: signed values as colours, the outline over them.

use super::axis::{Axis, rounded};
use super::canvas::{Anchor, BORDER, Canvas, Lettering, Stroke, TEXT, WIDTH, number, palette};
use super::outline::{View, bounds};
use super::panel::Panel;
use crate::billiard::{Domain, Role, Vec2};
use std::fmt::Write;

/// Room for the labels of the y axis, points.
const LEFT: f64 = 56.0;
/// Largest height of the drawing, points: with title and caption it fits on half a page.
const LARGEST_HEIGHT: f64 = 330.0;
/// Part of the domain's extent left free around it.
const MARGIN: f64 = 0.04;
/// Shades on either side of zero: steps between them are just seen.
const SHADES: i32 = 9;
/// Cells along the longer side of the drawing: more would make the file larger than the picture is worth.
const MOST_CELLS: usize = 200;
/// Size of the bar that explains the colours, points.
const BAR: Vec2 = Vec2::new(120.0, 8.0);

/// The outline.
const OUTLINE: Stroke = Stroke::solid(palette::BLACK, 1.4);
/// Strongest colours of positive and negative values, as parts of red, green and blue: vermillion and blue of the palette.
const POSITIVE: [f64; 3] = [213.0, 94.0, 0.0];
const NEGATIVE: [f64; 3] = [0.0, 114.0, 178.0];

/// What is drawn of a wave.
#[derive(Clone, Copy, Debug)]
pub struct WaveDrawing<'a> {
    /// Title of the picture.
    pub title: &'a str,
    /// The domain.
    pub domain: &'a Domain,
    /// Unit of lengths, if there is one.
    pub length_unit: Option<&'a str>,
    /// Lower left point of the grid.
    pub origin: Vec2,
    /// Distance of neighbouring points in both directions.
    pub step: f64,
    /// Points in a row.
    pub columns: usize,
    /// Values at the points, row by row from below; not finite outside the domain.
    pub values: &'a [f64],
    /// What is written below.
    pub caption: &'a str,
}

/// Draws a wave: values above zero in vermillion, below zero in blue, the stronger the larger, white where it vanishes.
#[must_use]
pub fn wave_picture(wave: &WaveDrawing<'_>) -> String {
    let description = format!("A wave in its domain. {}", wave.caption);
    let mut canvas = Canvas::new(wave.title, &description);
    let top = canvas.heading() + 2.0;
    let top = bar(&mut canvas, top, largest(wave.values)) + 6.0;
    let (panel, view) = layout(wave.domain, top);
    let cells = Cells::new(wave);
    canvas.cells(
        view.place(cells.corner),
        cells.size * view.scale,
        &cells.strokes(),
    );
    mask(&mut canvas, wave.domain, &panel, &view);
    for wall in &wave.domain.walls {
        canvas.flat_path(&view.wall_path(wall), OUTLINE);
    }
    let bottom = panel.axes(&mut canvas, true);
    let named = |name: &str| {
        wave.length_unit
            .map_or(name.to_owned(), |unit| format!("{name} ({unit})"))
    };
    let bottom = panel.name_x(&mut canvas, &named("x"), bottom);
    panel.name_y(&mut canvas, &[named("y")], LEFT - BORDER - TEXT);
    let bottom = canvas.paragraph(wave.caption, bottom + 3.0, Lettering::plain(Anchor::Start));
    canvas.finish(bottom + BORDER)
}

/// The largest size of a value.
fn largest(values: &[f64]) -> f64 {
    values
        .iter()
        .filter(|value| value.is_finite())
        .fold(0.0, |size, value| size.max(value.abs()))
}

/// Panel and view of a domain, the panel's upper edge at a height; the panel is as wide as the domain.
fn layout(domain: &Domain, top: f64) -> (Panel, View) {
    let (low, high) = bounds(domain);
    let margin = MARGIN * (high - low).max();
    let (low, high) = (low - Vec2::repeat(margin), high + Vec2::repeat(margin));
    let width = WIDTH - LEFT - BORDER - 6.0;
    let scale = View::scale_for((low, high), width, LARGEST_HEIGHT);
    let size = (high - low) * scale;
    let corner = Vec2::new(LEFT + 0.5 * (width - size.x), top);
    let view = View::centered((low, high), scale, corner + 0.5 * size);
    let panel = Panel {
        corner,
        size,
        x: Axis {
            low: low.x,
            high: high.x,
        },
        y: Axis {
            low: low.y,
            high: high.y,
        },
    };
    (panel, view)
}

/// Covers everything outside the domain: cells at the edge reach over it.
fn mask(canvas: &mut Canvas, domain: &Domain, panel: &Panel, view: &View) {
    let paths = |role: Role| -> String {
        let chains = domain.loops.iter().filter(|chain| chain.role == role);
        chains.map(|chain| view.loop_path(domain, chain)).collect()
    };
    let (corner, size) = (panel.corner, panel.size);
    let frame = format!(
        "M{} {}h{}v{}h{}Z",
        number(corner.x),
        number(corner.y),
        number(size.x),
        number(size.y),
        number(-size.x)
    );
    canvas.area(&(frame + &paths(Role::Outer)), palette::WHITE);
    canvas.area(&paths(Role::Hole), palette::LIGHT_GREY);
}

/// The bar that explains the colours; returns the height of its lower edge.
fn bar(canvas: &mut Canvas, top: f64, largest: f64) -> f64 {
    let count = 2 * SHADES + 1;
    let cell = BAR.x / f64::from(count);
    let left = LEFT + 60.0;
    for shade in -SHADES..=SHADES {
        let corner = Vec2::new(left + f64::from(shade + SHADES) * cell, top + 1.0);
        // A little wider than its place, so that no gap shows.
        let opposite = corner + Vec2::new(cell + 0.1, BAR.y);
        canvas.rectangle(corner, opposite, &color(shade), None);
    }
    let base = top + BAR.y;
    let label = |canvas: &mut Canvas, x: f64, anchor, text: &str| {
        canvas.text(Vec2::new(x, base), Lettering::plain(anchor), text);
    };
    label(canvas, left - 4.0, Anchor::End, &rounded(-largest));
    label(
        canvas,
        left + BAR.x + 4.0,
        Anchor::Start,
        &format!("{} (u, normalised)", rounded(largest)),
    );
    top + BAR.y + 2.0
}

/// Colour of a shade: from white to the strongest colour of its sign.
fn color(shade: i32) -> String {
    let share = f64::from(shade.abs()) / f64::from(SHADES);
    let strongest = if shade < 0 { NEGATIVE } else { POSITIVE };
    let part = |full: f64| (255.0 + share * (full - 255.0)).round() as u8;
    format!(
        "#{:02X}{:02X}{:02X}",
        part(strongest[0]),
        part(strongest[1]),
        part(strongest[2])
    )
}

/// The grid of the drawing: every so many points of the wave's grid, and their shades.
struct Cells {
    /// Upper left corner in the plane.
    corner: Vec2,
    /// Size of a cell in the plane.
    size: f64,
    /// Shades row by row from above; none outside.
    rows: Vec<Vec<Option<i32>>>,
}

impl Cells {
    fn new(wave: &WaveDrawing<'_>) -> Self {
        let rows = wave.values.len() / wave.columns.max(1);
        let every = wave.columns.max(rows).div_ceil(MOST_CELLS).max(1);
        let largest = largest(wave.values).max(f64::MIN_POSITIVE);
        let shade = |value: f64| {
            value
                .is_finite()
                .then(|| (value / largest * f64::from(SHADES)).round() as i32)
        };
        // The point in the middle of every block of points stands for it, or one beside it where it lies outside.
        let of_block = |row: usize, column: usize| {
            let mut points: Vec<[usize; 2]> = (row..(row + every).min(rows))
                .flat_map(|i| (column..(column + every).min(wave.columns)).map(move |j| [i, j]))
                .collect();
            points.sort_by_key(|[i, j]| {
                (i - row).abs_diff(every / 2) + (j - column).abs_diff(every / 2)
            });
            points
                .iter()
                .find_map(|[i, j]| shade(wave.values[i * wave.columns + j]))
        };
        let below: Vec<Vec<Option<i32>>> = (0..rows)
            .step_by(every)
            .map(|row| {
                (0..wave.columns)
                    .step_by(every)
                    .map(|column| of_block(row, column))
                    .collect()
            })
            .collect();
        let size = every as f64 * wave.step;
        let mut rows = widened(&below);
        rows.reverse();
        // One cell was added on every side.
        let low = wave.origin - Vec2::repeat(0.5 * wave.step + size);
        Self {
            corner: low + Vec2::new(0.0, rows.len() as f64 * size),
            size,
            rows,
        }
    }

    /// For every colour the path along the middles of its cells, in units of a cell, rows downwards.
    fn strokes(&self) -> Vec<(String, String)> {
        let mut paths = vec![String::new(); 2 * SHADES as usize + 1];
        for (row, shades) in self.rows.iter().enumerate() {
            let mut column = 0;
            for run in shades.chunk_by(|a, b| a == b) {
                if let Some(path) = run[0]
                    .filter(|shade| *shade != 0)
                    .and_then(|shade| paths.get_mut((shade + SHADES) as usize))
                {
                    // Writing into a string cannot fail.
                    let _ = write!(path, "M{column} {row}.5h{}", run.len());
                }
                column += run.len();
            }
        }
        (-SHADES..=SHADES)
            .zip(paths)
            .filter(|(_, path)| !path.is_empty())
            .map(|(shade, path)| (color(shade), path))
            .collect()
    }
}

/// A frame of one cell is added, and cells outside take the shade of a neighbour inside: the outline runs between points.
fn widened(rows: &[Vec<Option<i32>>]) -> Vec<Vec<Option<i32>>> {
    let (high, wide) = (rows.len(), rows.first().map_or(0, Vec::len));
    let at = |row: usize, column: usize| -> Option<i32> {
        *rows.get(row.wrapping_sub(1))?.get(column.wrapping_sub(1))?
    };
    let near = |row: usize, column: usize| {
        let neighbours = [
            (1, 1),
            (0, 1),
            (2, 1),
            (1, 0),
            (1, 2),
            (0, 0),
            (0, 2),
            (2, 0),
            (2, 2),
        ];
        neighbours.iter().find_map(|(down, right)| {
            at(
                (row + down).wrapping_sub(1),
                (column + right).wrapping_sub(1),
            )
        })
    };
    (0..high + 2)
        .map(|row| (0..wide + 2).map(|column| near(row, column)).collect())
        .collect()
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::super::testing::{checked, keep, ring, slit_square};
    use super::*;
    use crate::billiard::Interior;

    fn draw(name: &str, domain: &Domain, points: usize) -> String {
        let (low, high) = bounds(domain);
        let step = (high - low).max() / points as f64;
        let origin = low + Vec2::repeat(0.5 * step);
        let count = |span: f64| (span / step).round() as usize;
        let (columns, rows) = (count((high - low).x), count((high - low).y));
        let interior = Interior::new(domain);
        let values: Vec<f64> = (0..rows * columns)
            .map(|index| {
                let cell = Vec2::new((index % columns) as f64, (index / columns) as f64);
                let point = origin + cell * step;
                if interior.contains(point) {
                    (9.0 * point.x).sin() * (7.0 * point.y).cos()
                } else {
                    f64::NAN
                }
            })
            .collect();
        let picture = wave_picture(&WaveDrawing {
            title: "an invented wave",
            domain,
            length_unit: Some("mm"),
            origin,
            step,
            columns,
            values: &values,
            caption: "k = 12.345.",
        });
        checked(&picture);
        keep(name, &picture);
        picture
    }

    #[test]
    fn waves_are_drawn_in_small_files() {
        for (name, domain) in [("wave-ring", ring()), ("wave-slit", slit_square())] {
            for points in [2, 40, 320] {
                let picture = draw(&format!("{name}-{points}"), &domain, points);
                assert!(picture.len() < 300_000, "{name}: {}", picture.len());
            }
        }
    }

    #[test]
    fn cells_lie_where_their_points_are() {
        let wave = WaveDrawing {
            title: "",
            domain: &ring(),
            length_unit: None,
            origin: Vec2::new(0.5, 0.5),
            step: 1.0,
            columns: 2,
            values: &[1.0, f64::NAN, -1.0, 0.0],
            caption: "",
        };
        let cells = Cells::new(&wave);
        assert_eq!(cells.corner, Vec2::new(-1.0, 3.0));
        assert_eq!(cells.rows.len(), 4);
        // The lower left point is the strongest positive one, above it the strongest negative one.
        assert_eq!(cells.rows[2][1], Some(SHADES));
        assert_eq!(cells.rows[1][1], Some(-SHADES));
        assert_eq!(cells.rows[1][2], Some(0));
        assert_eq!(color(0), "#FFFFFF");
    }
}
