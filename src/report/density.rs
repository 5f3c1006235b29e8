//! Density and staircase: smooth part, orbit sum, levels, and what is left over.

use super::axis::{Axis, rounded};
use super::canvas::{Canvas, Stroke, palette};
use super::legend::Sample;
use super::panel::{Panel, RUG_STROKE};
use super::stack::{PANEL_WIDTH, finish, legend_above, named, panel_at};

/// Heights of the panels, points: with legends and captions the picture fills about two thirds of a page.
const DENSITY_HEIGHT: f64 = 130.0;
const STAIRCASE_HEIGHT: f64 = 130.0;
const RESIDUAL_HEIGHT: f64 = 90.0;
/// Free part of a range above and below its curves.
const MARGIN: f64 = 0.06;
/// Part of the staircase's range kept free below for the ticks of the levels.
const RUG_MARGIN: f64 = 0.09;
/// Smallest mean distance of levels, points, at which they are marked one by one.
const SPARSE: f64 = 1.0;

/// Levels: wide and light, so that a prediction drawn over them shows both where they agree.
const LEVELS: Stroke = Stroke::solid(palette::ORANGE, 3.0);
/// Prediction with the orbits.
const ORBITS: Stroke = Stroke::solid(palette::BLUE, 1.0);
/// Smooth part.
const SMOOTH: Stroke = Stroke::broken(palette::BLACK, 1.0, "6 3");
/// What is left over.
const RESIDUAL: Stroke = Stroke::solid(palette::BLACK, 0.9);
/// Its rms.
const RMS: Stroke = Stroke::broken(palette::VERMILLION, 0.8, "3 2");
/// Zero.
const ZERO: Stroke = Stroke::solid(palette::GREY, 0.6);

/// Curves of a window of the spectrum, all over the same positions `x`; what is missing is not drawn, and a value that is
/// not finite leaves a gap.
#[derive(Clone, Copy, Debug, Default)]
pub struct DensityCurves<'a> {
    /// Title of the picture.
    pub title: &'a str,
    /// Spectral variable: `k`, `energy` or `frequency`.
    pub variable: &'a str,
    /// Its unit, such as `GHz`, if it has one.
    pub unit: Option<&'a str>,
    /// Positions, increasing, in the spectral variable.
    pub x: &'a [f64],
    /// Smooth density, levels per unit of the variable.
    pub density_smooth: &'a [f64],
    /// Smooth density and orbit sum together.
    pub density: &'a [f64],
    /// Density of the levels, smoothed like the orbit sum.
    pub density_levels: Option<&'a [f64]>,
    /// Orbit sum of the staircase, in levels.
    pub staircase_fluctuation_orbits: &'a [f64],
    /// Staircase of the levels, smoothed, less its smooth part.
    pub staircase_fluctuation_levels: Option<&'a [f64]>,
    /// The levels themselves, in the spectral variable; those outside the window are not drawn.
    pub levels: Option<&'a [f64]>,
    /// Levels less smooth part and orbit sum, in levels.
    pub residual: Option<&'a [f64]>,
    /// Root mean square of the residual, in levels.
    pub residual_rms: Option<f64>,
    /// What is written below the panels, one paragraph each.
    pub captions: &'a [String],
}

/// Draws density, staircase fluctuation and, if there is one, residual, one above the other over the same axis.
#[must_use]
pub fn density_picture(curves: &DensityCurves<'_>) -> String {
    let mut canvas = Canvas::new(curves.title, &description(curves));
    let x = Axis::around(curves.x.iter().copied());
    let top = canvas.heading() + 2.0;
    let top = density_panel(&mut canvas, curves, x, top);
    let top = staircase_panel(&mut canvas, curves, x, top);
    let bottom = residual_panel(&mut canvas, curves, x, top);
    let name = named(curves.variable, curves.unit);
    finish(canvas, x, &name, curves.captions, bottom)
}

