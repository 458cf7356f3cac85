//! Equation (1) fitted to measured on-resistances.
//!
//! A point is a row with a small drain voltage: `r = W·V_DS/I_D` at the gate voltage `V = V_GS − V_DS/2`, for in the
//! triode region `I_D = β (V_GS − V_T − V_DS/2) V_DS` (Shichman and Hodges 1968), so that half the drain voltage is
//! taken off the gate to get the conductance at V_DS = 0. Least squares of `ln r`, each temperature with the same
//! weight in all, over the gate voltages of a closed switch.

use super::least_squares::{Minimum, Residuals, described, minimise};
use super::table::{Kind, Polarity, Row, Tables};
use crate::numerics::matrix::Column;
use crate::study::{FaultKind, Faults};
use crate::technology::Transistor;
use crate::technology::transistor::{REFERENCE_TEMPERATURE_K, WarmTransistor};
use std::collections::{BTreeMap, BTreeSet};

/// Drain voltage up to which a row tells an on-resistance, V.
pub const SMALL_DRAIN_V: f64 = 0.1;
/// Variables of equation (1).
pub const VARIABLES: usize = 7;
/// Points nearer in gate voltage than this are one, V.
const SAME_V: f64 = 1e-3;
/// Temperatures nearer than this are one, K.
const SAME_K: f64 = 1.0;
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

/// Measurements at one temperature and gate voltage.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Point {
    /// K.
    pub temperature_k: f64,
    /// V_GS − V_DS/2, V.
    pub gate_v: f64,
    /// V_GS, V.
    pub applied_v: f64,
    /// Measured, geometric mean of repeats, Ω·m.
    pub resistance_ohm_m: f64,
    /// Measurements in it.
    pub repeats: f64,
    /// Sum of squares of ln r about the mean.
    scatter: f64,
}

/// What was measured of one device and polarity.
#[derive(Debug, Clone, PartialEq)]
pub struct Curves {
    /// The chosen gate length, m.
    pub length_m: f64,
    /// Lengths that were measured too, m.
    pub other_lengths_m: Vec<f64>,
    /// Fitted points, by temperature and then gate voltage.
    pub points: Vec<Point>,
    /// Points of output curves that are held against the fit and take no part in it.
    pub checks: Vec<Point>,
    /// Temperatures, K.
    pub temperatures_k: Vec<f64>,
}

impl Curves {
    /// Lowest and highest gate voltage applied, V.
    pub fn range_v(&self) -> (f64, f64) {
        let applied = || self.points.iter().map(|point| point.applied_v);
        (
            applied().fold(f64::INFINITY, f64::min),
            applied().fold(0.0, f64::max),
        )
    }
}

