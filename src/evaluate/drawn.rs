//! A stage evaluated exactly as it is drawn: widths, driver stages, spiral and capacitors given, the rest following.

use super::figures::{cannot_exist, full_figures, sizing, spiral_coil};
use super::{Evaluation, FixedInductor, Setup, core};
use crate::numerics::scalar::Scalar;
use crate::stage::Impossible;
use crate::stage::driver::drawn_capacitances_f;
use crate::steady::period::ALL_HARMONICS;
use crate::steady::waveform::{Waveform, waveform};
use crate::study::Design;
use crate::technology::Inductor;
use crate::technology::inductor::{SolvedSpiral, SpiralGeometry};
use crate::technology::transistor::WarmTransistor;
use serde::{Deserialize, Serialize};

/// The inductor of a drawn stage.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum DrawnInductor {
    /// One spiral a leg.
    Spiral(SpiralGeometry),
    /// A fixed inductor: L of the loop, H.
    Fixed(f64),
}

/// What is drawn.
#[derive(Debug, Clone, PartialEq)]
pub struct Drawn {
    /// V_DD, V.
    pub supply_v: f64,
    /// δ, a fraction of the period a transition.
    pub dead_time: f64,
    /// W_n and W_p, m.
    pub widths_m: [f64; 2],
    /// N and P of each driver stage, first stage first, m.
    pub drivers_m: Vec<[f64; 2]>,
    /// The inductor.
    pub inductor: DrawnInductor,
    /// A leg's own series capacitor, B·C_s, F.
    pub leg_series_capacitance_f: f64,
    /// C_p, F; none with the direct network.
    pub shunt_capacitance_f: Option<f64>,
}

/// One drawn transistor.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct DeviceFigures {
    /// What its driver charges, over the driver's swing, F.
    pub gate_capacitance_f: f64,
    /// What it puts on its output, F.
    pub drain_capacitance_f: f64,
    /// Closed, r_on(V)/W at no current, Ω; with two devices in series that of the lower one.
    pub on_resistance_ohm: f64,
}

/// A drawn stage evaluated.
#[derive(Debug, Clone, PartialEq)]
pub struct DrawnEvaluation {
    /// As of any design; Q_L, x and R_opt are those that the drawn parts give.
    pub evaluation: Evaluation,
    /// One period.
    pub waveform: Waveform,
    /// N and P of a leg, without the plate of the series capacitor.
    pub switches: [DeviceFigures; 2],
    /// N and P of each driver stage.
    pub drivers: Vec<[DeviceFigures; 2]>,
    /// One spiral; none with a fixed inductor.
    pub spiral: Option<SolvedSpiral>,
}

/// N and P of each stage of the tapered chain of a design, first stage first, m: `w_i = C_in u_t^{i−1}/c_in` (8).
pub fn tapered_widths_m(setup: &Setup, design: &Design, taper: f64) -> Vec<[f64; 2]> {
    let swing_v = setup.swing_v(design.supply_v);
    let ratio = setup.chain.ratio;
    let [input_f, _] = drawn_capacitances_f(&setup.pair, [1.0, ratio], swing_v);
    (0..design.stages)
        .map(|i| {
            let width = setup.chain.input_capacitance_f * taper.powi(i as i32) / input_f;
            [width, ratio * width]
        })
        .collect()
}

/// The spiral of a geometry at the carrier; loop values come from [`evaluate_drawn`].
///
/// # Errors
/// [`Impossible::Spiral`], [`Impossible::PastResonance`].
pub fn spiral_of(setup: &Setup, geometry: &SpiralGeometry) -> Result<SolvedSpiral, Impossible> {
    match &setup.inductor {
        Inductor::Spiral(process) => spiral_coil(setup, process, geometry).map(|(_, s)| s),
        Inductor::Fixed { .. } => Err(Impossible::Missing { key: "inductance" }),
    }
}

