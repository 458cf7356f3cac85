//! The Pareto front of one cell: what the tracer finds, filtered, evaluated exactly and spread evenly.

use super::Context;
use super::front::{Costs, costs, non_dominated, spread};
use super::reach::Solved;
use super::space::{Cell, Slice, slices};
use super::tracer::Tracer;
use crate::evaluate::{Evaluation, evaluate};
use crate::study::Objective;
use std::sync::atomic::{AtomicBool, Ordering};

/// Points of a cell's front are no closer than this part of a level in every objective.
const SPACING: f64 = 0.25;
/// Residual above which a front point is marked as not certified.
pub const CERTIFIED_RESIDUAL: f64 = 1e-4;

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

/// Searches one cell; `None` when `stop` was raised before it was done.
pub fn search_cell(context: &Context<'_>, cell: &Cell, stop: &AtomicBool) -> Option<CellFront> {
    let slices = slices(context.space, cell);
    let mut tracer = Tracer::new(context, &slices, stop);
    tracer.run(cell);
    let Tracer {
        found, evaluations, ..
    } = tracer;
    let mut front = CellFront {
        cell: *cell,
        points: Vec::new(),
        evaluations,
    };
    front.fill(context, &slices, &found, stop);
    (!stop.load(Ordering::Relaxed)).then_some(front)
}

/// Searches one cell, then asks it for the best efficiency under each of `demands`: output power at least, W, and area at
/// most, m². None where no design meets one. The assessments of both come with it.
pub fn best_efficiencies(
    context: &Context<'_>,
    cell: &Cell,
    demands: &[[f64; 2]],
) -> (Vec<Option<f64>>, u64) {
    let (slices, never) = (slices(context.space, cell), AtomicBool::new(false));
    let mut tracer = Tracer::new(context, &slices, &never);
    tracer.run(cell);
    let targets: Vec<[f64; 2]> = demands.iter().map(|d| d.map(f64::ln)).collect();
    let answers = tracer.answers(&targets);
    let efficiencies = answers.into_iter().map(|a| a.map(f64::exp)).collect();
    (efficiencies, tracer.evaluations)
}

impl CellFront {
    /// Filters what was found, evaluates it exactly, filters again.
    fn fill(
        &mut self,
        context: &Context<'_>,
        slices: &[Slice],
        found: &[Solved],
        stop: &AtomicBool,
    ) {
        let objectives = context.objectives;
        let key = |m: &[f64; 3]| costs(objectives, m[0].exp(), m[1].exp(), m[2].exp());
        let all: Vec<Costs> = found.iter().map(|s| key(&s.merits)).collect();
        let kept = non_dominated(&all);
        let kept_costs: Vec<Costs> = kept.iter().map(|&i| all[i]).collect();
        let mut points: Vec<FrontPoint> = Vec::new();
        for at in spread(&kept_costs, SPACING / context.effort.levels as f64) {
            if stop.load(Ordering::Relaxed) {
                return;
            }
            let solved = &found[kept[at]];
            let slice = &slices[solved.slice];
            let design = slice.design(&solved.point[..slice.axes.len()]);
            let evaluation = evaluate(context.setup, &design);
            self.evaluations += 1;
            context.count(1);
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
        self.points = chosen.into_iter().map(|(_, p)| p).collect();
    }
}

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
