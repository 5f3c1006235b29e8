//! Statistics of unfolded levels: spacings, number variance, rigidity, form factor, beside curves.

use super::axis::{Axis, rounded};
use super::canvas::{Anchor, BORDER, Canvas, Lettering, Stroke, WIDTH, palette, polyline};
use super::legend::{Entry, Sample, legend};
use super::panel::Panel;
use crate::billiard::Vec2;

/// Room for name and labels of a y axis, points.
const LEFT: f64 = 50.0;
/// Room to the right of a panel for half a label, points.
const RIGHT: f64 = 12.0;
/// Height of a panel, points: with its width close to the golden ratio.
const HEIGHT: f64 = 125.0;
/// Space between the rows, points.
const APART: f64 = 12.0;
/// Free part of a range above its values.
const MARGIN: f64 = 0.08;
/// Half width of the caps of error bars, points.
const CAP: f64 = 1.6;

/// What was measured: steps, or points with error bars.
const MEASURED: Stroke = Stroke::solid(palette::BLACK, 0.9);
/// Inside of a histogram.
const INSIDE: &str = palette::LIGHT_GREY;
/// Where random statistics end.
const SATURATION: Stroke = Stroke::broken(palette::GREY, 0.8, "1 2");

/// What a curve stands for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum CurveKind {
    /// Uncorrelated levels.
    Uncorrelated,
    /// Gaussian orthogonal ensemble.
    Orthogonal,
    /// What is expected of the list, where that is neither of the two.
    Expected,
    /// Brody's distribution, fitted.
    Brody,
    /// Berry and Robnik's distribution, fitted.
    BerryRobnik,
    /// What the orbits say.
    Orbits,
}

impl CurveKind {
    const ALL: [Self; 6] = [
        Self::Uncorrelated,
        Self::Orthogonal,
        Self::Expected,
        Self::Brody,
        Self::BerryRobnik,
        Self::Orbits,
    ];

    fn stroke(self) -> Stroke {
        match self {
            Self::Uncorrelated => Stroke::broken(palette::BLACK, 0.9, "2 2"),
            Self::Orthogonal => Stroke::solid(palette::BLUE, 1.2),
            Self::Expected => Stroke::broken(palette::GREEN, 1.4, "6 2"),
            Self::Brody => Stroke::broken(palette::VERMILLION, 1.2, "8 2 2 2"),
            Self::BerryRobnik => Stroke::broken(palette::GREEN, 1.2, "3 2"),
            Self::Orbits => Stroke::solid(palette::ORANGE, 2.0),
        }
    }

    fn name(self) -> &'static str {
        match self {
            Self::Uncorrelated => "uncorrelated (Poisson)",
            Self::Orthogonal => "orthogonal ensemble (GOE)",
            Self::Expected => "expected of the list",
            Self::Brody => "Brody, fitted",
            Self::BerryRobnik => "Berry and Robnik, fitted",
            Self::Orbits => "from the orbits",
        }
    }
}

/// A curve to compare with; where it is not finite it has a gap.
#[derive(Clone, Copy, Debug)]
pub struct StatisticsCurve<'a> {
    /// What it stands for.
    pub kind: CurveKind,
    /// Places.
    pub x: &'a [f64],
    /// Values.
    pub y: &'a [f64],
}

/// One of the statistics: measured values with their errors and curves.
#[derive(Clone, Copy, Debug, Default)]
pub struct MeasuredCurve<'a> {
    /// Places.
    pub x: &'a [f64],
    /// Values.
    pub y: &'a [f64],
    /// Standard errors; empty if there are none.
    pub error: &'a [f64],
    /// Curves beside them.
    pub curves: &'a [StatisticsCurve<'a>],
    /// Value at which it saturates, if that is known.
    pub saturation: Option<f64>,
}

/// All that is drawn.
#[derive(Clone, Copy, Debug, Default)]
pub struct StatisticsCurves<'a> {
    /// Title of the picture.
    pub title: &'a str,
    /// Histogram of nearest-neighbour spacings in mean spacings: edges of the bins, one more than the probability densities in `spacings.y`.
    pub edges: &'a [f64],
    /// Densities of the bins, and curves. (`x` and `error` are not used.)
    pub spacings: MeasuredCurve<'a>,
    /// Number variance over the length of windows in mean spacings.
    pub number_variance: MeasuredCurve<'a>,
    /// Rigidity over the same.
    pub rigidity: MeasuredCurve<'a>,
    /// Length at which these saturate, if it is known.
    pub saturation_length: Option<f64>,
    /// Form factor over Heisenberg times.
    pub form_factor: MeasuredCurve<'a>,
    /// What is written below, one paragraph each.
    pub captions: &'a [String],
}

