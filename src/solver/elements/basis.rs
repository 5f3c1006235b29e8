//! Hierarchical polynomials on a triangle: corner, edge and interior functions, every degree adding to those below it.
//!
//! In barycentric coordinates l0, l1, l2: corner functions l_i; on the edge from corner a to corner b the functions
//! l_a l_b (l_a + l_b)^n P_n^{(1,1)}((l_b - l_a)/(l_a + l_b)); inside, those of the edge 0 1 times l_2 P_q^{(2n+3,1)}(2 l_2 - 1).
//! Source: Karniadakis & Sherwin, Spectral/hp Element Methods (2005), section 3.2.

use super::jacobi::{Jet, scaled};

/// Corners of the edges of a triangle: edge e lies opposite to corner e.
pub(in crate::solver) const EDGES: [[usize; 2]; 3] = [[1, 2], [2, 0], [0, 1]];

/// One function of the basis.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(in crate::solver) enum Function {
    /// One at a corner, zero at the other two.
    Corner(usize),
    /// Mode `order` of an edge; odd orders change their sign with the direction of the edge. Degree `order` + 2.
    Edge { edge: usize, order: usize },
    /// Zero on all edges.
    Interior { degree: usize },
}

/// All functions up to a degree: corners, the edges one after the other, the interior by ascending degree.
pub(in crate::solver) fn functions(degree: usize) -> Vec<Function> {
    let mut all: Vec<Function> = (0..3).map(Function::Corner).collect();
    for edge in 0..3 {
        all.extend((0..degree.saturating_sub(1)).map(|order| Function::Edge { edge, order }));
    }
    all.extend(interior(degree).map(|(n, q)| Function::Interior { degree: n + q + 3 }));
    all
}

/// Orders (n, q) of the interior functions up to a degree.
fn interior(degree: usize) -> impl Iterator<Item = (usize, usize)> {
    (3..=degree).flat_map(|total| (0..=total - 3).map(move |n| (n, total - 3 - n)))
}

/// Values and gradients (with respect to x = l1, y = l2) of all functions up to a degree at one point.
pub(super) fn evaluate(degree: usize, x: f64, y: f64) -> Vec<Jet<2>> {
    let l = [
        Jet {
            value: 1.0 - x - y,
            gradient: [-1.0, -1.0],
        },
        Jet {
            value: x,
            gradient: [1.0, 0.0],
        },
        Jet {
            value: y,
            gradient: [0.0, 1.0],
        },
    ];
    let mut values = l.to_vec();
    if degree < 2 {
        return values;
    }
    let along = |edge: usize| {
        let [a, b] = EDGES[edge];
        let modes = scaled(
            degree - 2,
            1.0,
            1.0,
            l[b].plus(l[a].scaled(-1.0)),
            l[a].plus(l[b]),
        );
        let product = l[a].times(l[b]);
        modes
            .into_iter()
            .map(move |mode| mode.times(product))
            .collect::<Vec<_>>()
    };
    for edge in 0..3 {
        values.extend(along(edge));
    }
    if degree < 3 {
        return values;
    }
    let base = along(2);
    let height = l[2].scaled(2.0).plus(Jet::constant(-1.0));
    let upwards: Vec<Vec<Jet<2>>> = (0..=degree - 3)
        .map(|n| {
            let a = (2 * n + 3) as f64;
            scaled(degree - 3 - n, a, 1.0, height, Jet::constant(1.0))
        })
        .collect();
    values.extend(interior(degree).map(|(n, q)| base[n].times(l[2]).times(upwards[n][q])));
    values
}