/// Draws curves and axes of one panel over what is already in it.
fn finish_panel(
    canvas: &mut Canvas,
    panel: &Panel,
    curves: &[(&[f64], &[f64], Stroke)],
    name: &[String],
    last: bool,
) -> f64 {
    for (x, y, stroke) in curves {
        panel.curve(canvas, x, y, *stroke);
    }
    let drawn = |(x, y, _): &(&[f64], &[f64], Stroke)| {
        x.iter()
            .zip(*y)
            .any(|(x, y)| x.is_finite() && y.is_finite())
    };
    if !curves.iter().any(drawn) {
        panel.remark(canvas, "nothing to draw");
    }
    panel.name_y(canvas, name, 42.0);
    panel.axes(canvas, last)
}

/// All values of some curves.
fn values<'a>(curves: &'a [(&[f64], &[f64], Stroke)]) -> impl Iterator<Item = f64> + 'a {
    curves
        .iter()
        .flat_map(|(x, y, _)| y[..y.len().min(x.len())].iter().copied())
}

fn density_panel(canvas: &mut Canvas, curves: &DensityCurves<'_>, x: Axis, top: f64) -> f64 {
    let mut drawn = Vec::new();
    let mut entries = Vec::new();
    if let Some(levels) = curves.density_levels {
        drawn.push((curves.x, levels, LEVELS));
        entries.push((Sample::Line(LEVELS), "levels, smoothed".to_owned()));
    }
    drawn.push((curves.x, curves.density_smooth, SMOOTH));
    entries.push((Sample::Line(SMOOTH), "smooth part".to_owned()));
    drawn.push((curves.x, curves.density, ORBITS));
    entries.push((Sample::Line(ORBITS), "smooth part + orbits".to_owned()));
    let y = Axis::around(values(&drawn)).widened(MARGIN);
    let panel = panel_at(legend_above(canvas, &entries, top), DENSITY_HEIGHT, x, y);
    panel.grid(canvas);
    let per = match curves.unit {
        Some(unit) => format!("levels per {unit}"),
        None => format!("levels per unit of {}", curves.variable),
    };
    finish_panel(canvas, &panel, &drawn, &["density".into(), per], false) + 6.0
}

fn staircase_panel(canvas: &mut Canvas, curves: &DensityCurves<'_>, x: Axis, top: f64) -> f64 {
    let mut drawn = Vec::new();
    let mut entries = Vec::new();
    if let Some(levels) = curves.staircase_fluctuation_levels {
        drawn.push((curves.x, levels, LEVELS));
        entries.push((
            Sample::Line(LEVELS),
            "levels, smoothed, less smooth part".to_owned(),
        ));
    }
    drawn.push((curves.x, curves.staircase_fluctuation_orbits, ORBITS));
    entries.push((Sample::Line(ORBITS), "orbit sum".to_owned()));
    let inside: Vec<f64> = curves
        .levels
        .unwrap_or_default()
        .iter()
        .copied()
        .filter(|level| (x.low..=x.high).contains(level))
        .collect();
    let sparse = inside.len() as f64 * SPARSE <= PANEL_WIDTH;
    let marked = sparse && !inside.is_empty();
    if marked {
        entries.push((Sample::Rug(RUG_STROKE), counted(inside.len())));
    } else if !sparse {
        entries.push((
            Sample::Nothing,
            format!("{}, too dense to mark", counted(inside.len())),
        ));
    }
    let mut y = Axis::around(values(&drawn).chain([0.0]))
        .symmetric()
        .widened(MARGIN);
    if marked {
        y.low -= RUG_MARGIN * y.span();
    }
    let panel = panel_at(legend_above(canvas, &entries, top), STAIRCASE_HEIGHT, x, y);
    panel.grid(canvas);
    panel.level_line(canvas, 0.0, ZERO);
    if marked {
        panel.rug(canvas, &inside);
    }
    let last = curves.residual.is_none();
    let name = ["staircase".into(), "fluctuation (levels)".into()];
    finish_panel(canvas, &panel, &drawn, &name, last) + if last { 0.0 } else { 6.0 }
}

