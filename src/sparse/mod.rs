//! Sparse algebra on sprs matrices: products, conjugate gradients, the multilevel preconditioner. No physics.

pub mod cg;
mod degree;
mod ldl;
pub mod matrix;
pub mod multilevel;

pub use cg::{CgError, Convergence, Operator, Stop, conjugate_gradients};
pub use matrix::{Matrix, Storage, Swept};
pub use multilevel::{Hierarchy, Interpolation, Multilevel, Workspace};
