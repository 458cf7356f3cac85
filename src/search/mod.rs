//! The search: the design space cut into cells, each cell's Pareto front traced by constrained optimisation.

pub mod problem;
pub mod quadratic;
pub mod solver;
pub mod space;
