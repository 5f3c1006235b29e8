//! Fewer points for the same picture.

use crate::billiard::Vec2;

/// Width of a column of the sheet within which a curve is reduced to its extremes, points (0.18 mm: below the width of the
/// curve itself).
const COLUMN: f64 = 0.5;
/// Distance in points by which a drawn outline may leave the true one (7 micrometres, a tenth of what print resolves).
const HAIR: f64 = 0.02;

/// Runs of consecutive finite points on the sheet, thinned: of the points that fall into one column only the lowest and
/// the highest are kept, in their order, and the first and last of the run. A point that is not finite ends a run.
///
/// No extreme of the curve is lost, and no point is moved; what is left out lies within half a point of what is drawn.
pub(super) fn thinned(points: impl IntoIterator<Item = Vec2>) -> Vec<Vec<Vec2>> {
    let mut runs = Vec::new();
    let mut run: Vec<Vec2> = Vec::new();
    for point in points {
        if point.x.is_finite() && point.y.is_finite() {
            run.push(point);
        } else if !run.is_empty() {
            runs.push(thin_run(&std::mem::take(&mut run)));
        }
    }
    if !run.is_empty() {
        runs.push(thin_run(&run));
    }
    runs
}

fn thin_run(run: &[Vec2]) -> Vec<Vec2> {
    let mut kept = Vec::new();
    let column = |point: &Vec2| (point.x / COLUMN).floor();
    let mut first = 0;
    for group in run.chunk_by(|a, b| column(a) == column(b)) {
        let (mut low, mut high) = (0, 0);
        for (index, point) in group.iter().enumerate() {
            if point.y < group[low].y {
                low = index;
            }
            if point.y > group[high].y {
                high = index;
            }
        }
        let mut keep = vec![low.min(high), low.max(high)];
        if first == 0 {
            keep.insert(0, 0);
        }
        first += group.len();
        if first == run.len() {
            keep.push(group.len() - 1);
        }
        keep.dedup();
        kept.extend(keep.into_iter().map(|index| group[index]));
    }
    kept
}

/// Positions along the sheet, at most one per column, increasing.
pub(super) fn thinned_positions(positions: impl IntoIterator<Item = f64>) -> Vec<f64> {
    let mut sorted: Vec<f64> = positions.into_iter().filter(|x| x.is_finite()).collect();
    sorted.sort_by(f64::total_cmp);
    sorted.dedup_by_key(|x| (*x / COLUMN).floor());
    sorted
}

/// The chain without points that lie within the thickness of a hair of the straight line between those kept; both ends
/// are kept.
pub(super) fn straightened(chain: &[Vec2]) -> Vec<Vec2> {
    let mut kept: Vec<Vec2> = Vec::with_capacity(chain.len());
    let mut from = 0;
    kept.extend(chain.first());
    for to in 2..chain.len() {
        let bent =
            (from + 1..to).any(|index| distance(chain[index], chain[from], chain[to]) > HAIR);
        if bent {
            from = to - 1;
            kept.push(chain[from]);
        }
    }
    if chain.len() > 1 {
        kept.extend(chain.last());
    }
    kept
}

/// Distance of a point from the straight line between two others (not beyond them).
fn distance(point: Vec2, from: Vec2, to: Vec2) -> f64 {
    let span = to - from;
    let length = span.norm_squared();
    let share = if length > 0.0 {
        ((point - from).dot(&span) / length).clamp(0.0, 1.0)
    } else {
        0.0
    };
    (point - from - span * share).norm()
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    /// A fast oscillation over 400 points of width.
    fn curve(count: usize) -> Vec<Vec2> {
        (0..count)
            .map(|index| {
                let x = 400.0 * index as f64 / count as f64;
                Vec2::new(x, 50.0 * (x * 1.7).sin() * (x * 31.0).cos())
            })
            .collect()
    }

    #[test]
    fn every_column_keeps_its_extremes() {
        let points = curve(100_000);
        let runs = thinned(points.iter().copied());
        assert_eq!(runs.len(), 1);
        assert!(runs[0].len() <= 2 * 800 + 2, "{}", runs[0].len());
        assert_eq!(runs[0][0], points[0]);
        assert_eq!(runs[0].last(), points.last());
        for column in 0..800 {
            let inside = |point: &&Vec2| (point.x / COLUMN).floor() as usize == column;
            let extremes = |points: &[Vec2]| {
                points
                    .iter()
                    .filter(inside)
                    .fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), point| {
                        (low.min(point.y), high.max(point.y))
                    })
            };
            assert_eq!(extremes(&points), extremes(&runs[0]));
        }
    }

    #[test]
    fn sparse_curves_stay_as_they_are() {
        let points = curve(300);
        assert_eq!(thinned(points.iter().copied()), vec![points]);
    }

    #[test]
    fn gaps_split_a_curve() {
        let hole = Vec2::new(1.0, f64::NAN);
        let (a, b) = (Vec2::new(0.0, 1.0), Vec2::new(2.0, f64::INFINITY));
        assert_eq!(
            thinned([hole, a, hole, hole, b, a, a]),
            vec![vec![a], vec![a, a]]
        );
        assert!(thinned([hole, b]).is_empty());
        assert!(thinned([]).is_empty());
    }

    #[test]
    fn positions_are_sorted_and_thinned() {
        assert_eq!(
            thinned_positions([3.0, f64::NAN, 1.0, 1.1, 1.6]),
            vec![1.0, 1.6, 3.0]
        );
    }

    #[test]
    fn straightened_chains_stay_within_a_hair() {
        let circle: Vec<Vec2> = (0..=2000)
            .map(|index| {
                let angle = std::f64::consts::TAU * f64::from(index) / 2000.0;
                Vec2::new(50.0 * angle.cos(), 50.0 * angle.sin())
            })
            .collect();
        let kept = straightened(&circle);
        // A chord with sagitta h spans sqrt(8 h/R): 2 pi/sqrt(8 x 0.02/50) = 111 pieces are enough.
        assert!((100..130).contains(&kept.len()), "{}", kept.len());
        for point in &circle {
            let nearest = kept
                .windows(2)
                .map(|pair| distance(*point, pair[0], pair[1]))
                .fold(f64::INFINITY, f64::min);
            assert!(nearest <= HAIR + 1e-12);
        }
        let square = [[0.0, 0.0], [1.0, 0.0], [2.0, 0.0], [2.0, 2.0], [0.0, 0.0]].map(Vec2::from);
        assert_eq!(
            straightened(&square),
            [square[0], square[2], square[3], square[4]]
        );
        assert_eq!(straightened(&square[..1]), square[..1]);
        assert!(straightened(&[]).is_empty());
    }
}
