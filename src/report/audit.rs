//! Audit of a level list: the residual before and after correction, with its findings marked.

use super::axis::{Axis, rounded};
use super::canvas::{Anchor, Canvas, Lettering, Stroke, TEXT, palette, polyline};
use super::legend::{Entry, Mark, Sample};
use super::panel::Panel;
use super::stack::{finish, legend_above, named, panel_at};
use super::thinning::thinned;
use crate::billiard::Vec2;

/// Heights of the panels, points.
const BEFORE_HEIGHT: f64 = 190.0;
const AFTER_HEIGHT: f64 = 110.0;
/// Free part of a range above and below its curves.
const MARGIN: f64 = 0.06;
/// Part of the range kept free above the curves for marks and labels of findings.
const LABEL_SHARE: f64 = 0.3;
/// Distance of a mark from the upper edge and of a label from its mark, points.
const MARK_BELOW: f64 = 9.0;
const LABEL_BELOW: f64 = 8.0;
/// Smallest distance of two labels, points.
const APART: f64 = TEXT;

/// The residual.
const RESIDUAL: Stroke = Stroke::solid(palette::BLACK, 1.1);
/// The corrected residual.
const CORRECTED: Stroke = Stroke::solid(palette::BLUE, 1.1);
/// Inside of the band of noise.
const NOISE: &str = palette::LIGHT_GREY;
/// Zero.
const ZERO: Stroke = Stroke::solid(palette::GREY, 0.6);

/// What an event is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum AuditMarkKind {
    /// A missing level.
    Missing,
    /// A false level.
    False,
    /// A level that lies elsewhere.
    Shifted,
    /// One listed level that stands for several.
    Unresolved,
}

impl AuditMarkKind {
    const ALL: [Self; 4] = [Self::Missing, Self::False, Self::Shifted, Self::Unresolved];

    fn mark(self) -> Mark {
        match self {
            Self::Missing => Mark::Circle,
            Self::False => Mark::Cross,
            Self::Shifted => Mark::Square,
            Self::Unresolved => Mark::Stroke,
        }
    }

    fn stroke(self) -> Stroke {
        match self {
            Self::Missing => Stroke::solid(palette::VERMILLION, 0.8),
            Self::False => Stroke::broken(palette::VERMILLION, 0.8, "5 2"),
            Self::Shifted => Stroke::broken(palette::GREEN, 0.9, "2 2"),
            Self::Unresolved => Stroke::broken(palette::GREEN, 0.9, "6 2 1 2"),
        }
    }

    fn name(self) -> &'static str {
        match self {
            Self::Missing => "missing",
            Self::False => "false",
            Self::Shifted => "shifted",
            Self::Unresolved => "unresolved",
        }
    }
}

/// An event and what is written beside its mark.
#[derive(Clone, Debug, PartialEq)]
pub struct AuditMark {
    /// What it is.
    pub kind: AuditMarkKind,
    /// Where, in the spectral variable.
    pub at: f64,
    /// What is written.
    pub label: String,
}

/// Residual of a list, all over the same positions `x`.
#[derive(Clone, Copy, Debug, Default)]
pub struct AuditCurves<'a> {
    /// Title of the picture.
    pub title: &'a str,
    /// Spectral variable: `k`, `energy` or `frequency`.
    pub variable: &'a str,
    /// Its unit, such as `GHz`, if it has one.
    pub unit: Option<&'a str>,
    /// Positions, increasing, in the spectral variable.
    pub x: &'a [f64],
    /// Smoothed staircase of the list less the prediction, in levels.
    pub before: &'a [f64],
    /// The same for the corrected list.
    pub after: &'a [f64],
    /// Standard deviation of the noise, in levels.
    pub noise: &'a [f64],
    /// Events.
    pub marks: &'a [AuditMark],
    /// What is written below the panels, one paragraph each.
    pub captions: &'a [String],
}

/// Draws the residual with the events marked, and below it the residual of the corrected list, over the same axis.
#[must_use]
pub fn audit_picture(curves: &AuditCurves<'_>) -> String {
    let mut canvas = Canvas::new(curves.title, &description(curves));
    let x = Axis::around(curves.x.iter().copied());
    let top = canvas.heading() + 2.0;
    let top = before_panel(&mut canvas, curves, x, top);
    let bottom = after_panel(&mut canvas, curves, x, top);
    let name = named(curves.variable, curves.unit);
    finish(canvas, x, &name, curves.captions, bottom)
}

