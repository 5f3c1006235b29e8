//! Number variance and rigidity of a list, averaged over overlapping windows.

/// Blocks for the error of a mean, at most; each is at least twice as long as a window, so that the means of two of them are nearly
/// independent.
const MOST_BLOCKS: f64 = 50.0;
/// Fewest blocks whose scatter is taken for an error: it is known to a quarter then.
const FEWEST_BLOCKS: f64 = 8.0;
/// Lengths of windows that are measured, mean spacings.
const LENGTHS: [f64; 26] = [
    0.5, 1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 7.0, 8.0, 10.0, 12.0, 14.0, 16.0, 18.0, 20.0, 25.0,
    30.0, 35.0, 40.0, 50.0, 60.0, 70.0, 80.0, 90.0, 100.0,
];

/// Sum of a quantity over the windows that begin within a block, and the number (or length) of those windows.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(super) struct Block {
    pub(super) sum: f64,
    pub(super) weight: f64,
}

/// Mean over blocks for windows of a length, and its standard error from their scatter.
///
/// Windows that overlap are correlated, about in proportion to the overlap. Over blocks of B starting points the scatter of the blocks then
/// misses L/(3 B) of the variance, which is put back.
pub(super) fn mean_and_error(blocks: &[Block], length: f64, edges: &[f64]) -> (f64, f64) {
    let count = blocks.len() as f64;
    let weight: f64 = blocks.iter().map(|block| block.weight).sum();
    let mean = blocks.iter().map(|block| block.sum).sum::<f64>() / weight;
    let scatter: f64 = blocks
        .iter()
        .map(|block| (block.sum - block.weight * mean).powi(2))
        .sum();
    let block = (edges[edges.len() - 1] - edges[0]) / count;
    let missed = 1.0 - length / (3.0 * block);
    (
        mean,
        (scatter * count / (count - 1.0) / missed).sqrt() / weight,
    )
}

/// Lengths of windows that a list over `span` mean spacings says something about.
pub(super) fn lengths(span: f64) -> impl Iterator<Item = f64> {
    LENGTHS
        .into_iter()
        .filter(move |length| (span - length) / (2.0 * length) >= FEWEST_BLOCKS)
}

/// Edges of equal blocks of starting points for windows of one length.
pub(super) fn even_edges(span: f64, length: f64) -> Vec<f64> {
    let starts = span - length;
    let blocks = (starts / (2.0 * length)).floor().min(MOST_BLOCKS);
    let count = blocks.max(FEWEST_BLOCKS) as usize;
    (0..=count)
        .map(|index| starts * index as f64 / count as f64)
        .collect()
}

/// Edges of blocks of starting points such that the middle of a window lies in the same part of the list whatever its length.
pub(super) fn centered_edges(span: f64, length: f64, count: usize) -> Vec<f64> {
    (0..=count)
        .map(|index| {
            let middle = span * index as f64 / count as f64;
            (middle - 0.5 * length).clamp(0.0, span - length)
        })
        .collect()
}

/// Squared deviation of the number of levels in a window from its length, for windows that begin within each block; the average
/// over starting points is exact. `positions` ascend from 0 with density 1.
///
/// The mean over the blocks is the number variance. Because the mean density was taken from the list itself, it comes out low by (L^2/N^2)
/// Sigma^2(N), N being the number of levels: L^2/N for uncorrelated levels, next to nothing for correlated ones.
pub(super) fn number_variance(positions: &[f64], length: f64, edges: &[f64]) -> Vec<Block> {
    sweep(positions, length, edges, |levels, _, _| {
        (levels.len() as f64 - length).powi(2)
    })
}

/// Mean square distance of the staircase from the best straight line, for windows that begin within each block; the average over
/// starting points is exact. `positions` ascend from 0 with density 1.
pub(super) fn rigidity(positions: &[f64], length: f64, edges: &[f64]) -> Vec<Block> {
    sweep(positions, length, edges, |levels, from, to| {
        // While no level enters or leaves, the distance is a polynomial of degree 4 in the start: three points are exact.
        let (middle, half) = (0.5 * (from + to), 0.5 * (to - from));
        let at = |x: f64| distance_from_line(levels, middle + half * x, length);
        let outer = 0.6_f64.sqrt();
        (5.0 * (at(-outer) + at(outer)) + 8.0 * at(0.0)) / 18.0
    })
}

