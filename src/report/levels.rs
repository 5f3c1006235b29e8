//! The staircase of computed levels less the smooth count.

use super::axis::{Axis, rounded};
use super::canvas::{Anchor, BORDER, Canvas, Lettering, Stroke, WIDTH, palette};
use super::legend::{Sample, legend};
use super::panel::{Panel, RUG_STROKE};
use crate::billiard::Vec2;

/// Room for names and labels of the y axis, points.
const LEFT: f64 = 68.0;
/// Room to the right of the panel for half a label, points.
const RIGHT: f64 = 18.0;
/// Height of the panel, points.
const HEIGHT: f64 = 170.0;
/// Free part of the range above and below the curves.
const MARGIN: f64 = 0.06;
/// Part of the range kept free below for the ticks of the levels.
const RUG_MARGIN: f64 = 0.09;
/// Smallest mean distance of levels, points, at which they are marked one by one.
const SPARSE: f64 = 1.0;

/// The staircase as it is.
const STEPS: Stroke = Stroke::solid(palette::ORANGE, 0.8);
/// The staircase, smoothed.
const SMOOTHED: Stroke = Stroke::solid(palette::BLUE, 1.6);
/// Zero.
const ZERO: Stroke = Stroke::solid(palette::GREY, 0.6);

/// What is drawn of computed levels.
#[derive(Clone, Copy, Debug, Default)]
pub struct LevelCurves<'a> {
    /// Title of the picture.
    pub title: &'a str,
    /// Spectral variable: `k`, `energy` or `frequency`.
    pub variable: &'a str,
    /// Its unit, such as `GHz`, if it has one.
    pub unit: Option<&'a str>,
    /// Staircase less smooth count, before and after each level: positions and levels.
    pub steps: (&'a [f64], &'a [f64]),
    /// The same, smoothed.
    pub smoothed: (&'a [f64], &'a [f64]),
    /// Standard deviation of that smoothing in mean spacings.
    pub smoothing: f64,
    /// The levels themselves.
    pub levels: &'a [f64],
    /// What is written below, one paragraph each.
    pub captions: &'a [String],
}

/// Draws how the staircase of levels strays from the smooth count: a complete list strays about zero, and a level that is
/// missing moves all that follows down by one.
#[must_use]
pub fn levels_picture(curves: &LevelCurves<'_>) -> String {
    let x = Axis::around(curves.steps.0.iter().copied());
    let description = format!(
        "Staircase of levels less smooth count for {} from {} to {}.",
        curves.variable,
        rounded(x.low),
        rounded(x.high)
    );
    let mut canvas = Canvas::new(curves.title, &description);
    let top = canvas.heading() + 2.0;
    let inside: Vec<f64> = curves
        .levels
        .iter()
        .copied()
        .filter(|level| (x.low..=x.high).contains(level))
        .collect();
    let width = WIDTH - LEFT - RIGHT;
    let marked = !inside.is_empty() && inside.len() as f64 * SPARSE <= width;
    let mut entries = vec![(
        Sample::Line(STEPS),
        "staircase less smooth count".to_owned(),
    )];
    if !curves.smoothed.0.is_empty() {
        entries.push((
            Sample::Line(SMOOTHED),
            format!("smoothed over {} mean spacings", curves.smoothing),
        ));
    }
    if marked {
        entries.push((Sample::Rug(RUG_STROKE), "levels".to_owned()));
    }
    let top = legend(&mut canvas, &entries, LEFT, WIDTH - BORDER, top) + 3.0;
    let values = curves.steps.1.iter().chain(curves.smoothed.1).copied();
    let mut y = Axis::around(values.chain([0.0]))
        .symmetric()
        .widened(MARGIN);
    if marked {
        y.low -= RUG_MARGIN * y.span();
    }
    let panel = Panel {
        corner: Vec2::new(LEFT, top),
        size: Vec2::new(width, HEIGHT),
        x,
        y,
    };
    panel.grid(&mut canvas);
    panel.level_line(&mut canvas, 0.0, ZERO);
    if marked {
        panel.rug(&mut canvas, &inside);
    }
    panel.curve(&mut canvas, curves.steps.0, curves.steps.1, STEPS);
    panel.curve(&mut canvas, curves.smoothed.0, curves.smoothed.1, SMOOTHED);
    panel.name_y(
        &mut canvas,
        &["staircase".into(), "fluctuation (levels)".into()],
        42.0,
    );
    let bottom = panel.axes(&mut canvas, true);
    let name = curves.unit.map_or(curves.variable.to_owned(), |unit| {
        format!("{} ({unit})", curves.variable)
    });
    let mut bottom = panel.name_x(&mut canvas, &name, bottom) + 3.0;
    for caption in curves.captions {
        bottom = canvas.paragraph(caption, bottom, Lettering::plain(Anchor::Start));
    }
    canvas.finish(bottom + BORDER)
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::super::testing::{checked, keep};
    use super::*;

    #[test]
    fn an_invented_staircase_is_drawn() {
        let levels: Vec<f64> = (1..60)
            .map(|n| f64::from(n) + 0.3 * f64::from(n * n % 7) - 1.0)
            .collect();
        let mut sorted = levels.clone();
        sorted.sort_by(f64::total_cmp);
        let x: Vec<f64> = sorted.iter().flat_map(|&k| [k, k]).collect();
        let y: Vec<f64> = sorted
            .iter()
            .enumerate()
            .flat_map(|(n, &k)| [n as f64 - k, n as f64 + 1.0 - k])
            .collect();
        let smooth: Vec<f64> = x.iter().map(|k| 0.2 * (0.5 * k).sin()).collect();
        let curves = LevelCurves {
            title: "invented levels",
            variable: "frequency",
            unit: Some("GHz"),
            steps: (&x, &y),
            smoothed: (&x, &smooth),
            smoothing: 2.0,
            levels: &sorted,
            captions: &["Invented.".to_owned()],
        };
        let picture = levels_picture(&curves);
        checked(&picture);
        keep("levels", &picture);
        assert!(picture.contains("frequency (GHz)"));
        checked(&levels_picture(&LevelCurves::default()));
    }
}
