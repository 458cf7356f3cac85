//! Traces a cell's front: every slice by warm-started constrained optimisation.
//!
//! The front is the set of best efficiencies under targets of output power and area (the ε-constraint method: Haimes,
//! Lasdon and Wismer 1971) on a grid that all slices share. A tighter target cannot be met better than a looser one, so
//! what a slice reached before bounds what it can reach: at each target slices are taken by their bound, and those whose
//! bound is below what is found already are dropped.

mod corners;

use super::Context;
use super::cell::CERTIFIED_RESIDUAL;
use super::constrained::FEASIBLE;
use super::curvature::Curvature;
use super::problem::{Goal, SliceProblem};
use super::quadratic::{MOST_VARIABLES, Row};
use super::reach::{NO_TARGET, Reached, Solved, Target, better};
use super::solver::{Ended, SequentialQuadratic};
use super::space::{Cell, Slice};
use crate::study::Objective;
use argmin::core::Executor;
use std::sync::atomic::{AtomicBool, Ordering};

/// First-order residual asked of an answer.
const RESIDUAL: f64 = 1e-5;
/// How far past a slice's extreme (logarithm) is out of its reach: more than the solves' tolerance.
const EXTREME_SLACK: f64 = 1e-4;
const MOST_ITERATIONS: u64 = 80;

/// The search of one cell under way.
pub(super) struct Tracer<'a> {
    context: &'a Context<'a>,
    slices: &'a [Slice],
    /// Assessments spent.
    pub evaluations: u64,
    /// Everything found.
    pub found: Vec<Solved>,
    /// What each slice is known to reach.
    reached: Vec<Reached>,
    stop: &'a AtomicBool,
}

impl<'a> Tracer<'a> {
    pub fn new(context: &'a Context<'a>, slices: &'a [Slice], stop: &'a AtomicBool) -> Self {
        Self {
            context,
            slices,
            evaluations: 0,
            found: Vec::new(),
            reached: slices.iter().map(|_| Reached::new()).collect(),
            stop,
        }
    }

    /// Traces the front.
    pub fn run(&mut self, cell: &Cell) {
        let trades = |o| self.context.objectives.contains(&o);
        let primary = [
            Objective::Efficiency,
            Objective::OutputPower,
            Objective::Area,
        ]
        .into_iter()
        .find(|&o| trades(o))
        .unwrap_or(Objective::Efficiency);
        let targets_power = trades(Objective::OutputPower) && primary != Objective::OutputPower;
        let targets_area = trades(Objective::Area) && primary != Objective::Area;
        let mut wanted = vec![primary];
        wanted.extend(targets_power.then_some(Objective::OutputPower));
        self.corners(cell, &wanted);

        // The first column has all the area it asks for.
        let levels = self.context.effort.levels;
        let Some(top) = self.best_at(&NO_TARGET, primary) else {
            return;
        };
        let mut rows = None;
        if targets_power && let Some(most_power) = self.strongest(&NO_TARGET) {
            let shared = Rows {
                origin: top.merits[1],
                step: (most_power - top.merits[1]) / levels as f64,
            };
            self.column(
                &NO_TARGET,
                primary,
                shared.between(top.merits[1], most_power),
            );
            rows = Some(shared);
        }
        if targets_area && let Some(least_area) = self.smallest_of(self.least_of_corners()) {
            let most_area = self
                .found
                .iter()
                .map(|s| s.merits[2])
                .fold(f64::NEG_INFINITY, f64::max);
            // Down to where no slice follows: others may reach below the one that set the step.
            let step = ((most_area - least_area) / levels as f64).max(EXTREME_SLACK);
            let mut alive: Vec<usize> = Vec::new();
            for k in 1.. {
                let column = Target {
                    most_area: most_area - step * k as f64,
                    ..NO_TARGET
                };
                let Some(first) = self.best_at(&column, primary) else {
                    break;
                };
                alive = self.alive(&column);
                if let Some(rows) = rows
                    && let Some(most_power) = self.strongest(&column)
                {
                    self.column(&column, primary, rows.between(first.merits[1], most_power));
                }
            }
            for slice in alive {
                self.smallest_of(Some(slice));
            }
        }
    }

