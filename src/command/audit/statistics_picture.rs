//! The picture of measured statistics. It knows the library only: tests draw with it too.

use orbitsum::levels::statistics::{FormFactorBin, LevelStatistics, SpacingCurves, WindowPoint};
use orbitsum::report::{
    CurveKind, MeasuredCurve, StatisticsCurve, StatisticsCurves, statistics_picture,
};

/// Draws all of it.
pub(crate) fn picture(title: &str, statistics: &LevelStatistics, captions: &[String]) -> String {
    let spacings = &statistics.spacings;
    let mut edges: Vec<f64> = spacings.histogram.iter().map(|bin| bin.from).collect();
    edges.extend(spacings.histogram.last().map(|bin| bin.to));
    let densities: Vec<f64> = spacings.histogram.iter().map(|bin| bin.density).collect();
    let s: Vec<f64> = spacings.curves.iter().map(|point| point.spacing).collect();
    type Pick = fn(&SpacingCurves) -> f64;
    let spacing_kinds: [(CurveKind, Pick); 4] = [
        (CurveKind::Uncorrelated, |curves| curves.uncorrelated),
        (CurveKind::Orthogonal, |curves| curves.orthogonal),
        (CurveKind::Brody, |curves| curves.brody),
        (CurveKind::BerryRobnik, |curves| curves.berry_robnik),
    ];
    let spacing_values = spacing_kinds.map(|(kind, pick)| {
        let values: Vec<f64> = spacings
            .curves
            .iter()
            .map(|point| pick(&point.density_curves))
            .collect();
        (kind, values)
    });
    let spacing_lines: Vec<StatisticsCurve<'_>> = spacing_values
        .iter()
        .map(|(kind, y)| StatisticsCurve {
            kind: *kind,
            x: &s,
            y,
        })
        .collect();
    let variance = Windows::new(&statistics.number_variance);
    let rigidity = Windows::new(&statistics.rigidity);
    let times = Times::new(&statistics.form_factor);
    let (variance_lines, rigidity_lines) = (variance.lines(), rigidity.lines());
    let time_lines = times.lines();
    let saturation = statistics.saturation;
    statistics_picture(&StatisticsCurves {
        title,
        edges: &edges,
        spacings: MeasuredCurve {
            y: &densities,
            curves: &spacing_lines,
            ..MeasuredCurve::default()
        },
        number_variance: variance.measured(
            &variance_lines,
            saturation.map(|saturation| saturation.number_variance),
        ),
        rigidity: rigidity.measured(
            &rigidity_lines,
            saturation.map(|saturation| saturation.rigidity),
        ),
        saturation_length: saturation.map(|saturation| saturation.length),
        form_factor: MeasuredCurve {
            x: &times.middle,
            y: &times.value,
            error: &times.error,
            curves: &time_lines,
            saturation: None,
        },
        captions,
    })
}

/// Columns of number variance or rigidity, the curves with their value 0 at length 0.
struct Windows {
    length: Vec<f64>,
    value: Vec<f64>,
    error: Vec<f64>,
    from_zero: Vec<f64>,
    curves: Vec<(CurveKind, Vec<f64>)>,
}

impl Windows {
    fn new(points: &[WindowPoint]) -> Self {
        let of =
            |pick: &dyn Fn(&WindowPoint) -> f64| -> Vec<f64> { points.iter().map(pick).collect() };
        let curve = |pick: &dyn Fn(&WindowPoint) -> f64| -> Vec<f64> {
            std::iter::once(0.0)
                .chain(points.iter().map(pick))
                .collect()
        };
        let length = of(&|point| point.length);
        Self {
            from_zero: curve(&|point| point.length),
            value: of(&|point| point.value),
            error: of(&|point| point.error),
            curves: vec![
                (CurveKind::Uncorrelated, curve(&|point| point.uncorrelated)),
                (CurveKind::Orthogonal, curve(&|point| point.orthogonal)),
                (
                    CurveKind::Orbits,
                    curve(&|point| point.orbits.unwrap_or(f64::NAN)),
                ),
            ],
            length,
        }
    }

    fn lines(&self) -> Vec<StatisticsCurve<'_>> {
        self.curves
            .iter()
            .map(|(kind, y)| StatisticsCurve {
                kind: *kind,
                x: &self.from_zero,
                y,
            })
            .collect()
    }

    fn measured<'a>(
        &'a self,
        curves: &'a [StatisticsCurve<'a>],
        saturation: Option<f64>,
    ) -> MeasuredCurve<'a> {
        MeasuredCurve {
            x: &self.length,
            y: &self.value,
            error: &self.error,
            curves,
            saturation,
        }
    }
}

/// Columns of the form factor.
struct Times {
    middle: Vec<f64>,
    value: Vec<f64>,
    error: Vec<f64>,
    curves: Vec<(CurveKind, Vec<f64>)>,
}

impl Times {
    fn new(bins: &[FormFactorBin]) -> Self {
        let of =
            |pick: &dyn Fn(&FormFactorBin) -> f64| -> Vec<f64> { bins.iter().map(pick).collect() };
        Self {
            middle: of(&|bin| 0.5 * (bin.from + bin.to)),
            value: of(&|bin| bin.value),
            error: of(&|bin| bin.error),
            curves: vec![
                (CurveKind::Uncorrelated, of(&|_| 1.0)),
                (CurveKind::Orthogonal, of(&|bin| bin.orthogonal)),
                (
                    CurveKind::Orbits,
                    of(&|bin| bin.diagonal.unwrap_or(f64::NAN)),
                ),
            ],
        }
    }

    fn lines(&self) -> Vec<StatisticsCurve<'_>> {
        self.curves
            .iter()
            .map(|(kind, y)| StatisticsCurve {
                kind: *kind,
                x: &self.middle,
                y,
            })
            .collect()
    }
}
