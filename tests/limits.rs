//! Limits that the whole evaluation must recover.

mod common;

use common::{direct_design, direct_study, ideal_technology};
use std::f64::consts::PI;
use widefront::evaluate::{Figures, Setup, evaluate};
use widefront::study::{Design, Study};
use widefront::technology::Technology;

/// The limit's parts are lossless to 1e-9 or so, not exactly.
const NEARLY_IDEAL: f64 = 1e-6;
/// The published tables give four to five digits.
const TABLE_DB: f64 = 0.006;

fn figures(study: &Study, technology: &Technology, design: &Design) -> Figures {
    let setup = Setup::new(study, technology).unwrap();
    let evaluation = evaluate(&setup, design);
    evaluation
        .figures
        .unwrap_or_else(|| panic!("{:?}", evaluation.reason))
}

/// Ideal parts, high loaded Q: 2V²/(π²R) and all of the power (Krauss, Bostian and Raab 1980, ch. 14; from memory,
/// recomputed).
#[test]
fn published_ideal_power_and_efficiency() {
    let design = Design {
        loaded_q: 2000.0,
        ..direct_design()
    };
    let f = figures(&direct_study(), &ideal_technology(), &design);
    let ideal = 2.0 / (PI * PI * 50.0);
    assert!((f.output_power_w / ideal - 1.0).abs() < NEARLY_IDEAL);
    assert!((f.drain_efficiency - 1.0).abs() < NEARLY_IDEAL);
    assert!((f.efficiency - 1.0).abs() < NEARLY_IDEAL);
}

/// On-resistance alone: R/(R+r) of all delivered power at any loaded Q, and 2V²R/(π²(R+r)²) at a high one
/// (the same source).
#[test]
fn published_resistance_alone() {
    let mut technology = ideal_technology();
    let pair = technology.transistors.get_mut("core").unwrap();
    // 5 Ω for a millimetre: r/R = 0.1.
    pair.nmos.access_resistance_ohm_m = 5e-3;
    pair.pmos.access_resistance_ohm_m = 5e-3;
    for loaded_q in [1.0, 3.0, 2000.0] {
        let design = Design {
            loaded_q,
            ..direct_design()
        };
        let f = figures(&direct_study(), &technology, &design);
        let delivered = f.output_power_w + f.losses_w.harmonics;
        assert!((delivered / f.dc_power_w - 50.0 / 55.0).abs() < NEARLY_IDEAL);
        if loaded_q > 100.0 {
            let expected = 2.0 * 50.0 / (PI * PI * 55.0 * 55.0);
            assert!((f.output_power_w / expected - 1.0).abs() < NEARLY_IDEAL);
        }
    }
}

/// Third harmonic and the fundamental's share against loaded Q, tuned, no resistance (Fourier, recomputed).
#[test]
fn published_third_harmonic_against_loaded_q() {
    for (loaded_q, dbc, share) in [
        (1.0, -18.63, 0.98415),
        (2.0, -24.23, 0.99563),
        (3.0, -27.67, 0.99802),
        (4.0, -30.14, 0.99888),
        (5.0, -32.07, 0.99928),
        (10.0, -38.07, 0.99982),
    ] {
        let design = Design {
            loaded_q,
            ..direct_design()
        };
        let f = figures(&direct_study(), &ideal_technology(), &design);
        assert!((f.third_harmonic_dbc.unwrap() - dbc).abs() < TABLE_DB);
        let found = f.output_power_w / (f.output_power_w + f.losses_w.harmonics);
        assert!((found - share).abs() < 6e-6);
    }
}

/// A hard-switched node of capacitance C costs C V² f (textbook): the drain-charge loss of a leg whose junctions are
/// large against nothing else.
#[test]
fn published_hard_switched_node_charge() {
    let mut technology = ideal_technology();
    let pair = technology.transistors.get_mut("core").unwrap();
    for device in [&mut pair.nmos, &mut pair.pmos] {
        device.access_resistance_ohm_m = 1e-4;
        device.junction_capacitance_f_m = 1e-11;
    }
    let design = Design {
        loaded_q: 500.0,
        ..direct_design()
    };
    let f = figures(&direct_study(), &technology, &design);
    let expected = f.drain_capacitance_f * 1e9;
    // The network's own current helps or hinders a little: of the order of r/R.
    assert!((f.losses_w.drain_charge / expected - 1.0).abs() < 0.01);
}

/// The finite-Q Class DE conditions of Zhukov and Kozyrev (1975), Hamill (1996), Koizumi et al. (1996) — tables
/// from memory, solved again: at on-duty 0.25 the drain arrives at turn-on with neither voltage nor slope.
#[test]
fn published_soft_switching_at_finite_q() {
    for (loaded_q, capacitance, reactance, power) in [
        (3.0, 0.315435, 1.707096, 0.045067),
        (5.0, 0.317263, 1.649282, 0.047316),
        (10.0, 0.318047, 1.608771, 0.048997),
        (500.0, std::f64::consts::FRAC_1_PI, 1.571531, 0.050628),
    ] {
        let study = direct_study();
        let mut technology = ideal_technology();
        let pair = technology.transistors.get_mut("core").unwrap();
        let width = 1e-3;
        // C of the node so that ωCR is the table's: both junctions together, charge-equivalent over the swing.
        let omega = 2.0 * PI * study.frequency_hz;
        let node = capacitance / (omega * study.antenna_resistance_ohm);
        // c_j(V) of a junction of c_j0 with m = 0.5 and φ = 1 V over 1 V: 2(√2 − 1) c_j0.
        let of_unit = 2.0 * (2f64.sqrt() - 1.0);
        for device in [&mut pair.nmos, &mut pair.pmos] {
            device.junction_capacitance_f_m = node / (2.0 * width * of_unit);
            device.access_resistance_ohm_m = 1e-8;
        }
        let design = Design {
            loaded_q,
            reactance,
            dead_time: 0.25,
            ..direct_design()
        };
        let f = figures(&study, &technology, &design);
        assert!((f.drain_capacitance_f / node - 1.0).abs() < 1e-9);
        // The table's power is all that is delivered, harmonics with it.
        let delivered = (f.output_power_w + f.losses_w.harmonics) * 50.0;
        assert!(
            (delivered / power - 1.0).abs() < 3e-5,
            "Q {loaded_q}: {delivered} instead of {power}"
        );
        // No voltage is left to switch: a thousandth of the hard-switched loss would show.
        let hard = node * study.frequency_hz;
        assert!(f.losses_w.drain_charge.abs() + f.losses_w.conduction < 1e-3 * hard);
        assert!(f.peak_drain_v < 1.0 + 1e-3 && f.lowest_drain_v > -1e-3);
        if loaded_q < 11.0 {
            let third = [(3.0, -27.63), (5.0, -32.05), (10.0, -38.06)]
                .iter()
                .find(|t| t.0 == loaded_q)
                .unwrap()
                .1;
            assert!((f.third_harmonic_dbc.unwrap() - third).abs() < TABLE_DB);
        }
    }
}
