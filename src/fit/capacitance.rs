//! Gate, overlap and junction capacitances from their tables.

use super::least_squares::{Minimum, Residuals, minimise};
use super::table::{Kind, Polarity, Row, Tables};
use crate::numerics::matrix::Column;
use crate::technology::transistor::REFERENCE_TEMPERATURE_K;

/// Points that a capacitance over a swing needs at least.
const LEAST_POINTS: usize = 3;

/// Rows at the temperature nearest the reference, and that temperature.
fn nearest_temperature(rows: Vec<&Row>) -> (Vec<&Row>, f64) {
    let away = |row: &&Row| (row.temperature_k - REFERENCE_TEMPERATURE_K).abs();
    let Some(nearest) = rows.iter().min_by(|a, b| away(a).total_cmp(&away(b))) else {
        return (rows, REFERENCE_TEMPERATURE_K);
    };
    let temperature_k = nearest.temperature_k;
    let near = |row: &&Row| (row.temperature_k - temperature_k).abs() < 1.0;
    (rows.into_iter().filter(near).collect(), temperature_k)
}

/// Gate capacitances of one device and polarity.
#[derive(Debug, Clone, PartialEq)]
pub struct Gate {
    /// c_gate, F/m.
    pub gate_f_m: f64,
    /// c_gd, F/m.
    pub overlap_f_m: f64,
    /// Mean over the swing as measured, F/m.
    pub mean_f_m: f64,
    /// Value at V_GS = 0, F/m.
    pub off_f_m: f64,
    /// Length of the structure, m.
    pub structure_length_m: f64,
    /// K.
    pub temperature_k: f64,
    /// The body was tied to source and drain, so its share is in it.
    pub with_body: bool,
    /// Mean over 0..V against the model's constant: V and the measured mean, F/m, at the device's length.
    pub means: Vec<(f64, f64)>,
}

/// Why a capacitance cannot be had from its table.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum NoCapacitance {
    /// Too few points.
    #[error("{kind}: read {read} points from 0 to {to} V, allowed at least {LEAST_POINTS}")]
    TooFew {
        kind: &'static str,
        read: usize,
        to: f64,
    },
    /// The swing is not covered.
    #[error("{kind}: read {low} V to {high} V, allowed a range that covers 0 to {to} V")]
    NotCovered {
        kind: &'static str,
        low: f64,
        high: f64,
        to: f64,
    },
    /// More than one structure.
    #[error("{kind}: read structures of different length or width, allowed one")]
    Several { kind: &'static str },
    /// The overlap is more than half of the mean.
    #[error(
        "{kind}: read a mean of {mean:e} F/m over the swing and {off:e} F/m at 0 V, allowed a mean above: has the gate been turned on?"
    )]
    NoChannel {
        kind: &'static str,
        mean: f64,
        off: f64,
    },
    /// The least squares did not come to an end.
    #[error("{kind}: no starting value gives finite residuals")]
    NoMinimum { kind: &'static str },
}

