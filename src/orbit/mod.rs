//! Periodic orbits and families: search, refinement, index, terms.

mod analyse;
mod catalogue;
mod chain;
mod cyclic;
mod fan;
mod joint;
mod monodromy;
mod omission;
mod passes;
mod path;
mod periodic;
mod phase;
mod search;
mod strip;
mod terms;

pub use catalogue::{Catalogue, Limits};
pub use omission::{Omission, OmissionKind};
pub use passes::Pass;
pub use periodic::{Closure, Fixing, Orbit, OrbitKind, OrbitPoint};
pub use search::CurvedFamily;
pub use strip::{Strip, StripEdge};
pub use terms::{
    ClassWeights, SourcedTerm, TermSource, orbit_terms, sourced_terms, strip_terms, terms,
    torus_classes_known,
};
pub mod tori;
