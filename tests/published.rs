//! Printed values of the parts: drivers, matching, spirals, transistors.

use std::f64::consts::PI;
use std::path::Path;
use widefront::evaluate::{Setup, evaluate};
use widefront::stage::driver::fastest_taper;
use widefront::study::{Design, Network};
use widefront::technology::inductor::{self, SpiralGeometry, filaments};
use widefront::technology::transistor::WarmTransistor;
use widefront::technology::{self, Inductor, SpiralProcess};

mod common;

/// Best taper for delay (Hedenstierna and Jeppson 1987; from memory, recomputed).
#[test]
fn published_best_tapers() {
    for (own, taper) in [
        (0.0, std::f64::consts::E),
        (0.5, 3.1810),
        (1.0, 3.5911),
        (2.0, 4.3191),
        (3.0, 4.9706),
    ] {
        assert!((fastest_taper(own) - taper).abs() < 6e-5);
    }
}

/// Chain delay over unit delay at γ = 1, best integer count (Rabaey, Digital Integrated Circuits, ch. 5; from memory,
/// recomputed): N stages of taper F^{1/N} take N(1 + F^{1/N}).
#[test]
fn published_chain_delays() {
    for (fan_out, count, delay) in [
        (10f64, 2, 8.32),
        (100.0, 4, 16.65),
        (1000.0, 5, 24.91),
        (10_000.0, 7, 33.09),
    ] {
        let of = |n: i32| f64::from(n) * (1.0 + fan_out.powf(1.0 / f64::from(n)));
        let best = (1..20).min_by(|&a, &b| of(a).total_cmp(&of(b))).unwrap();
        assert_eq!(best, count);
        assert!((of(best) - delay).abs() < 0.011);
        // The best whole count sits where the taper is nearest the best one.
        let taper = fan_out.powf(1.0 / f64::from(best));
        assert!((taper.ln() - fastest_taper(1.0).ln()).abs() < 0.3);
    }
}

/// Exact efficiency of an L section whose inductor has quality Q, step-down ratio r with the loss inside the smaller
/// resistance (recomputed): the whole evaluation of an ideal stage with a lossy fixed inductor gives it.
#[test]
fn published_l_section_efficiency() {
    for (quality, ratio, efficiency) in [
        (10.0, 2.0, 0.900496),
        (10.0, 5.0, 0.815291),
        (10.0, 10.0, 0.738477),
        (10.0, 20.0, 0.646323),
        (20.0, 10.0, 0.859830),
        (20.0, 50.0, 0.705200),
    ] {
        let mut technology = common::ideal_technology();
        let mut study = common::direct_study();
        study.stage.network = Network::LowPass;
        // The section alone: of the whole series reactance the inductor's loss is that of the section's own part.
        // R_opt without loss and the loss together are R_a/r.
        let small = study.antenna_resistance_ohm / ratio;
        let (q2, r) = (quality * quality, ratio);
        let closed = (2.0 * q2 + r - ((2.0 * q2 + r).powi(2) - 4.0 * (q2 + 1.0) * q2).sqrt())
            / (2.0 * (q2 + 1.0));
        assert!((closed - efficiency).abs() < 6e-7);
        let lossless = small * closed;
        let section_q = (study.antenna_resistance_ohm / lossless - 1.0).sqrt();
        // Loss of the section's inductor: X/Q, X = Q_m R; the program's inductor is Q_L R_opt of quality q_whole.
        let loaded_q = 400.0;
        technology.inductor = Inductor::Fixed {
            quality: quality * loaded_q / section_q,
            area_base_m2: 1e-8,
            area_slope_m2_h: 30.0,
        };
        let design = Design {
            loaded_q,
            resistance_ohm: Some(lossless),
            ..common::direct_design()
        };
        let setup = Setup::new(&study, &technology).unwrap();
        let f = evaluate(&setup, &design).figures.unwrap();
        // Harmonics at a loaded Q of 400 are below 1e-6 of the power.
        assert!(
            (f.drain_efficiency - efficiency).abs() < 3e-6,
            "{}",
            f.drain_efficiency
        );
    }
}

/// Overlap power of an unloaded inverter: (β/12)(V − 2V_T)³τf; 1.8 V, 0.5 V, 1 mA/V², 100 ps, 1 GHz gives 4.2667 µW
/// (Veendrick, JSSC 1984; from memory, recomputed).
#[test]
fn published_overlap_power() {
    use widefront::stage::leg::Leg;
    use widefront::technology::transistor::WarmPair;
    let mut technology = common::ideal_technology();
    let pair = technology.transistors.get_mut("core").unwrap();
    for device in [&mut pair.nmos, &mut pair.pmos] {
        device.threshold_v = 0.5;
        device.transconductance_a_v2 = 1e-3;
        device.length_m = 1.0;
    }
    let warm = WarmPair::new(pair, 300.15);
    let leg = Leg {
        legs: 1,
        stack: 1,
        supply_v: 1.8,
        swing_v: 1.8,
        widths_m: [1.0, 1.0],
        routing_resistance_ohm: 0.0,
    };
    // The program's edge is 10 % to 90 %, 0.8 of the full ramp.
    let power = leg.crowbar_power_w(&warm, 1e9, 0.0, 0.8 * 100e-12);
    assert!((power / 4.2667e-6 - 1.0).abs() < 1e-5);
}

fn aluminium(thickness_m: f64, spacing_m: f64) -> SpiralProcess {
    SpiralProcess {
        resistivity_ohm_m: 2.65e-8,
        thickness_m,
        spacing_m,
        oxide_height_m: 6e-6,
        oxide_permittivity: 4.0,
        substrate_capacitance_f_m2: 1.6e-6,
        substrate_conductance_s_m2: 4e4,
        underpass_height_m: 1e-6,
        keep_out_m: 30e-6,
    }
}

