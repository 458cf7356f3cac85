//! Laws that every design obeys, over random designs of all kinds.

mod common;

use common::ideal_technology;
use proptest::prelude::*;
use widefront::evaluate::{Figures, Setup, evaluate, loop_waveform};
use widefront::study::{Design, Network, Study, Swing};
use widefront::technology::{Inductor, Technology, Transistor};

/// The energy balance: what the issue of this program asks for.
const BALANCE: f64 = 1e-9;
/// Exact relations left with the rounding of exponentials of large matrices.
const EXACT: f64 = 1e-9;

fn technology() -> Technology {
    let mut technology = ideal_technology();
    let transistor = |k: f64, access: f64| Transistor {
        transconductance_a_v2: k,
        length_m: 60e-9,
        threshold_v: 0.35,
        threshold_drift_v_k: -0.8e-3,
        slope: 1.35,
        degradation_per_v: 0.5,
        mobility_exponent: -1.3,
        access_resistance_ohm_m: access,
        gate_capacitance_f_m: 0.95e-9,
        overlap_capacitance_f_m: 0.28e-9,
        junction_capacitance_f_m: 0.65e-9,
        junction_grading: 0.4,
        junction_potential_v: 0.8,
        off_current_a_m: 20e-3,
    };
    let pair = technology.transistors.get_mut("core").unwrap();
    pair.nmos = transistor(280e-6, 200e-6);
    pair.pmos = transistor(100e-6, 450e-6);
    technology.inductor = Inductor::Fixed {
        quality: 12.0,
        area_base_m2: 1e-8,
        area_slope_m2_h: 30.0,
    };
    technology.capacitor.quality = 60.0;
    technology.capacitor.bottom_plate = 0.01;
    technology.layout.routing_resistance_ohm = 0.02;
    technology
}

fn study(legs: u32, stack: u32, network: Network) -> Study {
    let mut study = common::direct_study();
    study.frequency_hz = 2.45e9;
    study.antenna_loss_db = 0.3;
    study.stage.legs = legs;
    study.stage.stack = stack;
    study.stage.network = network;
    study.driver.input_capacitance_f = 20e-15;
    study.driver.ratio = 2.0;
    study.driver.crowbar = 0.05;
    study
}

fn random_design() -> impl Strategy<Value = (u32, u32, bool, Design)> {
    (
        (1u32..=2, 1u32..=2, any::<bool>()),
        (0.8..1.3f64, 1.5..8.0f64, 50e-6..4e-3f64, 0.5..3.5f64),
        (
            2.0..30.0f64,
            0.0..1.2f64,
            prop_oneof![Just(0.0), 0.0..0.2f64],
            1u32..=7,
        ),
    )
        .prop_map(
            |((legs, stack, direct), (v, loaded_q, width, ratio), (ohm, x, dead, stages))| {
                let design = Design {
                    supply_v: v * f64::from(stack),
                    loaded_q,
                    nmos_width_m: width,
                    width_ratio: ratio,
                    turns: None,
                    trace_m: None,
                    diameter_m: None,
                    resistance_ohm: (!direct).then_some(ohm),
                    reactance: x.min(0.5 * loaded_q),
                    dead_time: dead,
                    stages,
                };
                (legs, stack, direct, design)
            },
        )
}

fn kind(direct: bool) -> Network {
    if direct {
        Network::Direct
    } else {
        Network::LowPass
    }
}

