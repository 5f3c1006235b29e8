//! The unknowns: which functions of which triangles are one and the same, and which vanish on the boundary.

use super::elements::{ElementMatrices, Function, Reference, Selection};
use super::fields::{Direction, Fields};
use super::mesh::{Cell, Mesh, Side, Triangle, same_length};
use crate::dense::Matrix;
use rayon::prelude::*;
use std::collections::BTreeMap;
use std::ops::Range;

/// Lowest polynomial degree, in the triangles next to a singular point.
const LOWEST_DEGREE: usize = 3;

/// A corner or edge function of an element holds `coefficient` times one unknown.
#[derive(Clone, Copy, Debug)]
pub(super) struct Entry {
    /// Row of the element's matrices.
    pub(super) local: usize,
    /// Position in [`Leaf::rim`].
    pub(super) slot: usize,
    pub(super) coefficient: f64,
}

/// One field on one element.
#[derive(Clone, Debug)]
pub(super) struct Leaf {
    pub(super) element: usize,
    pub(super) field: usize,
    /// Numbers of the unknowns on its corners and edges.
    pub(super) rim: Vec<usize>,
    /// What its corner and edge functions are made of.
    pub(super) entries: Vec<Entry>,
    /// Numbers of the unknowns inside, one for each interior function, in their order.
    pub(super) interior: Range<usize>,
}

/// An element: its functions and matrices.
#[derive(Clone, Debug)]
pub(super) struct Element {
    /// Number of the triangle in the mesh.
    pub(super) triangle: usize,
    pub(super) selection: Selection,
    pub(super) matrices: ElementMatrices,
    /// Number of corner and edge functions: they come first.
    pub(super) rim: usize,
    /// Elements of one kind have the same matrices but for rounding.
    pub(super) kind: usize,
}

/// All unknowns of a mesh at one polynomial degree.
#[derive(Debug)]
pub(super) struct Space {
    pub(super) reference: Reference,
    pub(super) elements: Vec<Element>,
    pub(super) leaves: Vec<Leaf>,
    /// The first element of each kind.
    pub(super) kinds: Vec<usize>,
    /// Number of unknowns.
    pub(super) size: usize,
}

/// Degree inside a triangle.
pub(super) fn degree_of(triangle: &Triangle, full: usize) -> usize {
    let span = full.saturating_sub(LOWEST_DEGREE) as f64;
    (LOWEST_DEGREE + (triangle.quality * span).round() as usize).min(full)
}

/// Degrees on the edges: the higher one of the neighbours.
fn edge_degrees(mesh: &Mesh, full: usize) -> Vec<usize> {
    let mut degrees = vec![0; mesh.edges.len()];
    for triangle in &mesh.triangles {
        for edge in triangle.edges {
            degrees[edge] = degrees[edge].max(degree_of(triangle, full));
        }
    }
    degrees
}

/// Numbers of the unknowns of a corner or an edge: `first` + order * directions + direction.
#[derive(Clone, Debug)]
struct Place {
    first: usize,
    directions: Vec<Direction>,
}

impl Space {
    pub(super) fn new(
        mesh: &Mesh,
        cell: &Cell,
        fields: &Fields,
        degree: usize,
        extra: usize,
    ) -> Self {
        let reference = Reference::new(degree + extra);
        let edge_degree: Vec<usize> = edge_degrees(mesh, degree)
            .into_iter()
            .map(|degree| degree + extra)
            .collect();
        let mut size = 0;
        let corners = corner_places(mesh, cell, fields, &mut size);
        let edges = edge_places(mesh, cell, fields, &edge_degree, &mut size);
        let mut elements: Vec<Element> = mesh
            .triangles
            .par_iter()
            .enumerate()
            .map(|(index, triangle)| {
                let selection = Selection::new(
                    &reference,
                    triangle.edges.map(|edge| edge_degree[edge]),
                    degree_of(triangle, degree) + extra,
                );
                let matrices = ElementMatrices::new(mesh, triangle, &reference, &selection);
                Element {
                    triangle: index,
                    matrices,
                    rim: reference.rim_functions(&selection),
                    selection,
                    kind: 0,
                }
            })
            .collect();
        let kinds = sort_into_kinds(&mut elements);
        let mut leaves = Vec::new();
        for (index, element) in elements.iter().enumerate() {
            for field in 0..fields.count {
                leaves.push(leaf(
                    &mesh.triangles[index],
                    &reference,
                    (index, element),
                    field,
                    (&corners, &edges),
                    &mut size,
                ));
            }
        }
        Self {
            reference,
            elements,
            leaves,
            kinds,
            size,
        }
    }
}

