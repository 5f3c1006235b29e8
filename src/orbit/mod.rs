//! Periodic orbits and families: search, refinement, index, terms.

mod analyse;
mod catalogue;
mod chain;
mod cyclic;
mod fan;
mod joint;
mod monodromy;
mod omission;
mod path;
mod periodic;
mod phase;
mod search;
mod strip;
mod terms;

pub use catalogue::{Catalogue, Limits};
pub use omission::{Omission, OmissionKind};
pub use periodic::{Closure, Fixing, Orbit, OrbitKind, OrbitPoint};
pub use search::{CurvedFamily, Pass};
pub use strip::{Strip, StripEdge};
pub use terms::{ClassWeights, orbit_terms, strip_terms, terms, torus_classes_known};
pub mod tori;
