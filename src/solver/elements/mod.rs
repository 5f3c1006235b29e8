//! Polynomials on triangles: basis, quadrature, and the stiffness and mass matrices of one element.

mod basis;
mod jacobi;
mod matrices;
mod reference;

pub(super) use basis::{EDGES, Function};
pub(super) use matrices::{ElementMatrices, Selection};
pub(super) use reference::Reference;
