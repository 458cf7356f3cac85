//! The off current, equation (3).

use super::table::{Kind, Polarity, Row, Tables};
use crate::technology::Transistor;
use crate::technology::transistor::{REFERENCE_TEMPERATURE_K, WarmTransistor};

/// The off current of one device and polarity.
#[derive(Debug, Clone, PartialEq)]
pub struct Off {
    /// At the reference temperature, A/m.
    pub current_a_m: f64,
    /// Where it was measured, K.
    pub temperature_k: f64,
    /// Drain voltage it was measured at, V.
    pub drain_v: f64,
    /// Temperature, measured and modelled, A/m, at the same drain voltage.
    pub points: Vec<(f64, f64, f64)>,
}

impl Off {
    /// Points above the temperature of the current, whose leakage matters to a hot switch.
    pub fn hot(&self) -> impl Iterator<Item = &(f64, f64, f64)> {
        let from_k = self.temperature_k + 1.0;
        self.points.iter().filter(move |(k, ..)| *k > from_k)
    }

    /// Sum of squares of ln(model/measured) of the hot points; `None` without any.
    pub fn growth_miss(&self) -> Option<f64> {
        self.hot().next()?;
        let miss = |&(_, measured, model): &(f64, f64, f64)| (model / measured).ln().powi(2);
        Some(self.hot().map(miss).sum())
    }
}

/// The current at the drain voltage nearest the nominal one and the temperature nearest the reference, brought to the
/// reference by equation (3) with the other figures of `device`; `None` where no current above 0 was measured.
pub fn off(
    tables: &Tables,
    device: usize,
    polarity: Polarity,
    nominal_v: f64,
    figures: &Transistor,
) -> Option<Off> {
    let own_length = |row: &&Row| (row.length_m / figures.length_m - 1.0).abs() < 1e-3;
    let on = |row: &&Row| row.value > 0.0 && row.drain_v > 0.0;
    let rows: Vec<&Row> = tables
        .rows(Kind::Off, device, polarity)
        .filter(own_length)
        .filter(on)
        .collect();
    let away = |row: &Row| (row.temperature_k - REFERENCE_TEMPERATURE_K).abs();
    let miss = |row: &Row| (row.drain_v - nominal_v).abs();
    let order = |a: &&&Row, b: &&&Row| {
        away(a)
            .total_cmp(&away(b))
            .then(miss(a).total_cmp(&miss(b)))
            .then(a.line.cmp(&b.line))
    };
    let at = **rows.iter().min_by(order)?;
    let per_width = |row: &Row| row.value / row.width_m;
    let one = Transistor {
        off_current_a_m: 1.0,
        ..figures.clone()
    };
    let growth = |temperature_k: f64| WarmTransistor::new(&one, temperature_k).off_current_a_m;
    let near = (at.temperature_k - REFERENCE_TEMPERATURE_K).abs() < 1.0;
    let current_a_m = per_width(&at) / if near { 1.0 } else { growth(at.temperature_k) };
    let same = rows
        .iter()
        .filter(|row| (row.drain_v - at.drain_v).abs() < 1e-3);
    let mut points: Vec<(f64, f64, f64)> = same
        .map(|row| {
            (
                row.temperature_k,
                per_width(row),
                current_a_m * growth(row.temperature_k),
            )
        })
        .collect();
    points.sort_by(|a, b| a.0.total_cmp(&b.0));
    Some(Off {
        current_a_m,
        temperature_k: at.temperature_k,
        drain_v: at.drain_v,
        points,
    })
}
