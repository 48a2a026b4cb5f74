//! gapwright: the magnetic field of round cores and coils, with a guaranteed interval of the inductance.
//!
//! `input` → `model` → `geometry` → `mesh` → `adapt` (`fem`, `solve`, `bound`) → `results` → `report`.

pub mod adapt;
pub mod bound;
pub mod fem;
pub mod geometry;
pub mod input;
pub mod mesh;
pub mod model;
pub mod report;
pub mod results;
pub mod solve;
pub mod sparse;
pub mod study;
pub mod units;
