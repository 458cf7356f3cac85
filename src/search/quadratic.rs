//! Small strictly convex quadratic programs by the dual active-set method of Goldfarb and Idnani
//! (Mathematical Programming 27, 1983, pp. 1–33).

/// Most variables of a program.
pub const MOST_VARIABLES: usize = 12;

/// A row of numbers, one a variable; those past the program's size are 0.
pub type Row = [f64; MOST_VARIABLES];

/// `a·x ≥ b`.
#[derive(Debug, Clone, Copy)]
pub struct HalfSpace {
    /// Normal a.
    pub normal: Row,
    /// Offset b.
    pub offset: f64,
}

/// Minimum of a program.
#[derive(Debug, Clone)]
pub struct Minimum {
    /// Where.
    pub point: Row,
    /// Multiplier of each constraint, in their order, ≥ 0.
    pub multipliers: Vec<f64>,
}

/// Why there is no minimum.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum NoMinimum {
    /// No point satisfies all constraints.
    Infeasible,
    /// The matrix is not positive definite, or the iteration did not end.
    Numbers,
}

/// Violation below which a constraint counts as satisfied; constraints come scaled to order 1.
const SATISFIED: f64 = 1e-13;

/// Minimises `½xᵀHx + gᵀx` over `n` variables under `constraints`.
///
/// # Errors
/// [`NoMinimum`].
pub fn minimise(
    n: usize,
    hessian: &[Row; MOST_VARIABLES],
    gradient: &Row,
    constraints: &[HalfSpace],
) -> Result<Minimum, NoMinimum> {
    // J = L^{-T} of H = LLᵀ; its columns span the space, the first `active` ones that of the active normals.
    let mut j = inverse_factor(n, hessian).ok_or(NoMinimum::Numbers)?;
    let mut r = [[0.0; MOST_VARIABLES]; MOST_VARIABLES];
    let mut x = unconstrained(n, &j, gradient);
    let mut active: Vec<usize> = Vec::with_capacity(n);
    let mut multipliers: Vec<f64> = Vec::with_capacity(n + 1);
    let mut is_active = vec![false; constraints.len()];
    let most_steps = 50 * (n + constraints.len());
    let mut steps = 0;

    while let Some((entering, _)) = most_violated(n, constraints, &is_active, &x) {
        let normal = &constraints[entering].normal;
        let mut incoming = 0.0;
        loop {
            steps += 1;
            if steps > most_steps {
                return Err(NoMinimum::Numbers);
            }
            let q = active.len();
            // d = Jᵀa; the step direction is J₂d₂, the change of multipliers −R⁻¹d₁.
            let mut d = [0.0; MOST_VARIABLES];
            for k in 0..n {
                d[k] = (0..n).map(|i| j[i][k] * normal[i]).sum();
            }
            let mut z = [0.0; MOST_VARIABLES];
            for i in 0..n {
                z[i] = (q..n).map(|k| j[i][k] * d[k]).sum();
            }
            let mut change = [0.0; MOST_VARIABLES];
            for row in (0..q).rev() {
                let mut sum = d[row];
                for k in row + 1..q {
                    sum -= r[row][k] * change[k];
                }
                change[row] = sum / r[row][row];
            }
            // Longest dual step that keeps the multipliers positive.
            let mut dual_step = f64::INFINITY;
            let mut leaving = None;
            for k in 0..q {
                if change[k] > 0.0 && multipliers[k] / change[k] < dual_step {
                    dual_step = multipliers[k] / change[k];
                    leaving = Some(k);
                }
            }
            let curvature: f64 = (0..n).map(|i| z[i] * normal[i]).sum();
            let size: f64 = d[..n].iter().map(|v| v * v).sum();
            let violation =
                constraints[entering].offset - (0..n).map(|i| normal[i] * x[i]).sum::<f64>();
            let primal_step = if curvature > 1e-14 * size {
                violation / curvature
            } else {
                f64::INFINITY
            };
            let step = dual_step.min(primal_step);
            if step == f64::INFINITY {
                return Err(NoMinimum::Infeasible);
            }
            for k in 0..q {
                multipliers[k] -= step * change[k];
            }
            incoming += step;
            if primal_step.is_finite() {
                for i in 0..n {
                    x[i] += step * z[i];
                }
            }
            if primal_step <= dual_step {
                add(n, q, &mut j, &mut r, &mut d);
                active.push(entering);
                multipliers.push(incoming);
                is_active[entering] = true;
                break;
            }
            if let Some(k) = leaving {
                is_active[active[k]] = false;
                active.remove(k);
                multipliers.remove(k);
                remove(n, k, active.len(), &mut j, &mut r);
            }
        }
    }
    let mut all = vec![0.0; constraints.len()];
    for (&index, &multiplier) in active.iter().zip(&multipliers) {
        all[index] = multiplier;
    }
    Ok(Minimum {
        point: x,
        multipliers: all,
    })
}

