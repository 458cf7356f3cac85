//! Small dense numerics of our own: scalars with derivatives, fixed-size matrices. No physics.

pub mod chebyshev;
pub mod complex;
pub mod elliptic;
pub mod hypervolume;
pub mod lyapunov;
pub mod matrix;
pub mod root;
pub mod scalar;
pub mod symmetric;
