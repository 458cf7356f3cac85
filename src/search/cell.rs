//! The Pareto front of one cell: every slice traced by warm-started constrained optimisation.
//!
//! The front is the set of best efficiencies under targets of output power and area (the ε-constraint method: Haimes,
//! Lasdon and Wismer 1971). Columns of area targets run from the least area to that of the most power; in each the
//! output-power targets climb from that of the best efficiency to the highest. Each solve starts from its neighbour.

use super::Context;
use super::front::{Costs, costs, non_dominated, spread};
use super::problem::{Goal, SliceProblem};
use super::quadratic::{MOST_VARIABLES, Row};
use super::solver::{Curvature, Ended, SequentialQuadratic, no_curvature};
use super::space::{Cell, Slice, slices};
use crate::evaluate::{Evaluation, evaluate};
use crate::study::Objective;
use argmin::core::Executor;
use std::sync::atomic::{AtomicBool, Ordering};

/// Levels of a traced front along output power and along area.
const LEVELS: usize = 14;
/// Levels when slices are compared with one another.
const SCREENING_LEVELS: usize = 3;
/// A slice stays while it is within this of the best in ln efficiency at some screening target.
const SCREENING_SLACK: f64 = 0.03;
/// Points of a cell's front are no closer than this in every objective, of the front's span.
const SPACING: f64 = 0.25 / LEVELS as f64;
/// First-order residual asked of a solve.
const RESIDUAL: f64 = 1e-6;
/// Residual above which a front point is marked as not certified.
pub const CERTIFIED_RESIDUAL: f64 = 1e-4;
/// Starts of a slice's first solve besides the middle.
const RESTARTS: usize = 3;
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
    stop: &'a AtomicBool,
}

/// The corners of a slice's front.
struct Corners {
    efficiency: Solved,
    power: Option<Solved>,
    area: Option<Solved>,
}