/// A number of levels in words.
fn counted(levels: usize) -> String {
    format!("{levels} level{}", if levels == 1 { "" } else { "s" })
}

fn residual_panel(canvas: &mut Canvas, curves: &DensityCurves<'_>, x: Axis, top: f64) -> f64 {
    let Some(residual) = curves.residual else {
        return top;
    };
    let drawn = [(curves.x, residual, RESIDUAL)];
    let mut entries = vec![(
        Sample::Line(RESIDUAL),
        "levels less smooth part and orbit sum".to_owned(),
    )];
    let rms = curves.residual_rms.filter(|rms| rms.is_finite());
    if let Some(rms) = rms {
        entries.push((
            Sample::Band(RMS),
            format!("\u{b1} rms = {} level", rounded(rms)),
        ));
    }
    let reach = rms.unwrap_or(0.0);
    let y = Axis::around(values(&drawn).chain([-reach, reach]))
        .symmetric()
        .widened(MARGIN);
    let panel = panel_at(legend_above(canvas, &entries, top), RESIDUAL_HEIGHT, x, y);
    if let Some(rms) = rms {
        panel.band(canvas, -rms, rms, palette::LIGHT_GREY);
    }
    panel.grid(canvas);
    panel.level_line(canvas, 0.0, ZERO);
    if let Some(rms) = rms {
        panel.level_line(canvas, -rms, RMS);
        panel.level_line(canvas, rms, RMS);
    }
    finish_panel(
        canvas,
        &panel,
        &drawn,
        &["residual".into(), "(levels)".into()],
        true,
    )
}

