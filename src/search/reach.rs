//! What a slice is known to reach: targets with the best score under each, and the solved points to start from.

use super::cell::CERTIFIED_RESIDUAL;
use super::curvature::Curvature;
use super::quadratic::{MOST_VARIABLES, Row};
use crate::search::problem::Goal;
use crate::study::Objective;

/// Targets in logarithms: output power at least, area at most; infinite = no target.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Target {
    pub least_power: f64,
    pub most_area: f64,
}

pub(super) const NO_TARGET: Target = Target {
    least_power: f64::NEG_INFINITY,
    most_area: f64::INFINITY,
};

/// A point meets a target when it misses by no more than this (logarithm): the solves' tolerance.
const MET: f64 = 1e-7;
/// Scores this near (logarithm) count as equal.
const SAME_SCORE: f64 = 1e-7;

impl Target {
    /// Whether meeting `self` meets `other` too.
    fn implies(&self, other: &Self) -> bool {
        self.least_power >= other.least_power && self.most_area <= other.most_area
    }

    fn met_by(&self, merits: &[f64; 3]) -> bool {
        merits[1] >= self.least_power - MET && merits[2] <= self.most_area + MET
    }

    pub fn goal(&self, best: Objective) -> Goal {
        Goal {
            best,
            least_ln_power: self.least_power.is_finite().then_some(self.least_power),
            most_ln_area: self.most_area.is_finite().then_some(self.most_area),
        }
    }

    /// Where the target stands in the plane of power and area; a solved point's own figure where there is no target.
    fn place(&self, merits: &[f64; 3]) -> [f64; 2] {
        let or = |wanted: f64, own: f64| if wanted.is_finite() { wanted } else { own };
        [
            or(self.least_power, merits[1]),
            or(self.most_area, merits[2]),
        ]
    }
}

/// A solved point of a slice.
#[derive(Debug, Clone)]
pub(super) struct Solved {
    pub slice: usize,
    pub point: Row,
    pub curvature: Curvature,
    pub residual: f64,
    /// ln efficiency, ln W, ln m².
    pub merits: [f64; 3],
    /// The target it was solved for.
    pub target: Target,
}

impl Solved {
    /// What is to be made large when `by` is to be best.
    pub fn score(&self, by: Objective) -> f64 {
        match by {
            Objective::Efficiency => self.merits[0],
            Objective::OutputPower => self.merits[1],
            Objective::Area => -self.merits[2],
        }
    }
}

/// The better of two by an objective, the first of equals.
pub(super) fn better(a: Option<Solved>, b: Option<Solved>, by: Objective) -> Option<Solved> {
    match (a, b) {
        (Some(a), Some(b)) => Some(if b.score(by) > a.score(by) { b } else { a }),
        (a, b) => a.or(b),
    }
}

/// Solved targets of one slice with their scores, minus infinity where nothing meets the target.
#[derive(Debug)]
pub(super) struct Reached {
    scores: Vec<(Target, f64)>,
    pub solved: Vec<Solved>,
    /// ln W above which nothing is to be had under the area of the column at hand.
    pub most_power: f64,
}

impl Reached {
    /// Nothing is known.
    pub fn new() -> Self {
        Self {
            scores: Vec::new(),
            solved: Vec::new(),
            most_power: f64::INFINITY,
        }
    }

    /// Notes that no design which meets `target` scores above `score`.
    pub fn note(&mut self, target: Target, score: f64) {
        self.scores.push((target, score));
    }

    /// No design of the slice that meets `target` scores above this.
    pub fn bound(&self, target: &Target) -> f64 {
        self.scores
            .iter()
            .filter(|(looser, _)| target.implies(looser))
            .map(|s| s.1)
            .fold(f64::INFINITY, f64::min)
    }

    /// A point solved for a looser target that meets `target` too: its answer.
    pub fn known(&self, target: &Target, by: Objective, bound: f64) -> Option<&Solved> {
        self.solved.iter().find(|s| {
            s.residual <= CERTIFIED_RESIDUAL
                && target.met_by(&s.merits)
                && s.score(by) >= bound - SAME_SCORE
        })
    }

    /// Where to start for a target: extrapolated over the three solved points nearest to it in the plane of power and
    /// area (for smooth answers the error is of second order in their distance), else the nearest; with its curvature.
    pub fn starts(&self, target: &Target) -> Vec<(Row, Curvature)> {
        /// Weights beyond this extrapolate too far.
        const MOST_WEIGHT: f64 = 2.5;
        let mut near: Vec<(f64, &Solved, [f64; 2])> = self
            .solved
            .iter()
            .map(|s| {
                let [power, area] = s.target.place(&s.merits);
                let [wanted_power, wanted_area] = target.place(&s.merits);
                let off = [power - wanted_power, area - wanted_area];
                (off[0].abs() + off[1].abs(), s, off)
            })
            .collect();
        near.sort_by(|a, b| a.0.total_cmp(&b.0));
        let Some(&(_, nearest, off)) = near.first() else {
            return Vec::new();
        };
        let mut starts = Vec::new();
        let along = near.iter().skip(1).take(6).find_map(|&(_, second, off2)| {
            let w = line_weight(off, off2)?;
            (w.abs() <= MOST_WEIGHT).then_some((w, second))
        });
        if let Some((w, second)) = along {
            let mut point = nearest.point;
            for i in 0..MOST_VARIABLES {
                point[i] += w * (nearest.point[i] - second.point[i]);
            }
            starts.push((point, nearest.curvature));
        }
        starts.push((nearest.point, nearest.curvature));
        starts
    }
}

/// The step from `first` back over `second` that reaches the origin, in units of their distance; none when the three are
/// not on one line.
fn line_weight(first: [f64; 2], second: [f64; 2]) -> Option<f64> {
    /// Sine of the angle under which three points count as on one line.
    const STRAIGHT: f64 = 0.05;
    let step = [first[0] - second[0], first[1] - second[1]];
    let length = step[0].hypot(step[1]);
    let away = first[0].hypot(first[1]);
    if length < 1e-9 || away < 1e-12 {
        return None;
    }
    let cross = step[0] * first[1] - step[1] * first[0];
    (cross.abs() <= STRAIGHT * length * away)
        .then(|| -(step[0] * first[0] + step[1] * first[1]) / (length * length))
}