/// Draws four panels: spacings, number variance, rigidity and form factor.
#[must_use]
pub fn statistics_picture(statistics: &StatisticsCurves<'_>) -> String {
    let windows = statistics.number_variance.x;
    let description = format!(
        "Spacings, number variance and rigidity up to {} mean spacings, and form factor of unfolded levels.",
        rounded(windows.iter().copied().fold(0.0, f64::max))
    );
    let mut canvas = Canvas::new(statistics.title, &description);
    let top = canvas.heading() + 2.0;
    let top = legend(&mut canvas, &entries(statistics), LEFT, WIDTH - BORDER, top) + 10.0;
    spacing_panel(&mut canvas, statistics, top);
    let bottom = window_panel(&mut canvas, statistics, &statistics.number_variance, 1, top);
    let top = bottom + APART;
    window_panel(&mut canvas, statistics, &statistics.rigidity, 0, top);
    let mut bottom = form_factor_panel(&mut canvas, &statistics.form_factor, top) + 4.0;
    for caption in statistics.captions {
        bottom = canvas.paragraph(caption, bottom, Lettering::plain(Anchor::Start));
    }
    canvas.finish(bottom + BORDER)
}

/// What the lines mean, each once for all panels.
fn entries(statistics: &StatisticsCurves<'_>) -> Vec<Entry> {
    let panels = [
        &statistics.spacings,
        &statistics.number_variance,
        &statistics.rigidity,
        &statistics.form_factor,
    ];
    let mut entries = vec![(Sample::Line(MEASURED), "measured".to_owned())];
    for kind in CurveKind::ALL {
        let is_drawn = |panel: &&MeasuredCurve<'_>| {
            panel
                .curves
                .iter()
                .any(|curve| curve.kind == kind && curve.y.iter().any(|y| y.is_finite()))
        };
        if panels.iter().any(is_drawn) {
            entries.push((Sample::Line(kind.stroke()), kind.name().to_owned()));
        }
    }
    if panels.iter().any(|panel| panel.saturation.is_some())
        || statistics.saturation_length.is_some()
    {
        entries.push((Sample::Line(SATURATION), "saturation".to_owned()));
    }
    entries
}

/// A panel in one of the two columns.
fn panel_at(column: usize, top: f64, x: Axis, y: Axis) -> Panel {
    let half = 0.5 * WIDTH;
    Panel {
        corner: Vec2::new(half * column as f64 + LEFT, top),
        size: Vec2::new(half - LEFT - RIGHT, HEIGHT),
        x,
        y,
    }
}

/// From zero to a little above the largest of the finite values.
fn from_zero(values: impl IntoIterator<Item = f64>) -> Axis {
    let largest = Axis::around(values.into_iter().chain([0.0])).high;
    Axis::new(
        0.0,
        if largest > 0.0 {
            largest * (1.0 + MARGIN)
        } else {
            1.0
        },
    )
}

/// Values with their error bars.
fn reach<'a>(measured: &'a MeasuredCurve<'_>) -> impl Iterator<Item = f64> + 'a {
    let error = |index: usize| measured.error.get(index).copied().unwrap_or(0.0);
    measured
        .y
        .iter()
        .enumerate()
        .map(move |(index, y)| y + error(index))
}

/// Values of the curves of some kinds.
fn values<'a>(
    measured: &'a MeasuredCurve<'_>,
    wanted: impl Fn(CurveKind) -> bool + 'a,
) -> impl Iterator<Item = f64> + 'a {
    measured
        .curves
        .iter()
        .filter(move |curve| wanted(curve.kind))
        .flat_map(|curve| curve.y.iter().copied())
}

