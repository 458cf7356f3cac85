//! Voltage and current over one period, for figures and extremes.

use super::circuit::{Circuit, Switches};
use super::period::{Phase, Solved, maps};
use super::rails::crossing;
use crate::numerics::matrix::apply;
use serde::{Deserialize, Serialize};

/// Samples of one period, evenly spaced, the first at the turn-on of P.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Waveform {
    /// Drain voltage of leg 1, V.
    pub drain_v: Vec<f64>,
    /// Loop current, A.
    pub current_a: Vec<f64>,
    /// Voltage at the antenna, V.
    pub output_v: Vec<f64>,
}

/// Lowest and highest drain voltage over the whole period, V.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct DrainExtremes {
    /// V.
    pub lowest_v: f64,
    /// V.
    pub highest_v: f64,
}

/// `samples` points over one period; `None` when the steady state leaves the floating-point range.
pub fn waveform(circuit: &Circuit<f64>, samples: usize) -> Option<Waveform> {
    match circuit.size() {
        3 => sampled::<3>(circuit, samples),
        4 => sampled::<4>(circuit, samples),
        5 => sampled::<5>(circuit, samples),
        _ => None,
    }
}

/// Extremes of the drain voltage, interior ones included.
pub fn drain_extremes(circuit: &Circuit<f64>) -> Option<DrainExtremes> {
    match circuit.size() {
        3 => extremes::<3>(circuit),
        4 => extremes::<4>(circuit),
        5 => extremes::<5>(circuit),
        _ => None,
    }
}

fn sampled<const N: usize>(circuit: &Circuit<f64>, samples: usize) -> Option<Waveform> {
    let mut room = maps();
    let solved = Solved::<f64, N>::new(circuit, &mut room)?;
    let order = circuit.order();
    let reference = circuit.reference_ohm();
    let mut wave = Waveform {
        drain_v: Vec::with_capacity(samples),
        current_a: Vec::with_capacity(samples),
        output_v: Vec::with_capacity(samples),
    };
    let half = 0.5 * circuit.period_s;
    for sample in 0..samples {
        let mut at_s = circuit.period_s * sample as f64 / samples as f64;
        let mirrored = circuit.legs == 2 && at_s >= half;
        if mirrored {
            at_s -= half;
        }
        let phase = solved
            .phases
            .iter()
            .rev()
            .find(|p| p.begin_s <= at_s)
            .or(solved.phases.first())?;
        let fraction = ((at_s - phase.begin_s) / phase.duration_s).clamp(0.0, 1.0);
        let from_rest = solved.exponential(phase).part(fraction, &phase.from_rest);
        let rest = circuit.rest::<N>(phase.switches);
        let (drain, sign) = if mirrored { (1, -1.0) } else { (0, 1.0) };
        let current = sign * from_rest[order.current] / reference;
        wave.drain_v.push(from_rest[drain] + rest[drain]);
        wave.current_a.push(current);
        wave.output_v.push(match order.output {
            Some(o) => sign * from_rest[o],
            None => current * circuit.network.antenna_resistance_ohm,
        });
    }
    Some(wave)
}

/// Pieces a phase is cut into when turns of the drain voltage are looked for.
const PIECES: usize = 64;

fn extremes<const N: usize>(circuit: &Circuit<f64>) -> Option<DrainExtremes> {
    let mut room = maps();
    let solved = Solved::<f64, N>::new(circuit, &mut room)?;
    let mut found = DrainExtremes {
        lowest_v: f64::INFINITY,
        highest_v: f64::NEG_INFINITY,
    };
    for phase in &solved.phases {
        // Two legs: leg 2 in the first half is leg 1 in the second.
        for leg in 0..circuit.legs as usize {
            phase_extremes(circuit, &solved, phase, leg, &mut found);
        }
    }
    Some(found)
}

fn phase_extremes<const N: usize>(
    circuit: &Circuit<f64>,
    solved: &Solved<'_, f64, N>,
    phase: &Phase<f64, N>,
    leg: usize,
    found: &mut DrainExtremes,
) {
    let rest = circuit.rest::<N>(phase.switches)[leg];
    let a = circuit.matrix::<N>(phase.switches);
    let exponential = solved.exponential(phase);
    let voltage = |fraction: f64| exponential.part(fraction, &phase.from_rest)[leg] + rest;
    let slope = |fraction: f64| apply(&a, &exponential.part(fraction, &phase.from_rest))[leg];
    let mut include = |v: f64| {
        found.lowest_v = found.lowest_v.min(v);
        found.highest_v = found.highest_v.max(v);
    };
    include(phase.from_rest[leg] + rest);
    include(phase.to_rest[leg] + rest);
    // A held drain settles within a few R·C_d after its switch turns on: pieces crowd toward the start there.
    let crowding = if phase.switches == Switches::Open {
        1
    } else {
        3
    };
    let mut before = (0.0, slope(0.0));
    for piece in 1..=PIECES {
        let fraction = (piece as f64 / PIECES as f64).powi(crowding);
        let now = (fraction, slope(fraction));
        if before.1 * now.1 < 0.0 {
            include(voltage(crossing(before, now, slope)));
        }
        before = now;
    }
}
