//! Periodic orbits and families: search, refinement, index, terms.

pub mod tori;