/// Collects the points of a device from `from_v` up; `None` where no row tells an on-resistance.
pub fn collect(
    tables: &Tables,
    device: usize,
    polarity: Polarity,
    length: Option<f64>,
    from_v: f64,
) -> Result<Option<Curves>, Faults> {
    let small = |row: &&Row| row.drain_v > 0.0 && row.drain_v <= SMALL_DRAIN_V * (1.0 + 1e-9);
    let rows: Vec<&Row> = tables
        .rows(Kind::Current, device, polarity)
        .filter(small)
        .collect();
    let used = |row: &&&Row| row.voltage_v >= from_v - 1e-9;
    let mut lengths: Vec<f64> = rows.iter().filter(used).map(|row| row.length_m).collect();
    lengths.sort_by(f64::total_cmp);
    lengths.dedup_by(|a, b| same_length(*a, *b));
    let temperatures = |length: f64| {
        let at = rows
            .iter()
            .filter(used)
            .filter(|row| same_length(row.length_m, length));
        distinct(at.map(|row| row.temperature_k).collect())
    };
    let chosen = match length {
        Some(length) => lengths.iter().copied().find(|l| same_length(*l, length)),
        // most temperatures; among equals the shortest, which comes first
        None => lengths
            .iter()
            .rev()
            .copied()
            .max_by_key(|length| temperatures(*length).len()),
    };
    let Some(length_m) = chosen else {
        return Ok(None);
    };
    let is_transfer: Vec<bool> = tables
        .tables
        .iter()
        .map(|(_, rows)| transfer(rows))
        .collect();
    let rows: Vec<&Row> = rows
        .into_iter()
        .filter(|row| used(&row) && same_length(row.length_m, length_m))
        .collect();
    let faults = rows.iter().filter(|row| row.value <= 0.0).take(5).map(|row| {
        let read = format!("{:e} A at V_GS = {} V", row.value, row.voltage_v);
        let allowed = "a current above 0 of a device that is on; turn the signs so that an on PMOS reads positive".to_owned();
        tables.fault(row, "i_d", FaultKind::OutOfRange { read, allowed })
    });
    if let Some(faults) = Faults::new(faults.collect()) {
        return Err(faults);
    }
    let any_transfer = rows.iter().any(|row| is_transfer[row.table]);
    let (fitted, checks): (Vec<&Row>, Vec<&Row>) = rows
        .into_iter()
        .partition(|row| is_transfer[row.table] || !any_transfer);
    Ok(Some(Curves {
        length_m,
        other_lengths_m: lengths
            .into_iter()
            .filter(|l| !same_length(*l, length_m))
            .collect(),
        temperatures_k: distinct(fitted.iter().map(|row| row.temperature_k).collect()),
        points: points(&fitted),
        checks: points(&checks),
    }))
}

fn same_length(a: f64, b: f64) -> bool {
    (a / b - 1.0).abs() < 1e-3
}

fn distinct(mut values: Vec<f64>) -> Vec<f64> {
    values.sort_by(f64::total_cmp);
    values.dedup_by(|a, b| *a - *b < SAME_K);
    values
}

/// Curves whose rows hold more gate voltages than drain voltages are transfer curves; a table is what most of its
/// curves are.
fn transfer(rows: &[Row]) -> bool {
    let mut curves: BTreeMap<_, [BTreeSet<i64>; 2]> = BTreeMap::new();
    for row in rows {
        let kelvin = (row.temperature_k / SAME_K).round() as i64;
        let picometres = (row.length_m * 1e12).round() as i64;
        let voltages = curves
            .entry((row.device, row.polarity, picometres, kelvin))
            .or_default();
        for (of, volts) in voltages.iter_mut().zip([row.voltage_v, row.drain_v]) {
            of.insert((volts / SAME_V).round() as i64);
        }
    }
    let transfers = curves
        .values()
        .filter(|[gate, drain]| gate.len() > drain.len());
    2 * transfers.count() > curves.len()
}

fn points(rows: &[&Row]) -> Vec<Point> {
    let mut groups: BTreeMap<(i64, i64), Vec<&Row>> = BTreeMap::new();
    for row in rows {
        let gate_v = row.voltage_v - row.drain_v / 2.0;
        let key = (
            (row.temperature_k / SAME_K).round() as i64,
            (gate_v / SAME_V).round() as i64,
        );
        groups.entry(key).or_default().push(row);
    }
    let of = |rows: &Vec<&Row>| {
        let repeats = rows.len() as f64;
        let mean = |f: &dyn Fn(&Row) -> f64| rows.iter().map(|row| f(row)).sum::<f64>() / repeats;
        let log = |row: &Row| (row.width_m * row.drain_v / row.value).ln();
        let ln_r = mean(&log);
        Point {
            temperature_k: mean(&|row| row.temperature_k),
            gate_v: mean(&|row| row.voltage_v - row.drain_v / 2.0),
            applied_v: mean(&|row| row.voltage_v),
            resistance_ohm_m: ln_r.exp(),
            repeats,
            scatter: rows.iter().map(|row| (log(row) - ln_r).powi(2)).sum(),
        }
    };
    groups.values().map(of).collect()
}

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

/// Whether a temperature is the reference, to a kelvin.
pub fn is_reference(temperature_k: f64) -> bool {
    (temperature_k - REFERENCE_TEMPERATURE_K).abs() < SAME_K
}
