//! Integrals along a wall.

use super::{Frame, Shape, Wall};

/// Nodes and weights of the ten-point Gauss-Legendre rule on [-1, 1], positive half (Abramowitz & Stegun, Table 25.4).
const NODES: [(f64, f64); 5] = [
    (0.148_874_338_981_631_21, 0.295_524_224_714_752_87),
    (0.433_395_394_129_247_2, 0.269_266_719_309_996_35),
    (0.679_409_568_299_024_4, 0.219_086_362_515_982_04),
    (0.865_063_366_688_984_5, 0.149_451_349_150_580_6),
    (0.973_906_528_517_171_7, 0.066_671_344_308_688_14),
];

/// Panels on a curve; analytic curves are integrated to rounding by then (a test halves the panels and compares).
const PANELS: usize = 64;

/// Places and weights of the rule on [from, to].
pub(crate) fn nodes(from: f64, to: f64) -> impl Iterator<Item = (f64, f64)> {
    let (middle, half) = (0.5 * (from + to), 0.5 * (to - from));
    NODES
        .into_iter()
        .flat_map(move |(x, w)| [-x, x].map(|x| (middle + half * x, half * w)))
}

/// Integral of `value` over the parameter interval [from, to] with the given number of panels.
pub(crate) fn integrate(
    from: f64,
    to: f64,
    panels: usize,
    mut value: impl FnMut(f64) -> f64,
) -> f64 {
    let half = 0.5 * (to - from) / panels as f64;
    (0..panels)
        .map(|panel| {
            let middle = from + (2 * panel + 1) as f64 * half;
            let sum: f64 = NODES
                .iter()
                .map(|&(x, w)| w * (value(middle - half * x) + value(middle + half * x)))
                .sum();
            half * sum
        })
        .sum()
}

/// Integral of `value` over arc length along the whole wall.
pub(crate) fn along(wall: &Wall, value: impl Fn(&Frame) -> f64) -> f64 {
    let panels = match wall.shape {
        Shape::Line(_) => 1,
        Shape::Arc(_) => 8,
        Shape::Curve(_) => PANELS,
    };
    integrate(0.0, wall.extent(), panels, |t| {
        let frame = wall.frame(t);
        value(&frame) * frame.speed
    })
}
