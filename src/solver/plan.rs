//! Windows of k that hold about as many levels each as one factorisation is good for, and bands of windows that share a mesh.

use super::Sector;

/// Levels of the largest sector per window: fewer do not pay for the factorisation, more need too many vectors kept
/// orthogonal.
const LEVELS_PER_WINDOW: f64 = 110.0;
/// Ratio of the upper ends of neighbouring bands: a mesh is at most this much finer than a window needs.
const BAND_RATIO: f64 = 1.3;

/// A window of k: from <= k < to.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Window {
    /// Lower end.
    pub from: f64,
    /// Upper end.
    pub to: f64,
}

impl Window {
    /// The window in k^2. One that begins at 0 begins a little below, so that a constant wave lies well inside.
    pub(super) fn energies(&self) -> [f64; 2] {
        const BELOW_ZERO: f64 = 0.01;
        let from = if self.from > 0.0 {
            self.from * self.from
        } else {
            -BELOW_ZERO * self.to * self.to
        };
        [from, self.to * self.to]
    }
}

/// Windows that share a mesh.
#[derive(Debug)]
pub(super) struct Band<'a> {
    /// Upper end of the last window.
    pub(super) k: f64,
    pub(super) windows: &'a [Window],
}

/// Cuts from..to into windows.
pub(super) fn windows(sectors: &[Sector], from: f64, to: f64) -> Vec<Window> {
    // In levels of the fields: copies are computed once. Without the term in 1/k, which is infinite at k = 0.
    let count = |k: f64| {
        sectors
            .iter()
            .map(|sector| {
                let weyl = &sector.weyl;
                let count = (weyl.coefficient(2) * k + weyl.coefficient(1)) * k + weyl.constant();
                count / sector.fields.copies as f64
            })
            .fold(0.0, f64::max)
    };
    let total = (count(to) - count(from)).max(0.0);
    let number = (total / LEVELS_PER_WINDOW).ceil().max(1.0) as usize;
    let mut ends = vec![from];
    for index in 1..number {
        let wanted = count(from) + total * index as f64 / number as f64;
        let (mut low, mut high) = (from, to);
        for _ in 0..60 {
            let middle = 0.5 * (low + high);
            if count(middle) < wanted {
                low = middle;
            } else {
                high = middle;
            }
        }
        ends.push(high);
    }
    ends.push(to);
    ends.windows(2)
        .map(|pair| Window {
            from: pair[0],
            to: pair[1],
        })
        .collect()
}

/// Groups windows into bands, from the top downwards so that the last one is not a remainder.
pub(super) fn bands(windows: &[Window]) -> Vec<Band<'_>> {
    let mut bands = Vec::new();
    let mut end = windows.len();
    while end > 0 {
        let top = windows[end - 1].to;
        let start = windows[..end]
            .iter()
            .position(|window| window.to * BAND_RATIO > top)
            .unwrap_or(end - 1);
        bands.push(Band {
            k: top,
            windows: &windows[start..end],
        });
        end = start;
    }
    bands.reverse();
    bands
}
