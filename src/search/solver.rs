//! Sequential quadratic programming as an argmin solver: bounds and limits are constraints, never penalties in the answer.
//!
//! Each iteration solves a quadratic model of the Lagrangian under the linearised constraints
//! ([`super::quadratic`]), steps along it by Han's exact merit function (Han, JOTA 22, 1977; penalties after Powell,
//! 1978), with a second-order correction (Fletcher 1982) where curvature of the constraints would cut the step, and
//! learns the model's curvature ([`super::curvature`]).

use super::constrained::{Assessment, Constrained, FEASIBLE, MOST_CONSTRAINTS};
use super::curvature::{Curvature, dot, learn, no_curvature};
use super::quadratic::{HalfSpace, MOST_VARIABLES, Minimum, NoMinimum, Row, minimise};
use argmin::core::{Error, IterState, KV, Problem, Solver, TerminationReason, TerminationStatus};
use arrayvec::ArrayVec;

/// Limits broken by more than `FAR`, which in so many models running are not narrowed to a part `NARROWED`, have no point
/// in common near here. A model in which they contradict each other counts for more.
const PATIENCE: u32 = 20;
const CONTRADICTION: u32 = 6;
const NARROWED: f64 = 0.8;
const FAR: f64 = 1e-3;

/// A step need only be better than the worst of this many points before and the present one (Grippo, Lampariello and
/// Lucidi 1986): asked to be better than the present one, steps along curved limits are cut short and zigzag.
const MEMORY: usize = 3;

/// Lengths tried along a step: the last is about 1e-5 of it.
const MOST_TRIALS: usize = 13;

/// How an optimisation ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Ended {
    /// Stationary and feasible to tolerance.
    Converged,
    /// No further descent along the model; the residual says how near.
    Stalled,
    /// The linearised constraints contradict each other.
    Infeasible,
    /// The start cannot be assessed.
    NoStart,
    /// Still running when the iterations ran out.
    Unfinished,
}

/// The solver with its state; read it after the run.
#[derive(Debug, Clone)]
pub struct SequentialQuadratic {
    /// Where it is.
    pub point: Row,
    /// Assessment there.
    pub assessment: Option<Assessment>,
    /// Model of the Lagrangian's curvature.
    pub curvature: Curvature,
    /// First-order optimality residual of the last model: the largest component of the Lagrangian's gradient,
    /// complementarity or violation.
    pub residual: f64,
    /// Largest violation of a constraint.
    pub violation: f64,
    /// Multipliers of the general constraints at the last model.
    pub multipliers: ArrayVec<f64, MOST_CONSTRAINTS>,
    /// How it ended.
    pub ended: Ended,
    penalties: ArrayVec<f64, MOST_CONSTRAINTS>,
    tolerance: f64,
    resets: u32,
    least_violation: f64,
    waited: u32,
    /// The last points left behind, newest last.
    passed: ArrayVec<Assessment, MEMORY>,
}

impl SequentialQuadratic {
    /// Starts at `point` with what is known of the curvature.
    pub fn new(point: Row, curvature: Curvature, tolerance: f64) -> Self {
        Self {
            point,
            assessment: None,
            curvature,
            residual: f64::INFINITY,
            violation: f64::INFINITY,
            multipliers: ArrayVec::new(),
            ended: Ended::Unfinished,
            penalties: ArrayVec::new(),
            tolerance,
            resets: 0,
            least_violation: f64::INFINITY,
            waited: 0,
            passed: ArrayVec::new(),
        }
    }

    /// Solves the quadratic model, the constraints' own values scaled back while they contradict each other.
    fn model<O: Constrained>(
        &self,
        problem: &O,
        a: &Assessment,
        values: impl Fn(usize) -> f64,
    ) -> Option<(Minimum, f64)> {
        let n = problem.size();
        for relaxed in [1.0, 0.5, 0.1, 0.01] {
            let mut half_spaces: ArrayVec<HalfSpace, { MOST_CONSTRAINTS + 2 * MOST_VARIABLES }> =
                ArrayVec::new();
            for (j, c) in a.constraints.iter().enumerate() {
                let value = values(j);
                half_spaces.push(HalfSpace {
                    normal: c.gradient,
                    offset: if value < 0.0 {
                        -value * relaxed
                    } else {
                        -value
                    },
                });
            }
            for i in 0..n {
                let (low, high) = problem.bounds(i);
                let mut normal = [0.0; MOST_VARIABLES];
                normal[i] = 1.0;
                half_spaces.push(HalfSpace {
                    normal,
                    offset: low - self.point[i],
                });
                normal[i] = -1.0;
                half_spaces.push(HalfSpace {
                    normal,
                    offset: self.point[i] - high,
                });
            }
            match minimise(n, &self.curvature, &a.cost.gradient, &half_spaces) {
                Ok(minimum) => return Some((minimum, relaxed)),
                Err(NoMinimum::Infeasible) => {}
                Err(NoMinimum::Numbers) => return None,
            }
        }
        None
    }