impl Tracer<'_> {
    fn run(&mut self, cell: &Cell) {
        let trades = |o| self.context.objectives.contains(&o);
        let (power, area) = (trades(Objective::OutputPower), trades(Objective::Area));
        let corners: Vec<(usize, Corners)> = (0..self.slices.len())
            .filter_map(|slice| Some((slice, self.corners(cell, slice, power, area)?)))
            .collect();
        for (_, c) in &corners {
            self.found.push(c.efficiency.clone());
            self.found.extend(c.power.iter().chain(&c.area).cloned());
        }
        if !(power || area) {
            return;
        }
        for (slice, corners) in &corners {
            self.trace(*slice, corners, SCREENING_LEVELS);
        }
        let screened = std::mem::take(&mut self.found);
        let promising: Vec<&(usize, Corners)> = corners
            .iter()
            .filter(|(slice, _)| contributes(&screened, *slice, self.context.objectives))
            .collect();
        self.found = screened;
        for (slice, corners) in promising {
            self.trace(*slice, corners, LEVELS);
        }
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
        let merits = merits.ok().filter(|_| feasible)?;
        Some(Solved {
            slice,
            point: solver.point,
            curvature: solver.curvature,
            residual: solver.residual,
            merits: merits.objectives.map(|o| o.value),
        })
    }

    fn corners(&mut self, cell: &Cell, slice: usize, power: bool, area: bool) -> Option<Corners> {
        let goal = |best| Goal {
            best,
            least_ln_power: None,
            most_ln_area: None,
        };
        let first = if self.context.objectives.contains(&Objective::Efficiency) {
            Objective::Efficiency
        } else if power {
            Objective::OutputPower
        } else {
            Objective::Area
        };
        let mut best: Option<Solved> = None;
        for start in 0..=RESTARTS {
            let point = self
                .context
                .start(cell, slice, start, self.slices[slice].axes.len());
            let solved = self.solve(slice, goal(first), point, &no_curvature());
            best = better(best, solved, first);
            // No start of several found the feasible region: the slice has none to speak of.
        }
        let efficiency = best?;
        let extreme = |tracer: &mut Self, wanted: bool, objective| {
            if !wanted {
                return None;
            }
            let warm = tracer.solve(slice, goal(objective), efficiency.point, &no_curvature());
            let point = tracer
                .context
                .start(cell, slice, 1, tracer.slices[slice].axes.len());
            let cold = tracer.solve(slice, goal(objective), point, &no_curvature());
            better(warm, cold, objective)
        };
        let power = extreme(self, power, Objective::OutputPower);
        let area = extreme(self, area, Objective::Area);
        Some(Corners {
            efficiency,
            power,
            area,
        })
    }

    /// Traces a slice with `levels` columns of `levels` targets.
    fn trace(&mut self, slice: usize, corners: &Corners, levels: usize) {
        let top = corners
            .power
            .iter()
            .chain([&corners.efficiency])
            .map(|s| s.merits[2])
            .fold(f64::NEG_INFINITY, f64::max);
        let Some(least) = &corners.area else {
            self.column(slice, corners, None, &corners.efficiency, levels);
            return;
        };
        let bottom = least.merits[2];
        let mut start = corners.efficiency.clone();
        for level in (1..=levels).rev() {
            let most = bottom + (top - bottom) * level as f64 / levels as f64;
            match self.column(slice, corners, Some(most), &start, levels) {
                Some(next) => start = next,
                // The neighbour led nowhere: come from the other end.
                None => {
                    if let Some(next) = self.column(slice, corners, Some(most), least, levels) {
                        start = next;
                    }
                }
            }
        }
    }

    /// One column: the best efficiency under the area target, then rising output power. Returns its first point.
    fn column(
        &mut self,
        slice: usize,
        corners: &Corners,
        most_ln_area: Option<f64>,
        start: &Solved,
        levels: usize,
    ) -> Option<Solved> {
        let goal = |best, least_ln_power| Goal {
            best,
            least_ln_power,
            most_ln_area,
        };
        let trades_efficiency = self.context.objectives.contains(&Objective::Efficiency);
        let best = if trades_efficiency {
            Objective::Efficiency
        } else {
            Objective::Area
        };
        let first = self.solve(slice, goal(best, None), start.point, &start.curvature)?;
        self.found.push(first.clone());
        let Some(power) = &corners.power else {
            return Some(first);
        };
        let strongest = self.solve(
            slice,
            goal(Objective::OutputPower, None),
            first.point,
            &no_curvature(),
        );
        let strongest = better(
            strongest,
            Some(power.clone()).filter(|p| most_ln_area.is_none_or(|a| p.merits[2] <= a)),
            Objective::OutputPower,
        )?;
        let (low, high) = (first.merits[1], strongest.merits[1]);
        self.found.push(strongest.clone());
        if high <= low {
            return Some(first);
        }
        let mut neighbour = first.clone();
        for level in 1..levels {
            let target = low + (high - low) * level as f64 / levels as f64;
            let goal = goal(best, Some(target));
            let solved = self
                .solve(slice, goal, neighbour.point, &neighbour.curvature)
                .or_else(|| self.solve(slice, goal, strongest.point, &no_curvature()));
            if let Some(solved) = solved {
                self.found.push(solved.clone());
                neighbour = solved;
            }
        }
        Some(first)
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

fn better(a: Option<Solved>, b: Option<Solved>, by: Objective) -> Option<Solved> {
    let score = |s: &Solved| match by {
        Objective::Efficiency => s.merits[0],
        Objective::OutputPower => s.merits[1],
        Objective::Area => -s.merits[2],
    };
    match (a, b) {
        (Some(a), Some(b)) => Some(if score(&b) > score(&a) { b } else { a }),
        (a, b) => a.or(b),
    }
}

/// Whether some screening point of `slice` is not dominated by other slices' with the slack to spare.
fn contributes(found: &[Solved], slice: usize, objectives: &[Objective]) -> bool {
    let key =
        |m: &[f64; 3], slack: f64| costs(objectives, m[0] + slack, m[1] + slack, m[2] - slack);
    found.iter().filter(|s| s.slice == slice).any(|own| {
        let eased = key(&own.merits, SCREENING_SLACK);
        !found.iter().filter(|s| s.slice != slice).any(|other| {
            let theirs = key(&other.merits, 0.0);
            theirs.iter().zip(&eased).all(|(t, e)| t <= e)
        })
    })
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
