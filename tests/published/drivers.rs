//! The driver chain and the overlap of the switches.

use crate::common::ideal_technology;
use crate::{Line, Within};
use std::f64::consts::E;
use widefront::stage::driver::{Chain, ChainGivens, fastest_taper};
use widefront::stage::leg::Leg;
use widefront::technology::transistor::WarmPair;

const TAPER: &str = "Hedenstierna and Jeppson (1987); from memory";
const DELAY: &str = "Rabaey, Digital Integrated Circuits, ch. 5; from memory";
const OVERLAP: &str = "Veendrick, JSSC 1984; from memory";

fn tapers() -> Line {
    let printed = [
        (0.0, "2.7183"),
        (0.5, "3.1810"),
        (1.0, "3.5911"),
        (2.0, "4.3191"),
        (3.0, "4.9706"),
    ];
    Line {
        quantity: "best taper for delay, own over input capacitance 0, 0.5, 1, 2, 3".into(),
        source: TAPER,
        values: printed
            .map(|(own, taper)| (taper, fastest_taper(own)))
            .to_vec(),
        within: Within::Units(5.1e-5),
    }
}

/// N stages of taper F^{1/N} take N(1 + F^{1/N}); N is the whole number that the best taper names, on one of its sides.
fn delays() -> Vec<Line> {
    let table = [
        (10f64, "2", "8.32"),
        (100.0, "4", "16.65"),
        (1000.0, "5", "24.91"),
        (1e4, "7", "33.09"),
    ];
    let delay = |fan_out: f64, count: f64| count * (1.0 + fan_out.powf(1.0 / count));
    let best = |fan_out: f64| {
        let count = fan_out.ln() / fastest_taper(1.0).ln();
        let (below, above) = (count.floor(), count.ceil());
        if delay(fan_out, below) < delay(fan_out, above) {
            below
        } else {
            above
        }
    };
    vec![
        Line {
            quantity: "best count of stages, fan-out 10, 100, 1000, 10000, own capacitance equal to the input".into(),
            source: DELAY,
            values: table.map(|row| (row.1, best(row.0))).to_vec(),
            within: Within::Units(0.0),
        },
        Line {
            quantity: "delay of that chain over that of one unloaded stage".into(),
            source: DELAY,
            values: table.map(|row| (row.2, delay(row.0, best(row.0)))).to_vec(),
            // The source cuts where it does not round.
            within: Within::Units(0.011),
        },
    ]
}

/// Power of a long chain over that of its load: (1 + γ)/(u − 1).
fn chain_power() -> Line {
    const STAGES: u32 = 30;
    let of = |own: f64, taper: f64| {
        let mut technology = ideal_technology();
        let pair = technology.transistors.get_mut("core").unwrap();
        for device in [&mut pair.nmos, &mut pair.pmos] {
            device.gate_capacitance_f_m = 1e-9;
            // c_j over 1 V with m = 0.5 and φ = 1 V: 2(√2 − 1)c_j0.
            device.junction_capacitance_f_m = own * 1e-9 / (2.0 * (2f64.sqrt() - 1.0));
        }
        let givens = ChainGivens {
            input_capacitance_f: 1e-15,
            ratio: 1.0,
            crowbar: 0.0,
        };
        let load_f = 1e-15 * taper.powi(STAGES as i32);
        let warm = WarmPair::new(pair, 300.15);
        let chain = Chain::new(&givens, &warm, STAGES, 1.0, 1e9, load_f).unwrap();
        chain.chain_power_w / chain.gate_power_w
    };
    Line {
        quantity: "capacitance of a long chain over its load's, (1+γ)/(u−1): γ 0 and u = e; γ 1 and u 3.5911, 8".into(),
        source: TAPER,
        values: vec![
            ("0.5820", of(0.0, E)),
            ("0.7719", of(1.0, 3.5911)),
            ("0.2857", of(1.0, 8.0)),
        ],
        within: Within::Units(5.1e-5),
    }
}

fn overlap() -> Line {
    let mut technology = ideal_technology();
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
    let power_w: f64 = leg.crowbar_power_w(&warm, 1e9, 0.0, 0.8 * 100e-12);
    Line {
        quantity: "overlap of an unloaded inverter, 1.8 V, V_T 0.5 V, 1 mA/V², 100 ps, 1 GHz, µW"
            .into(),
        source: OVERLAP,
        values: vec![("4.2667", power_w * 1e6)],
        within: Within::Units(5.1e-5),
    }
}

pub fn lines() -> Vec<Line> {
    let mut lines = vec![tapers()];
    lines.extend(delays());
    lines.extend([chain_power(), overlap()]);
    lines
}

#[test]
fn published_drivers() {
    lines().iter().for_each(Line::check);
}
