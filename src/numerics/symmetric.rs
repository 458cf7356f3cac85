//! Elimination of a dense complex symmetric matrix.

use super::scalar::Scalar;

/// A complex symmetric matrix, upper triangle by rows, real and imaginary parts apart (so that rows are taken several
/// numbers at once).
#[derive(Debug, Clone, Default)]
pub struct ComplexSymmetric {
    size: usize,
    re: Vec<f64>,
    im: Vec<f64>,
}

/// Rows eliminated together: each trailing row is then read and written once for four.
const PANEL: usize = 4;

impl ComplexSymmetric {
    /// A matrix of `size` rows, all zero.
    pub fn zeros(size: usize) -> Self {
        Self {
            size,
            re: vec![0.0; size * size],
            im: vec![0.0; size * size],
        }
    }

    /// Number of rows.
    pub fn size(&self) -> usize {
        self.size
    }

    /// Sets element (row, column), row ≤ column.
    pub fn set(&mut self, row: usize, column: usize, re: f64, im: f64) {
        debug_assert!(row <= column);
        self.re[row * self.size + column] = re;
        self.im[row * self.size + column] = im;
    }

    /// The imaginary parts of one row.
    pub fn row_im_mut(&mut self, row: usize) -> &mut [f64] {
        &mut self.im[row * self.size..(row + 1) * self.size]
    }

    /// Eliminates every row but the last (`LDLᵀ` without pivoting) and returns the last pivot as (re, im): the Schur
    /// complement `a_nn − aᵀ A⁻¹ a` of the leading block.
    ///
    /// No pivoting is needed where the leading block has a positive definite real part followed by a block whose Schur
    /// complement has a negative definite one (Higham 1998, *Math. Comp.* 67, 1591: growth below 3 for such matrices).
    pub fn last_pivot(mut self) -> (f64, f64) {
        let n = self.size;
        let mut start = 0;
        while start + 1 < n {
            let end = (start + PANEL).min(n - 1);
            let (head_re, tail_re) = self.re.split_at_mut(end * n);
            let (head_im, tail_im) = self.im.split_at_mut(end * n);
            let panel_re = &mut head_re[start * n..];
            let panel_im = &mut head_im[start * n..];
            let width = end - start;
            let mut inverse = [(0.0, 0.0); PANEL];
            for p in 0..width {
                let (above_re, row_re) = panel_re.split_at_mut(p * n);
                let (above_im, row_im) = panel_im.split_at_mut(p * n);
                for q in 0..p {
                    let (u_re, u_im) = (&above_re[q * n..][..n], &above_im[q * n..][..n]);
                    let factor = product(inverse[q], (u_re[start + p], u_im[start + p]));
                    subtract(
                        factor,
                        &u_re[start + p..],
                        &u_im[start + p..],
                        &mut row_re[start + p..n],
                        &mut row_im[start + p..n],
                    );
                }
                inverse[p] = reciprocal((row_re[start + p], row_im[start + p]));
            }
            for i in end..n {
                let at = (i - end) * n;
                let a_re = &mut tail_re[at + i..at + n];
                let a_im = &mut tail_im[at + i..at + n];
                if width == PANEL {
                    let rows: [_; PANEL] = std::array::from_fn(|p| {
                        let (u_re, u_im) = (&panel_re[p * n..][..n], &panel_im[p * n..][..n]);
                        (
                            product(inverse[p], (u_re[i], u_im[i])),
                            &u_re[i..],
                            &u_im[i..],
                        )
                    });
                    subtract_four(rows, a_re, a_im);
                } else {
                    for p in 0..width {
                        let (u_re, u_im) = (&panel_re[p * n..][..n], &panel_im[p * n..][..n]);
                        let factor = product(inverse[p], (u_re[i], u_im[i]));
                        subtract(factor, &u_re[i..], &u_im[i..], a_re, a_im);
                    }
                }
            }
            start = end;
        }
        (self.re[n * n - 1], self.im[n * n - 1])
    }
}

fn product(a: (f64, f64), b: (f64, f64)) -> (f64, f64) {
    (a.0 * b.0 - a.1 * b.1, a.0 * b.1 + a.1 * b.0)
}

fn reciprocal(a: (f64, f64)) -> (f64, f64) {
    let square = a.0 * a.0 + a.1 * a.1;
    (a.0 / square, -a.1 / square)
}

