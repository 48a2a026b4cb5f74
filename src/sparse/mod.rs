//! Sparse algebra on sprs matrices: products, conjugate gradients, the multilevel preconditioner. No physics.

pub mod cg;
pub mod matrix;
pub mod multilevel;

pub use cg::{CgError, Convergence, Stop, conjugate_gradients};
pub use matrix::Matrix;
pub use multilevel::{Hierarchy, Interpolation};
