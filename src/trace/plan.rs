//! Which terms are summed directly over which part of a grid, and which by the fast transform.
//!
//! A term can be transformed over a part of the grid where its series in 1/k holds and the clamp of its phase correction
//! does not change state. The grid is halved as long as that makes the sum cheaper. The plan depends on the terms and the grid
//! alone.

use std::ops::Range;

use super::nufft;
use super::series::Leading;
use super::smoothed::{MAX_PHASE, SmoothedTerm, SmoothedTerms};
use super::sum::UniformGrid;

/// Measured cost in nanoseconds of a term at a point: a constant amplitude, a series, a quadrature at low k.
const CONSTANT_COST: f64 = 1.0;
const SERIES_COST: f64 = 50.0;
const QUADRATURE_COST: f64 = 3000.0;

/// Measured cost in nanoseconds of looking at a term when a plan is made.
const PLAN_COST: f64 = 20.0;

/// Parts of the grid shorter than this are not halved.
const MIN_POINTS: usize = 128;

/// Share of the accuracy below which an order of a series is left out.
const ORDER_SHARE: f64 = 0.02;

/// Part of the accuracy that one transform may use up. A source and its mirror image count twice in its own accuracy.
pub(super) const TRANSFORM_SHARE: f64 = 0.5;

/// A part of the grid and how its terms are summed there.
pub(super) struct Segment {
    /// Numbers of the points.
    pub(super) points: Range<usize>,
    /// Numbers of the terms that are summed directly.
    pub(super) direct: Vec<usize>,
    /// The others, by the power of k in front.
    pub(super) fast: Vec<FastClass>,
}

/// Terms with the same power of k in front, for one fast sum.
pub(super) struct FastClass {
    pub(super) leading: Leading,
    /// Their numbers, and how many powers of 1/k each of them needs.
    pub(super) terms: Vec<(usize, usize)>,
    /// Size below which a power of 1/k is left out, relative to a term's unsmoothed amplitude.
    pub(super) tolerance: f64,
}

/// The segments of the cheapest plan that was found, in order.
pub(super) fn segments(terms: &SmoothedTerms, grid: &UniformGrid, accuracy: f64) -> Vec<Segment> {
    if grid.count == 0 {
        return Vec::new();
    }
    let planner = Planner {
        terms: &terms.terms,
        grid,
        accuracy,
    };
    planner.best(0..grid.count).segments
}

struct Planner<'a> {
    terms: &'a [SmoothedTerm],
    grid: &'a UniformGrid,
    accuracy: f64,
}

struct Plan {
    cost: f64,
    segments: Vec<Segment>,
}

impl Planner<'_> {
    fn best(&self, points: Range<usize>) -> Plan {
        let whole = self.whole(points.clone());
        let planning = 2.0 * PLAN_COST * self.terms.len() as f64;
        let something_direct = whole
            .segments
            .iter()
            .any(|segment| !segment.direct.is_empty());
        if points.len() < 2 * MIN_POINTS || !something_direct || whole.cost < 4.0 * planning {
            return whole;
        }
        let middle = points.start + points.len() / 2;
        let mut low = self.best(points.start..middle);
        let high = self.best(middle..points.end);
        if low.cost + high.cost + planning >= whole.cost {
            return whole;
        }
        low.segments.extend(high.segments);
        Plan {
            cost: low.cost + high.cost + planning,
            segments: low.segments,
        }
    }

    /// The plan without halving.
    fn whole(&self, points: Range<usize>) -> Plan {
        let count = points.len() as f64;
        let from = self.grid.point(points.start);
        let to = self.grid.point(points.end - 1);
        let tolerance = ORDER_SHARE * self.accuracy;
        let classes = [Leading::Constant, Leading::SquareRoot];
        let mut fast = classes.map(|leading| FastClass {
            leading,
            terms: Vec::new(),
            tolerance,
        });
        let mut direct_instead = [0.0; 2];
        let mut direct = Vec::new();
        let mut cost = PLAN_COST * self.terms.len() as f64;
        for (index, term) in self.terms.iter().enumerate() {
            let here = count * direct_cost(term, from);
            if self.can_be_transformed(term, from, to) {
                let orders = orders(term, from, to, tolerance);
                if orders > 0 {
                    let class = term.series.leading as usize;
                    fast[class].terms.push((index, orders));
                    direct_instead[class] += here;
                }
            } else {
                direct.push(index);
                cost += here;
            }
        }
        let mut kept = Vec::new();
        for (class, direct_cost) in fast.into_iter().zip(direct_instead) {
            let fast_cost = class_cost(&class, points.len(), self.accuracy);
            cost += fast_cost.min(direct_cost);
            if class.terms.is_empty() {
                continue;
            }
            if fast_cost < direct_cost {
                kept.push(class);
            } else {
                direct.extend(class.terms.iter().map(|&(index, _)| index));
            }
        }
        direct.sort_unstable();
        Plan {
            cost,
            segments: vec![Segment {
                points,
                direct,
                fast: kept,
            }],
        }
    }

    /// Whether the series of a term describes it for from <= k <= to.
    fn can_be_transformed(&self, term: &SmoothedTerm, from: f64, to: f64) -> bool {
        if TRANSFORM_SHARE * self.accuracy < nufft::BEST_ACCURACY || !term.term.length.is_finite() {
            return false;
        }
        let slope = term.slope();
        if slope == 0.0 {
            return term.series.holds_at(from);
        }
        let clamped_below = slope.abs() / MAX_PHASE;
        from > 0.0 && term.series.holds_at(from) && (clamped_below <= from || clamped_below >= to)
    }
}

/// Cost of a term at a point near k.
fn direct_cost(term: &SmoothedTerm, k: f64) -> f64 {
    if !term.series.holds_at(k) {
        QUADRATURE_COST
    } else if term.is_plain_wave() {
        CONSTANT_COST
    } else {
        SERIES_COST
    }
}

/// Number of powers of 1/k that a term needs for from <= k <= to, with its phase correction.
fn orders(term: &SmoothedTerm, from: f64, to: f64, tolerance: f64) -> usize {
    let orders = term.series.orders(from, tolerance);
    let size = term.slope().abs() / from;
    if orders == 0 || size == 0.0 || term.slope().abs() >= MAX_PHASE * to {
        return orders;
    }
    // exp(i slope/k) = sum_q (i slope/k)^q/q!
    let mut power = size;
    let mut next = 1;
    while power > tolerance {
        next += 1;
        power *= size / f64::from(next);
    }
    orders + next as usize - 1
}

fn class_cost(class: &FastClass, points: usize, accuracy: f64) -> f64 {
    let transforms = class
        .terms
        .iter()
        .map(|&(_, orders)| orders)
        .max()
        .unwrap_or(0);
    transforms as f64 * nufft::cost(points, class.terms.len(), TRANSFORM_SHARE * accuracy)
}