fn most_violated(
    n: usize,
    constraints: &[HalfSpace],
    is_active: &[bool],
    x: &Row,
) -> Option<(usize, f64)> {
    let mut worst: Option<(usize, f64)> = None;
    for (index, c) in constraints.iter().enumerate() {
        if is_active[index] {
            continue;
        }
        let room = (0..n).map(|i| c.normal[i] * x[i]).sum::<f64>() - c.offset;
        if room < -SATISFIED * (1.0 + c.offset.abs()) && worst.is_none_or(|(_, w)| room < w) {
            worst = Some((index, room));
        }
    }
    worst
}

/// L^{-T} of the Cholesky factor.
fn inverse_factor(n: usize, h: &[Row; MOST_VARIABLES]) -> Option<[Row; MOST_VARIABLES]> {
    let mut l = [[0.0; MOST_VARIABLES]; MOST_VARIABLES];
    for i in 0..n {
        for k in 0..=i {
            let sum: f64 = h[i][k] - (0..k).map(|m| l[i][m] * l[k][m]).sum::<f64>();
            if i == k {
                if sum.is_nan() || sum <= 0.0 {
                    return None;
                }
                l[i][i] = sum.sqrt();
            } else {
                l[i][k] = sum / l[k][k];
            }
        }
    }
    let mut inverse = [[0.0; MOST_VARIABLES]; MOST_VARIABLES];
    for column in 0..n {
        for i in column..n {
            let sum: f64 = (column..i).map(|m| l[i][m] * inverse[m][column]).sum();
            let unit = if i == column { 1.0 } else { 0.0 };
            inverse[i][column] = (unit - sum) / l[i][i];
        }
    }
    let mut transposed = [[0.0; MOST_VARIABLES]; MOST_VARIABLES];
    for i in 0..n {
        for k in 0..n {
            transposed[i][k] = inverse[k][i];
        }
    }
    Some(transposed)
}

/// −H^{-1}g = −J Jᵀ g.
fn unconstrained(n: usize, j: &[Row; MOST_VARIABLES], gradient: &Row) -> Row {
    let mut x = [0.0; MOST_VARIABLES];
    for k in 0..n {
        let part: f64 = (0..n).map(|i| j[i][k] * gradient[i]).sum();
        for (i, entry) in x.iter_mut().enumerate().take(n) {
            *entry -= j[i][k] * part;
        }
    }
    x
}

/// Rotation that carries (a, b) to (√(a²+b²), 0).
fn rotation(a: f64, b: f64) -> (f64, f64, f64) {
    let h = a.hypot(b);
    if h == 0.0 {
        (1.0, 0.0, 0.0)
    } else {
        (a / h, b / h, h)
    }
}

fn rotate_columns(n: usize, j: &mut [Row; MOST_VARIABLES], k: usize, c: f64, s: f64) {
    for row in j.iter_mut().take(n) {
        let (a, b) = (row[k], row[k + 1]);
        row[k] = c * a + s * b;
        row[k + 1] = -s * a + c * b;
    }
}

/// Takes a normal with `d = Jᵀa` into the active set of `q`.
fn add(
    n: usize,
    q: usize,
    j: &mut [Row; MOST_VARIABLES],
    r: &mut [Row; MOST_VARIABLES],
    d: &mut Row,
) {
    for k in (q..n.saturating_sub(1)).rev() {
        let (c, s, h) = rotation(d[k], d[k + 1]);
        d[k] = h;
        d[k + 1] = 0.0;
        rotate_columns(n, j, k, c, s);
    }
    for i in 0..=q {
        r[i][q] = d[i];
    }
}

