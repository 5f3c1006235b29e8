//! One mesh with the unknowns of every symmetry class on it, good up to some k.

use super::Sector;
use super::dissection::Dissection;
use super::estimate::Estimator;
use super::factor::{Factor, count_below};
use super::fields::Fields;
use super::lanczos::{Wanted, pairs_near};
use super::mesh::{Cell, Mesh, MeshError, Triangle};
use super::space::Space;
use super::waves::Spot;
use crate::billiard::cross;
use crate::dense::Matrix;

/// Polynomial degree that is tried first: with straight triangles of many shapes, degrees of 12 to 20 cost about the same per
/// level, lower and higher ones more.
const DEGREE: usize = 16;
/// What is tried where the first degree is not accurate enough: a degree, and the length of edges in units of that at first. Shorter
/// edges help where parts of the outline much shorter than a wave lie beside long ones.
const FINER: [(usize, f64); 2] = [(20, 1.0), (20, 0.4)];
/// In two dimensions the error is that of one dimension for a wave with this times the wave number (measured on disks).
const DISPERSION: f64 = 1.2;
/// The largest error of a window's levels is about this many times the one that the mesh is made for.
const SPREAD: f64 = 5.0;
/// Part of the wanted accuracy that the iteration may use up.
const ITERATION: f64 = 0.1;
/// Times a window is halved when levels are missing from it.
const HALVINGS: usize = 3;

/// Length of edges times k at which a wave of wave number k has the relative accuracy.
///
/// For one dimension: (p!/(2p)!)^2 (k h)^(2p)/(2 (2p + 1)) (Ainsworth, SIAM J. Numer. Anal. 42 (2004) 553).
fn length_times_k(degree: usize, accuracy: f64) -> f64 {
    let p = degree as f64;
    let ratio: f64 = (degree + 1..=2 * degree).map(|i| (i as f64).ln()).sum();
    let logarithm = (accuracy / SPREAD * 2.0 * (2.0 * p + 1.0)).ln() + 2.0 * ratio;
    (logarithm / (2.0 * p)).exp() / DISPERSION
}

/// Waves up to some wave number, discretised.
#[derive(Debug)]
pub(super) struct Discretisation {
    mesh: Mesh,
    parts: Vec<Part>,
}

/// The unknowns of one class.
#[derive(Debug)]
struct Part {
    fields: Fields,
    space: Space,
    tree: Dissection,
    estimator: Estimator,
}

/// Levels of one class in a window.
#[derive(Clone, Debug, Default)]
pub(super) struct Found {
    /// Eigenvalues k^2 of the fields, ascending, and their errors.
    pub(super) values: Vec<f64>,
    pub(super) errors: Vec<f64>,
    /// Coefficients of the waves: blocks of rows in the order of the values.
    pub(super) vectors: Vec<Matrix>,
    /// Number of eigenvalues by inertia: below the window, and in it.
    pub(super) below: usize,
    pub(super) counted: usize,
}

impl Discretisation {
    /// How many meshes and degrees there are to be tried one after the other.
    pub(super) const ATTEMPTS: usize = 1 + FINER.len();

    /// Discretises all sectors for waves up to `k` with the relative accuracy; `attempt` counts from 0.
    pub(super) fn new(
        cell: &Cell,
        sectors: &[Sector],
        k: f64,
        accuracy: f64,
        attempt: usize,
    ) -> Result<Self, MeshError> {
        let (degree, part) = match attempt {
            0 => (DEGREE, 1.0),
            _ => FINER[(attempt - 1).min(FINER.len() - 1)],
        };
        let mesh = Mesh::new(cell, part * length_times_k(DEGREE, accuracy) / k)?;
        let parts = sectors
            .iter()
            .map(|sector| Part::new(&mesh, cell, &sector.fields, degree))
            .collect();
        Ok(Self { mesh, parts })
    }

    /// Number of unknowns of a domain of this area for waves up to k: what a window costs in memory.
    pub(super) fn expected_unknowns(area: f64, k: f64, accuracy: f64) -> f64 {
        let length = length_times_k(DEGREE, accuracy) / k;
        let triangles = area / (0.25 * 3.0_f64.sqrt() * length * length);
        0.5 * triangles * (DEGREE * DEGREE) as f64
    }

    /// Number of levels of a sector below k^2 = `energy`, by inertia.
    pub(super) fn count(&self, sector: usize, energy: f64) -> usize {
        let part = &self.parts[sector];
        count_below(&part.space, &part.tree, energy)
    }

    /// All levels of a sector with from <= k^2 < to, of which there are as many as the counts at both ends say.
    pub(super) fn levels(
        &self,
        sector: usize,
        range: [f64; 2],
        counts: [usize; 2],
        accuracy: f64,
    ) -> Found {
        let mut found = Found {
            below: counts[0],
            counted: counts[1].saturating_sub(counts[0]),
            ..Found::default()
        };
        let task = Task { accuracy, depth: 0 };
        collect(&self.parts[sector], range, counts, task, &mut found);
        found
    }

    pub(super) fn mesh(&self) -> &Mesh {
        &self.mesh
    }