    fn merit(&self, a: &Assessment) -> f64 {
        a.cost.value
            + a.constraints
                .iter()
                .zip(&self.penalties)
                .map(|(c, p)| p * (-c.value).max(0.0))
                .sum::<f64>()
    }

    fn assess<O: Constrained>(
        problem: &mut Problem<O>,
        point: &Row,
    ) -> Result<Option<Assessment>, Error> {
        problem.problem("assessments", |p| Ok(p.assess(point)))
    }

    fn moved<O: Constrained>(&self, problem: &O, step: &Row, length: f64) -> Row {
        let mut point = self.point;
        for i in 0..problem.size() {
            let (low, high) = problem.bounds(i);
            point[i] = (point[i] + length * step[i]).clamp(low, high);
        }
        point
    }

    /// One iteration; the new point is in `self`.
    fn iterate<O: Constrained>(&mut self, problem: &mut Problem<O>) -> Result<(), Error> {
        let Some(owner) = problem.problem.as_ref() else {
            return Err(Error::msg("the problem is gone"));
        };
        let n = owner.size();
        let Some(a) = self.assessment.take() else {
            self.ended = Ended::NoStart;
            return Ok(());
        };
        let model = self.model(owner, &a, |j| a.constraints[j].value);
        let Some((minimum, relaxed)) = model else {
            if self.resets < 2 {
                self.resets += 1;
                self.curvature = no_curvature();
            } else {
                self.ended = Ended::Infeasible;
            }
            self.assessment = Some(a);
            return Ok(());
        };
        let step = minimum.point;
        self.multipliers = minimum.multipliers[..a.constraints.len()]
            .iter()
            .copied()
            .collect();
        self.violation = a.violation();
        self.residual = self.measure(n, owner, &a, &minimum);
        let length: f64 = step[..n].iter().fold(0.0, |m, s| m.max(s.abs()));
        if self.residual <= self.tolerance && self.violation <= FEASIBLE {
            self.ended = Ended::Converged;
            self.assessment = Some(a);
            return Ok(());
        }
        if self.violation < NARROWED * self.least_violation {
            self.least_violation = self.violation;
            self.waited = 0;
        } else if self.violation > FAR {
            self.waited += if relaxed < 1.0 { CONTRADICTION } else { 1 };
        }
        let settled = relaxed < 1.0 && length < 1e-9 && self.violation > self.tolerance;
        if settled || self.waited >= PATIENCE {
            self.ended = Ended::Infeasible;
            self.assessment = Some(a);
            return Ok(());
        }
        for (j, m) in self.multipliers.iter().enumerate() {
            match self.penalties.get_mut(j) {
                Some(p) => *p = m.max(0.5 * (*p + m)),
                None => self.penalties.push(*m),
            }
        }
        // A limit broken now must weigh, whatever its multiplier says.
        for (p, c) in self.penalties.iter_mut().zip(&a.constraints) {
            if c.value < 0.0 {
                *p = p.max(1.0);
            }
        }
        let merit = self.merit(&a);
        let reference = self
            .passed
            .iter()
            .map(|p| self.merit(p))
            .fold(merit, f64::max);
        let weighted: f64 = a
            .constraints
            .iter()
            .zip(&self.penalties)
            .map(|(c, p)| p * (-c.value).max(0.0))
            .sum();
        let descent = (dot(n, &a.cost.gradient, &step) - relaxed * weighted).min(0.0);
        let mut factor = 1.0;
        for trial in 0..MOST_TRIALS {
            let Some(owner) = problem.problem.as_ref() else {
                return Err(Error::msg("the problem is gone"));
            };
            let point = self.moved(owner, &step, factor);
            let assessed = Self::assess(problem, &point)?;
            if let Some(next) = assessed {
                let enough = reference + 1e-4 * factor * descent + 1e-15 * merit.abs();
                if self.merit(&next) <= enough {
                    self.accept(n, point, a, next);
                    return Ok(());
                }
                if trial == 0
                    && next.violation() > self.violation.max(self.tolerance)
                    && self.correct(problem, &a, &next, &step, enough)?
                {
                    return Ok(());
                }
                factor *= 0.4;
            } else {
                factor *= 0.2;
            }
        }
        // No descent at all: forget the curvature once, then give up.
        if self.resets < 2 {
            self.resets += 1;
            self.curvature = no_curvature();
        } else {
            self.ended = Ended::Stalled;
        }
        self.assessment = Some(a);
        Ok(())
    }