/// Finds the straight elements that have the same shape and size: a lattice has many. Returns the first element of each kind.
fn sort_into_kinds(elements: &mut [Element]) -> Vec<usize> {
    let mut known: BTreeMap<Vec<i64>, usize> = BTreeMap::new();
    let mut kinds = Vec::new();
    for (index, element) in elements.iter_mut().enumerate() {
        let new = kinds.len();
        element.kind = match element.matrices.fingerprint() {
            None => new,
            Some(mut key) => {
                key.extend(
                    element
                        .selection
                        .columns
                        .iter()
                        .map(|&column| column as i64),
                );
                *known.entry(key).or_insert(new)
            }
        };
        if element.kind == new {
            kinds.push(index);
        }
    }
    kinds
}

fn leaf(
    triangle: &Triangle,
    reference: &Reference,
    (index, element): (usize, &Element),
    field: usize,
    (corners, edges): (&[Place], &[Place]),
    size: &mut usize,
) -> Leaf {
    let mut leaf = Leaf {
        element: index,
        field,
        rim: Vec::new(),
        entries: Vec::new(),
        interior: *size..*size + element.selection.len() - element.rim,
    };
    *size = leaf.interior.end;
    for (local, &column) in element.selection.columns[..element.rim].iter().enumerate() {
        match reference.functions[column] {
            Function::Corner(corner) => {
                leaf.shared(local, &corners[triangle.corners[corner]], 0, 1.0);
            }
            Function::Edge { edge, order } => {
                let sign = if order % 2 == 1 && !triangle.forward[edge] {
                    -1.0
                } else {
                    1.0
                };
                leaf.shared(local, &edges[triangle.edges[edge]], order, sign);
            }
            Function::Interior { .. } => {}
        }
    }
    leaf
}

impl Leaf {
    /// Coefficients of the element's functions, `functions` of them: one row per vector, one column per function.
    pub(super) fn restrict(&self, block: &Matrix, functions: usize) -> Matrix {
        let mut local = Matrix::zeros(block.nrows(), functions);
        self.restrict_rim(block, &mut local);
        let rim = functions - self.interior.len();
        local
            .subcols_mut(rim, self.interior.len())
            .copy_from(block.subcols(self.interior.start, self.interior.len()));
        local
    }

    /// Writes the coefficients of the corner and edge functions into the first columns.
    pub(super) fn restrict_rim(&self, block: &Matrix, local: &mut Matrix) {
        for entry in &self.entries {
            let source = block.col_as_slice(self.rim[entry.slot]);
            let target = local.col_as_slice_mut(entry.local);
            for (t, s) in target.iter_mut().zip(source) {
                *t += entry.coefficient * s;
            }
        }
    }

    /// Adds what belongs to the element's functions to the unknowns.
    pub(super) fn accumulate(&self, local: &Matrix, block: &mut Matrix) {
        self.accumulate_rim(local, 1.0, block);
        let rim = local.ncols() - self.interior.len();
        for (column, unknown) in self.interior.clone().enumerate() {
            let source = local.col_as_slice(rim + column);
            let target = block.col_as_slice_mut(unknown);
            for (t, s) in target.iter_mut().zip(source) {
                *t += s;
            }
        }
    }

    /// Adds `factor` times what belongs to the corner and edge functions to their unknowns.
    pub(super) fn accumulate_rim(&self, local: &Matrix, factor: f64, block: &mut Matrix) {
        for entry in &self.entries {
            let weight = factor * entry.coefficient;
            let source = local.col_as_slice(entry.local);
            let target = block.col_as_slice_mut(self.rim[entry.slot]);
            for (t, s) in target.iter_mut().zip(source) {
                *t += weight * s;
            }
        }
    }

