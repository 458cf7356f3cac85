//! Bounded nonlinear least squares as an argmin solver, and what the minimum says of its parameters.
//!
//! Levenberg (1944) and Marquardt (1963): `(JᵀWJ + λ·diag) δ = −JᵀWr`, the step projected on the bounds and the
//! variables that push out of a bound left out of it (Kanzow, Yamashita and Fukushima 2004).
//! Standard errors are those of the linearised problem, `σ² H⁻¹MH⁻¹` with `H = JᵀWJ` and
//! `M = Σ (W²/repeats) jjᵀ`, over every variable that was not held: a variable at its bound still makes the others
//! uncertain, so it is not counted as known.

use crate::numerics::matrix::{Column, Matrix, identity, solve};
use argmin::core::{
    Error, Executor, IterState, KV, Problem, Solver, TerminationReason, TerminationStatus,
};

/// Step of the central differences, of variables scaled to order 1: the cube root of the rounding error, nearly.
const STEP: f64 = 1e-5;
/// A relative fall of the sum of squares below this ends the search.
const LEAST_FALL: f64 = 1e-13;
const MOST_ITERATIONS: u64 = 400;
const MOST_DAMPINGS: usize = 24;
const FIRST_DAMPING: f64 = 1e-3;

/// Residuals to be made small; variables scaled to order 1.
pub trait Residuals<const N: usize> {
    /// Residual of every point.
    fn at(&self, variables: &Column<f64, N>) -> Vec<f64>;
    /// Weight of a point.
    fn weight(&self, point: usize) -> f64;
    /// Measurements that a point is the mean of.
    fn repeats(&self, point: usize) -> f64;
    /// Weighted sum of squares within the points' repeats.
    fn scatter(&self) -> f64;
    /// Lower and upper bound; equal for a variable that is held.
    fn bounds(&self) -> [(f64, f64); N];
}

/// A minimum and what it says.
#[derive(Debug, Clone, PartialEq)]
pub struct Minimum<const N: usize> {
    /// The variables there.
    pub variables: Column<f64, N>,
    /// Weighted sum of squares, with the scatter within repeats.
    pub squares: f64,
    /// Standard deviation of one measurement of weight 1; `None` without points to spare.
    pub deviation: Option<f64>,
    /// Points to spare: measurements less free variables.
    pub freedom: usize,
    /// Covariance of the variables; zeros for those held, `None` where the data cannot tell them apart at all.
    pub covariance: Option<Matrix<f64, N>>,
    /// True for a variable on one of its bounds (and not held).
    pub at_bound: [bool; N],
    /// Starts that ended at this minimum.
    pub starts_agreed: usize,
}

type State<const N: usize> = IterState<Vec<f64>, (), (), (), (), f64>;

struct Damped<const N: usize> {
    point: Column<f64, N>,
    squares: f64,
    damping: f64,
    ended: bool,
}

fn squares<const N: usize>(problem: &impl Residuals<N>, point: &Column<f64, N>) -> f64 {
    let sum: f64 = (problem.at(point).iter().enumerate())
        .map(|(i, r)| problem.weight(i) * r * r)
        .sum();
    if sum.is_finite() { sum } else { f64::INFINITY }
}

/// `JᵀWJ`, `JᵀWr` and `Σ (W²/repeats) jjᵀ`.
struct Normal<const N: usize> {
    curvature: Matrix<f64, N>,
    gradient: Column<f64, N>,
    meat: Matrix<f64, N>,
}

fn normal<const N: usize>(problem: &impl Residuals<N>, point: &Column<f64, N>) -> Normal<N> {
    let here = problem.at(point);
    let held = problem.bounds().map(|(low, high)| low == high);
    let slopes: [Vec<f64>; N] = std::array::from_fn(|k| {
        if held[k] {
            return vec![0.0; here.len()];
        }
        let moved = |by: f64| {
            let mut point = *point;
            point[k] += by;
            problem.at(&point)
        };
        let (up, down) = (moved(STEP), moved(-STEP));
        let pairs = up.iter().zip(&down);
        pairs.map(|(u, d)| (u - d) / (2.0 * STEP)).collect()
    });
    let mut out = Normal {
        curvature: [[0.0; N]; N],
        gradient: [0.0; N],
        meat: [[0.0; N]; N],
    };
    for (i, residual) in here.iter().enumerate() {
        let weight = problem.weight(i);
        for a in 0..N {
            out.gradient[a] += weight * slopes[a][i] * residual;
            for b in 0..N {
                let product = weight * slopes[a][i] * slopes[b][i];
                out.curvature[a][b] += product;
                out.meat[a][b] += product * weight / problem.repeats(i);
            }
        }
    }
    out
}

