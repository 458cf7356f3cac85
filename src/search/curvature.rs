//! Model of a Lagrangian's curvature, learnt from the gradients met: damped BFGS (Powell 1978; Nocedal and Wright,
//! *Numerical Optimization*, ch. 18).

use super::quadratic::{MOST_VARIABLES, Row};

/// Curvature carried from one problem to a neighbour.
pub type Curvature = [Row; MOST_VARIABLES];

/// The identity.
pub fn no_curvature() -> Curvature {
    let mut h = [[0.0; MOST_VARIABLES]; MOST_VARIABLES];
    for (i, row) in h.iter_mut().enumerate() {
        row[i] = 1.0;
    }
    h
}

/// Learns from the gradients before and after a `step` in `n` variables.
pub fn learn(curvature: &mut Curvature, n: usize, step: &Row, before: &Row, after: &Row) {
    let mut y = [0.0; MOST_VARIABLES];
    let mut hs = [0.0; MOST_VARIABLES];
    for i in 0..n {
        y[i] = after[i] - before[i];
        hs[i] = dot(n, &curvature[i], step);
    }
    let shs = dot(n, step, &hs);
    let sy = dot(n, step, &y);
    if shs <= f64::MIN_POSITIVE || !sy.is_finite() {
        return;
    }
    if sy < 0.2 * shs {
        let theta = 0.8 * shs / (shs - sy);
        for i in 0..n {
            y[i] = theta * y[i] + (1.0 - theta) * hs[i];
        }
    }
    let sy = dot(n, step, &y);
    for i in 0..n {
        for k in 0..n {
            curvature[i][k] += y[i] * y[k] / sy - hs[i] * hs[k] / shs;
        }
    }
}

/// Scalar product of the first `n` components.
pub fn dot(n: usize, a: &Row, b: &Row) -> f64 {
    (0..n).map(|i| a[i] * b[i]).sum()
}
