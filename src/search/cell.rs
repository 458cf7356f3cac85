//! The Pareto front of one cell: every slice traced by warm-started constrained optimisation.
//!
//! The front is the set of best efficiencies under targets of output power and area (the ε-constraint method: Haimes,
//! Lasdon and Wismer 1971) on a grid that all slices share. A tighter target cannot be met better than a looser one, so
//! what a slice reached before bounds what it can reach: at each target slices are taken by their bound, and those whose
//! bound is below what is found already are dropped.

use super::Context;
use super::front::{Costs, costs, non_dominated, spread};
use super::problem::{Goal, SliceProblem};
use super::quadratic::{MOST_VARIABLES, Row};
use super::solver::{Constrained, Curvature, Ended, SequentialQuadratic, no_curvature};
use super::space::{Cell, Slice, slices};
use crate::evaluate::{Evaluation, evaluate};
use crate::study::Objective;
use argmin::core::Executor;
use std::sync::atomic::{AtomicBool, Ordering};

/// Levels of the targets along output power and along area.
const LEVELS: usize = 20;
/// Points of a cell's front are no closer than this in every objective, of the front's span.
const SPACING: f64 = 0.25 / LEVELS as f64;
/// First-order residual asked of a solve.
const RESIDUAL: f64 = 1e-6;
/// Residual above which a front point is marked as not certified.
pub const CERTIFIED_RESIDUAL: f64 = 1e-4;
/// A target this far past a slice's extreme (relative) is out of its reach: more than the solves' tolerance.
const EXTREME_SLACK: f64 = 1e-4;
/// Points drawn to choose a slice's starts from.
const SAMPLES: usize = 32;
/// Starts of a slice in the primary objective; its other extremes have one, and those of its neighbours.
const STARTS: usize = 3;
/// What a unit of broken limits counts when starts are ranked, in units of ln efficiency.
const VIOLATION_WEIGHT: f64 = 10.0;
const MOST_ITERATIONS: u64 = 80;

/// A point of a cell's front.
#[derive(Debug, Clone, PartialEq)]
pub struct FrontPoint {
    /// Evaluated exactly, its spiral solved.
    pub evaluation: Evaluation,
    /// How far from first-order optimal, scaled.
    pub residual: f64,
}

/// What the search of one cell found.
#[derive(Debug, Clone, PartialEq)]
pub struct CellFront {
    /// The cell.
    pub cell: Cell,
    /// Its front, best efficiency first.
    pub points: Vec<FrontPoint>,
    /// Assessments spent, final evaluations included.
    pub evaluations: u64,
}

/// A solved point of a slice.
#[derive(Debug, Clone)]
struct Solved {
    slice: usize,
    point: Row,
    curvature: Curvature,
    residual: f64,
    /// ln efficiency, ln W, ln m².
    merits: [f64; 3],
}

/// Searches one cell; `None` when `stop` was raised before it was done.
pub fn search_cell(context: &Context<'_>, cell: &Cell, stop: &AtomicBool) -> Option<CellFront> {
    let slices = slices(context.space, cell);
    let mut tracer = Tracer {
        context,
        slices: &slices,
        evaluations: 0,
        found: Vec::new(),
        reached: slices.iter().map(|_| Reached::default()).collect(),
        stop,
    };
    tracer.run(cell);
    let front = tracer.front(cell);
    (!stop.load(Ordering::Relaxed)).then_some(front)
}

struct Tracer<'a> {
    context: &'a Context<'a>,
    slices: &'a [Slice],
    evaluations: u64,
    found: Vec<Solved>,
    /// What each slice is known to reach.
    reached: Vec<Reached>,
    stop: &'a AtomicBool,
}

/// Targets in logarithms: output power at least, area at most; none = no target.
#[derive(Debug, Clone, Copy, PartialEq)]
struct Target {
    least_power: f64,
    most_area: f64,
}

const NO_TARGET: Target = Target {
    least_power: f64::NEG_INFINITY,
    most_area: f64::INFINITY,
};

impl Target {
    /// Whether meeting `self` meets `other` too.
    fn implies(&self, other: &Self) -> bool {
        self.least_power >= other.least_power && self.most_area <= other.most_area
    }

    fn goal(&self, best: Objective) -> Goal {
        Goal {
            best,
            least_ln_power: self.least_power.is_finite().then_some(self.least_power),
            most_ln_area: self.most_area.is_finite().then_some(self.most_area),
        }
    }
}

/// Solved targets of one slice with their scores, minus infinity where nothing meets the target.
#[derive(Debug, Default)]
struct Reached {
    scores: Vec<(Target, f64)>,
    solved: Vec<Solved>,
    /// ln W above which nothing is to be had in the column at hand.
    most_power: f64,
}