    /// The best efficiency under further targets (ln W at least, ln m² at most), ln; none where nothing meets one.
    pub fn answers(&mut self, targets: &[[f64; 2]]) -> Vec<Option<f64>> {
        let at = |tracer: &mut Self, &[least_power, most_area]: &[f64; 2]| {
            let target = Target {
                least_power,
                most_area,
            };
            let best = tracer.best_at(&target, Objective::Efficiency)?;
            Some(best.merits[0])
        };
        targets.iter().map(|t| at(self, t)).collect()
    }

    fn spend(&mut self, assessments: u64) {
        self.evaluations += assessments;
        self.context.count(assessments);
    }

    /// Slices that may still reach a target.
    fn alive(&self, target: &Target) -> Vec<usize> {
        (0..self.slices.len())
            .filter(|&slice| self.reached[slice].bound(target) > f64::NEG_INFINITY)
            .collect()
    }

    /// The best at every row of a column.
    fn column(&mut self, column: &Target, primary: Objective, rows: impl Iterator<Item = f64>) {
        for least_power in rows {
            let target = Target {
                least_power,
                ..*column
            };
            self.best_at(&target, primary);
        }
    }

    /// The best design of any slice that meets a target. Slices are taken by what they may still reach.
    fn best_at(&mut self, target: &Target, primary: Objective) -> Option<Solved> {
        let mut order: Vec<(f64, usize)> = self
            .alive(target)
            .into_iter()
            .map(|slice| (self.reached[slice].bound(target), slice))
            .collect();
        order.sort_by(|a, b| b.0.total_cmp(&a.0).then(a.1.cmp(&b.1)));
        let mut best: Option<Solved> = None;
        for (bound, slice) in order {
            if best.as_ref().is_some_and(|b| b.score(primary) >= bound) {
                break;
            }
            let known = self.reached[slice].known(target, primary, bound).cloned();
            let solved = match known {
                Some(known) => Some(known),
                None => {
                    let solved = self.solve_at(slice, target, primary);
                    self.found.extend(solved.clone());
                    self.reached[slice].solved.extend(solved.clone());
                    solved
                }
            };
            let score = solved
                .as_ref()
                .map_or(f64::NEG_INFINITY, |s| s.score(primary));
            self.reached[slice].note(*target, score);
            best = better(best, solved, primary);
        }
        best
    }

    /// A slice's best under a target, from what it reached before.
    fn solve_at(&mut self, slice: usize, target: &Target, primary: Objective) -> Option<Solved> {
        let starts = self.reached[slice].starts(target);
        let mut best = None;
        for (point, curvature) in starts {
            let solved = self.solve(slice, target, primary, &point, &curvature);
            best = better(best, solved, primary);
            if best
                .as_ref()
                .is_some_and(|b| b.residual <= CERTIFIED_RESIDUAL)
            {
                break;
            }
        }
        best
    }

    /// The most output power of any slice under an area target, ln W.
    fn strongest(&mut self, column: &Target) -> Option<f64> {
        let mut order: Vec<(f64, usize)> = self
            .alive(column)
            .into_iter()
            .map(|slice| (self.reached[slice].most_power, slice))
            .collect();
        order.sort_by(|a, b| b.0.total_cmp(&a.0).then(a.1.cmp(&b.1)));
        let mut best: Option<f64> = None;
        for (limit, slice) in order {
            if best.is_some_and(|b| b >= limit) {
                break;
            }
            let strong = Target {
                least_power: limit,
                ..*column
            };
            let Some((point, curvature)) = self.reached[slice].starts(&strong).pop() else {
                continue;
            };
            let solved = self.solve(slice, column, Objective::OutputPower, &point, &curvature);
            if let Some(solved) = solved {
                let power = solved.merits[1];
                // Columns narrow, so this holds for all that follow.
                self.reached[slice].most_power = power + EXTREME_SLACK;
                best = Some(best.map_or(power, |b| b.max(power)));
                self.reached[slice].solved.push(solved.clone());
                self.found.push(solved);
            }
        }
        best
    }

