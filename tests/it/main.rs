//! Integration tests, one binary: text in, text out.
#![allow(clippy::unwrap_used)]

mod messages;
mod mutations;
mod sheets;
