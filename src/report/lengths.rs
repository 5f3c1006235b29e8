//! Length spectra: levels upwards, orbits mirrored downwards, and their difference.

use super::axis::{Axis, rounded};
use super::canvas::{Anchor, Canvas, Lettering, Stroke, TEXT, palette};
use super::legend::Sample;
use super::panel::Panel;
use super::stack::{finish, legend_above, named, panel_at};
use crate::billiard::Vec2;

/// Heights of the panels, points.
const SPECTRUM_HEIGHT: f64 = 220.0;
const DIFFERENCE_HEIGHT: f64 = 120.0;
/// Part of a range that is kept free above its curves for the labels of peaks.
const LABEL_SHARE: f64 = 0.2;
/// Part of a range that is kept free on the other side.
const MARGIN: f64 = 0.04;
/// Distance of a label from its peak, points.
const ABOVE: f64 = 3.0;
/// Smallest distance of two labels, points.
const APART: f64 = TEXT;

/// Levels.
const LEVELS: Stroke = Stroke::solid(palette::BLACK, 1.1);
/// Orbits.
const ORBITS: Stroke = Stroke::solid(palette::BLUE, 1.1);
/// Complex difference.
const DIFFERENCE: Stroke = Stroke::solid(palette::VERMILLION, 1.1);
/// Noise.
const NOISE: Stroke = Stroke::broken(palette::BLACK, 0.8, "3 2");
/// Zero.
const ZERO: Stroke = Stroke::solid(palette::GREY, 0.6);

/// A place of a spectrum with what is written there.
#[derive(Clone, Debug, PartialEq)]
pub struct LengthMark {
    /// Length.
    pub length: f64,
    /// Height, in levels.
    pub height: f64,
    /// What is written.
    pub label: String,
}

/// Length spectra, all over the same lengths.
#[derive(Clone, Copy, Debug, Default)]
pub struct LengthCurves<'a> {
    /// Title of the picture.
    pub title: &'a str,
    /// Unit of lengths, if it has one.
    pub unit: Option<&'a str>,
    /// Lengths, increasing.
    pub lengths: &'a [f64],
    /// Modulus of the levels' spectrum, in levels.
    pub levels: &'a [f64],
    /// Modulus of the orbits' spectrum.
    pub orbits: &'a [f64],
    /// Modulus of their complex difference.
    pub difference: &'a [f64],
    /// What is listed passes this.
    pub threshold: &'a [f64],
    /// Length beyond which the two are not compared.
    pub compared_to: f64,
    /// Peaks of the levels.
    pub peaks: &'a [LengthMark],
    /// Peaks of the difference that are listed.
    pub misfits: &'a [LengthMark],
    /// What is written below the panels, one paragraph each.
    pub captions: &'a [String],
}

/// Draws the spectra one above the other over the same axis.
#[must_use]
pub fn lengths_picture(curves: &LengthCurves<'_>) -> String {
    let mut canvas = Canvas::new(curves.title, &description(curves));
    let x = Axis::around(curves.lengths.iter().copied());
    let top = canvas.heading() + 2.0;
    let top = spectrum_panel(&mut canvas, curves, x, top);
    let bottom = difference_panel(&mut canvas, curves, x, top);
    let name = named("length", curves.unit);
    finish(canvas, x, &name, curves.captions, bottom)
}

fn largest(values: &[f64]) -> f64 {
    values
        .iter()
        .copied()
        .filter(|value| value.is_finite())
        .fold(0.0, f64::max)
}

/// A panel's shade where nothing is compared, and its grid.
fn ground(canvas: &mut Canvas, panel: &Panel, curves: &LengthCurves<'_>) {
    if curves.compared_to < panel.x.high {
        let from = panel.place(curves.compared_to.max(panel.x.low), panel.y.high);
        let to = panel.place(panel.x.high, panel.y.low);
        canvas.rectangle(from, to, palette::LIGHT_GREY, None);
    }
    panel.grid(canvas);
    panel.level_line(canvas, 0.0, ZERO);
}

fn spectrum_panel(canvas: &mut Canvas, curves: &LengthCurves<'_>, x: Axis, top: f64) -> f64 {
    let entries = [
        (Sample::Line(LEVELS), "levels (upwards)".to_owned()),
        (Sample::Line(ORBITS), "orbits (downwards)".to_owned()),
    ];
    let (up, down) = (largest(curves.levels), largest(curves.orbits));
    let whole = (up + down).max(f64::MIN_POSITIVE) / (1.0 - LABEL_SHARE - MARGIN);
    let y = Axis::new(-down - MARGIN * whole, up + LABEL_SHARE * whole);
    let panel = panel_at(legend_above(canvas, &entries, top), SPECTRUM_HEIGHT, x, y);
    ground(canvas, &panel, curves);
    let mirrored: Vec<f64> = curves.orbits.iter().map(|value| -value).collect();
    panel.curve(canvas, curves.lengths, &mirrored, ORBITS);
    panel.curve(canvas, curves.lengths, curves.levels, LEVELS);
    label(canvas, &panel, curves.peaks);
    if curves.lengths.is_empty() {
        panel.remark(canvas, "nothing to draw");
    }
    panel.name_y(canvas, &["amplitude".into(), "(levels)".into()], 42.0);
    panel.axes(canvas, false) + 6.0
}

