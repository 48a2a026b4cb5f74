//! The study.
