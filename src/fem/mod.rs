//! Quadratic finite elements for ψ = r·A_φ in the hierarchical basis, axis rule and cap tensor included.
//!
//! Knows no file format, no solver and no report. The equations are numbered in DEVELOPERS.md.

pub mod assemble;
pub mod batches;
pub mod coefficients;
pub mod element;
pub mod elements;
pub mod evaluate;
pub mod moments;
pub mod quadrature;
pub mod space;

pub use coefficients::{Coefficients, Reluctivity};
pub use elements::{Element, Elements};
pub use quadrature::Rules;
pub use space::Space;
