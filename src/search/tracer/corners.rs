//! The corners of a cell's front, from which it is traced: each slice's best designs without a target.

use super::super::curvature::no_curvature;
use super::super::quadratic::Row;
use super::super::reach::{NO_TARGET, Solved, Target, better};
use super::super::space::Cell;
use super::{EXTREME_SLACK, Tracer};
use crate::study::Objective;

/// What a unit of broken limits counts when starts are ranked, in units of ln efficiency.
const VIOLATION_WEIGHT: f64 = 10.0;
/// Starts this near to where a slice stands already lead to the same hill.
const SAME_HILL: f64 = 0.02;

impl Tracer<'_> {
    /// The best design of every slice in efficiency and output power. There is more than one hill: several starts, and a
    /// slice also starts where its neighbours' best stand, once forward and once back.
    pub(super) fn corners(&mut self, cell: &Cell, wanted: &[Objective]) {
        let count = self.slices.len();
        let mut corners: Vec<Vec<Option<Solved>>> = vec![vec![None; wanted.len()]; count];
        for slice in 0..count {
            let drawn = self.draw(cell, slice);
            for (which, &objective) in wanted.iter().enumerate() {
                let mut points = ranked(&drawn, objective);
                points.truncate(if which == 0 {
                    self.context.effort.starts
                } else {
                    1
                });
                // A slice without a feasible design is not climbed for its other extremes.
                let own = corners[slice][0].as_ref().map(|s| s.point);
                if which > 0 {
                    if own.is_none() {
                        continue;
                    }
                    points.extend(own);
                }
                points.extend(neighbour(&corners, slice.checked_sub(1), which));
                for point in points {
                    self.climb(slice, objective, &point, &mut corners[slice][which]);
                }
            }
        }
        for slice in (0..count).rev() {
            for (which, &objective) in wanted.iter().enumerate() {
                if let Some(point) = neighbour(&corners, Some(slice + 1), which)
                    && corners[slice][0].is_some()
                {
                    self.climb(slice, objective, &point, &mut corners[slice][which]);
                }
            }
        }
        for (slice, corners) in corners.into_iter().enumerate() {
            self.keep_corners(slice, wanted, corners);
        }
    }

    /// Points of a slice drawn by seed, each with its merits and what it breaks of the limits.
    fn draw(&mut self, cell: &Cell, slice: usize) -> Vec<Drawn> {
        let samples = self.context.effort.samples;
        self.spend(samples as u64);
        let Some(problem) = self.problem(slice, NO_TARGET.goal(Objective::Efficiency)) else {
            return Vec::new();
        };
        let axes = self.slices[slice].axes.len();
        (0..samples)
            .map(|number| self.context.start(cell, slice, number, axes))
            .filter_map(|mut point| {
                let merits = problem.merits(&point[..axes]).ok()?;
                point[axes..axes + 2].copy_from_slice(&merits.residual);
                let broken = merits.limits.iter().map(|l| (-l).max(0.0)).sum();
                Some(Drawn {
                    point,
                    merits: merits.objectives,
                    broken,
                })
            })
            .collect()
    }

    fn climb(
        &mut self,
        slice: usize,
        objective: Objective,
        point: &Row,
        best: &mut Option<Solved>,
    ) {
        let axes = self.slices[slice].axes.len();
        let near = |s: &Solved| (0..axes).all(|i| (s.point[i] - point[i]).abs() < SAME_HILL);
        if best.as_ref().is_some_and(near) {
            return;
        }
        let solved = self.solve(slice, &NO_TARGET, objective, point, &no_curvature());
        *best = better(best.take(), solved, objective);
    }

    /// Notes what the corners say of a slice's reach.
    fn keep_corners(&mut self, slice: usize, wanted: &[Objective], corners: Vec<Option<Solved>>) {
        let reached = &mut self.reached[slice];
        for (which, (&objective, corner)) in wanted.iter().zip(corners).enumerate() {
            let Some(corner) = corner else {
                if which == 0 {
                    reached.note(NO_TARGET, f64::NEG_INFINITY);
                }
                continue;
            };
            let most = corner.score(objective) + EXTREME_SLACK;
            // Beyond its own extreme a slice reaches nothing.
            match objective {
                _ if which == 0 => reached.note(NO_TARGET, most),
                Objective::OutputPower => {
                    reached.most_power = most;
                    let beyond = Target {
                        least_power: most,
                        ..NO_TARGET
                    };
                    reached.note(beyond, f64::NEG_INFINITY);
                }
                Objective::Area | Objective::Efficiency => {}
            }
            self.found.push(corner.clone());
            reached.solved.push(corner);
        }
    }
}

struct Drawn {
    point: Row,
    merits: [f64; 3],
    broken: f64,
}

/// Drawn points, best and least infeasible first.
fn ranked(drawn: &[Drawn], objective: Objective) -> Vec<Row> {
    let cost = |d: &Drawn| {
        let best = match objective {
            Objective::Efficiency => -d.merits[0],
            Objective::OutputPower => -d.merits[1],
            Objective::Area => d.merits[2],
        };
        best + VIOLATION_WEIGHT * d.broken
    };
    let mut order: Vec<(f64, Row)> = drawn.iter().map(|d| (cost(d), d.point)).collect();
    order.sort_by(|a, b| a.0.total_cmp(&b.0));
    order.into_iter().map(|(_, p)| p).collect()
}

/// Where a neighbouring slice's best stands.
fn neighbour(corners: &[Vec<Option<Solved>>], slice: Option<usize>, which: usize) -> Option<Row> {
    let solved = corners.get(slice?)?.get(which)?.as_ref()?;
    Some(solved.point)
}
