//! Tensor Chebyshev interpolation of smooth functions of two variables on [−1, 1]².

use ndarray::Array2;
use std::f64::consts::PI;

/// Most coefficients along one variable.
const MOST_TERMS: usize = 32;

/// A polynomial `Σ c_ij T_i(x) T_j(y)`.
#[derive(Debug, Clone)]
pub struct Chebyshev2 {
    coefficients: Array2<f64>,
}

/// Value and first partial derivatives.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Surface {
    /// f.
    pub value: f64,
    /// ∂f/∂x.
    pub by_x: f64,
    /// ∂f/∂y.
    pub by_y: f64,
}

/// The `count` interpolation nodes on [−1, 1] (Chebyshev points of the first kind).
pub fn nodes(count: usize) -> Vec<f64> {
    (0..count)
        .map(|k| (PI * (k as f64 + 0.5) / count as f64).cos())
        .collect()
}

impl Chebyshev2 {
    /// Interpolates `values`, one row an x-node and one column a y-node of [`nodes`]; at most 32 each way.
    pub fn through(values: &Array2<f64>) -> Self {
        let (rows, columns) = values.dim();
        assert!(rows <= MOST_TERMS && columns <= MOST_TERMS);
        let transform = |count: usize| {
            Array2::from_shape_fn((count, count), |(i, k)| {
                let weight = if i == 0 { 1.0 } else { 2.0 } / count as f64;
                weight * (PI * i as f64 * (k as f64 + 0.5) / count as f64).cos()
            })
        };
        Self {
            coefficients: transform(rows).dot(values).dot(&transform(columns).t()),
        }
    }

    /// The polynomial at a point.
    pub fn at(&self, x: f64, y: f64) -> Surface {
        let (rows, columns) = self.coefficients.dim();
        let (tx, dx) = polynomials(rows, x);
        let (ty, dy) = polynomials(columns, y);
        let mut surface = Surface {
            value: 0.0,
            by_x: 0.0,
            by_y: 0.0,
        };
        for (i, row) in self.coefficients.outer_iter().enumerate() {
            let (mut along, mut slope) = (0.0, 0.0);
            for (c, (t, d)) in row.iter().zip(ty.iter().zip(&dy)) {
                along += c * t;
                slope += c * d;
            }
            surface.value += tx[i] * along;
            surface.by_x += dx[i] * along;
            surface.by_y += tx[i] * slope;
        }
        surface
    }
}

/// T_0..T_{count−1} and their derivatives at x.
fn polynomials(count: usize, x: f64) -> ([f64; MOST_TERMS], [f64; MOST_TERMS]) {
    let mut t = [0.0; MOST_TERMS];
    let mut d = [0.0; MOST_TERMS];
    t[0] = 1.0;
    if count > 1 {
        t[1] = x;
        d[1] = 1.0;
    }
    for k in 2..count {
        t[k] = 2.0 * x * t[k - 1] - t[k - 2];
        d[k] = 2.0 * t[k - 1] + 2.0 * x * d[k - 1] - d[k - 2];
    }
    (t, d)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The functions' own series end below this at 20 terms.
    const TOLERANCE: f64 = 1e-11;

    #[test]
    fn law_smooth_functions_and_their_slopes_come_back() {
        let f = |x: f64, y: f64| (0.7 * x + 0.2).exp() / (3.0 + y);
        let (xs, ys) = (nodes(16), nodes(20));
        let values = Array2::from_shape_fn((16, 20), |(i, k)| f(xs[i], ys[k]));
        let surface = Chebyshev2::through(&values);
        for (x, y) in [(0.0, 0.0), (-1.0, 1.0), (0.31, -0.77), (1.0, -1.0)] {
            let s = surface.at(x, y);
            assert!((s.value - f(x, y)).abs() < TOLERANCE);
            assert!((s.by_x - 0.7 * f(x, y)).abs() < 100.0 * TOLERANCE);
            assert!((s.by_y + f(x, y) / (3.0 + y)).abs() < 100.0 * TOLERANCE);
        }
    }
}