impl<const N: usize> Damped<N> {
    fn step(&mut self, problem: &impl Residuals<N>) {
        let bounds = problem.bounds();
        let Normal {
            curvature,
            gradient,
            ..
        } = normal(problem, &self.point);
        let free: [bool; N] = std::array::from_fn(|k| {
            let (low, high) = bounds[k];
            let out = (self.point[k] <= low && gradient[k] > 0.0)
                || (self.point[k] >= high && gradient[k] < 0.0);
            low < high && !out
        });
        for _ in 0..MOST_DAMPINGS {
            let mut matrix = identity::<f64, N>();
            let mut right = [0.0; N];
            for a in (0..N).filter(|&a| free[a]) {
                for b in (0..N).filter(|&b| free[b]) {
                    matrix[a][b] = curvature[a][b];
                }
                matrix[a][a] += self.damping * curvature[a][a].max(f64::MIN_POSITIVE);
                right[a] = -gradient[a];
            }
            if let Some(step) = solve(matrix, right) {
                let there = std::array::from_fn(|k| {
                    (self.point[k] + step[k]).clamp(bounds[k].0, bounds[k].1)
                });
                let squares = squares(problem, &there);
                if squares < self.squares {
                    self.ended = self.squares - squares <= LEAST_FALL * self.squares;
                    self.point = there;
                    self.squares = squares;
                    self.damping = (self.damping / 5.0).max(1e-15);
                    return;
                }
            }
            self.damping *= 4.0;
        }
        self.ended = true;
    }
}

impl<const N: usize, O: Residuals<N>> Solver<O, State<N>> for Damped<N> {
    fn name(&self) -> &str {
        "bounded Levenberg-Marquardt"
    }

    fn init(
        &mut self,
        problem: &mut Problem<O>,
        state: State<N>,
    ) -> Result<(State<N>, Option<KV>), Error> {
        let point = self.point;
        self.squares = problem.problem("residuals", |p| Ok(squares(p, &point)))?;
        self.ended = !self.squares.is_finite();
        Ok((state, None))
    }

    fn next_iter(
        &mut self,
        problem: &mut Problem<O>,
        state: State<N>,
    ) -> Result<(State<N>, Option<KV>), Error> {
        problem.problem("steps", |p| {
            self.step(p);
            Ok(())
        })?;
        Ok((state.param(self.point.to_vec()).cost(self.squares), None))
    }

    fn terminate(&mut self, _state: &State<N>) -> TerminationStatus {
        match self.ended {
            true => TerminationStatus::Terminated(TerminationReason::SolverConverged),
            false => TerminationStatus::NotTerminated,
        }
    }
}

/// The least of the minima reached from `starts`; `None` where no start gives finite residuals.
pub fn minimise<const N: usize>(
    problem: &impl Residuals<N>,
    starts: &[Column<f64, N>],
) -> Option<Minimum<N>> {
    let bounds = problem.bounds();
    let ends: Vec<Damped<N>> = starts
        .iter()
        .filter_map(|start| {
            let solver = Damped {
                point: std::array::from_fn(|k| start[k].clamp(bounds[k].0, bounds[k].1)),
                squares: f64::INFINITY,
                damping: FIRST_DAMPING,
                ended: false,
            };
            let run = Executor::new(Borrowed(problem), solver)
                .configure(|state| state.max_iters(MOST_ITERATIONS))
                .ctrlc(false)
                .timer(false)
                .run();
            // the solver's own steps cannot fail; an error here would be argmin's
            run.ok().map(|result| result.solver)
        })
        .filter(|end| end.squares.is_finite())
        .collect();
    let best = ends.iter().min_by(|a, b| a.squares.total_cmp(&b.squares))?;
    // within a ten-thousandth of the least sum: the same minimum for every use
    let agreed = |end: &&Damped<N>| end.squares <= best.squares * (1.0 + 1e-4) + 1e-12;
    let starts_agreed = ends.iter().filter(agreed).count();
    Some(described(problem, &best.point, starts_agreed))
}

