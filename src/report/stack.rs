//! Panels over the whole width of a sheet, one above the other over the same axis.

use super::axis::Axis;
use super::canvas::{Anchor, BORDER, Canvas, Lettering, TEXT, WIDTH};
use super::legend::{Entry, legend};
use super::panel::Panel;
use crate::billiard::Vec2;

/// Room for names and labels of the y axes, points.
const LEFT: f64 = 68.0;
/// Room to the right of the panels for half a label, points.
const RIGHT: f64 = 18.0;
/// Width of the panels, points.
pub(super) const PANEL_WIDTH: f64 = WIDTH - LEFT - RIGHT;

/// A panel over the whole width, its upper edge at a height.
pub(super) fn panel_at(top: f64, height: f64, x: Axis, y: Axis) -> Panel {
    Panel {
        corner: Vec2::new(LEFT, top),
        size: Vec2::new(PANEL_WIDTH, height),
        x,
        y,
    }
}

/// Writes a legend above a panel, returns where the panel begins.
pub(super) fn legend_above(canvas: &mut Canvas, entries: &[Entry], top: f64) -> f64 {
    legend(canvas, entries, LEFT, WIDTH - BORDER, top) + 3.0
}

/// Names the common axis below the lowest panel, writes the captions and ends the sheet.
pub(super) fn finish(
    mut canvas: Canvas,
    x: Axis,
    name: &str,
    captions: &[String],
    bottom: f64,
) -> String {
    let axis = panel_at(bottom, TEXT, x, Axis::new(0.0, 1.0));
    let mut bottom = axis.name_x(&mut canvas, name, bottom) + 3.0;
    for caption in captions {
        bottom = canvas.paragraph(caption, bottom, Lettering::plain(Anchor::Start));
    }
    canvas.finish(bottom + BORDER)
}

/// A variable with its unit, if it has one.
pub(super) fn named(variable: &str, unit: Option<&str>) -> String {
    unit.map_or_else(
        || variable.to_owned(),
        |unit| format!("{variable} ({unit})"),
    )
}
