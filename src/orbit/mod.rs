//! Periodic orbits and families: search, refinement, index, terms.

mod analyse;
mod cyclic;
mod fan;
mod path;
mod periodic;
mod phase;
mod search;

pub use periodic::{Closure, Fixing, Orbit, OrbitKind, OrbitPoint};
pub use search::Pass;