/// What the residuals say at a point that `starts_agreed` starts led to.
pub fn described<const N: usize>(
    problem: &impl Residuals<N>,
    point: &Column<f64, N>,
    starts_agreed: usize,
) -> Minimum<N> {
    let bounds = problem.bounds();
    let free: [bool; N] = std::array::from_fn(|k| bounds[k].0 < bounds[k].1);
    let points = problem.at(point).len();
    let measurements: f64 = (0..points).map(|i| problem.repeats(i)).sum();
    let unknown = free.iter().filter(|&&f| f).count();
    let freedom = (measurements as usize).saturating_sub(unknown);
    let total = squares(problem, point) + problem.scatter();
    let deviation = (freedom > 0).then(|| (total / freedom as f64).sqrt());
    let normal = normal(problem, point);
    Minimum {
        variables: *point,
        squares: total,
        deviation,
        freedom,
        covariance: deviation.and_then(|d| covariance(&normal, &free, d)),
        at_bound: std::array::from_fn(|k| {
            let (low, high) = bounds[k];
            let near = 1e-6 * (high - low);
            free[k] && (point[k] - low < near || high - point[k] < near)
        }),
        starts_agreed,
    }
}

fn covariance<const N: usize>(
    normal: &Normal<N>,
    free: &[bool; N],
    deviation: f64,
) -> Option<Matrix<f64, N>> {
    // scaled to a unit diagonal, so that elimination does not see the variables' sizes
    let scale: [f64; N] = std::array::from_fn(|k| match free[k] {
        true => normal.curvature[k][k].sqrt(),
        false => 1.0,
    });
    if scale.iter().any(|s| !s.is_finite() || *s <= 0.0) {
        return None;
    }
    let mut matrix = identity::<f64, N>();
    for a in (0..N).filter(|&a| free[a]) {
        for b in (0..N).filter(|&b| free[b]) {
            matrix[a][b] = normal.curvature[a][b] / (scale[a] * scale[b]);
        }
    }
    let mut inverse = [[0.0; N]; N];
    for k in (0..N).filter(|&k| free[k]) {
        let unit = std::array::from_fn(|i| if i == k { 1.0 } else { 0.0 });
        inverse[k] = solve(matrix, unit)?;
    }
    for a in 0..N {
        for b in 0..N {
            inverse[a][b] /= scale[a] * scale[b];
        }
    }
    let entry = |a: usize, b: usize| -> f64 {
        let pairs = (0..N).flat_map(|i| (0..N).map(move |j| (i, j)));
        let sum: f64 = pairs
            .map(|(i, j)| inverse[a][i] * normal.meat[i][j] * inverse[j][b])
            .sum();
        sum * deviation * deviation
    };
    let out: Matrix<f64, N> = std::array::from_fn(|a| std::array::from_fn(|b| entry(a, b)));
    let sound = (0..N).all(|k| out[k][k].is_finite() && (!free[k] || out[k][k] > 0.0));
    sound.then_some(out)
}

/// argmin takes its problem by value.
struct Borrowed<'p, P>(&'p P);

impl<const N: usize, P: Residuals<N>> Residuals<N> for Borrowed<'_, P> {
    fn at(&self, variables: &Column<f64, N>) -> Vec<f64> {
        self.0.at(variables)
    }
    fn weight(&self, point: usize) -> f64 {
        self.0.weight(point)
    }
    fn repeats(&self, point: usize) -> f64 {
        self.0.repeats(point)
    }
    fn scatter(&self) -> f64 {
        self.0.scatter()
    }
    fn bounds(&self) -> [(f64, f64); N] {
        self.0.bounds()
    }
}

/// Student's t that 95 % of the draws stay within: the expansion of Abramowitz and Stegun (1964), 26.7.5, which is
/// right to 1 % from 3 points to spare up.
pub fn student_95(freedom: usize) -> f64 {
    const Z: f64 = 1.959_963_984_540_054;
    let v = freedom.max(1) as f64;
    let (z3, z5, z7) = (Z.powi(3), Z.powi(5), Z.powi(7));
    Z + (z3 + Z) / (4.0 * v)
        + (5.0 * z5 + 16.0 * z3 + 3.0 * Z) / (96.0 * v * v)
        + (3.0 * z7 + 19.0 * z5 + 17.0 * z3 - 15.0 * Z) / (384.0 * v.powi(3))
}
