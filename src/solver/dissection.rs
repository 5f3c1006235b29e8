//! The order in which unknowns are eliminated: nested dissection of the elements (George, SIAM J. Numer. Anal. 10 (1973) 345).
//!
//! The unknowns inside elements go first. Then a binary tree over the leaves (single fields on single elements) is walked up: at
//! every node above the leaves those unknowns are eliminated that no leaf outside the node holds; what remains is the rim that
//! the node shares with the rest.

use super::space::{Leaf, Space};
use crate::billiard::Vec2;
use crate::solver::mesh::Mesh;

/// What stands below a node.
#[derive(Clone, Debug)]
pub(super) enum Below {
    /// One leaf, by its number in the space.
    Leaf(usize),
    /// Two nodes.
    Pair(usize, usize),
    /// A single node, the only leaf of its tree.
    Only(usize),
}

/// A node of the tree.
#[derive(Clone, Debug)]
pub(super) struct Node {
    pub(super) below: Below,
    /// Unknowns that end here.
    pub(super) eliminated: Vec<usize>,
    /// Unknowns that go on to the parent.
    pub(super) rim: Vec<usize>,
}

/// The tree; children stand before their parents, the root last.
#[derive(Debug)]
pub(super) struct Dissection {
    pub(super) nodes: Vec<Node>,
}

impl Dissection {
    pub(super) fn new(space: &Space, mesh: &Mesh) -> Self {
        let mut holders = vec![0_u32; space.size];
        for leaf in &space.leaves {
            for &unknown in &leaf.rim {
                holders[unknown] += 1;
            }
        }
        let middle = |leaf: &Leaf| -> Vec2 {
            let triangle = &mesh.triangles[space.elements[leaf.element].triangle];
            triangle.anchor + triangle.points.iter().sum::<Vec2>() / 3.0
        };
        let middles: Vec<Vec2> = space.leaves.iter().map(middle).collect();
        let mut builder = Builder {
            space,
            holders,
            middles,
            nodes: Vec::new(),
        };
        let fields = space
            .leaves
            .iter()
            .map(|leaf| leaf.field)
            .max()
            .unwrap_or(0);
        let mut tops = Vec::new();
        for field in 0..=fields {
            let mut own: Vec<usize> = (0..space.leaves.len())
                .filter(|&leaf| space.leaves[leaf].field == field)
                .collect();
            tops.push(builder.split(&mut own));
        }
        // Fields meet on the axes only, so each is dissected by itself.
        let mut top = tops.remove(0);
        for other in tops {
            top = builder.join(top, other);
        }
        if !top.1.is_empty() {
            builder.node(Below::Only(top.0), top.1);
        }
        Self {
            nodes: builder.nodes,
        }
    }
}

/// Unknowns that a subtree still holds, ascending, with the number of its leaves that hold them.
type Front = Vec<(usize, u32)>;

struct Builder<'a> {
    space: &'a Space,
    holders: Vec<u32>,
    middles: Vec<Vec2>,
    nodes: Vec<Node>,
}

impl Builder<'_> {
    /// Halves a set of leaves along its longer side until single leaves are left.
    fn split(&mut self, leaves: &mut [usize]) -> (usize, Front) {
        if let [leaf] = leaves {
            let mut held: Front = self.space.leaves[*leaf]
                .rim
                .iter()
                .map(|&unknown| (unknown, 1))
                .collect();
            held.sort_unstable();
            self.nodes.push(Node {
                below: Below::Leaf(*leaf),
                eliminated: Vec::new(),
                rim: held.iter().map(|&(unknown, _)| unknown).collect(),
            });
            return (self.nodes.len() - 1, held);
        }
        let mut low = Vec2::repeat(f64::INFINITY);
        let mut high = Vec2::repeat(f64::NEG_INFINITY);
        for &leaf in leaves.iter() {
            low = low.inf(&self.middles[leaf]);
            high = high.sup(&self.middles[leaf]);
        }
        let axis = usize::from((high - low).y > (high - low).x);
        leaves.sort_by(|&a, &b| {
            let along = self.middles[a][axis].total_cmp(&self.middles[b][axis]);
            along.then(a.cmp(&b))
        });
        let (left, right) = leaves.split_at_mut(leaves.len() / 2);
        let (first, second) = (self.split(left), self.split(right));
        self.join(first, second)
    }

    fn join(&mut self, first: (usize, Front), second: (usize, Front)) -> (usize, Front) {
        let held = merge(&first.1, &second.1);
        self.node(Below::Pair(first.0, second.0), held)
    }

    fn node(&mut self, below: Below, held: Front) -> (usize, Front) {
        let (ends, rim): (Front, Front) = held
            .into_iter()
            .partition(|&(unknown, count)| count == self.holders[unknown]);
        let names = |front: &Front| front.iter().map(|&(unknown, _)| unknown).collect();
        self.nodes.push(Node {
            below,
            eliminated: names(&ends),
            rim: names(&rim),
        });
        (self.nodes.len() - 1, rim)
    }
}

fn merge(a: &Front, b: &Front) -> Front {
    let mut all: Front = Vec::with_capacity(a.len() + b.len());
    let (mut i, mut j) = (0, 0);
    while i < a.len() || j < b.len() {
        let take_a = j >= b.len() || (i < a.len() && a[i].0 <= b[j].0);
        let take_b = i >= a.len() || (j < b.len() && b[j].0 <= a[i].0);
        let unknown = if take_a { a[i].0 } else { b[j].0 };
        let mut count = 0;
        if take_a {
            count += a[i].1;
            i += 1;
        }
        if take_b {
            count += b[j].1;
            j += 1;
        }
        all.push((unknown, count));
    }
    all
}