    /// Value and gradient of every wave at the spots: one list per field, wave after wave.
    pub(super) fn values(
        &self,
        sector: usize,
        vectors: &[Matrix],
        spots: &[Spot],
    ) -> Vec<Vec<[f64; 3]>> {
        let part = &self.parts[sector];
        let waves: usize = vectors.iter().map(Matrix::nrows).sum();
        let mut values = vec![vec![[0.0; 3]; waves * spots.len()]; part.fields.count];
        let mut by_triangle: Vec<Vec<usize>> = vec![Vec::new(); self.mesh.triangles.len()];
        for (index, spot) in spots.iter().enumerate() {
            by_triangle[spot.triangle].push(index);
        }
        for leaf in &part.space.leaves {
            let element = &part.space.elements[leaf.element];
            let triangle = &self.mesh.triangles[element.triangle];
            let own = &by_triangle[element.triangle];
            if own.is_empty() {
                continue;
            }
            let functions: Vec<Vec<[f64; 3]>> = own
                .iter()
                .map(|&spot| part.functions(&self.mesh, triangle, leaf.element, spots[spot].at))
                .collect();
            let mut first = 0;
            for block in vectors {
                let local = leaf.restrict(block, element.selection.len());
                for row in 0..block.nrows() {
                    for (&spot, functions) in own.iter().zip(&functions) {
                        let mut sum = [0.0; 3];
                        for (column, parts) in functions.iter().enumerate() {
                            for (sum, part) in sum.iter_mut().zip(parts) {
                                *sum += local[(row, column)] * part;
                            }
                        }
                        values[leaf.field][(first + row) * spots.len() + spot] = sum;
                    }
                }
                first += block.nrows();
            }
        }
        values
    }
}

/// A shift near the middle of a range at which the factorisation keeps its digits, and the factorised matrix.
fn well_placed(part: &Part, [from, to]: [f64; 2]) -> (f64, Factor<'_>) {
    /// Largest entry at which enough digits are left; most shifts stay below.
    const LARGEST: f64 = 1e4;
    /// Distances from the middle, in widths of the range, that are tried where the middle does not do.
    const PLACES: [f64; 4] = [0.03, -0.03, 0.07, -0.07];
    let middle = 0.5 * (from + to);
    let at = |shift: f64| (shift, Factor::new(&part.space, &part.tree, shift));
    let mut best = at(middle);
    for place in PLACES {
        if best.1.largest < LARGEST {
            break;
        }
        let next = at(middle + place * (to - from));
        if next.1.largest < best.1.largest {
            best = next;
        }
    }
    best
}

/// What errors of the solutions leave in the Rayleigh quotients.
///
/// Where the operator of the iteration is off by d, seen in the difference of its values from the quotients, vectors are off by
/// d/gap and quotients by d^2/gap.
fn drifts(quotients: &[f64], iterated: &[f64]) -> Vec<f64> {
    quotients
        .iter()
        .zip(iterated)
        .enumerate()
        .map(|(index, (&own, &other))| {
            let drift = (own - other).abs();
            let neighbours = [index.checked_sub(1), Some(index + 1)];
            let gap = neighbours
                .into_iter()
                .flatten()
                .filter_map(|neighbour| quotients.get(neighbour))
                .map(|neighbour| (neighbour - own).abs())
                .filter(|&distance| distance > drift)
                .fold(f64::INFINITY, f64::min);
            drift.min(drift * drift / gap)
        })
        .collect()
}

/// How levels are looked for.
#[derive(Clone, Copy, Debug)]
struct Task {
    accuracy: f64,
    depth: usize,
}

impl Part {
    fn new(mesh: &Mesh, cell: &Cell, fields: &Fields, degree: usize) -> Self {
        let space = Space::new(mesh, cell, fields, degree, 0);
        Self {
            tree: Dissection::new(&space, mesh),
            estimator: Estimator::new(&space, mesh, cell, fields, degree),
            space,
            fields: fields.clone(),
        }
    }

    /// Values and derivatives by x and y in the plane of the selected functions of an element.
    fn functions(
        &self,
        mesh: &Mesh,
        triangle: &Triangle,
        element: usize,
        at: [f64; 2],
    ) -> Vec<[f64; 3]> {
        let [_, dx, dy] = mesh.map(triangle, at);
        let jacobian = cross(dx, dy);
        let all = self.space.reference.at(at);
        self.space.elements[element]
            .selection
            .columns
            .iter()
            .map(|&column| {
                let [value, by_x, by_y] = all[column];
                [
                    value,
                    (dy.y * by_x - dx.y * by_y) / jacobian,
                    (-dy.x * by_x + dx.x * by_y) / jacobian,
                ]
            })
            .collect()
    }
}

/// Finds the levels of a range in which there are `counts[1] - counts[0]`; where the iteration misses some, both halves.
fn collect(part: &Part, [from, to]: [f64; 2], counts: [usize; 2], task: Task, found: &mut Found) {
    let counted = counts[1].saturating_sub(counts[0]);
    if counted == 0 {
        return;
    }
    let (shift, factor) = well_placed(part, [from, to]);
    let wanted = Wanted {
        from,
        to,
        expected: counted,
        accuracy: ITERATION * task.accuracy,
    };
    let pairs = pairs_near(&part.space, &factor, shift, &wanted);
    let incomplete = !pairs.converged || pairs.values.len() != counted;
    if incomplete && task.depth < HALVINGS && counted > 1 {
        let middle = factor.negative;
        let deeper = Task {
            depth: task.depth + 1,
            ..task
        };
        collect(part, [from, shift], [counts[0], middle], deeper, found);
        collect(part, [shift, to], [middle, counts[1]], deeper, found);
        return;
    }
    let (values, errors) = part.estimator.assess(&part.space, &pairs.vectors);
    found.values.extend(&values);
    let drifts = drifts(&values, &pairs.values);
    found.errors.extend(
        errors
            .iter()
            .zip(&pairs.remainders)
            .zip(drifts)
            .map(|((own, remainder), drift)| own + remainder + drift),
    );
    found.vectors.push(pairs.vectors);
}
