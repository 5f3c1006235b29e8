//! Pictures, written as SVG: the shape, its orbits, density and staircase, residual of an audited
//! list, length spectra, levels and their statistics, waves.
//!
//! Plain data goes in, the text of a self-contained SVG document comes out; nothing here writes files. One unit of a
//! picture is one point (1/72 inch), and every picture is 180 mm wide: the text width of a printed
//! page. Numbers are written with a fixed format, so equal data gives equal bytes.
//!
//! What matters is never told by colour alone: lines differ in width, lightness and dashes, corners in the form of their
//! marks.

mod audit;
mod axis;
mod canvas;
mod density;
mod legend;
mod lengths;
mod levels;
mod orbits;
mod outline;
mod panel;
mod shape;
mod stack;
mod statistics;
#[cfg(test)]
mod testing;
mod thinning;
mod wave;

pub use audit::{AuditCurves, AuditMark, AuditMarkKind, audit_picture};
pub use density::{DensityCurves, density_picture};
pub use lengths::{LengthCurves, LengthMark, lengths_picture};
pub use levels::{LevelCurves, levels_picture};
pub use orbits::{LARGEST_GRID, OrbitDrawing, OrbitStroke, orbits_picture};
pub use shape::shape_picture;
pub use statistics::{
    CurveKind, MeasuredCurve, StatisticsCurve, StatisticsCurves, statistics_picture,
};
pub use wave::{WaveDrawing, wave_picture};