/// `c_gate` as the mean over the swing of the capacitance of the gate to source and drain, less the drain's overlap;
/// `c_gd` as half the value at V_GS = 0, where the channel is gone and the overlaps of source and drain are left.
///
/// What exceeds the least value measured, the fringes, lies under the gate and is scaled to the device's length.
pub fn gate(
    tables: &Tables,
    device: usize,
    polarity: Polarity,
    length_m: f64,
    nominal_v: f64,
) -> Result<Option<Gate>, NoCapacitance> {
    let kind = "gate capacitance";
    let all: Vec<&Row> = tables.rows(Kind::Gate, device, polarity).collect();
    let with_body = !all.iter().any(|row| row.source_drain);
    let all: Vec<&Row> = all
        .into_iter()
        .filter(|row| row.source_drain != with_body)
        .collect();
    if all.is_empty() {
        return Ok(None);
    }
    let (rows, temperature_k) = nearest_temperature(all);
    let structure_length_m = rows[0].length_m;
    let differs = |a: f64, b: f64| (a / b - 1.0).abs() > 1e-3;
    if rows.iter().any(|row| {
        differs(row.length_m, structure_length_m) || differs(row.width_m, rows[0].width_m)
    }) {
        return Err(NoCapacitance::Several { kind });
    }
    let curve = curve(&rows, |row| row.value / row.width_m);
    let inside = curve
        .iter()
        .filter(|(v, _)| (-1e-9..=nominal_v + 1e-9).contains(v))
        .count();
    if inside < LEAST_POINTS {
        return Err(NoCapacitance::TooFew {
            kind,
            read: inside,
            to: nominal_v,
        });
    }
    let (low, high) = (curve[0].0, curve[curve.len() - 1].0);
    if low > 1e-9 || high < nominal_v - 1e-9 {
        return Err(NoCapacitance::NotCovered {
            kind,
            low,
            high,
            to: nominal_v,
        });
    }
    let off_f_m = at(&curve, 0.0);
    let mean_f_m = mean(&curve, nominal_v);
    if mean_f_m <= off_f_m {
        return Err(NoCapacitance::NoChannel {
            kind,
            mean: mean_f_m,
            off: off_f_m,
        });
    }
    let fringe_f_m = curve.iter().map(|(_, c)| *c).fold(off_f_m, f64::min);
    let scaled = |mean: f64| (mean - fringe_f_m) * length_m / structure_length_m + fringe_f_m;
    let overlap_f_m = off_f_m / 2.0;
    let range = curve.iter().filter(|(v, _)| *v >= 2.0 / 3.0 * nominal_v);
    Ok(Some(Gate {
        gate_f_m: scaled(mean_f_m) - overlap_f_m,
        overlap_f_m,
        mean_f_m,
        off_f_m,
        structure_length_m,
        temperature_k,
        with_body,
        means: range.map(|(v, _)| (*v, scaled(mean(&curve, *v)))).collect(),
    }))
}

/// Values over voltage, rising, repeats averaged.
fn curve(rows: &[&Row], value: impl Fn(&Row) -> f64) -> Vec<(f64, f64)> {
    let mut all: Vec<(f64, f64)> = rows.iter().map(|row| (row.voltage_v, value(row))).collect();
    all.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.total_cmp(&b.1)));
    let mut out: Vec<(f64, f64, f64)> = Vec::new();
    for (v, c) in all {
        match out.last_mut() {
            Some((last, sum, count)) if v - *last < 1e-4 => {
                *sum += c;
                *count += 1.0;
            }
            _ => out.push((v, c, 1.0)),
        }
    }
    out.into_iter()
        .map(|(v, sum, count)| (v, sum / count))
        .collect()
}

/// Linear between points; the curve's end outside of it.
fn at(curve: &[(f64, f64)], v: f64) -> f64 {
    let next = curve.partition_point(|(x, _)| *x < v);
    match (
        next.checked_sub(1).and_then(|i| curve.get(i)),
        curve.get(next),
    ) {
        (Some((x0, y0)), Some((x1, y1))) => y0 + (y1 - y0) * (v - x0) / (x1 - x0),
        (None, Some((_, y))) | (Some((_, y)), None) => *y,
        (None, None) => 0.0,
    }
}

/// Mean over 0..`to` by trapezoids.
fn mean(curve: &[(f64, f64)], to: f64) -> f64 {
    let mut nodes = vec![0.0];
    nodes.extend(
        curve
            .iter()
            .map(|(v, _)| *v)
            .filter(|v| *v > 0.0 && *v < to),
    );
    nodes.push(to);
    let areas = nodes
        .windows(2)
        .map(|w| (w[1] - w[0]) * (at(curve, w[0]) + at(curve, w[1])) / 2.0);
    areas.sum::<f64>() / to
}

/// A junction: an area and its edge.
#[derive(Debug, Clone, PartialEq)]
pub struct Junction {
    /// At 0 V, F/m².
    pub area_f_m2: f64,
    /// At 0 V, F/m; 0 where one kind of structure was measured.
    pub edge_f_m: f64,
    /// Grading m_j.
    pub grading: f64,
    /// Built-in potential φ_b, V.
    pub potential_v: f64,
    /// Structures of two shapes told area from edge.
    pub told_apart: bool,
    /// K.
    pub temperature_k: f64,
    /// Highest reverse voltage fitted, V.
    pub to_v: f64,
    /// The least squares: ln c_area, ln c_edge, m_j, φ_b.
    pub minimum: Minimum<4>,
    /// Reverse voltage, measured and modelled capacitance of a structure, F.
    pub points: Vec<(f64, f64, f64)>,
}