fn before_panel(canvas: &mut Canvas, curves: &AuditCurves<'_>, x: Axis, top: f64) -> f64 {
    let mut entries: Vec<Entry> = vec![
        (Sample::Line(RESIDUAL), "list less prediction".to_owned()),
        (Sample::Area(NOISE), "its noise".to_owned()),
    ];
    for kind in AuditMarkKind::ALL {
        if curves.marks.iter().any(|mark| mark.kind == kind) {
            entries.push((Sample::Mark(kind.mark()), kind.name().to_owned()));
        }
    }
    let range = Axis::around(
        curves
            .before
            .iter()
            .copied()
            .chain(both_signs(curves.noise)),
    )
    .widened(MARGIN);
    let y = match curves.marks.is_empty() {
        true => range,
        false => Axis::new(
            range.low,
            range.high + LABEL_SHARE * range.span() / (1.0 - LABEL_SHARE),
        ),
    };
    let panel = panel_at(legend_above(canvas, &entries, top), BEFORE_HEIGHT, x, y);
    ground(canvas, &panel, curves);
    lines(canvas, &panel, curves.marks, panel.corner.y + MARK_BELOW);
    panel.curve(canvas, curves.x, curves.before, RESIDUAL);
    mark(canvas, &panel, curves.marks);
    if !curves.before.iter().any(|value| value.is_finite()) {
        panel.remark(canvas, "nothing to draw");
    }
    panel.name_y(canvas, &["residual".into(), "(levels)".into()], 42.0);
    panel.axes(canvas, false) + 6.0
}

fn after_panel(canvas: &mut Canvas, curves: &AuditCurves<'_>, x: Axis, top: f64) -> f64 {
    let entries = [
        (
            Sample::Line(CORRECTED),
            "corrected list less prediction".to_owned(),
        ),
        (Sample::Area(NOISE), "its noise".to_owned()),
    ];
    let y = Axis::around(curves.after.iter().copied().chain(both_signs(curves.noise)))
        .symmetric()
        .widened(MARGIN);
    let panel = panel_at(legend_above(canvas, &entries, top), AFTER_HEIGHT, x, y);
    ground(canvas, &panel, curves);
    lines(canvas, &panel, curves.marks, panel.corner.y);
    panel.curve(canvas, curves.x, curves.after, CORRECTED);
    panel.name_y(canvas, &["corrected".into(), "(levels)".into()], 42.0);
    panel.axes(canvas, true)
}

fn both_signs(values: &[f64]) -> impl Iterator<Item = f64> + '_ {
    values.iter().flat_map(|value| [*value, -value])
}

/// Band of noise, grid and zero of a panel.
fn ground(canvas: &mut Canvas, panel: &Panel, curves: &AuditCurves<'_>) {
    let inside: Vec<(f64, f64)> = curves
        .x
        .iter()
        .zip(curves.noise)
        .filter(|(x, noise)| x.is_finite() && noise.is_finite())
        .map(|(x, noise)| (*x, noise.min(panel.y.high.abs())))
        .collect();
    let edge = |sign: f64| -> Vec<Vec2> {
        let edge = inside
            .iter()
            .map(|(x, noise)| panel.place(*x, (sign * noise).max(panel.y.low)));
        thinned(edge).into_iter().flatten().collect()
    };
    let mut rim = edge(1.0);
    rim.extend(edge(-1.0).into_iter().rev());
    if rim.len() > 2 {
        canvas.area(&polyline(&rim), NOISE);
    }
    panel.grid(canvas);
    panel.level_line(canvas, 0.0, ZERO);
}

/// The marks inside a panel.
fn inside<'a>(panel: &Panel, marks: &'a [AuditMark]) -> Vec<&'a AuditMark> {
    marks
        .iter()
        .filter(|mark| (panel.x.low..=panel.x.high).contains(&mark.at))
        .collect()
}

