//! Spreading sources over the fine grid.

use num_complex::Complex64;
use rayon::prelude::*;

use super::kernel::Kernel;

/// Cells that one thread fills at a time: they fit into a core's own cache.
const CHUNK: usize = 1 << 13;

/// Where sources and their mirror images lie on the fine grid, sorted by cell.
pub(super) struct Places {
    places: Vec<Place>,
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
        let sources = turns
            .iter()
            .enumerate()
            .map(|(source, &x)| place(source, x, false));
        let mirrors = turns
            .iter()
            .enumerate()
            .rev()
            .map(|(source, &x)| place(source, -x, true));
        let mut places: Vec<Place> = sources.chain(mirrors).collect();
        places.sort_by_key(|place| place.cell);
        Self { places, cells }
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
                // Kernels that begin before the chunk reach into it, around the end of the period for the first one.
                if begin < W {
                    let from = self
                        .places
                        .partition_point(|place| (place.cell as usize) <= self.cells + begin - W);
                    for place in &self.places[from..] {
                        let offset = place.cell as isize - self.cells as isize - begin as isize;
                        add::<W>(
                            chunk,
                            offset,
                            &values(polynomials, place.y),
                            place.strength(strengths),
                        );
                    }
                }
                let from = self
                    .places
                    .partition_point(|place| (place.cell as usize) + W <= begin);
                let to = self
                    .places
                    .partition_point(|place| (place.cell as usize) < begin + chunk.len());
                for place in &self.places[from..to] {
                    let offset = place.cell as isize - begin as isize;
                    add::<W>(
                        chunk,
                        offset,
                        &values(polynomials, place.y),
                        place.strength(strengths),
                    );
                }
            });
    }
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
