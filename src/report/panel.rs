//! A rectangle of the sheet with two axes.

use super::axis::Axis;
use super::canvas::{Anchor, Canvas, Lettering, Stroke, TEXT, palette, polyline};
use super::outline::stroke_through;
use super::thinning::{thinned, thinned_positions};
use crate::billiard::Vec2;

/// Length of a tick, points.
const TICK: f64 = 4.0;
/// Space that a label along x wants, points.
const LABEL_WIDTH: f64 = 55.0;
/// Space that a label along y wants, points.
const LABEL_HEIGHT: f64 = 18.0;
/// Intervals between ticks along y, however high the panel.
const MOST_INTERVALS: usize = 8;
/// Height of the ticks that mark positions along the lower edge, points.
const RUG: f64 = 7.0;

/// Frame, axes and ticks.
const FRAME: Stroke = Stroke::solid(palette::BLACK, 0.7);
/// Lines across the panel at the ticks.
const GRID: Stroke = Stroke::solid(palette::LIGHT_GREY, 0.4);
/// Ticks that mark positions such as levels.
pub(super) const RUG_STROKE: Stroke = Stroke::solid(palette::BLACK, 0.6);

/// A rectangle of the sheet with two axes.
#[derive(Clone, Copy, Debug)]
pub(super) struct Panel {
    /// Upper left corner on the sheet.
    pub(super) corner: Vec2,
    /// Width and height on the sheet.
    pub(super) size: Vec2,
    /// Range along x.
    pub(super) x: Axis,
    /// Range along y.
    pub(super) y: Axis,
}

impl Panel {
    /// Where a point of the ranges lies on the sheet.
    pub(super) fn place(&self, x: f64, y: f64) -> Vec2 {
        Vec2::new(
            self.corner.x + self.x.fraction(x) * self.size.x,
            self.corner.y + (1.0 - self.y.fraction(y)) * self.size.y,
        )
    }

    /// Height of the lower edge on the sheet.
    pub(super) fn bottom(&self) -> f64 {
        self.corner.y + self.size.y
    }

    /// Right edge on the sheet.
    pub(super) fn right(&self) -> f64 {
        self.corner.x + self.size.x
    }

    /// Lines across the panel at the ticks; to be drawn before everything else in it.
    pub(super) fn grid(&self, canvas: &mut Canvas) {
        for x in self.x.ticks(self.most_x()).values {
            let place = self.place(x, self.y.low);
            canvas.line(place, Vec2::new(place.x, self.corner.y), GRID);
        }
        for y in self.y.ticks(self.most_y()).values {
            let place = self.place(self.x.low, y);
            canvas.line(place, Vec2::new(self.right(), place.y), GRID);
        }
    }

    /// Frame and ticks, y with its labels and x with them if wanted; to be drawn after everything else. Returns the height
    /// of the lower edge of it all.
    pub(super) fn axes(&self, canvas: &mut Canvas, label_x: bool) -> f64 {
        canvas.rectangle(self.corner, self.corner + self.size, "none", Some(FRAME));
        self.vertical_axis(canvas);
        self.horizontal_axis(canvas, label_x)
    }

    fn vertical_axis(&self, canvas: &mut Canvas) {
        let ticks = self.y.ticks(self.most_y());
        for (value, label) in ticks.values.iter().zip(&ticks.labels) {
            let place = self.place(self.x.low, *value);
            canvas.line(place, place + Vec2::new(TICK, 0.0), FRAME);
            canvas.text(
                place + Vec2::new(-4.0, 0.35 * TEXT),
                Lettering::plain(Anchor::End),
                label,
            );
        }
        canvas.text(
            self.corner + Vec2::new(-4.0, -0.5 * TEXT),
            Lettering::plain(Anchor::End),
            &ticks.note,
        );
    }

    fn horizontal_axis(&self, canvas: &mut Canvas, labelled: bool) -> f64 {
        let ticks = self.x.ticks(self.most_x());
        let base = self.bottom() + 3.0 + TEXT;
        for (value, label) in ticks.values.iter().zip(&ticks.labels) {
            let place = self.place(*value, self.y.low);
            canvas.line(place, place - Vec2::new(0.0, TICK), FRAME);
            if labelled {
                canvas.text(
                    Vec2::new(place.x, base),
                    Lettering::plain(Anchor::Middle),
                    label,
                );
            }
        }
        if !labelled {
            return self.bottom();
        }
        canvas.text(
            Vec2::new(self.right(), base + 1.3 * TEXT),
            Lettering::plain(Anchor::End),
            &ticks.note,
        );
        base + 3.0
    }

    /// Name of the x axis, below labels that end at `top`; returns the height of its lower edge.
    pub(super) fn name_x(&self, canvas: &mut Canvas, name: &str, top: f64) -> f64 {
        let place = Vec2::new(self.corner.x + 0.5 * self.size.x, top + TEXT);
        canvas.text(place, Lettering::plain(Anchor::Middle), name);
        top + TEXT + 3.0
    }

    /// Name of the y axis, line by line, `distance` to the left of the panel (last line).
    pub(super) fn name_y(&self, canvas: &mut Canvas, lines: &[String], distance: f64) {
        let middle = self.corner.y + 0.5 * self.size.y;
        for (index, line) in lines.iter().rev().enumerate() {
            let x = self.corner.x - distance - index as f64 * 1.25 * TEXT;
            canvas.text(Vec2::new(x, middle), Lettering::upright(), line);
        }
    }

    /// A curve; points that are not finite leave gaps.
    pub(super) fn curve(&self, canvas: &mut Canvas, x: &[f64], y: &[f64], stroke: Stroke) {
        let points = x.iter().zip(y).map(|(x, y)| self.place(*x, *y));
        for run in thinned(points) {
            canvas.path(&polyline(&run), stroke);
        }
    }

    /// A line across the panel at a height.
    pub(super) fn level_line(&self, canvas: &mut Canvas, y: f64, stroke: Stroke) {
        canvas.line(
            self.place(self.x.low, y),
            self.place(self.x.high, y),
            stroke,
        );
    }

    /// A filled strip across the panel between two heights.
    pub(super) fn band(&self, canvas: &mut Canvas, low: f64, high: f64, fill: &str) {
        canvas.rectangle(
            self.place(self.x.low, low),
            self.place(self.x.high, high),
            fill,
            None,
        );
    }

    /// Ticks that stand on the lower edge at some positions.
    pub(super) fn rug(&self, canvas: &mut Canvas, positions: &[f64]) {
        let inside = positions
            .iter()
            .filter(|x| (self.x.low..=self.x.high).contains(*x))
            .map(|x| self.place(*x, self.y.low).x);
        let middle = self.bottom() - 0.5 * RUG;
        let path: String = thinned_positions(inside)
            .into_iter()
            .map(|x| stroke_through(Vec2::new(x, middle), Vec2::y(), 0.5 * RUG))
            .collect();
        canvas.flat_path(&path, RUG_STROKE);
    }

    /// Says in the upper part of the panel why it is empty (a line at zero may run through its middle).
    pub(super) fn remark(&self, canvas: &mut Canvas, text: &str) {
        let place = self.corner + Vec2::new(0.5 * self.size.x, 0.3 * self.size.y);
        canvas.text(place, Lettering::plain(Anchor::Middle), text);
    }

    fn most_x(&self) -> usize {
        ((self.size.x / LABEL_WIDTH) as usize).max(2)
    }

    fn most_y(&self) -> usize {
        ((self.size.y / LABEL_HEIGHT) as usize).clamp(2, MOST_INTERVALS)
    }
}
