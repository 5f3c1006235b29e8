//! Level counts and level densities of wave cavities and quantum wells from classical periodic orbits.
//!
//! The pipeline, left to right:
//!
//! ```text
//! system file -> System -> orbits and families -> terms -> sum at the wanted k -> density, staircase
//!                     \-> baseline (Weyl) ---------------------------------------/
//!                     \-> levels (computed directly, or a list) -----------------/
//! ```
//!
//! * [`system`] reads and validates a system file.
//! * [`billiard`] holds walls, outline, symmetry group and the bounce map.
//! * [`orbit`] finds periodic orbits and families and turns them into terms.
//! * [`baseline`] counts levels smoothly (Weyl).
//! * [`trace`] smooths and sums the terms, and estimates how far the staircase strays from its smooth part.
//! * [`levels`] reads level lists and smooths their staircase.
//! * [`solver`] computes levels and waves directly, and counts them.
//! * [`report`] draws pictures.

pub mod baseline;
pub mod billiard;
mod dense;
pub mod levels;
pub mod orbit;
pub mod report;
pub mod solver;
pub mod system;
pub mod trace;