    fn accept(&mut self, n: usize, point: Row, before: Assessment, after: Assessment) {
        let mut step = [0.0; MOST_VARIABLES];
        for i in 0..n {
            step[i] = point[i] - self.point[i];
        }
        let slopes = |a: &Assessment| a.lagrangian_gradient(&self.multipliers);
        let (earlier, later) = (slopes(&before), slopes(&after));
        learn(&mut self.curvature, n, &step, &earlier, &later);
        if self.passed.is_full() {
            self.passed.pop_at(0);
        }
        self.passed.push(before);
        self.point = point;
        self.assessment = Some(after);
    }

    /// Second-order correction: the model again with the constraints as they turned out at the full step.
    fn correct<O: Constrained>(
        &mut self,
        problem: &mut Problem<O>,
        a: &Assessment,
        full: &Assessment,
        step: &Row,
        enough: f64,
    ) -> Result<bool, Error> {
        let Some(owner) = problem.problem.as_ref() else {
            return Err(Error::msg("the problem is gone"));
        };
        let n = owner.size();
        let curved =
            |j: usize| full.constraints[j].value - dot(n, &a.constraints[j].gradient, step);
        let Some((corrected, _)) = self.model(owner, a, curved) else {
            return Ok(false);
        };
        let point = self.moved(owner, &corrected.point, 1.0);
        if let Some(next) = Self::assess(problem, &point)?
            && self.merit(&next) <= enough
        {
            self.accept(n, point, a.clone(), next);
            return Ok(true);
        }
        Ok(false)
    }

    /// Residual of the first-order conditions (Karush, Kuhn and Tucker) at the current point with the model's
    /// multipliers, bounds included.
    fn measure<O: Constrained>(
        &self,
        n: usize,
        problem: &O,
        a: &Assessment,
        minimum: &Minimum,
    ) -> f64 {
        let general = a.constraints.len();
        let mut gradient = a.lagrangian_gradient(&self.multipliers);
        let mut worst = self.violation;
        for i in 0..n {
            let (low, high) = problem.bounds(i);
            let at_low = minimum.multipliers[general + 2 * i];
            let at_high = minimum.multipliers[general + 2 * i + 1];
            gradient[i] += at_high - at_low;
            worst = worst
                .max(gradient[i].abs())
                .max(at_low * (self.point[i] - low))
                .max(at_high * (high - self.point[i]));
        }
        for (c, m) in a.constraints.iter().zip(&minimum.multipliers) {
            worst = worst.max(m * c.value.abs());
        }
        worst
    }
}

/// The state argmin keeps: parameters and cost; everything else is the solver's own.
pub type SolverState = IterState<Vec<f64>, (), (), (), (), f64>;

impl<O: Constrained> Solver<O, SolverState> for SequentialQuadratic {
    fn name(&self) -> &str {
        "sequential quadratic programming"
    }

    fn init(
        &mut self,
        problem: &mut Problem<O>,
        state: SolverState,
    ) -> Result<(SolverState, Option<KV>), Error> {
        if let Some(owner) = problem.problem.as_ref() {
            self.point = self.moved(owner, &[0.0; MOST_VARIABLES], 0.0);
        }
        let point = self.point;
        self.assessment = Self::assess(problem, &point)?;
        if self.assessment.is_none() {
            self.ended = Ended::NoStart;
        }
        Ok((state, None))
    }

    fn next_iter(
        &mut self,
        problem: &mut Problem<O>,
        state: SolverState,
    ) -> Result<(SolverState, Option<KV>), Error> {
        self.iterate(problem)?;
        let cost = self
            .assessment
            .as_ref()
            .map_or(f64::INFINITY, |a| a.cost.value);
        Ok((state.param(self.point.to_vec()).cost(cost), None))
    }

