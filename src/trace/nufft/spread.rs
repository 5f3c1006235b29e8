//! Spreading sources and their mirror images over the fine grid.
//!
//! A source at x and its mirror image at -x see the same kernel in mirrored cells, so that one evaluation serves both: the cells 1,
//! 2, .. up to half of the period and their mirror images are filled together.

use num_complex::Complex64;
use rayon::prelude::*;

use super::kernel::Kernel;

/// Cells that one thread fills at a time, with as many mirror images: they fit into a core's own cache.
const CHUNK: usize = 1 << 12;

/// Cells that share a bucket when sources are sorted.
const BUCKET: usize = 64;

/// Strength of a source and of its mirror image.
#[derive(Clone, Copy, Debug, Default)]
pub(in crate::trace) struct Strength {
    /// At x.
    pub(in crate::trace) source: Complex64,
    /// At -x.
    pub(in crate::trace) mirror: Complex64,
}

impl Strength {
    fn swapped(self) -> Self {
        Self {
            source: self.mirror,
            mirror: self.source,
        }
    }
}

/// Where sources lie on the fine grid, sorted by bucket.
pub(super) struct Places {
    places: Vec<Place>,
    /// Whether the mirror image is the one at positive x, for every source.
    swapped: Vec<bool>,
    /// Number of places before each bucket, and the number of all of them.
    starts: Vec<usize>,
    cells: usize,
}

/// First cell that a source reaches, and where in the kernel it begins.
#[derive(Clone, Copy)]
struct Place {
    /// Of the source or its mirror image, whichever lies at positive x: from minus half a width on.
    cell: i32,
    source: u32,
    /// Position along the cell, from -1 to 1.
    y: f64,
}

impl Places {
    /// Places for sources at `turns` (x/(2 pi), from -1/2 to 1/2) on a grid of an even number of cells.
    pub(super) fn new(turns: &[f64], cells: usize, kernel: &Kernel) -> Self {
        let half_width = 0.5 * kernel.width as f64;
        let place = |(source, turns): (usize, &f64)| {
            let begin = turns.abs() * cells as f64 - half_width;
            let cell = begin.ceil();
            Place {
                cell: cell as i32,
                source: source as u32,
                y: 2.0 * (cell - begin) - 1.0,
            }
        };
        let unsorted: Vec<Place> = turns.par_iter().enumerate().map(place).collect();
        let mut starts = vec![0; bucket((cells / 2) as isize) + 2];
        for place in &unsorted {
            starts[bucket(place.cell as isize) + 1] += 1;
        }
        for bucket in 1..starts.len() {
            starts[bucket] += starts[bucket - 1];
        }
        let mut next = starts.clone();
        let mut places = unsorted.clone();
        for place in &unsorted {
            let slot = &mut next[bucket(place.cell as isize)];
            places[*slot] = *place;
            *slot += 1;
        }
        let swapped = turns.iter().map(|&turns| turns < 0.0).collect();
        Self {
            places,
            swapped,
            starts,
            cells,
        }
    }

    /// The places whose first cell lies between `from` and `to`, and some neighbours.
    fn between(&self, from: isize, to: isize) -> &[Place] {
        let last = self.starts.len() - 1;
        &self.places[self.starts[bucket(from).min(last)]..self.starts[(bucket(to) + 1).min(last)]]
    }

    fn strength(&self, place: &Place, strengths: &[Strength]) -> Strength {
        let source = place.source as usize;
        if self.swapped[source] {
            strengths[source].swapped()
        } else {
            strengths[source]
        }
    }

    /// Fills the grid, which holds zeros. Every cell adds up its sources in the order of their places, whatever the number of threads.
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
        let width = W as isize;
        let half = self.cells / 2;
        // The cells 0 and half are their own mirror images.
        for cell in [0, half] {
            for place in self.between(cell as isize - width, cell as isize) {
                if let Ok(index) = usize::try_from(cell as isize - place.cell as isize)
                    && index < W
                {
                    let strength = self.strength(place, strengths);
                    let value = values(polynomials, place.y)[index];
                    grid[cell] += (strength.source + strength.mirror) * value;
                }
            }
        }
        let (low, high) = grid.split_at_mut(half);
        let chunks = low[1..]
            .par_chunks_mut(CHUNK)
            .zip(high[1..].par_rchunks_mut(CHUNK));
        chunks.enumerate().for_each(|(index, (cells, mirrors))| {
            let begin = (1 + index * CHUNK) as isize;
            let mut part = Part {
                begin,
                half: half as isize,
                cells,
                mirrors,
            };
            for place in self.between(begin - width, begin + (CHUNK + W) as isize) {
                let values = values(polynomials, place.y);
                part.add::<W>(
                    place.cell as isize,
                    &values,
                    self.strength(place, strengths),
                );
            }
        });
    }
}

/// Number of the bucket of a cell; cells from -BUCKET on have one.
fn bucket(cell: isize) -> usize {
    (cell + BUCKET as isize).max(0) as usize / BUCKET
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

/// A range of cells and of their mirror images.
struct Part<'a> {
    /// The first cell.
    begin: isize,
    /// The cell in the middle of the period.
    half: isize,
    cells: &'a mut [Complex64],
    /// In descending order of the mirrored cell.
    mirrors: &'a mut [Complex64],
}

impl Part<'_> {
    /// Adds the part of a kernel that lies in the range; the kernel begins at cell `first`.
    #[inline(always)]
    fn add<const W: usize>(&mut self, first: isize, values: &[f64; W], strength: Strength) {
        let count = self.cells.len();
        let offset = first - self.begin;
        if offset >= 0 && offset as usize + W <= count {
            let offset = offset as usize;
            for (cell, value) in self.cells[offset..offset + W].iter_mut().zip(values) {
                *cell += strength.source * value;
            }
            let mirrors = &mut self.mirrors[count - offset - W..count - offset];
            for (cell, value) in mirrors.iter_mut().zip(values.iter().rev()) {
                *cell += strength.mirror * value;
            }
            return;
        }
        for (index, value) in values.iter().enumerate() {
            // A kernel that reaches across 0 or half the period meets its mirror image there.
            let (cell, strength) = match first + index as isize {
                cell if cell < 0 => (-cell, strength.swapped()),
                cell if cell > self.half => (2 * self.half - cell, strength.swapped()),
                cell => (cell, strength),
            };
            if let Ok(offset) = usize::try_from(cell - self.begin)
                && offset < count
            {
                self.cells[offset] += strength.source * value;
                self.mirrors[count - 1 - offset] += strength.mirror * value;
            }
        }
    }
}
