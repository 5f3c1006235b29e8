//! Periodic orbits and families: search, refinement, index, terms.

mod analyse;
mod catalogue;
#[allow(dead_code, reason = "the terms of strip edges are the caller")]
mod chain;
mod cyclic;
mod fan;
mod path;
mod periodic;
mod phase;
mod search;

pub use catalogue::{Catalogue, Limits};
pub use periodic::{Closure, Fixing, Orbit, OrbitKind, OrbitPoint};
pub use search::Pass;
