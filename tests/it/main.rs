//! Integration tests, one binary: text in, text out.
#![allow(clippy::unwrap_used)]

mod bench_smoke;
mod architecture;
mod cli;
mod messages;
mod mutations;
mod sheets;
mod tidy;
