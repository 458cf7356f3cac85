//! The half-bridge: supply V, series-tuned load R, on-resistance r.
//!
//! Krauss, Bostian and Raab, *Solid State Radio Engineering* (1980); Kazimierczuk, *RF Power Amplifiers*; Kazimierczuk
//! and Czarkowski, *Resonant Power Converters*.

use crate::common::{direct_design, direct_study, ideal_technology};
use crate::{Line, Within};
use std::f64::consts::{SQRT_2, TAU};
use widefront::evaluate::{Figures, Setup, evaluate};
use widefront::study::{Design, Study, Swing};
use widefront::technology::{Inductor, Technology};

const KRAUSS: &str = "Krauss, Bostian and Raab (1980), ch. 14; from memory";
const TUNED: &str = "Fourier series, computed apart";
const EXAMPLES: &str = "Kazimierczuk and Czarkowski, ch. 6; from memory";

/// Six printed digits, and harmonics of 1e-7 at a loaded Q of 2000.
const SIX_DIGITS: f64 = 3e-6;
/// Half of the second decimal.
const DECIBELS: f64 = 0.0051;
/// Half of the fifth decimal.
const SHARE: f64 = 5.1e-6;

pub fn figures(study: &Study, technology: &Technology, design: &Design) -> Figures {
    let setup = Setup::new(study, technology).unwrap();
    let evaluation = evaluate(&setup, design);
    evaluation
        .figures
        .unwrap_or_else(|| panic!("{:?}", evaluation.reason))
}

fn at_loaded_q(technology: &Technology, loaded_q: f64) -> Figures {
    let design = Design {
        loaded_q,
        ..direct_design()
    };
    figures(&direct_study(), technology, &design)
}

/// 5 Ω for the millimetre of each switch: r/R = 0.1.
fn resistive() -> Technology {
    let mut technology = ideal_technology();
    let pair = technology.transistors.get_mut("core").unwrap();
    pair.nmos.access_resistance_ohm_m = 5e-3;
    pair.pmos.access_resistance_ohm_m = 5e-3;
    technology
}

fn ideal() -> Vec<Line> {
    let f = at_loaded_q(&ideal_technology(), 2000.0);
    let values = vec![
        ("0.636620", (2.0 * f.output_power_w * 50.0).sqrt()),
        ("0.636620", f.network_current_rms_a * SQRT_2 * 50.0),
        ("0.202642", f.output_power_w * 50.0),
        ("1", f.drain_efficiency),
        ("1", f.efficiency),
    ];
    vec![Line {
        quantity:
            "ideal: fundamental over V, peak current over V/R, output power over V²/R, efficiencies"
                .into(),
        source: KRAUSS,
        values,
        within: Within::Fraction(SIX_DIGITS),
    }]
}

/// Through a loop that hardly filters, its |1 + jQ(n − 1/n)| put back.
fn odd_harmonics() -> Vec<Line> {
    let loaded_q = 0.03;
    let f = at_loaded_q(&ideal_technology(), loaded_q);
    let unfiltered = |dbc: Option<f64>, n: f64| {
        dbc.unwrap() + 10.0 * (1.0 + (loaded_q * (n - 1.0 / n)).powi(2)).log10()
    };
    vec![Line {
        quantity: "odd harmonics 2V/(nπ): third and fifth over the fundamental, dB".into(),
        source: KRAUSS,
        values: vec![
            ("-9.5424", unfiltered(f.third_harmonic_dbc, 3.0)),
            ("-13.9794", unfiltered(f.fifth_harmonic_dbc, 5.0)),
        ],
        within: Within::Units(6e-5),
    }]
}

fn resistance() -> Vec<Line> {
    let technology = resistive();
    let share = |loaded_q| {
        let f = at_loaded_q(&technology, loaded_q);
        (f.output_power_w + f.losses_w.harmonics) / f.dc_power_w
    };
    let power = at_loaded_q(&technology, 2000.0).output_power_w * 50.0;
    vec![
        Line {
            quantity: "r/R = 0.1: efficiency of all that is delivered at Q_L 1, 3, 2000".into(),
            source: KRAUSS,
            values: [1.0, 3.0, 2000.0].map(|q| ("0.909091", share(q))).to_vec(),
            within: Within::Fraction(SIX_DIGITS),
        },
        Line {
            quantity: "r/R = 0.1: output power over V²/R, 2R²/(π²(R+r)²)".into(),
            source: KRAUSS,
            values: vec![("0.167473", power)],
            within: Within::Fraction(SIX_DIGITS),
        },
    ]
}

