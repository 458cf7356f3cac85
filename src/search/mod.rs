//! The search: the design space cut into cells, each cell's Pareto front traced by constrained optimisation.

pub mod quadratic;
