//! On-resistances from rows of transfer and output curves.
//!
//! A point is a row with a small drain voltage: `r = W·V_DS/I_D` at the gate voltage `V = V_GS − V_DS/2`, for in the
//! triode region `I_D = β (V_GS − V_T − V_DS/2) V_DS` (Shichman and Hodges 1968), so that half the drain voltage is
//! taken off the gate to get the conductance at V_DS = 0.

use super::table::{Kind, Polarity, Row, Tables};
use crate::study::{FaultKind, Faults};
use crate::technology::transistor::REFERENCE_TEMPERATURE_K;
use std::collections::{BTreeMap, BTreeSet};

/// Drain voltage up to which a row tells an on-resistance, V.
pub const SMALL_DRAIN_V: f64 = 0.1;
/// Points nearer in gate voltage than this are one, V.
const SAME_V: f64 = 1e-3;
/// Temperatures nearer than this are one, K.
pub const SAME_K: f64 = 1.0;

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
    pub scatter: f64,
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

/// Whether a temperature is the reference, to a kelvin.
pub fn is_reference(temperature_k: f64) -> bool {
    (temperature_k - REFERENCE_TEMPERATURE_K).abs() < SAME_K
}
