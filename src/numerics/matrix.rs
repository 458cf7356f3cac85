//! Small square matrices on the stack, over any [`Scalar`]: product, solve, exponential with its halvings.

use super::lyapunov;
use super::scalar::Scalar;
use arrayvec::ArrayVec;

/// A square matrix, rows first.
pub type Matrix<S, const N: usize> = [[S; N]; N];

/// A column.
pub type Column<S, const N: usize> = [S; N];

/// The identity.
#[inline(always)]
pub fn identity<S: Scalar, const N: usize>() -> Matrix<S, N> {
    let mut m = [[S::zero(); N]; N];
    for (i, row) in m.iter_mut().enumerate() {
        row[i] = S::one();
    }
    m
}

/// `a·b`.
#[inline(always)]
pub fn product<S: Scalar, const N: usize>(a: &Matrix<S, N>, b: &Matrix<S, N>) -> Matrix<S, N> {
    let mut c = [[S::zero(); N]; N];
    multiply(a, b, &mut c);
    c
}

/// `c ← a·b`, in place: matrices of numbers with derivatives are large enough for copies to count.
#[inline(always)]
fn multiply<S: Scalar, const N: usize>(a: &Matrix<S, N>, b: &Matrix<S, N>, c: &mut Matrix<S, N>) {
    for i in 0..N {
        for j in 0..N {
            let mut sum = a[i][0] * b[0][j];
            for k in 1..N {
                sum = sum.add_product(a[i][k], b[k][j]);
            }
            c[i][j] = sum;
        }
    }
}

/// `a·x`.
#[inline(always)]
pub fn apply<S: Scalar, const N: usize>(a: &Matrix<S, N>, x: &Column<S, N>) -> Column<S, N> {
    let mut y = [S::zero(); N];
    for i in 0..N {
        for j in 0..N {
            y[i] = y[i].add_product(a[i][j], x[j]);
        }
    }
    y
}

/// Solves `a·x = b` by elimination with partial pivoting; `None` when a pivot vanishes. The right side may carry
/// derivatives.
pub fn solve<S: Scalar, const N: usize>(
    mut a: Matrix<f64, N>,
    mut b: Column<S, N>,
) -> Option<Column<S, N>> {
    for column in 0..N {
        let mut pivot = column;
        for row in column + 1..N {
            if a[row][column].abs() > a[pivot][column].abs() {
                pivot = row;
            }
        }
        let size = a[pivot][column].abs();
        if size == 0.0 || !size.is_finite() {
            return None;
        }
        a.swap(column, pivot);
        b.swap(column, pivot);
        for row in column + 1..N {
            let factor = a[row][column] / a[column][column];
            for k in column..N {
                let above = a[column][k];
                a[row][k] -= factor * above;
            }
            b[row] = b[row].add_scaled(b[column], -factor);
        }
    }
    for row in (0..N).rev() {
        let mut sum = b[row];
        for k in row + 1..N {
            sum = sum.add_scaled(b[k], -a[row][k]);
        }
        b[row] = sum * (1.0 / a[row][row]);
    }
    Some(b)
}

/// Largest column sum of magnitudes.
pub fn norm_one<S: Scalar, const N: usize>(a: &Matrix<S, N>) -> f64 {
    (0..N)
        .map(|j| a.iter().map(|row| row[j].value().abs()).sum())
        .fold(
            0.0,
            |a: f64, b: f64| if b > a || b.is_nan() { b } else { a },
        )
}

/// Most halvings an exponential may take: `‖x‖` up to 2^60 times the step of one Taylor polynomial.
pub const MOST_HALVINGS: usize = 60;

/// Norm below which the Taylor polynomial of degree 12 is exact to rounding: 0.35^13/13! < 2e-16.
const STEP_NORM: f64 = 0.35;

/// `e^x − 1`, together with the values of `e^{x/2} − 1`, `e^{x/4} − 1`, … down to the step where a Taylor polynomial
/// suffices (scaling and squaring: Higham, *Functions of Matrices*, 2008, ch. 10). The identity is kept apart, so that
/// slow modes beside a fast one lose nothing to the many squarings the fast one asks for.
pub struct Exponential<S, const N: usize> {
    x: Matrix<S, N>,
    less_identity: Matrix<S, N>,
    /// `powers[k] = e^{x/2^{halvings−k}} − 1`, k = 0..=halvings.
    powers: ArrayVec<Matrix<f64, N>, { MOST_HALVINGS + 1 }>,
    /// `x/2^halvings`.
    step: Matrix<f64, N>,
}