/// Evaluates what is drawn, with `samples` points of one period.
///
/// The parts give the design: with the low-pass network `Q_m = ω0 R_a C_p` and `R_opt = R_a/(1 + Q_m²)`, directly
/// R_opt = R_a; then `Q_L = ω0 L/R_opt` and `x = Q_L − Q_m − X_Cs/R_opt`, equation (12) solved for what it was chosen
/// by. PAE counts the input capacitance of the first drawn stage.
///
/// # Errors
/// Why the drawn stage cannot exist.
pub fn evaluate_drawn(
    setup: &Setup,
    drawn: &Drawn,
    samples: usize,
) -> Result<DrawnEvaluation, Impossible> {
    let w = setup.network.angular_frequency;
    let antenna = setup.network.antenna_resistance_ohm;
    let matching_q = match (setup.is_direct(), drawn.shunt_capacitance_f) {
        (true, _) => 0.0,
        (false, Some(c)) => w * antenna * c,
        (false, None) => return Err(Impossible::Missing { key: "shunt" }),
    };
    let optimum = antenna / (1.0 + matching_q * matching_q);
    let (coil, spiral, geometry) = match (&setup.inductor, drawn.inductor) {
        (Inductor::Spiral(process), DrawnInductor::Spiral(geometry)) => {
            let (coil, solved) = spiral_coil(setup, process, &geometry)?;
            (coil, Some(solved), Some(geometry))
        }
        (
            &Inductor::Fixed {
                quality,
                area_base_m2,
                area_slope_m2_h,
            },
            DrawnInductor::Fixed(inductance_h),
        ) => {
            let fixed = FixedInductor {
                quality,
                area_base_m2,
                area_slope_m2_h,
            };
            let loaded_q = w * inductance_h / optimum;
            (setup.fixed_coil(&fixed, loaded_q, optimum), None, None)
        }
        _ => return Err(Impossible::Missing { key: "inductance" }),
    };
    let loaded_q = w * coil.inductance_h / optimum;
    let series_f = drawn.leg_series_capacitance_f / f64::from(setup.legs);
    let values = Design {
        supply_v: drawn.supply_v,
        loaded_q,
        nmos_width_m: drawn.widths_m[0],
        width_ratio: drawn.widths_m[1] / drawn.widths_m[0],
        turns: geometry.map(|g| g.turns),
        trace_m: geometry.map(|g| g.trace_m),
        diameter_m: geometry.map(|g| g.diameter_m),
        resistance_ohm: (geometry.is_none() && !setup.is_direct()).then_some(optimum),
        reactance: loaded_q - matching_q - 1.0 / (w * series_f * optimum),
        dead_time: drawn.dead_time,
        stages: drawn.drivers_m.len() as u32,
    };
    let first = drawn.drivers_m.first().ok_or(Impossible::Numbers)?;
    let swing_v = setup.swing_v(drawn.supply_v);
    let mut own = setup.clone();
    own.chain.input_capacitance_f = drawn_capacitances_f(&setup.pair, *first, swing_v)[0];

    let sized = sizing(&values);
    let core = core(&own, &sized, &coil, ALL_HARMONICS)?;
    let resonance = spiral.and_then(|s| s.self_resonance_hz);
    let figures = full_figures(&own, &values, &coil, resonance, Some(&drawn.drivers_m));
    let evaluation = match figures {
        Ok((figures, broken_limits)) => Evaluation {
            feasible: broken_limits.is_empty(),
            reason: None,
            broken_limits,
            figures: Some(figures),
            design: values,
        },
        Err(reason) => cannot_exist(values, &reason),
    };
    let pair = setup.pair.both();
    let residual_v = core.period.residual_v.map(Scalar::positive_part);
    let stacked_v = swing_v * f64::from(setup.stack);
    Ok(DrawnEvaluation {
        evaluation,
        waveform: waveform(&core.circuit, samples).ok_or(Impossible::Numbers)?,
        switches: [0, 1].map(|i| {
            let factor = 1.0 + residual_v[i] / stacked_v;
            device(pair[i], drawn.widths_m[i], swing_v, drawn.supply_v, factor)
        }),
        drivers: drawn
            .drivers_m
            .iter()
            .map(|widths| [0, 1].map(|i| device(pair[i], widths[i], swing_v, swing_v, 2.0)))
            .collect(),
        spiral,
    })
}

/// A transistor of `width_m`: its gate with `overlap_factor` drain overlaps, its drain swinging over `drain_v`.
fn device(
    transistor: &WarmTransistor,
    width_m: f64,
    swing_v: f64,
    drain_v: f64,
    overlap_factor: f64,
) -> DeviceFigures {
    let overlap = transistor.overlap_capacitance_f_m;
    DeviceFigures {
        gate_capacitance_f: width_m * (transistor.gate_capacitance_f_m + overlap_factor * overlap),
        drain_capacitance_f: width_m * (transistor.junction_capacitance_f_m(drain_v) + overlap),
        on_resistance_ohm: transistor.on_resistance_ohm_m(swing_v) / width_m,
    }
}