/// A line across the panel at each event, from a height down to the lower edge.
fn lines(canvas: &mut Canvas, panel: &Panel, marks: &[AuditMark], top: f64) {
    for mark in inside(panel, marks) {
        let foot = panel.place(mark.at, panel.y.low);
        canvas.line(Vec2::new(foot.x, top), foot, mark.kind.stroke());
    }
}

/// Marks at the upper edge, and below each its place, upright, as many as fit beside each other.
fn mark(canvas: &mut Canvas, panel: &Panel, marks: &[AuditMark]) {
    let mut last = f64::NEG_INFINITY;
    for mark in inside(panel, marks) {
        let place = Vec2::new(
            panel.place(mark.at, panel.y.low).x,
            panel.corner.y + MARK_BELOW,
        );
        mark.kind.mark().draw(canvas, place, Vec2::y());
        if place.x - last < APART {
            continue;
        }
        last = place.x;
        let lettering = Lettering {
            anchor: Anchor::End,
            ..Lettering::upright()
        };
        canvas.text(
            place + Vec2::new(-0.25 * TEXT, LABEL_BELOW),
            lettering,
            &mark.label,
        );
    }
}

fn description(curves: &AuditCurves<'_>) -> String {
    let x = Axis::around(curves.x.iter().copied());
    let counts: Vec<String> = AuditMarkKind::ALL
        .into_iter()
        .filter_map(|kind| {
            let count = curves.marks.iter().filter(|mark| mark.kind == kind).count();
            (count > 0).then(|| format!("{count} {}", kind.name()))
        })
        .collect();
    format!(
        "Residual of a level list before and after correction for {} from {} to {}{}; {}.",
        curves.variable,
        rounded(x.low),
        rounded(x.high),
        curves
            .unit
            .map(|unit| format!(" {unit}"))
            .unwrap_or_default(),
        if counts.is_empty() {
            "no events".to_owned()
        } else {
            format!("marked: {}", counts.join(", "))
        }
    )
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::super::testing::{checked, keep};
    use super::*;

    fn at(kind: AuditMarkKind, at: f64) -> AuditMark {
        AuditMark {
            kind,
            at,
            label: format!("{at}"),
        }
    }

    #[test]
    fn events_are_marked_and_the_picture_is_repeatable() {
        let x: Vec<f64> = (0..400).map(|i| 0.1 * f64::from(i)).collect();
        let step = |x: f64, at: f64| 0.5 * libm::erfc(at - x);
        let of = |f: &dyn Fn(f64) -> f64| x.iter().map(|x| f(*x)).collect::<Vec<f64>>();
        let wobble = |x: f64| 0.05 * (3.0 * x).sin();
        let before = of(&|x| wobble(x) - step(x, 12.0) + step(x, 25.0) - step(x, 25.2));
        let after = of(&wobble);
        let noise = of(&|x| 0.03 + 0.002 * x);
        let curves = AuditCurves {
            title: "invented residual: 1 missing, 1 false",
            variable: "frequency",
            unit: Some("GHz"),
            x: &x,
            before: &before,
            after: &after,
            noise: &noise,
            marks: &[
                at(AuditMarkKind::Missing, 12.0),
                at(AuditMarkKind::False, 25.0),
                at(AuditMarkKind::Missing, 25.2),
                at(AuditMarkKind::Shifted, 33.0),
            ],
            captions: &["Invented.".into()],
        };
        let picture = audit_picture(&curves);
        keep("audit", &picture);
        let texts = checked(&picture);
        assert!(texts.contains(&"frequency (GHz)".to_owned()));
        // The labels of neighbours would lie on each other.
        assert!(texts.contains(&"25".to_owned()) && !texts.contains(&"25.2".to_owned()));
        assert_eq!(picture, audit_picture(&curves));
    }

    #[test]
    fn nothing_and_no_number_give_a_picture() {
        let picture = audit_picture(&AuditCurves::default());
        assert!(checked(&picture).contains(&"nothing to draw".to_owned()));
        let broken = [f64::NAN, f64::INFINITY, -1.0];
        checked(&audit_picture(&AuditCurves {
            x: &broken,
            before: &broken,
            after: &broken[..1],
            noise: &broken,
            marks: &[at(AuditMarkKind::False, f64::NAN)],
            ..AuditCurves::default()
        }));
    }
}