fn difference_panel(canvas: &mut Canvas, curves: &LengthCurves<'_>, x: Axis, top: f64) -> f64 {
    let entries = [
        (
            Sample::Line(DIFFERENCE),
            "complex difference of the two".to_owned(),
        ),
        (
            Sample::Line(NOISE),
            "not listed below, nor below a tenth of the peaks".to_owned(),
        ),
    ];
    let high = largest(curves.difference).max(f64::MIN_POSITIVE);
    let y = Axis::new(0.0, high / (1.0 - 2.0 * LABEL_SHARE));
    let panel = panel_at(legend_above(canvas, &entries, top), DIFFERENCE_HEIGHT, x, y);
    ground(canvas, &panel, curves);
    let inside = |value: &f64| if *value <= y.high { *value } else { f64::NAN };
    let noise: Vec<f64> = curves.threshold.iter().map(inside).collect();
    panel.curve(canvas, curves.lengths, &noise, NOISE);
    panel.curve(canvas, curves.lengths, curves.difference, DIFFERENCE);
    label(canvas, &panel, curves.misfits);
    panel.name_y(canvas, &["difference".into(), "(levels)".into()], 42.0);
    panel.axes(canvas, true)
}

/// Writes labels above their places, upright, the highest first, as many as fit beside each other.
fn label(canvas: &mut Canvas, panel: &Panel, marks: &[LengthMark]) {
    let mut order: Vec<&LengthMark> = marks
        .iter()
        .filter(|mark| mark.height.is_finite() && mark.length.is_finite())
        .collect();
    order.sort_by(|a, b| b.height.total_cmp(&a.height));
    let mut taken: Vec<f64> = Vec::new();
    for mark in order {
        let place = panel.place(mark.length, mark.height);
        if taken.iter().any(|x| (x - place.x).abs() < APART) {
            continue;
        }
        taken.push(place.x);
        let lettering = Lettering {
            anchor: Anchor::Start,
            ..Lettering::upright()
        };
        let corner = place + Vec2::new(0.35 * TEXT, -ABOVE);
        canvas.text(corner, lettering, &mark.label);
    }
}

fn description(curves: &LengthCurves<'_>) -> String {
    let x = Axis::around(curves.lengths.iter().copied());
    format!(
        "Length spectra of levels and orbits from {} to {}{}; largest difference {} level.",
        rounded(x.low),
        rounded(x.high),
        curves
            .unit
            .map(|unit| format!(" {unit}"))
            .unwrap_or_default(),
        rounded(largest(curves.difference))
    )
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::super::testing::{checked, keep};
    use super::*;

    fn mark(length: f64, height: f64) -> LengthMark {
        LengthMark {
            length,
            height,
            label: format!("{length}"),
        }
    }

    #[test]
    fn peaks_are_labelled_and_the_picture_is_repeatable() {
        let lengths: Vec<f64> = (0..2000).map(|i| 0.5 + 0.006 * f64::from(i)).collect();
        let bump = |at: f64, l: f64| (-(l - at).powi(2) / 0.02).exp();
        let of = |f: &dyn Fn(f64) -> f64| lengths.iter().map(|l| f(*l)).collect::<Vec<f64>>();
        let levels = of(&|l| 0.4 * bump(2.0, l) + 0.2 * bump(7.0, l));
        let orbits = of(&|l| 0.4 * bump(2.0, l));
        let difference = of(&|l| 0.2 * bump(7.0, l));
        let threshold = of(&|l| 0.02 + 0.5 / (l * l));
        let curves = LengthCurves {
            title: "invented spectra",
            unit: Some("mm"),
            lengths: &lengths,
            levels: &levels,
            orbits: &orbits,
            difference: &difference,
            threshold: &threshold,
            compared_to: 11.0,
            peaks: &[mark(2.0, 0.4), mark(2.01, 0.3), mark(7.0, 0.2)],
            misfits: &[mark(7.0, 0.2)],
            captions: &["Invented.".into()],
        };
        let picture = lengths_picture(&curves);
        keep("lengths", &picture);
        let texts = checked(&picture);
        assert!(texts.contains(&"length (mm)".to_owned()));
        assert!(texts.contains(&"2".to_owned()) && !texts.contains(&"2.01".to_owned()));
        assert_eq!(picture, lengths_picture(&curves));
    }

    #[test]
    fn nothing_and_no_number_give_a_picture() {
        let picture = lengths_picture(&LengthCurves::default());
        assert!(checked(&picture).contains(&"nothing to draw".to_owned()));
        let broken = [f64::NAN, f64::INFINITY, -1.0];
        checked(&lengths_picture(&LengthCurves {
            lengths: &broken,
            levels: &broken,
            orbits: &broken[..1],
            difference: &broken,
            threshold: &broken,
            compared_to: f64::NAN,
            peaks: &[mark(f64::NAN, 1.0)],
            ..LengthCurves::default()
        }));
    }
}
