//! Integration tests, one binary: text in, text out.
#![allow(clippy::unwrap_used)]

mod architecture;
mod cli;
mod messages;
mod mutations;
mod sheets;
mod tidy;
mod torture;
