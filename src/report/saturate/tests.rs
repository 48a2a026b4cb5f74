//! The table as text.