impl Reached {
    /// No design of the slice that meets `target` scores above this.
    fn bound(&self, target: &Target) -> f64 {
        self.scores
            .iter()
            .filter(|(looser, _)| target.implies(looser))
            .map(|s| s.1)
            .fold(f64::INFINITY, f64::min)
    }

    /// The solved point nearest to a target, to start from.
    fn nearest(&self, target: &Target) -> Option<&Solved> {
        let distance = |s: &Solved| {
            let off = |wanted: f64, has: f64| {
                if wanted.is_finite() {
                    (wanted - has).abs()
                } else {
                    0.0
                }
            };
            off(target.least_power, s.merits[1]) + off(target.most_area, s.merits[2])
        };
        self.solved
            .iter()
            .min_by(|a, b| distance(a).total_cmp(&distance(b)))
    }
}

impl Tracer<'_> {
    fn run(&mut self, cell: &Cell) {
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
        wanted.extend(targets_area.then_some(Objective::Area));
        self.corners(cell, &wanted);
        if !(targets_power || targets_area) {
            return;
        }
        // The columns span what the corners do.
        let (least_area, most_area) = self
            .found
            .iter()
            .map(|s| s.merits[2])
            .fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), v| {
                (low.min(v), high.max(v))
            });
        let level = |low: f64, high: f64, k: usize| low + (high - low) * k as f64 / LEVELS as f64;
        let areas: Vec<f64> = if targets_area {
            (1..=LEVELS)
                .rev()
                .map(|k| level(least_area, most_area, k))
                .collect()
        } else {
            vec![f64::INFINITY]
        };
        for area in areas {
            let column = Target {
                most_area: area,
                ..NO_TARGET
            };
            let first = self.best_at(&column, primary);
            if !targets_power {
                continue;
            }
            let Some(first) = first else { continue };
            let Some(most_power) = self.strongest(&column) else {
                continue;
            };
            for k in 1..LEVELS {
                let target = Target {
                    least_power: level(first.merits[1], most_power, k),
                    ..column
                };
                self.best_at(&target, primary);
            }
        }
    }

    /// The best design of any slice that meets a target. Slices are taken by what they may still reach.
    fn best_at(&mut self, target: &Target, primary: Objective) -> Option<Solved> {
        let mut order: Vec<(f64, usize)> = (0..self.slices.len())
            .map(|slice| (self.reached[slice].bound(target), slice))
            .filter(|(bound, _)| *bound > f64::NEG_INFINITY)
            .collect();
        order.sort_by(|a, b| b.0.total_cmp(&a.0).then(a.1.cmp(&b.1)));
        let mut best: Option<Solved> = None;
        for (bound, slice) in order {
            if best.as_ref().is_some_and(|b| score(b, primary) >= bound) {
                break;
            }
            let Some(start) = self.reached[slice].nearest(target).cloned() else {
                continue;
            };
            let goal = target.goal(primary);
            let mut solved = self.solve(slice, goal, start.point, &start.curvature);
            if solved
                .as_ref()
                .is_none_or(|s| s.residual > CERTIFIED_RESIDUAL)
            {
                let again = self.solve(slice, goal, start.point, &no_curvature());
                solved = better(solved, again, primary);
            }
            let reached = solved
                .as_ref()
                .map_or(f64::NEG_INFINITY, |s| score(s, primary));
            self.reached[slice].scores.push((*target, reached));
            if let Some(solved) = &solved {
                self.reached[slice].solved.push(solved.clone());
                self.found.push(solved.clone());
            }
            best = better(best, solved, primary);
        }
        best
    }

    /// The most output power of any slice under an area target.
    fn strongest(&mut self, column: &Target) -> Option<f64> {
        let mut order: Vec<(f64, usize)> = (0..self.slices.len())
            .filter(|&slice| self.reached[slice].bound(column) > f64::NEG_INFINITY)
            .map(|slice| (self.reached[slice].most_power, slice))
            .collect();
        order.sort_by(|a, b| b.0.total_cmp(&a.0).then(a.1.cmp(&b.1)));
        let mut best: Option<f64> = None;
        for (limit, slice) in order {
            if best.is_some_and(|b| b >= limit) {
                break;
            }
            let target = Target {
                least_power: limit,
                ..*column
            };
            let Some(start) = self.reached[slice].nearest(&target).cloned() else {
                continue;
            };
            let goal = column.goal(Objective::OutputPower);
            if let Some(solved) = self.solve(slice, goal, start.point, &no_curvature()) {
                // Columns narrow, so this holds for all that follow.
                self.reached[slice].most_power = solved.merits[1] + EXTREME_SLACK;
                best = Some(best.map_or(solved.merits[1], |b| b.max(solved.merits[1])));
                self.reached[slice].solved.push(solved.clone());
                self.found.push(solved);
            }
        }
        best
    }

    fn problem<'b>(&'b self, slice: usize, goal: Goal) -> Option<SliceProblem<'b>> {
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
        goal: Goal,
        point: Row,
        curvature: &Curvature,
    ) -> Option<Solved> {
        if self.stop.load(Ordering::Relaxed) {
            return None;
        }
        let problem = self.problem(slice, goal)?;
        let solver = SequentialQuadratic::new(point, *curvature, RESIDUAL);
        let result = Executor::new(problem, solver)
            .configure(|state| state.max_iters(MOST_ITERATIONS))
            .ctrlc(false)
            .timer(false)
            .run();
        // The solver's own steps cannot fail; an error here would be argmin's.
        let result = result.ok()?;
        let spent = result
            .problem
            .counts
            .get("assessments")
            .copied()
            .unwrap_or(0);
        let solver = result.solver;
        let feasible = solver.violation <= LEAST_FEASIBLE
            && !matches!(solver.ended, Ended::NoStart | Ended::Infeasible);
        let merits = self.problem(slice, goal)?.merits(&solver.point);
        self.evaluations += spent + 1;
        self.context.count(spent + 1);
        let merits = merits.ok().filter(|_| feasible)?;
        Some(Solved {
            slice,
            point: solver.point,
            curvature: solver.curvature,
            residual: solver.residual,
            merits: merits.objectives.map(|o| o.value),
        })
    }

    /// The best design of every slice in each objective. There is more than one hill: several starts, and a slice also
    /// starts where its neighbours' best stand, once forward and once back.
    fn corners(&mut self, cell: &Cell, wanted: &[Objective]) {
        let count = self.slices.len();
        let mut corners: Vec<Vec<Option<Solved>>> = vec![vec![None; wanted.len()]; count];
        for slice in 0..count {
            for (which, &objective) in wanted.iter().enumerate() {
                let mut points = self.starts(cell, slice, objective);
                points.truncate(if which == 0 { STARTS } else { 1 });
                // A slice without a feasible design is not climbed for its other extremes.
                let own = corners[slice][0].as_ref().map(|s| s.point);
                if which > 0 && own.is_none() {
                    continue;
                }
                points.extend(own.filter(|_| which > 0));
                points.extend(neighbour(&corners, slice.checked_sub(1), which));
                for point in points {
                    self.climb(slice, objective, point, &mut corners[slice][which]);
                }
            }
        }
        for slice in (0..count).rev() {
            for (which, &objective) in wanted.iter().enumerate() {
                if let Some(point) = neighbour(&corners, Some(slice + 1), which)
                    && corners[slice][0].is_some()
                {
                    self.climb(slice, objective, point, &mut corners[slice][which]);
                }
            }
        }
        for (slice, corners) in corners.into_iter().enumerate() {
            self.keep_corners(slice, wanted, corners);
        }
    }

    /// Where to start a slice: of many points drawn by seed the ones that are best and least infeasible.
    fn starts(&mut self, cell: &Cell, slice: usize, objective: Objective) -> Vec<Row> {
        let axes = self.slices[slice].axes.len();
        let Some(problem) = self.problem(slice, NO_TARGET.goal(objective)) else {
            return Vec::new();
        };
        let mut drawn: Vec<(f64, Row)> = (0..SAMPLES)
            .map(|number| self.context.start(cell, slice, number, axes))
            .filter_map(|point| {
                let a = problem.assess(&point)?;
                let broken: f64 = a.constraints.iter().map(|c| (-c.value).max(0.0)).sum();
                Some((a.cost.value + VIOLATION_WEIGHT * broken, point))
            })
            .collect();
        self.evaluations += SAMPLES as u64;
        self.context.count(SAMPLES as u64);
        drawn.sort_by(|a, b| a.0.total_cmp(&b.0));
        drawn.into_iter().map(|(_, p)| p).collect()
    }

    fn climb(&mut self, slice: usize, objective: Objective, point: Row, best: &mut Option<Solved>) {
        let solved = self.solve(slice, NO_TARGET.goal(objective), point, &no_curvature());
        *best = better(best.take(), solved, objective);
    }

    /// Notes what the corners say of a slice's reach.
    fn keep_corners(&mut self, slice: usize, wanted: &[Objective], corners: Vec<Option<Solved>>) {
        let reached = &mut self.reached[slice];
        for (which, (&objective, corner)) in wanted.iter().zip(corners).enumerate() {
            let best = corner
                .as_ref()
                .map_or(f64::NEG_INFINITY, |s| score(s, objective));
            if which == 0 {
                reached.scores.push((NO_TARGET, best));
            }
            let Some(corner) = corner else { continue };
            // Beyond its own extreme a slice reaches nothing.
            match objective {
                Objective::OutputPower if which > 0 => {
                    reached.most_power = best + EXTREME_SLACK;
                    let beyond = Target {
                        least_power: reached.most_power,
                        ..NO_TARGET
                    };
                    reached.scores.push((beyond, f64::NEG_INFINITY));
                }
                Objective::Area if which > 0 => {
                    let beyond = Target {
                        most_area: -best - EXTREME_SLACK,
                        ..NO_TARGET
                    };
                    reached.scores.push((beyond, f64::NEG_INFINITY));
                }
                _ => {}
            }
            self.found.push(corner.clone());
            reached.solved.push(corner);
        }
    }

    /// Filters what was found, evaluates it exactly, filters and spreads again.
    fn front(mut self, cell: &Cell) -> CellFront {
        let objectives = self.context.objectives;
        let key = |m: &[f64; 3]| costs(objectives, m[0].exp(), m[1].exp(), m[2].exp());
        let all: Vec<Costs> = self.found.iter().map(|s| key(&s.merits)).collect();
        let kept = non_dominated(&all);
        let kept_costs: Vec<Costs> = kept.iter().map(|&i| all[i]).collect();
        let mut points: Vec<FrontPoint> = Vec::new();
        for at in spread(&kept_costs, SPACING) {
            if self.stop.load(Ordering::Relaxed) {
                break;
            }
            let solved = &self.found[kept[at]];
            let slice = &self.slices[solved.slice];
            let design = slice.design(&solved.point[..slice.axes.len()]);
            let evaluation = evaluate(self.context.setup, &design);
            self.evaluations += 1;
            self.context.count(1);
            // The reserve kept to each limit covers the interpolation; what fails nonetheless is no answer.
            if evaluation.feasible {
                points.push(FrontPoint {
                    evaluation,
                    residual: solved.residual,
                });
            }
        }
        let exact: Vec<Costs> = points.iter().map(|p| point_costs(objectives, p)).collect();
        let mut chosen: Vec<(Costs, FrontPoint)> = non_dominated(&exact)
            .into_iter()
            .map(|i| (exact[i], points[i].clone()))
            .collect();
        chosen.sort_by(|a, b| {
            (a.0[0].total_cmp(&b.0[0]))
                .then(a.0[1].total_cmp(&b.0[1]))
                .then(a.0[2].total_cmp(&b.0[2]))
        });
        CellFront {
            cell: *cell,
            points: chosen.into_iter().map(|(_, p)| p).collect(),
            evaluations: self.evaluations,
        }
    }
}