impl<S: Scalar, const N: usize> Exponential<S, N> {
    /// Room for an exponential, to be filled in place: the halvings are too large to be moved about.
    #[inline(always)]
    pub fn empty() -> Self {
        Self {
            x: [[S::zero(); N]; N],
            less_identity: [[S::zero(); N]; N],
            powers: ArrayVec::new(),
            step: [[0.0; N]; N],
        }
    }

    /// The exponential of `x = a·t`; `None` when `x` is not finite or larger than can be halved.
    #[must_use]
    pub fn fill(&mut self, a: &Matrix<S, N>, t: S) -> Option<()> {
        each(&mut self.x, |i, j| a[i][j] * t);
        let norm = norm_one(&self.x);
        if !norm.is_finite() {
            return None;
        }
        let halvings = if norm <= STEP_NORM {
            0
        } else {
            (norm / STEP_NORM).log2().ceil() as usize
        };
        if halvings > MOST_HALVINGS {
            return None;
        }
        let scale = 0.5f64.powi(halvings as i32);
        let x = &self.x;
        each(&mut self.step, |i, j| x[i][j].value() * scale);
        taylor(|i, j| x[i][j] * scale, &mut self.less_identity);
        self.powers.clear();
        self.powers.push(values(&self.less_identity));
        let mut square = [[S::zero(); N]; N];
        for _ in 0..halvings {
            // (1 + F)² − 1 = 2F + F²
            let half = &mut self.less_identity;
            multiply(half, half, &mut square);
            for i in 0..N {
                for j in 0..N {
                    half[i][j] = square[i][j].add_scaled(half[i][j], 2.0);
                }
            }
            self.powers.push(values(half));
        }
        Some(())
    }

    /// `e^{kx/8}·y` for k = 1..8, values only, handed to `visit` one after the other.
    pub fn eighths(&self, y: &Column<f64, N>, mut visit: impl FnMut(usize, &Column<f64, N>)) {
        let mut at = *y;
        let eighth: Matrix<f64, N> = match self.halvings().checked_sub(3) {
            Some(k) => self.powers[k],
            None => {
                let scale = 2f64.powi(self.halvings() as i32 - 3);
                let mut eighth = [[0.0; N]; N];
                taylor(|i, j| self.step[i][j] * scale, &mut eighth);
                eighth
            }
        };
        for k in 1..8 {
            at = advanced(&eighth, &at);
            visit(k, &at);
        }
    }

    /// `e^x − 1`.
    pub fn less_identity(&self) -> &Matrix<S, N> {
        &self.less_identity
    }

    /// The same, values only.
    pub fn whole(&self) -> &Matrix<f64, N> {
        &self.powers[self.halvings()]
    }

    fn halvings(&self) -> usize {
        self.powers.len() - 1
    }

    /// `e^{fx}·y` for `0 ≤ f ≤ 1`, values only: binary digits of `f` by the stored halvings, the rest by Taylor.
    pub fn part(&self, fraction: f64, y: &Column<f64, N>) -> Column<f64, N> {
        let steps = fraction * 2f64.powi(self.halvings() as i32);
        let whole_steps = steps.floor();
        let mut y = *y;
        let mut left = whole_steps;
        for k in (0..=self.halvings()).rev() {
            let size = 2f64.powi(k as i32);
            if left >= size {
                left -= size;
                y = advanced(&self.powers[k], &y);
            }
        }
        let rest = steps - whole_steps;
        let terms = self.taylor_terms(&y);
        at_fraction(&terms, rest)
    }

    /// `e^{fx}·y` at a fixed `f` with its derivatives; `None` as in [`Exponential::fill`].
    pub fn moving_part(&self, fraction: f64, y: &Column<S, N>) -> Option<Column<S, N>> {
        let mut part = Self::empty();
        part.fill(&self.x, S::constant(fraction))?;
        Some(advanced(part.less_identity(), y))
    }