fn finite_q() -> Vec<Line> {
    let table = [
        (1.0, "-18.63", "0.98415"),
        (2.0, "-24.23", "0.99563"),
        (3.0, "-27.67", "0.99802"),
        (4.0, "-30.14", "0.99888"),
        (5.0, "-32.07", "0.99928"),
        (10.0, "-38.07", "0.99982"),
    ];
    let ideal = ideal_technology();
    let found = table.map(|row| (row, at_loaded_q(&ideal, row.0)));
    let share = |f: &Figures| f.output_power_w / (f.output_power_w + f.losses_w.harmonics);
    let third = |f: &Figures| f.third_harmonic_dbc.unwrap();
    vec![
        Line {
            quantity: "third harmonic in the load at Q_L 1, 2, 3, 4, 5, 10, dBc".into(),
            source: TUNED,
            values: found.iter().map(|(row, f)| (row.1, third(f))).collect(),
            within: Within::Units(DECIBELS),
        },
        Line {
            quantity: "fundamental's share of the delivered power at the same Q_L".into(),
            source: TUNED,
            values: found.iter().map(|(row, f)| (row.2, share(f))).collect(),
            within: Within::Units(SHARE),
        },
    ]
}

/// Junctions large against nothing else, switches of 0.1 Ω.
fn hard_switching() -> Vec<Line> {
    let mut technology = ideal_technology();
    let pair = technology.transistors.get_mut("core").unwrap();
    for device in [&mut pair.nmos, &mut pair.pmos] {
        device.access_resistance_ohm_m = 1e-4;
        device.junction_capacitance_f_m = 1e-11;
    }
    let f = at_loaded_q(&technology, 500.0);
    vec![Line {
        quantity: "charging of a hard-switched node over C V² f".into(),
        source: "textbook",
        values: vec![("1", f.losses_w.drain_charge / (f.drain_capacitance_f * 1e9))],
        // The network's own current helps or hinders a little: of the order of r/R.
        within: Within::Fraction(0.01),
    }]
}

/// V = 350 V, L = 84 µH, C = 300 pF, r_L = 1.4 Ω, r_C = 0.05 Ω, R = 200 Ω, at resonance.
fn worked_examples() -> Vec<Line> {
    let (inductance, capacitance): (f64, f64) = (84e-6, 300e-12);
    let resonance_hz = 1.0 / (TAU * (inductance * capacitance).sqrt());
    let reactance = (inductance / capacitance).sqrt();
    let mut technology = ideal_technology();
    technology.inductor = Inductor::Fixed {
        quality: reactance / 1.4,
        area_base_m2: 1e-8,
        area_slope_m2_h: 30.0,
    };
    technology.capacitor.quality = reactance / 0.05;
    // A drain whose time constant stays within reach of a period a thousand times as long as elsewhere.
    let pair = technology.transistors.get_mut("core").unwrap();
    for device in [&mut pair.nmos, &mut pair.pmos] {
        device.access_resistance_ohm_m = 1e-7;
        device.junction_capacitance_f_m = 1e-11;
    }
    let mut study = direct_study();
    study.driver.swing = Swing::Voltage(1.0);
    study.frequency_hz = resonance_hz;
    study.antenna_resistance_ohm = 200.0;
    let design = Design {
        supply_v: 350.0,
        loaded_q: reactance / 200.0,
        ..direct_design()
    };
    let f = figures(&study, &technology, &design);
    let resistance = 200.0 + f.inductor_resistance_ohm + 0.05;
    let peak = (2.0 * f.output_power_w / 200.0).sqrt();
    let line = |quantity: &str, values| Line {
        quantity: format!("half-bridge of 350 V, 84 µH, 300 pF, 200 Ω: {quantity}"),
        source: EXAMPLES,
        values,
        // Five printed digits.
        within: Within::Fraction(6e-5),
    };
    vec![
        line(
            "resonance, MHz",
            vec![(
                "1.00258",
                1e-6 / (TAU * (f.inductance_h * f.series_capacitance_f).sqrt()),
            )],
        ),
        line(
            "characteristic impedance, Ω; loaded Q",
            vec![
                ("529.15", (f.inductance_h / f.series_capacitance_f).sqrt()),
                ("2.6267", TAU * resonance_hz * f.inductance_h / resistance),
            ],
        ),
        line(
            "peak current, A; output power, W; capacitor peak, V",
            vec![
                ("1.1061", peak),
                ("122.34", f.output_power_w),
                (
                    "585.3",
                    peak / (TAU * resonance_hz * f.series_capacitance_f),
                ),
            ],
        ),
        line(
            "efficiency of the resonant circuit, %",
            vec![(
                "99.28",
                100.0 * (f.output_power_w + f.losses_w.harmonics) / f.dc_power_w,
            )],
        ),
    ]
}

pub fn lines() -> Vec<Line> {
    [
        ideal(),
        odd_harmonics(),
        resistance(),
        finite_q(),
        hard_switching(),
        worked_examples(),
    ]
    .into_iter()
    .flatten()
    .collect()
}

#[test]
fn published_half_bridge() {
    lines().iter().for_each(Line::check);
}
