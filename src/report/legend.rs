//! Legends: rows of samples with their meaning, above what they explain.

use super::canvas::{Anchor, Canvas, LEADING, Lettering, Stroke, TEXT, palette, text_width};
use super::outline::stroke_through;
use crate::billiard::Vec2;

/// Width of a sample, points: two periods of the longest dash.
const SAMPLE: f64 = 26.0;
/// Space between a sample and its text, points.
const NEAR: f64 = 4.0;
/// Space between two entries, points.
const APART: f64 = 14.0;
/// Height of a row, points.
const ROW: f64 = TEXT * LEADING + 1.0;

/// What is explained.
#[derive(Clone, Copy, Debug)]
pub(super) enum Sample {
    /// A line.
    Line(Stroke),
    /// A filled strip between two lines.
    Band(Stroke),
    /// A mark of a given form.
    Mark(Mark),
    /// Ticks in a row.
    Rug(Stroke),
    /// A filled area.
    Area(&'static str),
    /// Nothing: the text speaks for itself.
    Nothing,
}

/// Marks that differ by their form.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Mark {
    /// Open circle.
    Circle,
    /// Small filled square.
    Square,
    /// Short stroke along a direction; upright in a legend.
    Stroke,
    /// Upright cross.
    Cross,
}

impl Mark {
    /// Draws the mark; a stroke runs along `direction`, a unit vector on the sheet.
    pub(super) fn draw(self, canvas: &mut Canvas, place: Vec2, direction: Vec2) {
        let thin = Stroke::solid(palette::BLACK, 1.0);
        match self {
            Self::Circle => canvas.circle(
                place,
                3.6,
                palette::WHITE,
                Some(Stroke::solid(palette::BLACK, 1.3)),
            ),
            Self::Square => {
                let half = Vec2::repeat(2.4);
                canvas.rectangle(place - half, place + half, palette::BLACK, None);
            }
            Self::Stroke => canvas.flat_path(
                &stroke_through(place, direction, 5.0),
                Stroke::solid(palette::BLACK, 1.2),
            ),
            Self::Cross => {
                canvas.flat_path(&stroke_through(place, Vec2::x(), 4.0), thin);
                canvas.flat_path(&stroke_through(place, Vec2::y(), 4.0), thin);
            }
        }
    }
}

/// A sample and its meaning.
pub(super) type Entry = (Sample, String);

/// Writes the entries in rows between `left` and `right`, downwards from `top`; returns the height of the lower edge.
pub(super) fn legend(
    canvas: &mut Canvas,
    entries: &[Entry],
    left: f64,
    right: f64,
    top: f64,
) -> f64 {
    if entries.is_empty() {
        return top;
    }
    let (mut x, mut y) = (left, top);
    for (sample, text) in entries {
        let indent = match sample {
            Sample::Nothing => 0.0,
            _ => SAMPLE + NEAR,
        };
        let width = indent + text_width(text, TEXT);
        if x > left && x + width > right {
            x = left;
            y += ROW;
        }
        draw(canvas, *sample, x, y + 0.5 * ROW);
        canvas.text(
            Vec2::new(x + indent, y + 0.5 * ROW + 0.35 * TEXT),
            Lettering::plain(Anchor::Start),
            text,
        );
        x += width + APART;
    }
    y + ROW
}

fn draw(canvas: &mut Canvas, sample: Sample, x: f64, y: f64) {
    let (from, to) = (Vec2::new(x, y), Vec2::new(x + SAMPLE, y));
    match sample {
        Sample::Nothing => {}
        Sample::Line(stroke) => canvas.line(from, to, stroke),
        Sample::Band(stroke) => {
            let half = Vec2::new(0.0, 3.5);
            canvas.rectangle(from - half, to + half, palette::LIGHT_GREY, None);
            canvas.line(from - half, to - half, stroke);
            canvas.line(from + half, to + half, stroke);
        }
        Sample::Mark(mark) => mark.draw(canvas, 0.5 * (from + to), Vec2::y()),
        Sample::Rug(stroke) => {
            for share in [0.15, 0.35, 0.45, 0.7, 0.85] {
                let place = Vec2::new(x + share * SAMPLE, y);
                canvas.flat_path(&stroke_through(place, Vec2::y(), 3.5), stroke);
            }
        }
        Sample::Area(fill) => {
            let half = Vec2::new(0.0, 4.0);
            canvas.rectangle(
                from - half,
                to + half,
                fill,
                Some(Stroke::solid(palette::BLACK, 0.5)),
            );
        }
    }
}