/// A single round loop: µ0 a (ln(8a/g) − 2) (Grover, Inductance Calculations), at low frequency and a thin trace.
#[test]
fn published_single_round_loop() {
    let mu0 = 4e-7 * PI;
    for (trace_m, diameter_m) in [(2e-6, 200e-6), (4e-6, 500e-6), (10e-6, 900e-6)] {
        let process = aluminium(1e-6, 3e-6);
        let geometry = SpiralGeometry {
            turns: 1,
            trace_m,
            diameter_m,
        };
        let solved = filaments::series_impedance(&process, &geometry, 2.0 * PI * 1e6);
        let radius = 0.5 * (diameter_m - trace_m);
        let distance = 0.2235 * (trace_m + 1e-6);
        let expected = mu0 * radius * ((8.0 * radius / distance).ln() - 2.0);
        assert!((solved.inductance_h / expected - 1.0).abs() < 0.01);
        // At 1 MHz the current fills the metal: resistance of the ring.
        let ring = 2.65e-8 * 2.0 * PI * radius / (trace_m * 1e-6);
        assert!((solved.resistance_ohm / ring - 1.0).abs() < 0.01);
    }
}

/// Circular spirals against the current sheet of Mohan, Hershenson, Boyd and Lee (JSSC 34, 1999, 1419; the circle's
/// coefficients 1.00, 2.46, 0, 0.20 from memory): their few per cent, and a little for the metal's thickness, which the
/// expression leaves out.
#[test]
fn published_current_sheet_of_circular_spirals() {
    const FEW_PER_CENT: f64 = 0.04;
    let mu0 = 4e-7 * PI;
    for (turns, trace_m, spacing_m, inner_m) in [
        (2u32, 12e-6, 3e-6, 200e-6),
        (3, 10e-6, 2e-6, 150e-6),
        (4, 8e-6, 2e-6, 120e-6),
        (5, 10e-6, 2e-6, 100e-6),
    ] {
        let n = f64::from(turns);
        let diameter_m = inner_m + 2.0 * (n * trace_m + (n - 1.0) * spacing_m);
        let process = aluminium(0.5e-6, spacing_m);
        let geometry = SpiralGeometry {
            turns,
            trace_m,
            diameter_m,
        };
        let solved = filaments::series_impedance(&process, &geometry, 2.0 * PI * 1e7);
        let mean = 0.5 * (diameter_m + inner_m);
        let fill = (diameter_m - inner_m) / (diameter_m + inner_m);
        let sheet = 0.5 * mu0 * n * n * mean * ((2.46 / fill).ln() + 0.20 * fill * fill);
        let off = solved.inductance_h / sheet - 1.0;
        assert!(off.abs() < FEW_PER_CENT, "n {turns}: {off}");
    }
}

/// Skin effect in a wide, thick trace: resistance rises above the direct current's and less than metal of one skin depth
/// on all sides would have it (δ after Yue and Wong 1998; from memory).
#[test]
fn law_skin_effect_raises_resistance() {
    let process = aluminium(2e-6, 3e-6);
    let geometry = SpiralGeometry {
        turns: 2,
        trace_m: 20e-6,
        diameter_m: 300e-6,
    };
    let at = |hz: f64| inductor::solve(&process, &geometry, hz).unwrap();
    let (low, high) = (at(1e6), at(2.4e9));
    assert!(high.series_resistance_ohm > 1.3 * low.series_resistance_ohm);
    assert!(high.series_inductance_h < low.series_inductance_h);
    assert!(low.self_resonance_hz.unwrap() > 5e9);
}

/// Measured on-resistance of the open130 core devices, Ω·µm at V_GS (drain at 0.05 V): open 130 nm process, measurement
/// files at commit 5cccb161 (IHP GmbH, Apache-2.0), core devices of 130 nm.
#[test]
fn published_open130_on_resistance() {
    const WITHIN: f64 = 0.03;
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let technology = technology::read(&root.join("configs/technology/open130.toml"))
        .unwrap()
        .technology;
    let pair = &technology.transistors["core"];
    let voltages = [0.8, 1.0, 1.2, 1.35];
    let nmos = [
        (233.15, [1369.0, 784.0, 590.1, 518.3]),
        (300.15, [1475.0, 896.6, 684.9, 602.7]),
        (343.15, [1560.6, 981.9, 756.9, 666.9]),
        (398.15, [1693.0, 1106.0, 861.2, 759.3]),
    ];
    let pmos = [
        (233.15, [4277.9, 2651.1, 2049.0, 1807.4]),
        (300.15, [4397.5, 2905.6, 2284.4, 2021.3]),
        (343.15, [4523.1, 3077.7, 2444.0, 2169.4]),
        (398.15, [4662.4, 3275.3, 2630.2, 2340.8]),
    ];
    for (device, table) in [(&pair.nmos, nmos), (&pair.pmos, pmos)] {
        for (temperature, row) in table {
            let warm = WarmTransistor::new(device, temperature);
            for (v, ohm_um) in voltages.into_iter().zip(row) {
                // The channel's middle is half the drain voltage above the source.
                let r = warm.on_resistance_ohm_m(v - 0.025) * 1e6;
                assert!(
                    (r / ohm_um - 1.0).abs() < WITHIN,
                    "{temperature} K {v} V: {r} {ohm_um}"
                );
            }
        }
    }
}
