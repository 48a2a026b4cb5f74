//! Geometry torture on the user's path: text sheet → `input::read` → `geometry::outline` → `adapt::run`.
//!
//! Every sheet is either solved, with an interval that closes and is sane, or refused with its place named.

mod campaign;
mod cases;
mod copies;
mod draft;
mod fuzz;
mod judge;
mod random;
mod watch;
