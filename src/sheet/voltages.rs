//! The highest voltage on every device against its rating.

use super::snap::Units;
use crate::evaluate::{DrawnEvaluation, Figures, Setup};
use serde::{Deserialize, Serialize};

/// One voltage of one device.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Voltage {
    /// The device.
    pub device: String,
    /// Between which terminals.
    pub between: String,
    /// Largest magnitude over a period, V.
    pub highest_v: f64,
    /// Rating, V; none where the technology gives none.
    pub rating_v: Option<f64>,
}

impl Voltage {
    /// Above its rating, past rounding: a supply may stand on the rating itself.
    pub fn exceeds(&self) -> bool {
        const ROUNDING: f64 = 1e-9;
        self.rating_v
            .is_some_and(|rating| self.highest_v > rating * (1.0 + ROUNDING))
    }
}

/// Gates of N run from 0 to V, gates of P from V_DD − V to V_DD. The drain runs from its lowest to its highest voltage;
/// each terminal pair is taken at the worst gate level, whether or not both come together. Cascodes have their gates at
/// V_DD/2, and the mid nodes are taken to stop a threshold short of it.
pub fn voltages(
    setup: &Setup,
    drawn: &DrawnEvaluation,
    figures: &Figures,
    series: &Units,
) -> Vec<Voltage> {
    let supply = drawn.evaluation.design.supply_v;
    let swing = setup.swing_v(supply);
    let (high, low) = (figures.peak_drain_v, figures.lowest_drain_v);
    let rating = Some(setup.rating_v);
    let mut list = Vec::new();
    let mut push = |device: &str, between: &str, highest_v: f64, rating_v: Option<f64>| {
        list.push(Voltage {
            device: device.into(),
            between: between.into(),
            highest_v,
            rating_v,
        });
    };
    // Of P everything counts from the supply down.
    for (name, threshold_v, reach) in [
        ("NMOS", setup.pair.nmos.threshold_v, high),
        ("PMOS", setup.pair.pmos.threshold_v, supply - low),
    ] {
        let other_side = if name == "NMOS" { low } else { supply - high };
        if setup.stack == 1 {
            push(name, "gate-source", swing, rating);
            push(name, "drain-source", reach, rating);
            push(name, "gate-drain", reach.max(swing - other_side), rating);
        } else {
            let middle = 0.5 * supply;
            let mid_node = middle - threshold_v;
            push(&format!("{name} switch"), "gate-source", swing, rating);
            push(&format!("{name} switch"), "drain-source", mid_node, rating);
            let cascode = format!("{name} cascode");
            push(&cascode, "gate-source", middle, rating);
            push(&cascode, "drain-source", reach - mid_node, rating);
            push(
                &cascode,
                "gate-drain",
                (reach - middle).max(middle - other_side),
                rating,
            );
        }
    }
    push("driver stages", "gate-source, drain-source", swing, rating);
    push(
        "series capacitor",
        "plates",
        series_capacitor_v(setup, drawn, series),
        None,
    );
    if figures.shunt_capacitance_f.is_some() {
        let peak = drawn.waveform.output_v.iter().map(|v| v.abs());
        push("shunt capacitor", "plates", peak.fold(0.0, f64::max), None);
    }
    list
}

/// `max |⟨v_d⟩ + (∫i dt − its mean)/C|` of a leg's own capacitor, V: the spiral and the antenna hold no mean voltage, so
/// the capacitor holds that of the drain (two legs: each against a grounded middle of the antenna).
fn series_capacitor_v(setup: &Setup, drawn: &DrawnEvaluation, series: &Units) -> f64 {
    let wave = &drawn.waveform;
    let n = wave.current_a.len() as f64;
    let step_s = 1.0 / (setup.frequency_hz * n);
    let mean_drain = wave.drain_v.iter().sum::<f64>() / n;
    let mut charge = 0.0;
    let charges: Vec<f64> = wave
        .current_a
        .iter()
        .map(|i| {
            charge += i * step_s;
            charge
        })
        .collect();
    let mean_charge = charges.iter().sum::<f64>() / n;
    charges
        .iter()
        .map(|q| (mean_drain + (q - mean_charge) / series.capacitance_f).abs())
        .fold(0.0, f64::max)
}
