//! The composer: a design in, its evaluation out. The only place that puts the physics together.

mod drawn;
mod figures;
mod limits;

pub use drawn::{
    DeviceFigures, Drawn, DrawnEvaluation, DrawnInductor, evaluate_drawn, spiral_of,
    tapered_widths_m,
};
pub use figures::{AreaParts, Evaluation, Figures, evaluate, evaluate_with_coil, loop_waveform};
pub use limits::{Limit, Margin, margins};

use crate::budget::Losses;
use crate::numerics::scalar::Scalar;
use crate::stage::area::{Area, AreaRules};
use crate::stage::driver::{Chain, ChainGivens};
use crate::stage::leg::{Leg, OnState};
use crate::stage::network::{LoadNetwork, NetworkGivens};
use crate::stage::{Coil, Impossible, Sizing};
use crate::steady::circuit::Circuit;
use crate::steady::period::{self, Harmonics, PeriodFigures};
use crate::study::{Limits, Network, Study, Swing};
use crate::technology::transistor::WarmPair;
use crate::technology::{Capacitor, Inductor, Layout, Technology};
use std::f64::consts::TAU;

/// All that the designs of one study share, worked out once.
#[derive(Debug, Clone)]
pub struct Setup {
    /// The transistor pair at temperature.
    pub pair: WarmPair,
    /// Highest gate and drain voltage V_max, V.
    pub rating_v: f64,
    /// Forward voltage of the body diodes V_f, V.
    pub clamp_v: f64,
    /// Carrier, Hz.
    pub frequency_hz: f64,
    /// B.
    pub legs: u32,
    /// s.
    pub stack: u32,
    /// Swing of an unstacked leg's driver.
    pub swing: Swing,
    /// Givens of the load network.
    pub network: NetworkGivens,
    /// Givens of the driver chain.
    pub chain: ChainGivens,
    /// Loss behind the antenna port, dB.
    pub antenna_loss_db: f64,
    /// The inductor's model.
    pub inductor: Inductor,
    /// The capacitor.
    pub capacitor: Capacitor,
    /// The layout's costs.
    pub layout: Layout,
    /// The user's limits.
    pub limits: Limits,
}

/// The study names a device that its technology does not have.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error("device \"{device}\" is not in technology \"{technology}\"; it has {known}")]
pub struct UnknownDevice {
    /// As read.
    pub device: String,
    /// The technology's name.
    pub technology: String,
    /// Names it has.
    pub known: String,
}

impl Setup {
    /// The study on its technology.
    ///
    /// # Errors
    /// [`UnknownDevice`] when the technology lacks the study's transistor pair.
    pub fn new(study: &Study, technology: &Technology) -> Result<Self, UnknownDevice> {
        let device = &study.stage.device;
        let pair = technology
            .transistors
            .get(device)
            .ok_or_else(|| UnknownDevice {
                device: device.clone(),
                technology: technology.name.clone(),
                known: technology
                    .transistors
                    .keys()
                    .cloned()
                    .collect::<Vec<_>>()
                    .join(", "),
            })?;
        Ok(Self {
            pair: WarmPair::new(pair, study.temperature_k),
            rating_v: pair.rating_v,
            clamp_v: pair.clamp_v,
            frequency_hz: study.frequency_hz,
            legs: study.stage.legs,
            stack: study.stage.stack,
            swing: study.driver.swing,
            network: NetworkGivens {
                kind: study.stage.network,
                angular_frequency: TAU * study.frequency_hz,
                antenna_resistance_ohm: study.antenna_resistance_ohm,
                capacitor_quality: technology.capacitor.quality,
            },
            chain: ChainGivens {
                input_capacitance_f: study.driver.input_capacitance_f,
                ratio: study.driver.ratio,
                crowbar: study.driver.crowbar,
            },
            antenna_loss_db: study.antenna_loss_db,
            inductor: technology.inductor.clone(),
            capacitor: technology.capacitor.clone(),
            layout: technology.layout.clone(),
            limits: study.limits.clone(),
        })
    }

    /// V, the swing of the driver: half the supply when stacked.
    pub fn swing_v<S: Scalar>(&self, supply_v: S) -> S {
        match (self.stack, self.swing) {
            (1, Swing::Supply) => supply_v,
            (1, Swing::Voltage(v)) => S::constant(v),
            _ => supply_v * 0.5,
        }
    }

