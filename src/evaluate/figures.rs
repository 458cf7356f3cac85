//! One design evaluated in full: every figure that is written, reported or handed on.

use super::{FixedInductor, Limit, Performance, Setup, core, margins, performance, with_chain};
use crate::budget::Losses;
use crate::numerics::scalar::Scalar;
use crate::stage::driver::Chain;
use crate::stage::{Coil, Impossible, Sizing};
use crate::steady::period::ALL_HARMONICS;
use crate::steady::waveform::{self, Waveform};
use crate::study::Design;
use crate::technology::inductor::{self, SolvedSpiral, SpiralGeometry};
use crate::technology::{Inductor, SpiralProcess};
use serde::{Deserialize, Serialize};

/// A design with its verdict and, if it can exist, its figures. Serialises as one flat JSON object.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Evaluation {
    /// It exists and keeps every limit.
    pub feasible: bool,
    /// Why it cannot exist.
    #[serde(skip_serializing_if = "Option::is_none", default)]
    pub reason: Option<String>,
    /// Limits it breaks, each once.
    pub broken_limits: Vec<Limit>,
    /// Present when it exists.
    #[serde(flatten)]
    pub figures: Option<Figures>,
    /// The sizing; a result of it (the trace with the direct network) filled in.
    pub design: Design,
}

/// Area by part, m².
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct AreaParts {
    /// Output switches.
    pub switches: f64,
    /// Driver chains.
    pub drivers: f64,
    /// Capacitors of the network.
    pub capacitors: f64,
    /// Supply decoupling.
    pub decoupling: f64,
    /// Inductors with keep-out.
    pub inductors: f64,
}

/// Every figure of a design that exists, SI.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Figures {
    /// P_out, W.
    pub output_power_w: f64,
    /// P_out, dBm.
    pub output_power_dbm: f64,
    /// P_out/P_total.
    pub efficiency: f64,
    /// ½|V_o1|²/R_a over P_dc.
    pub drain_efficiency: f64,
    /// (P_out − B f V² C_in)/P_total.
    pub pae: f64,
    /// Whole area, m².
    pub area_m2: f64,
    /// Area by part, m².
    pub area_parts_m2: AreaParts,
    /// P_dc, W.
    pub dc_power_w: f64,
    /// P_total, W.
    pub total_power_w: f64,
    /// The loss budget, W.
    pub losses_w: Losses<f64>,
    /// R_n, Ω.
    pub on_resistance_n_ohm: f64,
    /// R_p, Ω.
    pub on_resistance_p_ohm: f64,
    /// C_d of a leg, plates included, F.
    pub drain_capacitance_f: f64,
    /// C_g of a leg, F.
    pub gate_capacitance_f: f64,
    /// R_opt, Ω.
    pub optimum_resistance_ohm: f64,
    /// L of the loop, H.
    pub inductance_h: f64,
    /// R_L of the loop, Ω.
    pub inductor_resistance_ohm: f64,
    /// ω0 L/R_L.
    pub inductor_q: f64,
    /// Self-resonance of one spiral, Hz; none with a fixed inductor.
    pub self_resonance_hz: Option<f64>,
    /// C_s of the loop, F.
    pub series_capacitance_f: f64,
    /// C_p, F; none with the direct network.
    pub shunt_capacitance_f: Option<f64>,
    /// u_t.
    pub taper: f64,
    /// t_edge/T.
    pub edge_time_fraction: f64,
    /// dBc at the antenna; none with two legs.
    pub second_harmonic_dbc: Option<f64>,
    /// dBc at the antenna.
    pub third_harmonic_dbc: Option<f64>,
    /// dBc at the antenna; none with two legs.
    pub fourth_harmonic_dbc: Option<f64>,
    /// dBc at the antenna.
    pub fifth_harmonic_dbc: Option<f64>,
    /// Highest drain voltage over the period, V.
    pub peak_drain_v: f64,
    /// Lowest drain voltage over the period, V.
    pub lowest_drain_v: f64,
    /// RMS of the loop current, A.
    pub network_current_rms_a: f64,
    /// Overdrive use of the NMOS.
    pub overdrive_use_n: f64,
    /// Overdrive use of the PMOS.
    pub overdrive_use_p: f64,
}

/// Evaluates `design` exactly, its spiral solved.
pub fn evaluate(setup: &Setup, design: &Design) -> Evaluation {
    let mut values = design.clone();
    match solve_coil(setup, design, &mut values) {
        Ok((coil, self_resonance_hz)) => {
            evaluate_with_coil(setup, values, &coil, self_resonance_hz)
        }
        Err(reason) => cannot_exist(values, &reason),
    }
}

