//! Equation (1) fitted to measured on-resistances.
//!
//! Least squares of `ln r`, each temperature with the same weight in all, over the gate voltages of a closed switch.

use super::least_squares::{Minimum, Residuals, described, minimise};
use super::points::{Curves, SAME_K};
use crate::numerics::matrix::Column;
use crate::technology::Transistor;
use crate::technology::transistor::WarmTransistor;

/// Variables of equation (1).
pub const VARIABLES: usize = 7;
/// Threshold drift where one temperature was measured, V/K.
pub const ASSUMED_DRIFT_V_K: f64 = -0.8e-3;
/// Exponent of mobility where one temperature was measured.
pub const ASSUMED_EXPONENT: f64 = -1.3;

/// Keys of the technology file that the variables are, in their order.
pub const KEYS: [&str; VARIABLES] = [
    "transconductance",
    "threshold",
    "threshold_drift",
    "slope",
    "degradation",
    "mobility_exponent",
    "access_resistance",
];

/// Sizes that make the variables of order 1; the first is `ln(k'/size)`.
const SIZES: [f64; VARIABLES] = [1e-4, 1.0, 1e-3, 1.0, 1.0, 1.0, 1e-3];

/// Place of the slope among the variables.
const SLOPE: usize = 3;
/// Steps between the least and the highest slope, where it is chosen.
const SLOPES: u32 = 12;

/// Equation (1) against the points.
#[derive(Clone)]
pub struct Law<'c> {
    curves: &'c Curves,
    /// Start and weight of each temperature's run of points.
    runs: Vec<(f64, std::ops::Range<usize>, f64)>,
    bounds: [(f64, f64); VARIABLES],
}

impl<'c> Law<'c> {
    /// The problem for `curves`.
    pub fn new(curves: &'c Curves) -> Self {
        let mut runs: Vec<(f64, std::ops::Range<usize>, f64)> = Vec::new();
        for (i, point) in curves.points.iter().enumerate() {
            match runs.last_mut() {
                Some((t, run, repeats)) if (*t - point.temperature_k).abs() < 1e-9 => {
                    run.end = i + 1;
                    *repeats += point.repeats;
                }
                _ => runs.push((point.temperature_k, i..i + 1, point.repeats)),
            }
        }
        let all: f64 = curves.points.iter().map(|point| point.repeats).sum();
        let temperatures = curves.temperatures_k.len() as f64;
        // runs within a kelvin are one temperature: they share its weight by their points
        let totals: Vec<f64> = runs
            .iter()
            .map(|(t, ..)| {
                let near = runs.iter().filter(|(other, ..)| (other - t).abs() < SAME_K);
                near.map(|(.., repeats)| repeats).sum()
            })
            .collect();
        for ((.., weight), total) in runs.iter_mut().zip(totals) {
            *weight = all / (temperatures * total);
        }
        let several = curves.temperatures_k.len() > 1;
        let least = curves.points.iter().map(|p| p.resistance_ohm_m);
        let least = least.fold(f64::INFINITY, f64::min) / SIZES[6];
        let highest_v = curves.range_v().1;
        let held = |value: f64| (value, value);
        let bounds = [
            // 1 uA/V^2 to 10 mA/V^2, what a technology file takes
            ((1e-6 / SIZES[0]).ln(), (1e-2 / SIZES[0]).ln()),
            (0.02, highest_v.clamp(0.1, 5.0)),
            if several {
                (-3.0, 0.0)
            } else {
                held(ASSUMED_DRIFT_V_K / SIZES[2])
            },
            // a gate's hold of its channel in bulk silicon; above the threshold the slope is seen only faintly
            (1.0, 1.6),
            (0.0, 5.0),
            if several {
                (-3.0, 0.0)
            } else {
                held(ASSUMED_EXPONENT)
            },
            // access cannot be more than the least that was measured
            (0.0, least.min(0.1 / SIZES[6])),
        ];
        Self {
            curves,
            runs,
            bounds,
        }
    }

    /// Variables that the data must give.
    pub fn unknown(&self) -> usize {
        self.bounds.iter().filter(|(low, high)| low < high).count()
    }

    /// The minimum from several starts: slope, degradation and access resistance low and high, threshold from two
    /// places.
    pub fn solve(&self) -> Option<Minimum<VARIABLES>> {
        minimise(self, &self.starts()?)
    }