    /// `Σ ∫₀¹ y(s) y(s)ᵀ ds` over the given arcs `y(s) = e^{sx} y₀` (start and end of each): values by Gauss-Legendre on
    /// the smallest step, then `W(2h) = W(h) + e^h W(h) (e^h)ᵀ`, a sum of positive terms only; derivatives from
    /// [`lyapunov::derivatives`].
    pub fn second_moment(&self, arcs: &[[&Column<S, N>; 2]]) -> Matrix<S, N> {
        let mut w = [[0.0; N]; N];
        let step = 0.5f64.powi(self.halvings() as i32);
        for [start, _] in arcs {
            let terms = self.taylor_terms(&start.map(S::value));
            for (node, weight) in GAUSS_NODES {
                let x = at_fraction(&terms, node);
                for i in 0..N {
                    let scaled = x[i] * (weight * step);
                    for j in 0..=i {
                        w[i][j] += scaled * x[j];
                    }
                }
            }
        }
        for i in 0..N {
            for j in 0..i {
                w[j][i] = w[i][j];
            }
        }
        for f in &self.powers[..self.halvings()] {
            // (1 + F) W (1 + F)ᵀ = W + FW + (FW)ᵀ + FWFᵀ
            let fw = product(f, &w);
            for i in 0..N {
                for j in 0..=i {
                    let mut sum = w[i][j] * 2.0 + fw[i][j] + fw[j][i];
                    for k in 0..N {
                        sum += fw[i][k] * f[j][k];
                    }
                    w[i][j] = sum;
                    w[j][i] = sum;
                }
            }
        }
        if S::MOVES {
            lyapunov::derivatives(&self.x, &w, arcs)
        } else {
            w.map(|row| row.map(S::constant))
        }
    }

    /// `(step)^k y/k!`, k = 0..=12.
    fn taylor_terms(&self, y: &Column<f64, N>) -> [Column<f64, N>; 13] {
        let mut terms = [[0.0; N]; 13];
        terms[0] = *y;
        for k in 1..13 {
            terms[k] = apply(&self.step, &terms[k - 1]).map(|entry| entry * (1.0 / k as f64));
        }
        terms
    }
}

/// A matrix without derivatives.
#[inline(always)]
fn values<S: Scalar, const N: usize>(m: &Matrix<S, N>) -> Matrix<f64, N> {
    let mut plain = [[0.0; N]; N];
    each(&mut plain, |i, j| m[i][j].value());
    plain
}

/// Sets every entry.
#[inline(always)]
fn each<S: Scalar, const N: usize>(m: &mut Matrix<S, N>, entry: impl Fn(usize, usize) -> S) {
    for i in 0..N {
        for j in 0..N {
            m[i][j] = entry(i, j);
        }
    }
}

/// Gauss-Legendre nodes and weights on [0, 1], five points: exact to degree 9; with `‖x‖ ≤ 0.35` the remainder
/// of a second moment is below 1e-15 (Abramowitz and Stegun, table 25.4, moved from [−1, 1]).
const GAUSS_NODES: [(f64, f64); 5] = [
    (0.046_910_077_030_668_004, 0.118_463_442_528_094_54),
    (0.230_765_344_947_158_45, 0.239_314_335_249_683_23),
    (0.5, 0.284_444_444_444_444_44),
    (0.769_234_655_052_841_6, 0.239_314_335_249_683_23),
    (0.953_089_922_969_332, 0.118_463_442_528_094_54),
];

/// `(1 + f)·y`.
#[inline(always)]
pub fn advanced<S: Scalar, const N: usize>(f: &Matrix<S, N>, y: &Column<S, N>) -> Column<S, N> {
    let mut sum = apply(f, y);
    for i in 0..N {
        sum[i] += y[i];
    }
    sum
}

#[inline(always)]
fn at_fraction<const N: usize>(terms: &[Column<f64, N>; 13], fraction: f64) -> Column<f64, N> {
    let mut sum = terms[12];
    for term in terms[..12].iter().rev() {
        for i in 0..N {
            sum[i] = term[i].add_product(sum[i], fraction);
        }
    }
    sum
}