    fn shared(&mut self, local: usize, place: &Place, order: usize, sign: f64) {
        let count = place.directions.len();
        for (index, direction) in place.directions.iter().enumerate() {
            let coefficient = direction[self.field];
            if coefficient != 0.0 {
                self.add(
                    local,
                    place.first + order * count + index,
                    sign * coefficient,
                );
            }
        }
    }

    fn add(&mut self, local: usize, unknown: usize, coefficient: f64) {
        let slot = match self.rim.iter().position(|&other| other == unknown) {
            Some(slot) => slot,
            None => {
                self.rim.push(unknown);
                self.rim.len() - 1
            }
        };
        self.entries.push(Entry {
            local,
            slot,
            coefficient,
        });
    }
}

/// Sides on which each corner lies.
fn sides_of_corners(mesh: &Mesh) -> Vec<Vec<Side>> {
    let mut sides: Vec<Vec<Side>> = vec![Vec::new(); mesh.corners.len()];
    for edge in &mesh.edges {
        if let Some((side, _)) = edge.boundary {
            for end in edge.ends {
                if !sides[end].contains(&side) {
                    sides[end].push(side);
                }
            }
        }
    }
    sides
}

fn corner_places(mesh: &Mesh, cell: &Cell, fields: &Fields, size: &mut usize) -> Vec<Place> {
    let sides = sides_of_corners(mesh);
    let radius = |corner: usize| (mesh.corners[corner] - cell.center).norm();
    let mut places: Vec<Place> = Vec::with_capacity(mesh.corners.len());
    let is_image = |corner: usize| {
        sides[corner].contains(&Side::Cut(1)) && !sides[corner].contains(&Side::Cut(0))
    };
    for (corner, sides) in sides.iter().enumerate() {
        let at_center = same_length(radius(corner), 0.0, cell.size);
        let directions = if is_image(corner) {
            Vec::new()
        } else {
            fields.free(sides, at_center)
        };
        let first = *size;
        *size += directions.len();
        places.push(Place { first, directions });
    }
    for corner in (0..mesh.corners.len()).filter(|&corner| is_image(corner)) {
        let original = (0..mesh.corners.len()).find(|&other| {
            sides[other].contains(&Side::Cut(0))
                && !sides[other].contains(&Side::Cut(1))
                && same_length(radius(other), radius(corner), cell.size)
        });
        if let Some(original) = original {
            places[corner] = image(&places[original], fields);
        }
    }
    places
}

fn edge_places(
    mesh: &Mesh,
    cell: &Cell,
    fields: &Fields,
    degrees: &[usize],
    size: &mut usize,
) -> Vec<Place> {
    let side = |edge: usize| mesh.edges[edge].boundary.map(|(side, _)| side);
    let radii = |edge: usize| {
        mesh.edges[edge]
            .ends
            .map(|end| (mesh.corners[end] - cell.center).norm())
    };
    let mut places: Vec<Place> = Vec::with_capacity(mesh.edges.len());
    for (edge, degree) in degrees.iter().enumerate() {
        let directions = match side(edge) {
            Some(Side::Cut(1)) => Vec::new(),
            Some(side) => fields.free(&[side], false),
            None => fields.free(&[], false),
        };
        let first = *size;
        *size += directions.len() * (degree - 1);
        places.push(Place { first, directions });
    }
    for edge in (0..mesh.edges.len()).filter(|&edge| side(edge) == Some(Side::Cut(1))) {
        let original = (0..mesh.edges.len()).find(|&other| {
            let pairs = radii(other).into_iter().zip(radii(edge));
            side(other) == Some(Side::Cut(0))
                && pairs.into_iter().all(|(a, b)| same_length(a, b, cell.size))
        });
        if let Some(original) = original {
            places[edge] = image(&places[original], fields);
        }
    }
    places
}

fn image(place: &Place, fields: &Fields) -> Place {
    Place {
        first: place.first,
        directions: place
            .directions
            .iter()
            .map(|&direction| fields.rotated(direction))
            .collect(),
    }
}