pub(super) fn cannot_exist(design: Design, reason: &Impossible) -> Evaluation {
    Evaluation {
        feasible: false,
        reason: Some(reason.to_string()),
        broken_limits: Vec::new(),
        figures: None,
        design,
    }
}

pub(super) fn sizing(values: &Design) -> Sizing<f64> {
    Sizing {
        supply_v: values.supply_v,
        loaded_q: values.loaded_q,
        nmos_width_m: values.nmos_width_m,
        width_ratio: values.width_ratio,
        reactance: values.reactance,
        dead_time: values.dead_time,
        stages: values.stages,
    }
}

/// Evaluates a design whose inductor is already known (loop values).
pub fn evaluate_with_coil(
    setup: &Setup,
    values: Design,
    coil: &Coil<f64>,
    self_resonance_hz: Option<f64>,
) -> Evaluation {
    match full_figures(setup, &values, coil, self_resonance_hz, None) {
        Ok((figures, broken_limits)) => Evaluation {
            feasible: broken_limits.is_empty(),
            reason: None,
            broken_limits,
            figures: Some(figures),
            design: values,
        },
        Err(reason) => cannot_exist(values, &reason),
    }
}

/// The figures and the limits broken; with `drivers_m` the chain is the drawn one, else the tapered one of the design.
pub(super) fn full_figures(
    setup: &Setup,
    values: &Design,
    coil: &Coil<f64>,
    self_resonance_hz: Option<f64>,
    drivers_m: Option<&[[f64; 2]]>,
) -> Result<(Figures, Vec<Limit>), Impossible> {
    let sizing = sizing(values);
    let core = core(setup, &sizing, coil, ALL_HARMONICS)?;
    let residual_v = core.period.residual_v.map(Scalar::positive_part);
    let p: Performance<f64> = match drivers_m {
        None => performance(setup, &sizing, coil, &core, residual_v)?,
        Some(widths_m) => {
            let gate_f = core.leg.gate_capacitance_f(&setup.pair, residual_v);
            let (swing_v, f) = (core.leg.swing_v, setup.frequency_hz);
            let chain = Chain::drawn(&setup.chain, &setup.pair, widths_m, swing_v, f, gate_f)?;
            with_chain(setup, &sizing, coil, &core, gate_f, chain)
        }
    };
    let mut broken: Vec<Limit> = margins(setup, &sizing, &core, &p)
        .iter()
        .filter(|m| m.margin.is_nan() || m.margin < 0.0)
        .map(|m| m.limit)
        .collect();
    broken.sort();
    broken.dedup();
    let extremes = waveform::drain_extremes(&core.circuit).ok_or(Impossible::Numbers)?;
    let rms = core.period.current_squared_a2.sqrt();
    let [overdrive_use_n, overdrive_use_p] = core.leg.overdrive_use(&setup.pair, rms);
    let [on_resistance_n_ohm, on_resistance_p_ohm] = core.on_state.resistance_ohm;
    let harmonic_v = core.period.harmonic_v;
    let dbc = |k: usize| {
        let ratio = harmonic_v[k - 1] / harmonic_v[0];
        (ratio > 0.0).then(|| 20.0 * ratio.log10())
    };
    let network = &core.circuit.network;
    let drive_w = f64::from(setup.legs)
        * setup.frequency_hz
        * core.leg.swing_v.powi(2)
        * setup.chain.input_capacitance_f;
    let figures = Figures {
        output_power_w: p.output_power_w,
        output_power_dbm: 10.0 * (p.output_power_w / 1e-3).log10(),
        efficiency: p.efficiency,
        drain_efficiency: p.carrier_power_w / core.period.supply_power_w,
        pae: (p.output_power_w - drive_w) / p.total_power_w,
        area_m2: p.area.total_m2(),
        area_parts_m2: AreaParts {
            switches: p.area.switches_m2,
            drivers: p.area.drivers_m2,
            capacitors: p.area.capacitors_m2,
            decoupling: p.area.decoupling_m2,
            inductors: p.area.inductors_m2,
        },
        dc_power_w: core.period.supply_power_w,
        total_power_w: p.total_power_w,
        losses_w: p.losses,
        on_resistance_n_ohm,
        on_resistance_p_ohm,
        drain_capacitance_f: core.circuit.drain_capacitance_f,
        gate_capacitance_f: p.gate_capacitance_f,
        optimum_resistance_ohm: network.optimum_resistance_ohm,
        inductance_h: coil.inductance_h,
        inductor_resistance_ohm: coil.resistance_ohm,
        inductor_q: setup.network.angular_frequency * coil.inductance_h / coil.resistance_ohm,
        self_resonance_hz,
        series_capacitance_f: network.series_capacitance_f,
        shunt_capacitance_f: network.shunt.map(|s| s.capacitance_f),
        taper: p.chain.taper,
        edge_time_fraction: p.chain.edge_time_s * setup.frequency_hz,
        second_harmonic_dbc: dbc(2),
        third_harmonic_dbc: dbc(3),
        fourth_harmonic_dbc: dbc(4),
        fifth_harmonic_dbc: dbc(5),
        peak_drain_v: extremes.highest_v,
        lowest_drain_v: extremes.lowest_v,
        network_current_rms_a: rms,
        overdrive_use_n,
        overdrive_use_p,
    };
    // A figure that overflowed has no meaning; refuse it rather than write null.
    let finite = [
        figures.efficiency,
        figures.area_m2,
        figures.output_power_dbm,
        figures.losses_w.total(),
        figures.edge_time_fraction,
    ];
    if finite.iter().all(|x| x.is_finite()) {
        Ok((figures, broken))
    } else {
        Err(Impossible::Numbers)
    }
}