    /// The slope that `miss` likes best among those whose sum of squares the standard error cannot tell from that of
    /// `minimum`, the other variables fitted to it. Above the threshold a slope is seen so faintly that what it does
    /// below may choose it. `None` where `miss` has nothing to say.
    pub fn chosen_slope(
        &self,
        minimum: &Minimum<VARIABLES>,
        miss: impl Fn(&Transistor) -> Option<f64>,
    ) -> Option<Minimum<VARIABLES>> {
        let most = minimum.squares * (1.0 + 1.0 / minimum.freedom.max(1) as f64);
        let (low, high) = self.bounds[SLOPE];
        // near the minimum already: its own place and two far ones will do
        let mut starts = self.starts()?;
        starts.truncate(2);
        starts.push(minimum.variables);
        let mut best: Option<(f64, Column<f64, VARIABLES>)> = None;
        for step in 0..=SLOPES {
            let slope = low + (high - low) * f64::from(step) / f64::from(SLOPES);
            let mut held = self.clone();
            held.bounds[SLOPE] = (slope, slope);
            let Some(found) = minimise(&held, &starts).filter(|found| found.squares <= most) else {
                continue;
            };
            let figures = figures(&found.variables);
            let miss = miss(&transistor(self.curves.length_m, &figures))?;
            if best.is_none_or(|(least, _)| miss < least) {
                best = Some((miss, found.variables));
            }
        }
        best.map(|(_, variables)| described(self, &variables, minimum.starts_agreed))
    }

    fn starts(&self) -> Option<Vec<Column<f64, VARIABLES>>> {
        let (from_v, _) = self.curves.range_v();
        let last = self.curves.points.last()?;
        let mut starts = Vec::new();
        for threshold in [0.5, 0.8] {
            for slope in [1.1, 1.5] {
                for (theta, access) in [(0.05, 0.5), (0.5, 0.1)] {
                    let threshold = threshold * from_v;
                    let access = access * self.bounds[6].1;
                    let channel = last.resistance_ohm_m * 0.6 * (last.gate_v - threshold).max(0.05);
                    let gain = self.curves.length_m / channel;
                    let log = (gain / SIZES[0]).ln();
                    starts.push([log, threshold, -0.8, slope, theta, -1.3, access]);
                }
            }
        }
        Some(starts)
    }

    fn scatter_of(&self, run: &std::ops::Range<usize>) -> f64 {
        self.curves.points[run.clone()]
            .iter()
            .map(|point| point.scatter)
            .sum()
    }
}

/// SI figures of scaled variables.
pub fn figures(variables: &Column<f64, VARIABLES>) -> [f64; VARIABLES] {
    std::array::from_fn(|k| match k {
        0 => variables[0].exp() * SIZES[0],
        _ => variables[k] * SIZES[k],
    })
}

/// SI standard errors of scaled variables.
pub fn errors(variables: &Column<f64, VARIABLES>, scaled: [f64; VARIABLES]) -> [f64; VARIABLES] {
    std::array::from_fn(|k| match k {
        0 => scaled[0] * figures(variables)[0],
        _ => scaled[k] * SIZES[k],
    })
}

/// A transistor with the figures of equation (1); the others are placeholders.
pub fn transistor(length_m: f64, figures: &[f64; VARIABLES]) -> Transistor {
    Transistor {
        transconductance_a_v2: figures[0],
        length_m,
        threshold_v: figures[1],
        threshold_drift_v_k: figures[2],
        slope: figures[3],
        degradation_per_v: figures[4],
        mobility_exponent: figures[5],
        access_resistance_ohm_m: figures[6],
        gate_capacitance_f_m: 1e-9,
        overlap_capacitance_f_m: 1e-9,
        junction_capacitance_f_m: 1e-9,
        junction_grading: 0.5,
        junction_potential_v: 1.0,
        off_current_a_m: 1.0,
    }
}

impl Residuals<VARIABLES> for Law<'_> {
    fn at(&self, variables: &Column<f64, VARIABLES>) -> Vec<f64> {
        let device = transistor(self.curves.length_m, &figures(variables));
        let mut out = Vec::with_capacity(self.curves.points.len());
        for (temperature_k, run, _) in &self.runs {
            let warm = WarmTransistor::new(&device, *temperature_k);
            out.extend(self.curves.points[run.clone()].iter().map(|point| {
                (warm.on_resistance_ohm_m(point.gate_v) / point.resistance_ohm_m).ln()
            }));
        }
        out
    }

    fn weight(&self, point: usize) -> f64 {
        let run = self.runs.partition_point(|(_, run, _)| run.end <= point);
        self.runs.get(run).map_or(1.0, |(.., weight)| *weight) * self.repeats(point)
    }

    fn repeats(&self, point: usize) -> f64 {
        self.curves.points[point].repeats
    }

    fn scatter(&self) -> f64 {
        self.runs
            .iter()
            .map(|(_, run, weight)| weight * self.scatter_of(run))
            .sum()
    }

    fn bounds(&self) -> [(f64, f64); VARIABLES] {
        self.bounds
    }
}
