//! Validation: the solver against mathematics that shares no line with it, and against published values.
//!
//! `cargo test --test validation` runs everything; `RUN_SLOW_TESTS=1` runs the long campaigns in full.
#![allow(clippy::unwrap_used, clippy::print_stdout)]

mod axis;
mod bessel;
mod bessel_form;
mod builders;
mod campaigns;
mod cell;
mod checks;
mod coils;
mod demag;
mod elliptic;
mod modes;
mod quadrature;
mod random;
mod references;
mod solver;
mod sphere;
mod table;
