//! What a problem of constrained optimisation is to its solver: cost and constraints with gradients, in a box.

use super::quadratic::Row;
use arrayvec::ArrayVec;

/// Most general constraints of a problem.
pub const MOST_CONSTRAINTS: usize = 28;

/// Violation under which a point counts as feasible.
pub const FEASIBLE: f64 = 1e-7;

/// A function's value and gradient.
#[derive(Debug, Clone, Copy)]
pub struct Linear {
    /// Value.
    pub value: f64,
    /// Gradient.
    pub gradient: Row,
}

/// Cost and constraints at one point.
#[derive(Debug, Clone)]
pub struct Assessment {
    /// To be minimised.
    pub cost: Linear,
    /// Each to be ≥ 0, scaled to order 1.
    pub constraints: ArrayVec<Linear, MOST_CONSTRAINTS>,
    /// What the problem's owner wants to know of the point; the solver only carries it along.
    pub merits: [f64; 3],
}

impl Assessment {
    /// Largest violation of a constraint.
    pub fn violation(&self) -> f64 {
        self.constraints
            .iter()
            .fold(0.0, |worst, c| worst.max(-c.value))
    }

    /// `∇cost − Σ multiplier·∇constraint`.
    pub fn lagrangian_gradient(&self, multipliers: &[f64]) -> Row {
        let mut g = self.cost.gradient;
        for (c, m) in self.constraints.iter().zip(multipliers) {
            for (slot, slope) in g.iter_mut().zip(&c.gradient) {
                *slot -= m * slope;
            }
        }
        g
    }
}

/// A smooth problem in a box.
pub trait Constrained {
    /// Number of variables.
    fn size(&self) -> usize;
    /// Lower and upper bound of a variable.
    fn bounds(&self, variable: usize) -> (f64, f64);
    /// Cost and constraints with gradients; `None` where they do not exist.
    fn assess(&self, point: &Row) -> Option<Assessment>;
}
