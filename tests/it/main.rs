//! Integration tests, one binary: text in, text out.
#![allow(clippy::unwrap_used)]

mod bench_smoke;
mod messages;
mod mutations;
mod sheets;