/// `a ← a − factor·u`.
fn subtract(factor: (f64, f64), u_re: &[f64], u_im: &[f64], a_re: &mut [f64], a_im: &mut [f64]) {
    let n = a_re.len();
    let (u_re, u_im, a_im) = (&u_re[..n], &u_im[..n], &mut a_im[..n]);
    for j in 0..n {
        a_re[j] = a_re[j]
            .add_product(u_re[j], -factor.0)
            .add_product(u_im[j], factor.1);
        a_im[j] = a_im[j]
            .add_product(u_im[j], -factor.0)
            .add_product(u_re[j], -factor.1);
    }
}

type Scaled<'a> = ((f64, f64), &'a [f64], &'a [f64]);

/// `a ← a − Σ factor·u` over four rows.
fn subtract_four(rows: [Scaled<'_>; PANEL], a_re: &mut [f64], a_im: &mut [f64]) {
    let n = a_re.len();
    let a_im = &mut a_im[..n];
    let [(f0, r0, i0), (f1, r1, i1), (f2, r2, i2), (f3, r3, i3)] = rows;
    let (r0, r1, r2, r3) = (&r0[..n], &r1[..n], &r2[..n], &r3[..n]);
    let (i0, i1, i2, i3) = (&i0[..n], &i1[..n], &i2[..n], &i3[..n]);
    for j in 0..n {
        let re = a_re[j]
            .add_product(r0[j], -f0.0)
            .add_product(i0[j], f0.1)
            .add_product(r1[j], -f1.0)
            .add_product(i1[j], f1.1)
            .add_product(r2[j], -f2.0)
            .add_product(i2[j], f2.1)
            .add_product(r3[j], -f3.0)
            .add_product(i3[j], f3.1);
        let im = a_im[j]
            .add_product(i0[j], -f0.0)
            .add_product(r0[j], -f0.1)
            .add_product(i1[j], -f1.0)
            .add_product(r1[j], -f1.1)
            .add_product(i2[j], -f2.0)
            .add_product(r2[j], -f2.1)
            .add_product(i3[j], -f3.0)
            .add_product(r3[j], -f3.1);
        a_re[j] = re;
        a_im[j] = im;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Growth is bounded, so a few tens of roundings suffice at these sizes.
    const ROUNDING: f64 = 1e-12;

    /// Last pivot of the full matrix by plain elimination, row by row.
    fn plain(n: usize, entry: &impl Fn(usize, usize) -> (f64, f64)) -> (f64, f64) {
        let mut a: Vec<Vec<_>> = (0..n)
            .map(|i| (0..n).map(|j| entry(i.min(j), i.max(j))).collect())
            .collect();
        for k in 0..n - 1 {
            let (done, rest) = a.split_at_mut(k + 1);
            let pivot = &done[k];
            for row in rest {
                let factor = product(row[k], reciprocal(pivot[k]));
                for (entry, above) in row.iter_mut().zip(pivot).skip(k) {
                    let change = product(factor, *above);
                    *entry = (entry.0 - change.0, entry.1 - change.1);
                }
            }
        }
        a[n - 1][n - 1]
    }

    #[test]
    fn law_blocked_elimination_is_plain_elimination() {
        for n in [1, 2, 4, 5, 6, 8, 9, 23] {
            let entry = |i: usize, j: usize| {
                let mix = ((i * 7 + j * 13 + i * j) % 11) as f64 / 11.0;
                let re = if i == j { 2.0 + mix } else { 0.1 * mix };
                (re, 3.0 / (1.0 + (j - i) as f64) + mix)
            };
            let mut matrix = ComplexSymmetric::zeros(n);
            for i in 0..n {
                for j in i..n {
                    let (re, im) = entry(i, j);
                    matrix.set(i, j, re, im);
                }
            }
            assert_eq!(matrix.size(), n);
            let (re, im) = matrix.last_pivot();
            let (plain_re, plain_im) = plain(n, &entry);
            assert!((re - plain_re).abs() < ROUNDING && (im - plain_im).abs() < ROUNDING);
        }
    }

    #[test]
    fn law_bordering_adds_branches_in_parallel() {
        // Branches of 1 + 2j and 3 Ω with one voltage, one current: the last pivot is their parallel impedance.
        let mut matrix = ComplexSymmetric::zeros(4);
        matrix.set(0, 0, 1.0, 2.0);
        matrix.set(1, 1, 3.0, 0.0);
        matrix.set(0, 2, 1.0, 0.0);
        matrix.set(1, 2, 1.0, 0.0);
        matrix.set(2, 3, 1.0, 0.0);
        let (re, im) = matrix.last_pivot();
        // (1+2j)·3/(4+2j) = (3+6j)(4−2j)/20 = (24 + 18j)/20.
        assert!((re - 1.2).abs() < ROUNDING && (im - 0.9).abs() < ROUNDING);
    }
}
