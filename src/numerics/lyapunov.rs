//! Derivatives of second moments from their Lyapunov equation.
//!
//! Along `y' = xy` the second moment `W = ∫₀¹ y yᵀ ds` satisfies `xW + Wxᵀ = y₁y₁ᵀ − y₀y₀ᵀ`. Differentiated,
//!
//! ```text
//! x dW + dW xᵀ = d(y₁y₁ᵀ − y₀y₀ᵀ) − dx W − W dxᵀ
//! ```
//!
//! one plain linear system for the symmetric dW, whatever the number of derivatives: several times cheaper than carrying
//! them through the recursion that gives W.

use super::matrix::{Column, Matrix};
use super::scalar::Scalar;

/// Largest order of x.
const MOST_ORDER: usize = 5;
/// Unknowns of a symmetric matrix of that order.
const MOST_UNKNOWNS: usize = MOST_ORDER * (MOST_ORDER + 1) / 2;

/// A pivot below this part of its column is rounding.
const VANISHED: f64 = 1e-11;

/// `w`, the second moment summed over `arcs` (start and end of each), with its derivatives.
///
/// A mode that rests (an eigenvalue 0 of x, as the charge of floating nodes) leaves the moments along it without an
/// equation: the derivatives of these come out as if a coordinate of the mode stood still. All others are exact.
/// Orders up to 5.
pub fn derivatives<S: Scalar, const N: usize>(
    x: &Matrix<S, N>,
    w: &Matrix<f64, N>,
    arcs: &[[&Column<S, N>; 2]],
) -> Matrix<S, N> {
    let place = |i: usize, j: usize| {
        let (high, low) = (i.max(j), i.min(j));
        high * (high + 1) / 2 + low
    };
    let size = N * (N + 1) / 2;
    let mut system = [[0.0; MOST_UNKNOWNS]; MOST_UNKNOWNS];
    let mut right = [S::zero(); MOST_UNKNOWNS];
    for i in 0..N {
        for j in 0..=i {
            let row = place(i, j);
            let mut sum = S::zero();
            for [start, end] in arcs {
                sum = sum.add_product(end[i], end[j]);
                sum = sum.add_product(-start[i], start[j]);
            }
            for k in 0..N {
                system[row][place(k, j)] += x[i][k].value();
                system[row][place(k, i)] += x[j][k].value();
                sum = sum.add_scaled(x[i][k].movement(), -w[k][j]);
                sum = sum.add_scaled(x[j][k].movement(), -w[i][k]);
            }
            right[row] = sum.movement();
        }
    }
    eliminate(size, &mut system, &mut right);
    let mut moved = [[S::zero(); N]; N];
    for i in 0..N {
        for j in 0..N {
            moved[i][j] = right[place(i, j)] + w[i][j];
        }
    }
    moved
}

/// Solves in place, row pivots; an unknown whose pivot vanishes is 0.
fn eliminate<S: Scalar>(
    size: usize,
    a: &mut [[f64; MOST_UNKNOWNS]; MOST_UNKNOWNS],
    b: &mut [S; MOST_UNKNOWNS],
) {
    let mut pivots = [None; MOST_UNKNOWNS];
    let mut top = 0;
    for column in 0..size {
        let scale = (0..size).map(|r| a[r][column].abs()).fold(0.0, f64::max);
        let mut pivot = top;
        for row in top..size {
            if a[row][column].abs() > a[pivot][column].abs() {
                pivot = row;
            }
        }
        if top == size || a[pivot][column].abs() <= VANISHED * scale {
            continue;
        }
        a.swap(top, pivot);
        b.swap(top, pivot);
        let inverse = 1.0 / a[top][column];
        for row in top + 1..size {
            let factor = a[row][column] * inverse;
            if factor != 0.0 {
                for k in column..size {
                    a[row][k] -= factor * a[top][k];
                }
                b[row] = b[row].add_scaled(b[top], -factor);
            }
        }
        pivots[column] = Some(top);
        top += 1;
    }
    let mut solved = [S::zero(); MOST_UNKNOWNS];
    for column in (0..size).rev() {
        let Some(row) = pivots[column] else { continue };
        let mut sum = b[row];
        for k in column + 1..size {
            sum = sum.add_scaled(solved[k], -a[row][k]);
        }
        solved[column] = sum * (1.0 / a[row][column]);
    }
    *b = solved;
}

#[cfg(test)]
mod tests {
    use crate::numerics::matrix::{Exponential, advanced};
    use crate::numerics::scalar::{Dual, Scalar};

    /// Central differences of step 1e-6 of values of order 1.
    const DIFFERENCE: f64 = 1e-8;
    const STEP: f64 = 1e-6;

    /// Second moment of a damped rotation beside a fast decay, or of a mode that rests; start and matrix move with t.
    fn moment<S: Scalar>(t: S, resting: bool) -> [[S; 3]; 3] {
        let fast = if resting { S::zero() } else { -(t * 40.0) };
        let x = [
            [-(t * 0.3), t * t, S::zero()],
            [-(t * t), -(t * 0.1), S::zero()],
            [t, S::zero(), fast],
        ];
        let start = [S::one(), t, S::one() * 2.0];
        let mut e = Exponential::empty();
        e.fill(&x, S::one()).unwrap();
        let end = advanced(e.less_identity(), &start);
        e.second_moment(&[[&start, &end]])
    }

    #[test]
    fn law_derivatives_agree_with_differences() {
        let t = 1.7;
        for resting in [false, true] {
            let moved = moment(Dual::<1>::variable(t, 0), resting);
            let (up, down) = (moment(t + STEP, resting), moment(t - STEP, resting));
            for i in 0..3 {
                for j in 0..3 {
                    let difference = (up[i][j] - down[i][j]) / (2.0 * STEP);
                    let slope = moved[i][j].partials[0];
                    // Along the mode that rests there is no equation.
                    let known = !resting || (i, j) != (2, 2);
                    if known {
                        assert!((slope - difference).abs() < DIFFERENCE * (1.0 + slope.abs()));
                    }
                }
            }
        }
    }
}