/// One period of a design that exists, `samples` points; `None` when it does not.
pub fn loop_waveform(setup: &Setup, design: &Design, samples: usize) -> Option<Waveform> {
    let mut values = design.clone();
    let (coil, _) = solve_coil(setup, design, &mut values).ok()?;
    let core = core(setup, &sizing(&values), &coil, ALL_HARMONICS).ok()?;
    waveform::waveform(&core.circuit, samples)
}

/// The inductor of a design, loop values, and the self-resonance of one spiral. Fills in what the design derives.
fn solve_coil(
    setup: &Setup,
    design: &Design,
    values: &mut Design,
) -> Result<(Coil<f64>, Option<f64>), Impossible> {
    let antenna = setup.network.antenna_resistance_ohm;
    match &setup.inductor {
        &Inductor::Fixed {
            quality,
            area_base_m2,
            area_slope_m2_h,
        } => {
            let optimum = match design.resistance_ohm {
                _ if setup.is_direct() => antenna,
                Some(ohm) => ohm,
                None => return Err(Impossible::Missing { key: "resistance" }),
            };
            let fixed = FixedInductor {
                quality,
                area_base_m2,
                area_slope_m2_h,
            };
            Ok((setup.fixed_coil(&fixed, design.loaded_q, optimum), None))
        }
        Inductor::Spiral(process) => {
            let legs = f64::from(setup.legs);
            let f = setup.frequency_hz;
            let turns = design.turns.ok_or(Impossible::Missing { key: "turns" })?;
            let diameter_m = design
                .diameter_m
                .ok_or(Impossible::Missing { key: "diameter" })?;
            let trace_m = if setup.is_direct() {
                let inductance_h =
                    design.loaded_q * antenna / setup.network.angular_frequency / legs;
                inductor::trace_for(process, turns, diameter_m, inductance_h, f)
                    .map_err(|_| Impossible::Trace { inductance_h })?
            } else {
                design.trace_m.ok_or(Impossible::Missing { key: "trace" })?
            };
            values.trace_m = Some(trace_m);
            let geometry = SpiralGeometry {
                turns,
                trace_m,
                diameter_m,
            };
            let (coil, solved) = spiral_coil(setup, process, &geometry)?;
            Ok((coil, solved.self_resonance_hz))
        }
    }
}

/// The spirals of all legs as the loop sees them, and one of them solved.
pub(super) fn spiral_coil(
    setup: &Setup,
    process: &SpiralProcess,
    geometry: &SpiralGeometry,
) -> Result<(Coil<f64>, SolvedSpiral), Impossible> {
    let legs = f64::from(setup.legs);
    let turns = geometry.turns;
    let solved = inductor::solve(process, geometry, setup.frequency_hz)
        .map_err(|_| Impossible::Spiral { turns })?;
    let positive = |x: f64| x.is_finite() && x > 0.0;
    if !positive(solved.inductance_h) || !positive(solved.resistance_ohm) {
        return Err(Impossible::PastResonance);
    }
    let coil = Coil {
        inductance_h: solved.inductance_h * legs,
        resistance_ohm: solved.resistance_ohm * legs,
        area_m2: inductor::footprint_m2(process, geometry.diameter_m) * legs,
    };
    Ok((coil, solved))
}
