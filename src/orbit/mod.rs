//! Periodic orbits and families: search, refinement, index, terms.

mod analyse;
mod catalogue;
mod cyclic;
mod fan;
mod path;
mod periodic;
mod phase;
mod search;
mod strip;

pub use catalogue::{Catalogue, Limits};
pub use periodic::{Closure, Fixing, Orbit, OrbitKind, OrbitPoint};
pub use search::Pass;
pub use strip::{Strip, StripEdge};
