//! Integration tests, one binary: text in, text out.
#![allow(clippy::unwrap_used)]

mod architecture;
mod bench_smoke;
mod cli;
mod instructions;
mod messages;
mod mutations;
mod sheets;
mod tidy;