fn spacing_panel(canvas: &mut Canvas, statistics: &StatisticsCurves<'_>, top: f64) {
    let measured = &statistics.spacings;
    let x = from_zero(
        statistics.edges.iter().copied().chain(
            measured
                .curves
                .iter()
                .flat_map(|curve| curve.x.last().copied()),
        ),
    );
    let x = Axis::new(0.0, x.high / (1.0 + MARGIN));
    // Brody's distribution may be infinite at zero.
    let y = from_zero(reach(measured).chain(values(measured, |kind| kind != CurveKind::Brody)));
    let panel = panel_at(0, top, x, y);
    let steps: Vec<Vec2> = statistics
        .edges
        .windows(2)
        .zip(measured.y)
        .flat_map(|(pair, density)| [pair[0], pair[1]].map(|edge| panel.place(edge, *density)))
        .collect();
    if let (Some(first), Some(last)) = (steps.first(), steps.last()) {
        let base = [last, first].map(|step| Vec2::new(step.x, panel.bottom()));
        canvas.area(&polyline(&[&steps[..], &base[..]].concat()), INSIDE);
    }
    panel.grid(canvas);
    canvas.path(&polyline(&steps), MEASURED);
    finish(
        canvas,
        &panel,
        measured,
        ["density of spacings", "spacing (mean spacings)"],
    );
}

fn window_panel(
    canvas: &mut Canvas,
    statistics: &StatisticsCurves<'_>,
    measured: &MeasuredCurve<'_>,
    column: usize,
    top: f64,
) -> f64 {
    let x = from_zero(measured.x.iter().copied());
    // Uncorrelated levels soon leave the range of all others.
    let others = values(measured, |kind| kind != CurveKind::Uncorrelated);
    let y = from_zero(reach(measured).chain(others).chain(measured.saturation));
    let panel = panel_at(column, top, x, y);
    panel.grid(canvas);
    if let Some(value) = measured.saturation.filter(|value| value.is_finite()) {
        panel.level_line(canvas, value, SATURATION);
    }
    if let Some(length) = statistics
        .saturation_length
        .filter(|length| *length < x.high)
    {
        canvas.line(
            panel.place(length, y.low),
            panel.place(length, y.high),
            SATURATION,
        );
    }
    let name = if column == 0 {
        "rigidity \u{394}\u{2083}"
    } else {
        "number variance \u{3a3}\u{b2}"
    };
    finish(canvas, &panel, measured, [name, "length (mean spacings)"])
}

fn form_factor_panel(canvas: &mut Canvas, measured: &MeasuredCurve<'_>, top: f64) -> f64 {
    let x = from_zero(measured.x.iter().copied());
    let y = from_zero(reach(measured).chain(values(measured, |kind| kind != CurveKind::Orbits)));
    let panel = panel_at(1, top, x, y);
    panel.grid(canvas);
    finish(
        canvas,
        &panel,
        measured,
        ["form factor K", "time (Heisenberg times)"],
    )
}

/// Curves, points and axes over what is already in the panel; returns the height of the lower edge.
fn finish(
    canvas: &mut Canvas,
    panel: &Panel,
    measured: &MeasuredCurve<'_>,
    [y_name, x_name]: [&str; 2],
) -> f64 {
    if measured.y.is_empty() {
        panel.remark(canvas, "too few levels");
    }
    for curve in measured.curves {
        let (x, y) = clipped(curve, panel.y.high);
        panel.curve(canvas, &x, &y, curve.kind.stroke());
    }
    for (index, (x, y)) in measured.x.iter().zip(measured.y).enumerate() {
        let Some(error) = measured.error.get(index) else {
            break;
        };
        point(canvas, panel, [*x, *y], *error);
    }
    panel.name_y(canvas, &[y_name.to_owned()], 34.0);
    let bottom = panel.axes(canvas, true);
    panel.name_x(canvas, x_name, bottom)
}

/// A measured value with its error bar, which ends at zero.
fn point(canvas: &mut Canvas, panel: &Panel, [x, y]: [f64; 2], error: f64) {
    if !(x.is_finite() && y.is_finite() && error.is_finite()) {
        return;
    }
    let (low, high) = (
        panel.place(x, (y - error).max(panel.y.low)),
        panel.place(x, y + error),
    );
    let cap = Vec2::new(CAP, 0.0);
    canvas.line(low, high, MEASURED);
    canvas.line(low - cap, low + cap, MEASURED);
    canvas.line(high - cap, high + cap, MEASURED);
    canvas.circle(panel.place(x, y), 1.5, palette::BLACK, None);
}