/// Taylor polynomial of `e^x − 1` of degree 12 in five products (Paterson and Stockmeyer 1973), into `sum`.
#[inline(always)]
fn taylor<S: Scalar, const N: usize>(entry: impl Fn(usize, usize) -> S, sum: &mut Matrix<S, N>) {
    let mut x = [[S::zero(); N]; N];
    let (mut x2, mut x3, mut x4) = (x, x, x);
    each(&mut x, entry);
    multiply(&x, &x, &mut x2);
    multiply(&x2, &x, &mut x3);
    multiply(&x2, &x2, &mut x4);
    let block = |c: [f64; 4], i: usize, j: usize| {
        let powers = (x[i][j] * c[1])
            .add_scaled(x2[i][j], c[2])
            .add_scaled(x3[i][j], c[3]);
        if i == j { powers + c[0] } else { powers }
    };
    let highest = [
        1.0 / 40_320.0,
        1.0 / 362_880.0,
        1.0 / 3_628_800.0,
        1.0 / 39_916_800.0,
    ];
    each(sum, |i, j| {
        block(highest, i, j).add_scaled(x4[i][j], 1.0 / 479_001_600.0)
    });
    let mut raised = [[S::zero(); N]; N];
    for lower in [
        [1.0 / 24.0, 1.0 / 120.0, 1.0 / 720.0, 1.0 / 5040.0],
        [0.0, 1.0, 0.5, 1.0 / 6.0],
    ] {
        multiply(&x4, sum, &mut raised);
        each(sum, |i, j| raised[i][j] + block(lower, i, j));
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::numerics::scalar::Dual;

    /// Rounding of a few dozen operations, grown by the squarings of the largest case (about 2^8).
    const TOLERANCE: f64 = 1e-12;

    fn filled<S: Scalar, const N: usize>(x: &Matrix<S, N>) -> Option<Exponential<S, N>> {
        let mut e = Exponential::empty();
        e.fill(x, S::one())?;
        Some(e)
    }

    /// A damped rotation beside a fast decay: its exponential is known in closed form.
    fn damped(a: f64, b: f64, fast: f64) -> Matrix<f64, 3> {
        [[-a, -b, 0.0], [b, -a, 0.0], [0.0, 0.0, -fast]]
    }

    #[test]
    fn law_exponential_of_a_damped_rotation() {
        for (a, b, fast) in [(0.1, 0.2, 0.01), (0.3, 3.0, 150.0), (2.0, 40.0, 3.0)] {
            let e = filled(&damped(a, b, fast)).unwrap();
            let m = e.less_identity();
            let radius = (-a).exp();
            assert!((1.0 + m[0][0] - radius * b.cos()).abs() < TOLERANCE);
            assert!((m[1][0] - radius * b.sin()).abs() < TOLERANCE);
            assert!((1.0 + m[2][2] - (-fast).exp()).abs() < TOLERANCE);
        }
    }

    #[test]
    fn law_a_slow_mode_survives_a_fast_neighbour() {
        // The fast mode asks for 40 squarings; the slow ones keep all but a few digits.
        let (a, b) = (1e-3, 2.0);
        let e = filled(&damped(a, b, 3e11)).unwrap();
        let radius = (-a).exp();
        assert!((1.0 + e.less_identity()[0][0] - radius * b.cos()).abs() < TOLERANCE);
    }

    #[test]
    fn law_parts_and_second_moments_of_a_damped_rotation() {
        let (a, b, fast) = (0.3, 3.0, 150.0);
        let e = filled(&damped(a, b, fast)).unwrap();
        let y = [1.0, 0.0, 2.0];
        for fraction in [0.0, 0.01, 0.37, 0.5, 0.999, 1.0] {
            let x = e.part(fraction, &y);
            let radius = (-a * fraction).exp();
            assert!((x[0] - radius * (b * fraction).cos()).abs() < TOLERANCE);
            assert!((x[1] - radius * (b * fraction).sin()).abs() < TOLERANCE);
        }
        let end = advanced(e.less_identity(), &y);
        let w = e.second_moment(&[[&y, &end]]);
        // ∫ e^{-2as} ds and ∫ 4 e^{-2fs} ds
        let rotation = (1.0 - (-2.0 * a).exp()) / (2.0 * a);
        assert!((w[0][0] + w[1][1] - rotation).abs() < TOLERANCE);
        assert!((w[2][2] - 4.0 / (2.0 * fast)).abs() < TOLERANCE);
    }

    #[test]
    fn law_solve_undoes_apply() {
        let a = [[0.0, 2.0, 1.0], [1.0, -1.0, 0.5], [3.0, 0.0, 1.0]];
        let x = [0.3, -2.0, 5.0];
        let back = solve(a, apply(&a, &x)).unwrap();
        for i in 0..3 {
            assert!((back[i] - x[i]).abs() < TOLERANCE);
        }
        assert!(solve([[1.0, 2.0], [2.0, 4.0]], [1.0, 1.0]).is_none());
    }

    #[test]
    fn law_exponential_carries_derivatives() {
        let at = |t: Dual<1>| {
            let zero = Dual::zero();
            filled(&[[-t, zero], [t * 2.0, t]])
                .map(|e| *e.less_identity())
                .unwrap()
        };
        let e = at(Dual::variable(1.3, 0));
        assert!((e[0][0].partials[0] + (-1.3f64).exp()).abs() < TOLERANCE);
        assert!((e[1][1].partials[0] - 1.3f64.exp()).abs() < TOLERANCE);
    }

    #[test]
    fn law_what_is_not_finite_is_refused() {
        assert!(filled(&[[f64::NAN]]).is_none());
        assert!(filled(&[[f64::INFINITY]]).is_none());
        assert!(filled(&[[1e300]]).is_none());
    }
}
