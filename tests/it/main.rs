//! Integration tests, one binary: text in, text out.
#![allow(clippy::unwrap_used, clippy::print_stdout)]

mod cases;
mod forces;
mod guarantee;
mod joint;
mod messages;
mod mutations;
mod rates;
mod sheets;