/// A curve as far as it lies below a height, with the places where it crosses it.
fn clipped(curve: &StatisticsCurve<'_>, high: f64) -> (Vec<f64>, Vec<f64>) {
    let (mut x, mut y) = (Vec::new(), Vec::new());
    let points: Vec<(f64, f64)> = curve
        .x
        .iter()
        .copied()
        .zip(curve.y.iter().copied())
        .collect();
    for (index, &(at, value)) in points.iter().enumerate() {
        if index > 0 {
            let (before, last) = points[index - 1];
            if (last > high) != (value > high) && last.is_finite() && value.is_finite() {
                x.push(before + (at - before) * (high - last) / (value - last));
                y.push(high);
            }
        }
        x.push(at);
        y.push(if value > high { f64::NAN } else { value });
    }
    (x, y)
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::super::testing::{checked, keep};
    use super::*;

    #[test]
    fn invented_statistics_are_drawn() {
        let edges: Vec<f64> = (0..=16).map(|i| 0.25 * f64::from(i)).collect();
        let wigner = |s: f64| 1.57 * s * (-0.785 * s * s).exp();
        let densities: Vec<f64> = edges
            .iter()
            .take(16)
            .map(|s| wigner(s + 0.125) * (1.0 + 0.2 * (9.0 * s).sin()))
            .collect();
        let s: Vec<f64> = (0..=80).map(|i| 0.05 * f64::from(i)).collect();
        let of = |x: &[f64], f: &dyn Fn(f64) -> f64| x.iter().map(|x| f(*x)).collect::<Vec<_>>();
        let (poisson, goe) = (of(&s, &|s| (-s).exp()), of(&s, &wigner));
        let lengths: Vec<f64> = (1..20).map(f64::from).collect();
        let linear = of(&lengths, &|l| l);
        let logarithm = of(&lengths, &|l| 0.2 * l.ln() + 0.45);
        let flat = of(&lengths, &|l| {
            (0.2 * l.ln() + 0.45).min(0.8) + 0.02 * l.sin()
        });
        let error = of(&lengths, &|l| 0.01 * l);
        let line = |kind, x, y| StatisticsCurve { kind, x, y };
        let spacing_lines = [
            line(CurveKind::Uncorrelated, &s[..], &poisson[..]),
            line(CurveKind::Orthogonal, &s, &goe),
        ];
        let window_lines = [
            line(CurveKind::Uncorrelated, &lengths[..], &linear[..]),
            line(CurveKind::Orthogonal, &lengths, &logarithm),
            line(CurveKind::Orbits, &lengths, &flat),
        ];
        let windows = MeasuredCurve {
            x: &lengths,
            y: &flat,
            error: &error,
            curves: &window_lines,
            saturation: Some(0.8),
        };
        let statistics = StatisticsCurves {
            title: "invented statistics",
            edges: &edges,
            spacings: MeasuredCurve {
                y: &densities,
                curves: &spacing_lines,
                ..MeasuredCurve::default()
            },
            number_variance: windows,
            rigidity: windows,
            saturation_length: Some(12.0),
            form_factor: windows,
            captions: &["Invented.".to_owned()],
        };
        let picture = statistics_picture(&statistics);
        let texts = checked(&picture);
        keep("statistics", &picture);
        assert!(texts.iter().any(|text| text == "from the orbits"));
        assert!(!texts.iter().any(|text| text.starts_with("Brody")));
        let nothing = statistics_picture(&StatisticsCurves::default());
        assert!(checked(&nothing).contains(&"too few levels".to_owned()));
    }

    #[test]
    fn curves_end_at_the_upper_edge() {
        let curve = StatisticsCurve {
            kind: CurveKind::Uncorrelated,
            x: &[0.0, 1.0, 3.0],
            y: &[0.0, 1.0, 3.0],
        };
        let (x, y) = clipped(&curve, 2.0);
        assert_eq!(x, [0.0, 1.0, 2.0, 3.0]);
        assert_eq!(y[..3], [0.0, 1.0, 2.0]);
        assert!(y[3].is_nan());
    }
}