/// Drops column `k` of R, `left` columns remain.
fn remove(
    n: usize,
    k: usize,
    left: usize,
    j: &mut [Row; MOST_VARIABLES],
    r: &mut [Row; MOST_VARIABLES],
) {
    for column in k..left {
        for row in r.iter_mut().take(left + 1) {
            row[column] = row[column + 1];
        }
    }
    for i in k..left {
        let (c, s, h) = rotation(r[i][i], r[i + 1][i]);
        r[i][i] = h;
        r[i + 1][i] = 0.0;
        for column in i + 1..left {
            let (a, b) = (r[i][column], r[i + 1][column]);
            r[i][column] = c * a + s * b;
            r[i + 1][column] = -s * a + c * b;
        }
        rotate_columns(n, j, i, c, s);
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    /// Rounding of a few dozen operations on numbers of order 1 to 10.
    const TOLERANCE: f64 = 1e-8;

    fn row(values: &[f64]) -> Row {
        let mut r = [0.0; MOST_VARIABLES];
        r[..values.len()].copy_from_slice(values);
        r
    }

    fn hessian(values: &[&[f64]]) -> [Row; MOST_VARIABLES] {
        let mut h = [[0.0; MOST_VARIABLES]; MOST_VARIABLES];
        for (i, v) in values.iter().enumerate() {
            h[i] = row(v);
        }
        h
    }

    /// The worked example of Goldfarb and Idnani (1983), from memory: minimum at (0.4762, 1.0476, 2.0952).
    #[test]
    fn published_worked_example() {
        let h = hessian(&[&[1.0, 0.0, 0.0], &[0.0, 1.0, 0.0], &[0.0, 0.0, 1.0]]);
        let constraints = [
            HalfSpace {
                normal: row(&[-4.0, -3.0, 0.0]),
                offset: -8.0,
            },
            HalfSpace {
                normal: row(&[2.0, 1.0, 0.0]),
                offset: 2.0,
            },
            HalfSpace {
                normal: row(&[0.0, -2.0, 1.0]),
                offset: 0.0,
            },
        ];
        let minimum = minimise(3, &h, &row(&[0.0, -5.0, 0.0]), &constraints).unwrap();
        for (x, e) in minimum
            .point
            .iter()
            .zip([10.0 / 21.0, 22.0 / 21.0, 44.0 / 21.0])
        {
            assert!((x - e).abs() < TOLERANCE);
        }
    }

    #[test]
    fn law_contradicting_constraints_are_infeasible() {
        let h = hessian(&[&[1.0, 0.0], &[0.0, 1.0]]);
        let constraints = [
            HalfSpace {
                normal: row(&[1.0, 0.0]),
                offset: 1.0,
            },
            HalfSpace {
                normal: row(&[-1.0, 0.0]),
                offset: 0.0,
            },
        ];
        assert_eq!(
            minimise(2, &h, &row(&[0.0, 0.0]), &constraints).unwrap_err(),
            NoMinimum::Infeasible
        );
    }

    proptest! {
        #[test]
        fn law_random_programs_meet_the_optimality_conditions(
            entries in proptest::collection::vec(-1.0..1.0f64, 25),
            gradient in proptest::collection::vec(-3.0..3.0f64, 5),
            normals in proptest::collection::vec(proptest::collection::vec(-1.0..1.0f64, 5), 8),
            rooms in proptest::collection::vec(0.0..1.0f64, 8),
        ) {
            let n = 5;
            let mut h = [[0.0; MOST_VARIABLES]; MOST_VARIABLES];
            for i in 0..n {
                for k in 0..n {
                    h[i][k] = (0..n).map(|m| entries[n * i + m] * entries[n * k + m]).sum();
                }
                h[i][i] += 0.1;
            }
            // The origin satisfies all of them, so a minimum exists.
            let constraints: Vec<HalfSpace> = normals
                .iter()
                .zip(&rooms)
                .map(|(a, &room)| HalfSpace { normal: row(a), offset: -room })
                .collect();
            let g = row(&gradient);
            let minimum = minimise(n, &h, &g, &constraints).unwrap();
            for i in 0..n {
                let slope: f64 = (0..n).map(|k| h[i][k] * minimum.point[k]).sum::<f64>() + g[i];
                let held: f64 = constraints.iter().zip(&minimum.multipliers).map(|(c, m)| c.normal[i] * m).sum();
                prop_assert!((slope - held).abs() < TOLERANCE);
            }
            for (c, &m) in constraints.iter().zip(&minimum.multipliers) {
                let room = (0..n).map(|i| c.normal[i] * minimum.point[i]).sum::<f64>() - c.offset;
                prop_assert!(room > -TOLERANCE && m >= 0.0 && (m * room).abs() < TOLERANCE);
            }
        }
    }
}
