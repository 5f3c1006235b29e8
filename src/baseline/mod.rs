//! Smooth level counts: the Weyl expansion with corners, curvature and symmetry classes.

mod axis;
mod boundary;
mod saturation;
mod weyl;

pub use saturation::{orthogonal_form_factor, saturation_fluctuation};
pub use weyl::{Contribution, Omission, Weyl, WeylTerm, weyl};