    /// The fixed inductor of quality Q that a loop of `optimum_ohm` needs at `loaded_q`: L = Q_L R_opt/ω0,
    /// R_L = ω0 L/Q, each leg's L/B on its own.
    pub fn fixed_coil<S: Scalar>(
        &self,
        fixed: &FixedInductor,
        loaded_q: S,
        optimum_ohm: S,
    ) -> Coil<S> {
        let inductance_h = loaded_q * optimum_ohm / self.network.angular_frequency;
        let legs = f64::from(self.legs);
        Coil {
            inductance_h,
            resistance_ohm: inductance_h * (self.network.angular_frequency / fixed.quality),
            area_m2: (inductance_h * (fixed.area_slope_m2_h / legs) + fixed.area_base_m2) * legs,
        }
    }

    /// The carrier and the harmonics that a limit holds.
    pub fn limited_harmonics(&self) -> Harmonics {
        let (second, third) = (
            self.limits.second_harmonic_dbc,
            self.limits.third_harmonic_dbc,
        );
        [true, second.is_some(), third.is_some(), false, false]
    }

    /// Whether R_opt is the antenna's own.
    pub fn is_direct(&self) -> bool {
        self.network.kind == Network::Direct
    }
}

/// The figures of [`Inductor::Fixed`].
#[derive(Debug, Clone, Copy)]
pub struct FixedInductor {
    /// ω0 L/R_L.
    pub quality: f64,
    /// m² at L = 0.
    pub area_base_m2: f64,
    /// m²/H.
    pub area_slope_m2_h: f64,
}

/// A design up to its steady state: what does not depend on the driver chain.
#[derive(Debug, Clone, Copy)]
pub struct Core<S> {
    /// The switches.
    pub leg: Leg<S>,
    /// Their on-resistances.
    pub on_state: OnState<S>,
    /// The circuit solved, its load network in it.
    pub circuit: Circuit<S>,
    /// Its steady state.
    pub period: PeriodFigures<S>,
}

/// Everything a search needs of one design.
#[derive(Debug, Clone, Copy)]
pub struct Performance<S> {
    /// C_g of a leg, F.
    pub gate_capacitance_f: S,
    /// The chain of a leg.
    pub chain: Chain<S>,
    /// The losses.
    pub losses: Losses<S>,
    /// ½|V_o1|²/R_a, W.
    pub carrier_power_w: S,
    /// P_out, W.
    pub output_power_w: S,
    /// P_total, W.
    pub total_power_w: S,
    /// P_out/P_total.
    pub efficiency: S,
    /// Area by part.
    pub area: Area<S>,
}

/// A switch of more than this passes nothing; the steady state of what is left is rounding.
const CUT_OFF_OHM: f64 = 1e9;

fn cut_off(resistance_ohm: [f64; 2]) -> Option<Impossible> {
    let [n, p] = resistance_ohm;
    let resistance_ohm = n.max(p);
    (resistance_ohm > CUT_OFF_OHM).then_some(Impossible::CutOff { resistance_ohm })
}

/// Sections 2, 4 and 5: the leg, its network, their steady state with the harmonics asked for.
///
/// # Errors
/// Why the design cannot exist.
pub fn core<S: Scalar>(
    setup: &Setup,
    sizing: &Sizing<S>,
    coil: &Coil<S>,
    harmonics: Harmonics,
) -> Result<Core<S>, Impossible> {
    let network = LoadNetwork::new(
        &setup.network,
        sizing.loaded_q,
        sizing.reactance,
        coil.inductance_h,
        coil.resistance_ohm,
    )?;
    let leg = Leg {
        legs: setup.legs,
        stack: setup.stack,
        supply_v: sizing.supply_v,
        swing_v: setup.swing_v(sizing.supply_v),
        widths_m: sizing.widths_m(),
        routing_resistance_ohm: setup.layout.routing_resistance_ohm,
    };
    let on_state = leg
        .on_state(
            &setup.pair,
            network.loop_impedance(setup.network.angular_frequency),
        )
        .ok_or_else(|| {
            // Too much resistance for any number is a switch that never turns on, at no current already.
            let devices = setup.pair.both();
            let without_current = [0, 1].map(|i| {
                let swing_v = leg.swing_v.value();
                devices[i].on_resistance_ohm_m(swing_v) / leg.widths_m[i].value()
            });
            cut_off(without_current).unwrap_or(Impossible::Numbers)
        })?;
    if let Some(cut_off) = cut_off(on_state.resistance_ohm.map(S::value)) {
        return Err(cut_off);
    }
    let plate_f =
        network.series_capacitance_f * (setup.capacitor.bottom_plate * f64::from(setup.legs));
    let circuit = Circuit {
        period_s: 1.0 / setup.frequency_hz,
        legs: setup.legs,
        supply_v: sizing.supply_v,
        dead_time: sizing.dead_time,
        drain_capacitance_f: leg.drain_capacitance_f(&setup.pair) + plate_f,
        on_resistance_ohm: on_state.resistance_ohm,
        network,
    };
    let period = period::figures(&circuit, harmonics).ok_or(Impossible::Numbers)?;
    Ok(Core {
        leg,
        on_state,
        circuit,
        period,
    })
}