/// Violation under which a point counts as feasible; the reserve to every limit is larger.
const LEAST_FEASIBLE: f64 = 1e-7;

/// Costs of a front point; one without figures cannot be on a front and costs infinity.
pub fn point_costs(objectives: &[Objective], point: &FrontPoint) -> Costs {
    point
        .evaluation
        .figures
        .as_ref()
        .map_or([f64::INFINITY; 3], |f| {
            costs(objectives, f.efficiency, f.output_power_w, f.area_m2)
        })
}

/// Where a neighbouring slice's best stands.
fn neighbour(corners: &[Vec<Option<Solved>>], slice: Option<usize>, which: usize) -> Option<Row> {
    let solved = corners.get(slice?)?.get(which)?.as_ref()?;
    Some(solved.point)
}

/// What is to be made large when `by` is the primary objective.
fn score(solved: &Solved, by: Objective) -> f64 {
    match by {
        Objective::Efficiency => solved.merits[0],
        Objective::OutputPower => solved.merits[1],
        Objective::Area => -solved.merits[2],
    }
}

fn better(a: Option<Solved>, b: Option<Solved>, by: Objective) -> Option<Solved> {
    match (a, b) {
        (Some(a), Some(b)) => Some(if score(&b, by) > score(&a, by) { b } else { a }),
        (a, b) => a.or(b),
    }
}

/// The middle of the box, or a seeded point of it, residual voltages at their most likely place: all of the supply.
pub(super) fn start_point(axes: usize, mut place: impl FnMut() -> f64) -> Row {
    let mut point = [0.0; MOST_VARIABLES];
    for slot in point.iter_mut().take(axes) {
        *slot = place();
    }
    point[axes] = 1.0;
    point[axes + 1] = 1.0;
    point
}
