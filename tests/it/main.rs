//! Integration tests, one binary: text in, text out.
#![allow(clippy::unwrap_used, clippy::print_stdout)]

mod architecture;
mod bench_smoke;
mod blame;
mod cases;
mod cli;
#[path = "../../validation/dice.rs"]
mod dice;
mod forces;
mod guarantee;
mod hot_spots;
mod instructions;
mod joint;
mod ledger;
mod messages;
mod mutations;
mod points;
mod rates;
mod readme;
mod saturation;
mod sheets;
mod tidy;
mod torture;
mod vtk_reader;