/// Sections 3 and 7 on top of a [`Core`]: drivers, budget, area, with the drain voltages `residual_v` that N and P
/// find when they turn on (their positive parts count; a search may hand bounds on them instead).
///
/// # Errors
/// [`Impossible::DriverSwing`].
pub fn performance<S: Scalar>(
    setup: &Setup,
    sizing: &Sizing<S>,
    coil: &Coil<S>,
    core: &Core<S>,
    residual_v: [S; 2],
) -> Result<Performance<S>, Impossible> {
    let gate_capacitance_f = core.leg.gate_capacitance_f(&setup.pair, residual_v);
    let chain = Chain::new(
        &setup.chain,
        &setup.pair,
        sizing.stages,
        core.leg.swing_v,
        setup.frequency_hz,
        gate_capacitance_f,
    )?;
    Ok(with_chain(
        setup,
        sizing,
        coil,
        core,
        gate_capacitance_f,
        chain,
    ))
}

/// [`performance`] with the chain already known.
fn with_chain<S: Scalar>(
    setup: &Setup,
    sizing: &Sizing<S>,
    coil: &Coil<S>,
    core: &Core<S>,
    gate_capacitance_f: S,
    chain: Chain<S>,
) -> Performance<S> {
    let (leg, period, network) = (&core.leg, &core.period, &core.circuit.network);
    let f = setup.frequency_hz;
    let legs = f64::from(setup.legs);
    let antenna = setup.network.antenna_resistance_ohm;
    let carrier_power_w = period.harmonic_v[0].squared() * (0.5 / antenna);
    let output_power_w = carrier_power_w * 10f64.powf(-0.1 * setup.antenna_loss_db);
    let shunt_loss = network.shunt.map_or(S::zero(), |s| s.loss_s);
    let losses = Losses {
        conduction: period.conduction_w,
        drain_charge: period.switch_dissipation_w - period.conduction_w,
        crowbar: leg.crowbar_power_w(&setup.pair, f, sizing.dead_time / f, chain.edge_time_s),
        gate: chain.gate_power_w * legs,
        driver_chain: chain.chain_power_w * legs,
        inductor: network.inductor_resistance_ohm * period.current_squared_a2,
        capacitor: network.capacitor_resistance_ohm * period.current_squared_a2
            + shunt_loss * period.output_squared_v2,
        leakage: leg.leakage_power_w(&setup.pair),
        harmonics: period.output_squared_v2 / antenna - carrier_power_w,
        balun: carrier_power_w - output_power_w,
        mid_node: leg.mid_node_power_w(&setup.pair, f) * legs,
    };
    let total_power_w = period.supply_power_w
        + losses.crowbar
        + losses.leakage
        + losses.gate
        + losses.driver_chain
        + losses.mid_node;
    Performance {
        gate_capacitance_f,
        chain,
        carrier_power_w,
        output_power_w,
        total_power_w,
        efficiency: output_power_w / total_power_w,
        area: Area::new(
            &AreaRules {
                capacitor: &setup.capacitor,
                layout: &setup.layout,
                driver_ratio: setup.chain.ratio,
                frequency_hz: f,
            },
            leg,
            &chain,
            network,
            coil.area_m2,
            total_power_w,
        ),
        losses,
    }
}
