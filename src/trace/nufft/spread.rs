//! Spreading sources over the fine grid.

use num_complex::Complex64;
use rayon::prelude::*;

use super::kernel::Kernel;

/// Cells that one thread fills at a time: they fit into a core's own cache.
const CHUNK: usize = 1 << 13;

/// Cells that share a bucket when sources are sorted; a divisor of [`CHUNK`].
const BUCKET: usize = 64;

/// Where sources and their mirror images lie on the fine grid, sorted by bucket.
pub(super) struct Places {
    places: Vec<Place>,
    /// Number of places before each bucket, and the number of all of them.
    starts: Vec<usize>,
    cells: usize,
}

/// First cell that a source reaches, and where in the kernel it begins.
#[derive(Clone, Copy)]
struct Place {
    cell: u32,
    source: u32,
    mirrored: bool,
    /// Position along the cell, from -1 to 1.
    y: f64,
}

/// Strength of a source and of its mirror image.
#[derive(Clone, Copy, Debug, Default)]
pub(in crate::trace) struct Strength {
    /// At x.
    pub(in crate::trace) source: Complex64,
    /// At -x.
    pub(in crate::trace) mirror: Complex64,
}

impl Places {
    /// Places for sources at `turns` (x/(2 pi), from -1/2 to 1/2) and at their negatives.
    pub(super) fn new(turns: &[f64], cells: usize, kernel: &Kernel) -> Self {
        let half_width = 0.5 * kernel.width as f64;
        let place = |source: usize, turns: f64, mirrored: bool| {
            let begin = turns * cells as f64 - half_width;
            let cell = begin.ceil();
            Place {
                cell: (cell as i64).rem_euclid(cells as i64) as u32,
                source: source as u32,
                mirrored,
                y: 2.0 * (cell - begin) - 1.0,
            }
        };
        let both = |source: usize| {
            let turns = turns[source];
            [place(source, turns, false), place(source, -turns, true)]
        };
        let unsorted: Vec<[Place; 2]> = (0..turns.len()).into_par_iter().map(both).collect();
        let (places, starts) = sorted(unsorted.as_flattened(), cells.div_ceil(BUCKET));
        Self {
            places,
            starts,
            cells,
        }
    }

    /// The places whose first cell lies in the buckets of the cells from..to.
    fn between(&self, from: usize, to: usize) -> &[Place] {
        &self.places[self.starts[from / BUCKET]..self.starts[to.div_ceil(BUCKET)]]
    }

    /// Fills the grid. Every cell adds up its sources in the order of their places, whatever the number of threads.
    pub(super) fn spread(&self, kernel: &Kernel, strengths: &[Strength], grid: &mut [Complex64]) {
        match kernel.padded {
            2 => self.spread_width::<2>(kernel, strengths, grid),
            4 => self.spread_width::<4>(kernel, strengths, grid),
            6 => self.spread_width::<6>(kernel, strengths, grid),
            8 => self.spread_width::<8>(kernel, strengths, grid),
            10 => self.spread_width::<10>(kernel, strengths, grid),
            12 => self.spread_width::<12>(kernel, strengths, grid),
            14 => self.spread_width::<14>(kernel, strengths, grid),
            16 => self.spread_width::<16>(kernel, strengths, grid),
            18 => self.spread_width::<18>(kernel, strengths, grid),
            _ => self.spread_width::<20>(kernel, strengths, grid),
        }
    }

    fn spread_width<const W: usize>(
        &self,
        kernel: &Kernel,
        strengths: &[Strength],
        grid: &mut [Complex64],
    ) {
        let (polynomials, _) = kernel.polynomials.as_chunks::<W>();
        grid.par_chunks_mut(CHUNK)
            .enumerate()
            .for_each(|(index, chunk)| {
                let begin = index * CHUNK;
                let mut add_all = |places: &[Place], begin: isize| {
                    for place in places {
                        let offset = place.cell as isize - begin;
                        add::<W>(
                            chunk,
                            offset,
                            &values(polynomials, place.y),
                            place.strength(strengths),
                        );
                    }
                };
                // Kernels that begin before the chunk reach into it, around the end of the period for the first one.
                if begin < W {
                    add_all(
                        self.between(self.cells - W, self.cells),
                        self.cells as isize + begin as isize,
                    );
                }
                let end = (begin + CHUNK).min(self.cells);
                add_all(self.between(begin.saturating_sub(W), end), begin as isize);
            });
    }
}

/// Sorts places by bucket, keeping their order within each; also gives the number of places before each bucket.
fn sorted(places: &[Place], buckets: usize) -> (Vec<Place>, Vec<usize>) {
    let mut starts = vec![0; buckets + 1];
    for place in places {
        starts[place.cell as usize / BUCKET + 1] += 1;
    }
    for bucket in 0..buckets {
        starts[bucket + 1] += starts[bucket];
    }
    let mut next = starts.clone();
    let mut sorted = places.to_vec();
    for place in places {
        let slot = &mut next[place.cell as usize / BUCKET];
        sorted[*slot] = *place;
        *slot += 1;
    }
    (sorted, starts)
}

impl Place {
    fn strength(&self, strengths: &[Strength]) -> Complex64 {
        let strength = &strengths[self.source as usize];
        if self.mirrored {
            strength.mirror
        } else {
            strength.source
        }
    }
}

/// The kernel in all its cells, by Horner's rule.
#[inline(always)]
fn values<const W: usize>(polynomials: &[[f64; W]], y: f64) -> [f64; W] {
    let mut sum = [0.0; W];
    for coefficients in polynomials {
        for (sum, coefficient) in sum.iter_mut().zip(coefficients) {
            *sum = *sum * y + coefficient;
        }
    }
    sum
}

/// Adds the part of a kernel that lies in the chunk; the kernel begins `offset` cells from the chunk's first.
#[inline(always)]
fn add<const W: usize>(
    chunk: &mut [Complex64],
    offset: isize,
    values: &[f64; W],
    strength: Complex64,
) {
    if offset >= 0 && offset as usize + W <= chunk.len() {
        let begin = offset as usize;
        for (cell, value) in chunk[begin..begin + W].iter_mut().zip(values) {
            *cell += strength * value;
        }
        return;
    }
    for (index, value) in values.iter().enumerate() {
        let target = offset + index as isize;
        if let Some(cell) = usize::try_from(target)
            .ok()
            .and_then(|target| chunk.get_mut(target))
        {
            *cell += strength * value;
        }
    }
}