fn found(study: &Study, technology: &Technology, design: &Design) -> Option<Figures> {
    evaluate(&Setup::new(study, technology).unwrap(), design).figures
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(400))]

    /// P_dc is what the parts dissipate and the antenna gets; the switches' share is integrated on its own.
    #[test]
    fn law_energy_balances((legs, stack, direct, design) in random_design()) {
        let Some(f) = found(&study(legs, stack, kind(direct)), &technology(), &design) else {
            return Ok(());
        };
        let l = &f.losses_w;
        let carrier = f.output_power_w + l.balun;
        let dissipated = l.conduction + l.drain_charge + l.inductor + l.capacitor;
        let balance = f.dc_power_w - (dissipated + l.harmonics + carrier);
        prop_assert!(balance.abs() < BALANCE * f.dc_power_w, "{} of {}", balance, f.dc_power_w);
        let total = f.total_power_w - f.output_power_w - l.total();
        prop_assert!(total.abs() < BALANCE * f.total_power_w);
    }

    /// All impedances times a, all widths over a: the same efficiency, a-th of the power. The driver scales with its
    /// input capacitance, the route with the resistances.
    #[test]
    fn law_impedance_scaling((legs, stack, direct, design) in random_design(), a in 0.3..3.0f64) {
        let (study, technology) = (study(legs, stack, kind(direct)), technology());
        let Some(f) = found(&study, &technology, &design) else {
            return Ok(());
        };
        let mut scaled_study = study.clone();
        scaled_study.antenna_resistance_ohm *= a;
        scaled_study.driver.input_capacitance_f /= a;
        let mut scaled_technology = technology.clone();
        scaled_technology.layout.routing_resistance_ohm *= a;
        let scaled_design = Design {
            nmos_width_m: design.nmos_width_m / a,
            resistance_ohm: design.resistance_ohm.map(|r| r * a),
            ..design
        };
        let g = found(&scaled_study, &scaled_technology, &scaled_design).unwrap();
        prop_assert!((g.efficiency / f.efficiency - 1.0).abs() < EXACT);
        prop_assert!((g.output_power_w * a / f.output_power_w - 1.0).abs() < EXACT);
    }

    /// A dead time that vanishes changes nothing by vanishing.
    #[test]
    fn law_dead_time_is_continuous_at_zero((legs, stack, direct, design) in random_design()) {
        let (study, technology) = (study(legs, stack, kind(direct)), technology());
        let with = |dead_time: f64| found(&study, &technology, &Design { dead_time, ..design.clone() });
        let (Some(none), Some(hair)) = (with(0.0), with(1e-9)) else {
            return Ok(());
        };
        prop_assert!((hair.efficiency / none.efficiency - 1.0).abs() < 1e-6);
        prop_assert!((hair.output_power_w / none.output_power_w - 1.0).abs() < 1e-6);
    }

    /// Two legs, differential on twice the antenna, are two single legs: twice the power, the same efficiency, as far as
    /// the odd harmonics go; so with a tuned high-Q loop.
    #[test]
    fn law_two_legs_are_one_leg_doubled(v in 0.9..1.3f64, width in 1e-4..2e-3f64, dead in 0.0..0.1f64) {
        let technology = technology();
        let one_study = study(1, 1, Network::Direct);
        let mut two_study = study(2, 1, Network::Direct);
        two_study.antenna_resistance_ohm *= 2.0;
        let design = Design {
            supply_v: v,
            loaded_q: 400.0,
            nmos_width_m: width,
            // Equal resistances: without it the single leg has even harmonics that the pair has not.
            width_ratio: 1.0,
            reactance: 0.5,
            dead_time: dead,
            ..common::direct_design()
        };
        let mut technology = technology;
        let pair = technology.transistors.get_mut("core").unwrap();
        pair.pmos = pair.nmos.clone();
        let design = Design { stages: 4, ..design };
        technology.inductor = Inductor::Fixed { quality: 1e5, area_base_m2: 1e-8, area_slope_m2_h: 30.0 };
        let one = found(&one_study, &technology, &design).unwrap();
        let two = found(&two_study, &technology, &design).unwrap();
        // Harmonics of order 1/Q² are what is left between them.
        prop_assert!((two.efficiency / one.efficiency - 1.0).abs() < 1e-4);
        prop_assert!((two.output_power_w / (2.0 * one.output_power_w) - 1.0).abs() < 1e-4);
    }

    /// Everything a times as fast, all capacitances an a-th: the same powers at the same voltages.
    #[test]
    fn law_time_and_frequency_scaling((legs, stack, direct, design) in random_design(), a in 0.2..5.0f64) {
        let (study, technology) = (study(legs, stack, kind(direct)), technology());
        let Some(f) = found(&study, &technology, &design) else {
            return Ok(());
        };
        let mut fast_study = study.clone();
        fast_study.frequency_hz *= a;
        fast_study.driver.input_capacitance_f /= a;
        let mut fast = technology.clone();
        let pair = fast.transistors.get_mut("core").unwrap();
        for device in [&mut pair.nmos, &mut pair.pmos] {
            device.gate_capacitance_f_m /= a;
            device.overlap_capacitance_f_m /= a;
            device.junction_capacitance_f_m /= a;
        }
        let g = found(&fast_study, &fast, &design).unwrap();
        prop_assert!((g.efficiency / f.efficiency - 1.0).abs() < EXACT);
        prop_assert!((g.output_power_w / f.output_power_w - 1.0).abs() < EXACT);
        prop_assert!((g.edge_time_fraction / f.edge_time_fraction - 1.0).abs() < EXACT);
        prop_assert!((g.inductance_h * a / f.inductance_h - 1.0).abs() < EXACT);
    }

    /// Switches that are resistances with drivers of their own rail, junctions that are plain capacitors: a linear
    /// circuit, whose powers go with the square of the supply.
    #[test]
    fn law_powers_go_with_the_supply_squared((legs, _, direct, design) in random_design(), a in 0.5..4.0f64) {
        let mut study = study(legs, 1, kind(direct));
        study.driver.swing = Swing::Voltage(1.0);
        let mut technology = technology();
        let pair = technology.transistors.get_mut("core").unwrap();
        for device in [&mut pair.nmos, &mut pair.pmos] {
            device.transconductance_a_v2 = 1e6;
            device.junction_grading = 0.0;
        }
        let higher = Design { supply_v: a * design.supply_v, ..design.clone() };
        let (Some(f), Some(g)) = (found(&study, &technology, &design), found(&study, &technology, &higher)) else {
            return Ok(());
        };
        /// What is left of the channel beside the access resistance is of the order of 1e-10.
        const LINEAR: f64 = 1e-7;
        prop_assert!((g.output_power_w / (a * a * f.output_power_w) - 1.0).abs() < LINEAR);
        prop_assert!((g.dc_power_w / (a * a * f.dc_power_w) - 1.0).abs() < LINEAR);
        prop_assert!((g.losses_w.conduction / (a * a * f.losses_w.conduction) - 1.0).abs() < LINEAR);
    }

    /// With equal switches one half of the period is the other's mirror, and no even harmonic is left.
    #[test]
    fn law_equal_switches_make_mirrored_half_periods((_, stack, direct, design) in random_design()) {
        const SAMPLES: usize = 32;
        /// Of the supply and of the highest current.
        const MIRRORED: f64 = 1e-9;
        let study = study(1, stack, kind(direct));
        let mut technology = technology();
        let pair = technology.transistors.get_mut("core").unwrap();
        pair.pmos = pair.nmos.clone();
        let design = Design { width_ratio: 1.0, ..design };
        let setup = Setup::new(&study, &technology).unwrap();
        let Some(f) = evaluate(&setup, &design).figures else {
            return Ok(());
        };
        let wave = loop_waveform(&setup, &design, SAMPLES).unwrap();
        let highest_a = wave.current_a.iter().fold(0.0, |m: f64, i| m.max(i.abs()));
        for k in 0..SAMPLES / 2 {
            let other = k + SAMPLES / 2;
            let volts = wave.drain_v[k] + wave.drain_v[other] - design.supply_v;
            prop_assert!(volts.abs() < MIRRORED * design.supply_v, "{}", volts);
            let amperes = wave.current_a[k] + wave.current_a[other];
            prop_assert!(amperes.abs() < MIRRORED * highest_a, "{}", amperes);
        }
        prop_assert!(f.second_harmonic_dbc.is_none_or(|h| h < -180.0), "{:?}", f.second_harmonic_dbc);
        prop_assert!(f.fourth_harmonic_dbc.is_none_or(|h| h < -180.0), "{:?}", f.fourth_harmonic_dbc);
    }

    /// Two legs, whatever their switches: the loop's second half period is the first one with the other sign.
    #[test]
    fn law_two_legs_turn_the_loop_s_sign((_, stack, direct, design) in random_design()) {
        const SAMPLES: usize = 32;
        /// Of the largest value.
        const MIRRORED: f64 = 1e-9;
        let setup = Setup::new(&study(2, stack, kind(direct)), &technology()).unwrap();
        let Some(wave) = loop_waveform(&setup, &design, SAMPLES) else {
            return Ok(());
        };
        for values in [&wave.current_a, &wave.output_v] {
            let largest = values.iter().fold(0.0, |m: f64, v| m.max(v.abs()));
            prop_assert!(largest > 0.0);
            for k in 0..SAMPLES / 2 {
                let sum = values[k] + values[k + SAMPLES / 2];
                prop_assert!(sum.abs() <= MIRRORED * largest, "{} of {}", sum, largest);
            }
        }
    }

    /// Exchanging the switches turns the leg upside down: the same powers.
    #[test]
    fn law_exchanged_switches_have_the_same_powers((legs, stack, direct, design) in random_design()) {
        let (study, technology) = (study(legs, stack, kind(direct)), technology());
        let Some(f) = found(&study, &technology, &design) else {
            return Ok(());
        };
        let mut exchanged = technology.clone();
        let pair = exchanged.transistors.get_mut("core").unwrap();
        std::mem::swap(&mut pair.nmos, &mut pair.pmos);
        let other = Design {
            nmos_width_m: design.nmos_width_m * design.width_ratio,
            width_ratio: 1.0 / design.width_ratio,
            ..design
        };
        let g = found(&study, &exchanged, &other).unwrap();
        prop_assert!((g.output_power_w / f.output_power_w - 1.0).abs() < EXACT);
        prop_assert!((g.dc_power_w / f.dc_power_w - 1.0).abs() < EXACT);
        prop_assert!((g.gate_capacitance_f / f.gate_capacitance_f - 1.0).abs() < EXACT);
        prop_assert!((g.losses_w.leakage / f.losses_w.leakage - 1.0).abs() < EXACT);
        prop_assert!((g.overdrive_use_p / f.overdrive_use_n - 1.0).abs() < EXACT);
    }

    /// What can only cost: loss behind the antenna, the drivers' own crowbar, heat in the off current, dearer area.
    #[test]
    fn law_what_can_only_cost_costs((legs, stack, direct, design) in random_design(), more in 1.1..3.0f64) {
        let (study, technology) = (study(legs, stack, kind(direct)), technology());
        let Some(f) = found(&study, &technology, &design) else {
            return Ok(());
        };
        let changed = |change: &dyn Fn(&mut Study, &mut Technology)| {
            let (mut study, mut technology) = (study.clone(), technology.clone());
            change(&mut study, &mut technology);
            found(&study, &technology, &design).unwrap()
        };
        let lossy = changed(&|study, _| study.antenna_loss_db *= more);
        let ratio = 10f64.powf(-0.03 * (more - 1.0));
        prop_assert!((lossy.output_power_w / f.output_power_w / ratio - 1.0).abs() < EXACT);
        prop_assert!((lossy.efficiency / f.efficiency / ratio - 1.0).abs() < EXACT);
        prop_assert_eq!(lossy.total_power_w, f.total_power_w);
        let crowbar = changed(&|study, _| study.driver.crowbar *= more);
        prop_assert!(crowbar.efficiency < f.efficiency && crowbar.losses_w.gate > f.losses_w.gate);
        prop_assert!(crowbar.losses_w.driver_chain > f.losses_w.driver_chain);
        let hot = changed(&|study, _| study.temperature_k += 20.0 * more);
        prop_assert!(hot.losses_w.leakage > f.losses_w.leakage);
        let dear = changed(&|_, technology| technology.layout.width_area_m *= more);
        prop_assert!(dear.area_m2 > f.area_m2 && dear.efficiency == f.efficiency);
        prop_assert!((dear.area_parts_m2.switches / (more * f.area_parts_m2.switches) - 1.0).abs() < EXACT);
        let parts = f.area_parts_m2;
        let sum = parts.switches + parts.drivers + parts.capacitors + parts.decoupling + parts.inductors;
        prop_assert!((sum / f.area_m2 - 1.0).abs() < EXACT);
    }

    /// Wider switches conduct better, and cost charge and area.
    #[test]
    fn law_width_trades_resistance_for_charge((legs, stack, direct, design) in random_design(), more in 1.05..3.0f64) {
        let (study, technology) = (study(legs, stack, kind(direct)), technology());
        let wider = Design { nmos_width_m: more * design.nmos_width_m, ..design.clone() };
        let (Some(f), Some(g)) = (found(&study, &technology, &design), found(&study, &technology, &wider)) else {
            return Ok(());
        };
        prop_assert!(g.on_resistance_n_ohm < f.on_resistance_n_ohm);
        prop_assert!(g.on_resistance_p_ohm < f.on_resistance_p_ohm);
        prop_assert!(g.drain_capacitance_f > f.drain_capacitance_f);
        prop_assert!(g.overdrive_use_n < f.overdrive_use_n);
        prop_assert!(g.area_parts_m2.switches > f.area_parts_m2.switches);
        prop_assert!(g.losses_w.leakage > f.losses_w.leakage);
    }

    /// Without drain charge every resistance in the way of the current costs efficiency.
    #[test]
    fn law_resistances_cost_efficiency(
        direct in any::<bool>(),
        loaded_q in 3.0..8.0f64,
        ohm in 3.0..30.0f64,
        more in 1.1..3.0f64,
    ) {
        let mut technology = ideal_technology();
        technology.inductor = Inductor::Fixed { quality: 20.0, area_base_m2: 1e-8, area_slope_m2_h: 30.0 };
        technology.capacitor.quality = 50.0;
        technology.layout.routing_resistance_ohm = 0.1;
        let study = study(1, 1, kind(direct));
        let design = Design {
            loaded_q: loaded_q + 3.0,
            resistance_ohm: (!direct).then_some(ohm),
            ..common::direct_design()
        };
        let with = |change: &dyn Fn(&mut Technology)| {
            let mut technology = technology.clone();
            change(&mut technology);
            found(&study, &technology, &design).unwrap().drain_efficiency
        };
        let plain = with(&|_| {});
        prop_assert!(plain < 1.0);
        prop_assert!(with(&|t| t.layout.routing_resistance_ohm *= more) < plain);
        prop_assert!(with(&|t| t.capacitor.quality /= more) < plain);
        let worse = Inductor::Fixed { quality: 20.0 / more, area_base_m2: 1e-8, area_slope_m2_h: 30.0 };
        prop_assert!(with(&|t| t.inductor = worse.clone()) < plain);
    }
}

/// Found by fuzzing: a threshold so far above the supply that no current is left in a floating-point number.
#[test]
fn regress_switches_that_never_turn_on_are_told() {
    let study = study(1, 1, Network::Direct);
    let mut technology = technology();
    let pair = technology.transistors.get_mut("core").unwrap();
    for device in [&mut pair.nmos, &mut pair.pmos] {
        device.threshold_v = 5.0;
        device.slope = 1.0;
    }
    for supply_v in [0.05, 0.4, 1.0] {
        let design = Design {
            supply_v,
            ..common::direct_design()
        };
        let evaluation = evaluate(&Setup::new(&study, &technology).unwrap(), &design);
        let reason = evaluation.reason.unwrap();
        assert!(
            evaluation.figures.is_none() && reason.starts_with("cut_off"),
            "{supply_v}: {reason}"
        );
    }
}