    fn terminate(&mut self, _state: &SolverState) -> TerminationStatus {
        match self.ended {
            Ended::Unfinished => TerminationStatus::NotTerminated,
            Ended::Converged => TerminationStatus::Terminated(TerminationReason::SolverConverged),
            other => {
                TerminationStatus::Terminated(TerminationReason::SolverExit(format!("{other:?}")))
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::constrained::Linear;
    use super::*;
    use argmin::core::Executor;

    /// The residual asked of the solver; minima are then right to about its square root in flat directions.
    const RESIDUAL: f64 = 1e-9;
    const PLACE: f64 = 1e-6;

    struct Toy<F: Fn(&Row) -> Option<Assessment>>(usize, (f64, f64), F);

    impl<F: Fn(&Row) -> Option<Assessment>> Constrained for Toy<F> {
        fn size(&self) -> usize {
            self.0
        }
        fn bounds(&self, _: usize) -> (f64, f64) {
            self.1
        }
        fn assess(&self, point: &Row) -> Option<Assessment> {
            self.2(point)
        }
    }

    fn linear(value: f64, gradient: &[f64]) -> Linear {
        let mut g = [0.0; MOST_VARIABLES];
        g[..gradient.len()].copy_from_slice(gradient);
        Linear { value, gradient: g }
    }

    fn run<O: Constrained>(problem: O, start: &[f64]) -> SequentialQuadratic {
        let mut point = [0.0; MOST_VARIABLES];
        point[..start.len()].copy_from_slice(start);
        Executor::new(
            problem,
            SequentialQuadratic::new(point, no_curvature(), RESIDUAL),
        )
        .configure(|s| s.max_iters(200))
        .ctrlc(false)
        .run()
        .unwrap()
        .solver
    }

    /// Rosenbrock's valley (1960): minimum 0 at (1, 1); inside the box and with the box cutting it.
    #[test]
    fn published_rosenbrock_free_and_on_a_bound() {
        let valley = |p: &Row| {
            let (x, y) = (p[0], p[1]);
            Some(Assessment {
                cost: linear(
                    (1.0 - x).powi(2) + 100.0 * (y - x * x).powi(2),
                    &[
                        -2.0 * (1.0 - x) - 400.0 * x * (y - x * x),
                        200.0 * (y - x * x),
                    ],
                ),
                constraints: ArrayVec::new(),
                merits: [0.0; 3],
            })
        };
        let free = run(Toy(2, (-2.0, 2.0), valley), &[-1.2, 1.0]);
        assert_eq!(free.ended, Ended::Converged);
        assert!((free.point[0] - 1.0).abs() < PLACE && (free.point[1] - 1.0).abs() < PLACE);
        // With x ≤ 0.5 the minimum is at (0.5, 0.25).
        let bounded = run(Toy(2, (-2.0, 0.5), valley), &[-1.2, 0.4]);
        assert_eq!(bounded.ended, Ended::Converged);
        assert!((bounded.point[0] - 0.5).abs() < PLACE && (bounded.point[1] - 0.25).abs() < PLACE);
    }

    /// Hock and Schittkowski (1981), problem 71, from memory: minimum 17.0140173 at (1, 4.743, 3.8211, 1.3794).
    /// Its equality is met by two inequalities here; its start is theirs.
    #[test]
    fn published_hock_schittkowski_71() {
        let problem = |p: &Row| {
            let (a, b, c, d) = (p[0], p[1], p[2], p[3]);
            let squares = (a * a + b * b + c * c + d * d - 40.0) / 40.0;
            let slopes = [a / 20.0, b / 20.0, c / 20.0, d / 20.0];
            let mut constraints = ArrayVec::new();
            constraints.push(linear(
                (a * b * c * d - 25.0) / 25.0,
                &[
                    b * c * d / 25.0,
                    a * c * d / 25.0,
                    a * b * d / 25.0,
                    a * b * c / 25.0,
                ],
            ));
            constraints.push(linear(-squares, &slopes.map(|s| -s)));
            Some(Assessment {
                cost: linear(
                    a * d * (a + b + c) + c,
                    &[d * (2.0 * a + b + c), a * d, a * d + 1.0, a * (a + b + c)],
                ),
                constraints,
                merits: [0.0; 3],
            })
        };
        let solved = run(Toy(4, (1.0, 5.0), problem), &[1.0, 5.0, 5.0, 1.0]);
        // The inequality form has the same minimum: the sphere binds from outside.
        assert_eq!(solved.ended, Ended::Converged);
        assert!((solved.assessment.unwrap().cost.value - 17.014_017_3).abs() < 1e-6);
        assert!((solved.point[1] - 4.743).abs() < 1e-3);
    }

    #[test]
    fn law_contradicting_constraints_are_reported() {
        let problem = |p: &Row| {
            let mut constraints = ArrayVec::new();
            constraints.push(linear(p[0] - 0.8, &[1.0]));
            constraints.push(linear(0.2 - p[0], &[-1.0]));
            Some(Assessment {
                cost: linear(p[0] * p[0], &[2.0 * p[0]]),
                constraints,
                merits: [0.0; 3],
            })
        };
        let solved = run(Toy(1, (0.0, 1.0), problem), &[0.5]);
        assert_ne!(solved.ended, Ended::Converged);
        assert!(solved.violation > 0.1);
    }
}