/// Moves a window over all starting points; `mean` is called with the levels inside and the range of starts over which they are the same.
fn sweep(
    positions: &[f64],
    length: f64,
    edges: &[f64],
    mean: impl Fn(&[f64], f64, f64) -> f64,
) -> Vec<Block> {
    let mut blocks = vec![Block::default(); edges.len() - 1];
    let mut start = edges[0];
    // Levels below the window, and below its upper end.
    let mut low = positions.partition_point(|x| *x < start);
    let mut high = positions.partition_point(|x| *x < start + length);
    for (block, pair) in blocks.iter_mut().zip(edges.windows(2)) {
        while start < pair[1] {
            let leaving = positions.get(low).copied().unwrap_or(f64::INFINITY);
            let entering = positions
                .get(high)
                .map_or(f64::INFINITY, |x| (x - length).max(start));
            let next = leaving.min(entering).min(pair[1]);
            if next > start {
                block.sum += (next - start) * mean(&positions[low..high], start, next);
                block.weight += next - start;
            }
            high += usize::from(entering <= next);
            low += usize::from(leaving <= next && low < high);
            start = next;
        }
    }
    blocks
}

/// Mean square distance of the staircase of n levels from its best straight line over the window. With z measured from the middle of the
/// window,
///
/// n^2/16 + (1/L) sum (n + 1 - 2 i) z_i - (sum z)^2/L^2 + 3 n (sum z^2)/(2 L^2) - 3 (sum z^2)^2/L^4
///
/// (Bohigas & Giannoni, Ann. Phys. 89 (1975) 393; derived again here from mean N^2 - (mean N)^2 - 12 (mean N z)^2/L^2).
pub(super) fn distance_from_line(levels: &[f64], start: f64, length: f64) -> f64 {
    let n = levels.len() as f64;
    let middle = start + 0.5 * length;
    let (mut first, mut second, mut ranked) = (0.0, 0.0, 0.0);
    for (index, level) in levels.iter().enumerate() {
        let z = (level - middle) / length;
        first += z;
        second += z * z;
        ranked += (n - 1.0 - 2.0 * index as f64) * z;
    }
    n * n / 16.0 + ranked - first * first + 1.5 * n * second - 3.0 * second * second
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The same by its definition, from the normal equations on a fine grid.
    #[test]
    fn the_closed_form_is_a_least_squares_fit() {
        let levels = [0.3, 0.35, 1.9, 2.2, 4.1];
        let (start, length) = (0.1, 4.5);
        let points = 200_000;
        let (mut n, mut n2, mut nz) = (0.0, 0.0, 0.0);
        for index in 0..points {
            let z = length * ((f64::from(index) + 0.5) / f64::from(points) - 0.5);
            let below = levels
                .iter()
                .filter(|level| **level - start - 0.5 * length <= z)
                .count() as f64;
            n += below / f64::from(points);
            n2 += below * below / f64::from(points);
            nz += below * z / f64::from(points);
        }
        let expected = n2 - n * n - 12.0 * nz * nz / (length * length);
        assert!((distance_from_line(&levels, start, length) - expected).abs() < 1e-4);
        assert_eq!(distance_from_line(&[], start, length), 0.0);
    }

    #[test]
    fn blocks_cover_all_starting_points() {
        let positions: Vec<f64> = (0..100).map(f64::from).collect();
        for edges in [even_edges(99.0, 4.3), centered_edges(99.0, 4.3, 10)] {
            for measure in [number_variance, rigidity] {
                let blocks = measure(&positions, 4.3, &edges);
                let weight: f64 = blocks.iter().map(|block| block.weight).sum();
                assert!((weight - 94.7).abs() < 1e-9);
            }
        }
    }

    /// n is 4 with probability 0.7 and 5 with 0.3.
    #[test]
    fn a_picket_fence_has_the_variance_of_the_fraction() {
        let positions: Vec<f64> = (0..1000).map(f64::from).collect();
        let blocks = number_variance(&positions, 4.3, &[0.0, 500.0, 900.0]);
        for block in &blocks {
            assert!((block.sum / block.weight - 0.3 * 0.7).abs() < 1e-3);
        }
        let (_, error) = mean_and_error(&blocks, 4.3, &[0.0, 500.0, 900.0]);
        assert!(error < 1e-3);
    }
}