struct Graded<'r> {
    rows: &'r [&'r Row],
    told_apart: bool,
}

/// Sizes of c_area and c_edge: 1 fF/µm² and 0.1 fF/µm.
const AREA_SIZE: f64 = 1e-3;
const EDGE_SIZE: f64 = 1e-10;

impl Graded<'_> {
    fn model(&self, x: &Column<f64, 4>, row: &Row) -> f64 {
        let edge = if self.told_apart {
            x[1] * EDGE_SIZE
        } else {
            0.0
        };
        (x[0].exp() * AREA_SIZE * row.area_m2 + edge * row.perimeter_m)
            / (1.0 + row.voltage_v / x[3]).powf(x[2])
    }
}

impl Residuals<4> for Graded<'_> {
    fn at(&self, x: &Column<f64, 4>) -> Vec<f64> {
        self.rows
            .iter()
            .map(|row| (self.model(x, row) / row.value).ln())
            .collect()
    }
    fn weight(&self, _: usize) -> f64 {
        1.0
    }
    fn repeats(&self, _: usize) -> f64 {
        1.0
    }
    fn scatter(&self) -> f64 {
        0.0
    }
    fn bounds(&self) -> [(f64, f64); 4] {
        let edge = if self.told_apart {
            (0.0, 100.0)
        } else {
            (0.0, 0.0)
        };
        [
            ((1e-6 / AREA_SIZE).ln(), (1.0 / AREA_SIZE).ln()),
            edge,
            (0.05, 0.9),
            (0.3, 1.2),
        ]
    }
}

/// Junctions are read up to this many rows; the rest is every so manieth.
const MOST_JUNCTION_ROWS: usize = 20_000;

/// Least squares of `ln C` with `C = (c_area A + c_edge P)/(1 + V/φ_b)^{m_j}` over all structures, from 0 V to the
/// rating: the drain of a switch stands no more.
pub fn junction(
    tables: &Tables,
    device: usize,
    polarity: Polarity,
    rating_v: f64,
) -> Result<Option<Junction>, NoCapacitance> {
    let kind = "junction capacitance";
    let all: Vec<&Row> = tables.rows(Kind::Junction, device, polarity).collect();
    if all.is_empty() {
        return Ok(None);
    }
    let (near, temperature_k) = nearest_temperature(all);
    let high = near.iter().map(|row| row.voltage_v).fold(0.0, f64::max);
    let rows: Vec<&Row> = near
        .into_iter()
        .filter(|row| row.voltage_v >= -1e-9 && row.voltage_v <= rating_v + 1e-9)
        .collect();
    let mut voltages: Vec<i64> = rows
        .iter()
        .map(|row| (row.voltage_v * 1e3).round() as i64)
        .collect();
    voltages.sort_unstable();
    voltages.dedup();
    if voltages.len() < LEAST_POINTS {
        return Err(NoCapacitance::TooFew {
            kind,
            read: voltages.len(),
            to: rating_v,
        });
    }
    let rows: Vec<&Row> = rows
        .iter()
        .step_by(rows.len().div_ceil(MOST_JUNCTION_ROWS))
        .copied()
        .collect();
    let ratio = |row: &&Row| row.perimeter_m / row.area_m2;
    let ratios = || rows.iter().map(ratio);
    let (least, most) = (
        ratios().fold(f64::INFINITY, f64::min),
        ratios().fold(0.0, f64::max),
    );
    // shapes that differ by less do not tell an edge from an area
    let told_apart = most > 1.5 * least;
    let (rows, to_v) = (rows.as_slice(), high.min(rating_v));
    let problem = Graded { rows, told_apart };
    let starts = [0.3, 0.5].map(|m| [0.0, 0.5, m, 0.75]);
    let minimum = minimise(&problem, &starts).ok_or(NoCapacitance::NoMinimum { kind })?;
    let x = minimum.variables;
    let point = |row: &&Row| (row.voltage_v, row.value, problem.model(&x, row));
    Ok(Some(Junction {
        area_f_m2: x[0].exp() * AREA_SIZE,
        edge_f_m: if told_apart { x[1] * EDGE_SIZE } else { 0.0 },
        grading: x[2],
        potential_v: x[3],
        told_apart,
        temperature_k,
        to_v,
        points: rows.iter().map(point).collect(),
        minimum,
    }))
}
