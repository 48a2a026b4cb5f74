//! Field values at points.