fn description(curves: &DensityCurves<'_>) -> String {
    let x = Axis::around(curves.x.iter().copied());
    let mut text = format!(
        "Level density and fluctuation of the staircase for {} from {} to {}{}",
        curves.variable,
        rounded(x.low),
        rounded(x.high),
        curves
            .unit
            .map(|unit| format!(" {unit}"))
            .unwrap_or_default()
    );
    if let Some(rms) = curves.residual_rms.filter(|rms| rms.is_finite()) {
        text.push_str(&format!("; rms residual {} level", rounded(rms)));
    }
    text.push('.');
    text
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::super::testing::{checked, keep};
    use super::*;

    struct Data {
        x: Vec<f64>,
        smooth: Vec<f64>,
        total: Vec<f64>,
        density_levels: Vec<f64>,
        orbits: Vec<f64>,
        levels: Vec<f64>,
        residual: Vec<f64>,
    }

    /// An invented spectrum: waves of four lengths over a rising mean.
    fn data(count: usize) -> Data {
        let x: Vec<f64> = (0..count)
            .map(|i| 8.0 + 34.0 * i as f64 / (count.max(2) - 1) as f64)
            .collect();
        let wave = |k: f64| {
            (4.0 * k).sin()
                + 0.6 * (4.83 * k + 1.0).cos()
                + 0.4 * (7.1 * k).sin()
                + 0.2 * (11.3 * k).cos()
        };
        let of = |f: &dyn Fn(f64) -> f64| x.iter().map(|k| f(*k)).collect::<Vec<_>>();
        let small = |k: f64| 0.012 * (3.3 * k).sin() * (0.4 * k).cos();
        Data {
            smooth: of(&|k| 0.284 * k - 0.4),
            total: of(&|k| 0.284 * k - 0.4 + 1.2 * wave(k)),
            density_levels: of(&|k| 0.284 * k - 0.4 + 1.2 * wave(k) + 8.0 * small(k)),
            orbits: of(&|k| 0.2 * wave(k + 0.3)),
            levels: of(&|k| 0.2 * wave(k + 0.3) + small(k)),
            residual: of(&small),
            x,
        }
    }

    fn curves<'a>(data: &'a Data, marks: &'a [f64], captions: &'a [String]) -> DensityCurves<'a> {
        DensityCurves {
            title: "quarter stadium (invented curves)",
            variable: "k",
            unit: None,
            x: &data.x,
            density_smooth: &data.smooth,
            density: &data.total,
            density_levels: Some(&data.density_levels),
            staircase_fluctuation_orbits: &data.orbits,
            staircase_fluctuation_levels: Some(&data.levels),
            levels: Some(marks),
            residual: Some(&data.residual),
            residual_rms: Some(0.006_412),
            captions,
        }
    }

    fn captions() -> Vec<String> {
        vec![
            "Orbits up to length 12 and 20 bounces; Gaussian smoothing of 2.8 mean spacings at the middle of the window, \
             width 0.2514 in k; smooth part after Weyl with corners & curvature."
                .into(),
            "280 isolated orbits, 1 family.".into(),
        ]
    }

    #[test]
    fn pictures_are_well_formed_and_repeatable() {
        let data = data(2000);
        let marks: Vec<f64> = (0..240)
            .map(|n| (64.0 + 7.2 * f64::from(n)).sqrt())
            .collect();
        let captions = captions();
        let full = curves(&data, &marks, &captions);
        let picture = density_picture(&full);
        keep("density-full", &picture);
        let texts = checked(&picture);
        assert!(
            texts
                .iter()
                .any(|text| text.contains("rms = 0.006412 level"))
        );
        // The last three lie beyond the window: 42^2 = 64 + 7.2 x 236.1.
        assert!(texts.contains(&"237 levels".to_owned()));
        assert_eq!(picture, density_picture(&full));
        let plain = DensityCurves {
            density_levels: None,
            staircase_fluctuation_levels: None,
            levels: None,
            residual: None,
            residual_rms: None,
            variable: "frequency",
            unit: Some("GHz"),
            ..full
        };
        let picture = density_picture(&plain);
        keep("density-plain", &picture);
        let texts = checked(&picture);
        assert!(
            texts.contains(&"frequency (GHz)".to_owned())
                && texts.contains(&"levels per GHz".to_owned())
        );
        assert!(!texts.iter().any(|text| text.contains("residual")));
    }

    #[test]
    fn long_curves_stay_small() {
        let data = data(100_000);
        let marks: Vec<f64> = (0..100_000).map(|n| 8.0 + 34e-5 * f64::from(n)).collect();
        let picture = density_picture(&curves(&data, &marks, &[]));
        keep("density-long", &picture);
        assert!(picture.len() < 300_000, "{}", picture.len());
        assert!(
            checked(&picture)
                .iter()
                .any(|text| text.contains("too dense"))
        );
    }

    #[test]
    fn nothing_one_point_and_no_number_give_a_picture() {
        let picture = density_picture(&DensityCurves::default());
        keep("density-empty", &picture);
        assert!(checked(&picture).contains(&"nothing to draw".to_owned()));
        let one = data(1);
        checked(&density_picture(&curves(&one, &[8.0], &captions())));
        let mut broken = data(300);
        broken.x[7] = f64::NAN;
        broken.total[100..120].fill(f64::NAN);
        broken.levels.fill(f64::INFINITY);
        broken.residual.truncate(50);
        let picture = density_picture(&DensityCurves {
            residual_rms: Some(f64::NAN),
            ..curves(&broken, &[f64::NAN, 10.0], &[])
        });
        keep("density-broken", &picture);
        checked(&picture);
    }

    #[test]
    fn extreme_numbers_give_a_picture() {
        for scale in [1e-300, 1e-9, 1e12, 1e300] {
            let mut data = data(500);
            for values in [
                &mut data.x,
                &mut data.total,
                &mut data.residual,
                &mut data.orbits,
            ] {
                values.iter_mut().for_each(|value| *value *= scale);
            }
            let picture = density_picture(&curves(&data, &[], &[]));
            keep(&format!("density-{scale:e}"), &picture);
            checked(&picture);
        }
    }
}
