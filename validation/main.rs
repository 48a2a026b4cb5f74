//! Validation: the solver against mathematics that shares no line with it, and against published values.
//!
//! `cargo test --test validation` runs everything; `RUN_SLOW_TESTS=1` runs the long campaigns in full.
#![allow(clippy::unwrap_used)]

use std::io::Write;

mod axis;
mod bessel;
mod bessel_form;
mod builders;
mod campaigns;
mod cell;
mod checks;
mod coils;
mod demag;
#[allow(dead_code, reason = "shared with the integration tests")]
mod dice;
mod elliptic;
mod ideal;
mod modes;
mod quadrature;
mod random;
mod references;
mod solver;
mod sphere;
mod stored;
mod table;
mod uniform;

/// Writes past the test harness, which keeps the output of passing tests to itself.
fn say(text: &str) {
    // A closed pipe is no reason to fail.
    let _ = writeln!(std::io::stdout().lock(), "{text}");
}