    /// The slice with the smallest solved design.
    fn least_of_corners(&self) -> Option<usize> {
        let least = |slice: usize| {
            let areas = self.reached[slice].solved.iter().map(|s| s.merits[2]);
            areas.fold(f64::INFINITY, f64::min)
        };
        self.alive(&NO_TARGET)
            .into_iter()
            .min_by(|&a, &b| least(a).total_cmp(&least(b)))
    }

    /// The least area of a slice, ln m², from the smallest design it has.
    fn smallest_of(&mut self, slice: Option<usize>) -> Option<f64> {
        let slice = slice?;
        let nearest = self.reached[slice]
            .solved
            .iter()
            .min_by(|a, b| a.merits[2].total_cmp(&b.merits[2]))?;
        let (point, curvature) = (nearest.point, nearest.curvature);
        let objective = Objective::Area;
        let solved = self.solve(slice, &NO_TARGET, objective, &point, &curvature)?;
        let area = solved.merits[2];
        self.reached[slice].solved.push(solved.clone());
        self.found.push(solved);
        Some(area)
    }

    fn problem(&self, slice: usize, goal: Goal) -> Option<SliceProblem<'a>> {
        let slice = &self.slices[slice];
        Some(SliceProblem {
            setup: self.context.setup,
            slice,
            coil: self.context.coil_source(slice.turns)?,
            goal,
        })
    }

    /// One solve; `None` when it ends without a feasible point.
    fn solve(
        &mut self,
        slice: usize,
        target: &Target,
        best: Objective,
        point: &Row,
        curvature: &Curvature,
    ) -> Option<Solved> {
        if self.stop.load(Ordering::Relaxed) {
            return None;
        }
        let problem = self.problem(slice, target.goal(best))?;
        let solver = SequentialQuadratic::new(*point, *curvature, RESIDUAL);
        let result = Executor::new(problem, solver)
            .configure(|state| state.max_iters(MOST_ITERATIONS))
            .ctrlc(false)
            .timer(false)
            .run();
        // The solver's own steps cannot fail; an error here would be argmin's.
        let result = result.ok()?;
        let spent = result.problem.counts.get("assessments").copied();
        let solver = result.solver;
        self.spend(spent.unwrap_or(0));
        let feasible = solver.violation <= FEASIBLE
            && !matches!(solver.ended, Ended::NoStart | Ended::Infeasible);
        let assessment = solver.assessment.filter(|_| feasible)?;
        Some(Solved {
            slice,
            point: solver.point,
            curvature: solver.curvature,
            residual: solver.residual,
            merits: assessment.merits,
            target: *target,
        })
    }
}

/// Levels of output power, ln W, shared by all columns.
#[derive(Debug, Clone, Copy)]
struct Rows {
    origin: f64,
    step: f64,
}

impl Rows {
    /// Levels strictly between two powers, none nearer to either than a tenth of a step.
    fn between(self, low: f64, high: f64) -> impl Iterator<Item = f64> {
        let first = ((low - self.origin) / self.step + 0.1).ceil();
        let last = ((high - self.origin) / self.step - 0.1).floor();
        let count = if self.step > 0.0 && last >= first {
            (last - first) as usize + 1
        } else {
            0
        };
        (0..count).map(move |k| self.origin + self.step * (first + k as f64))
    }
}

/// A point of the box.
pub(super) fn start_point(axes: usize, mut place: impl FnMut() -> f64) -> Row {
    let mut point = [0.0; MOST_VARIABLES];
    for slot in point.iter_mut().take(axes) {
        *slot = place();
    }
    point
}
