//! Spirals, coaxial circles, rings: Grover, *Inductance Calculations* (1946); Mohan, Hershenson, Boyd and Lee, JSSC 34
//! (1999), 1419.

use crate::{Line, Within};
use std::f64::consts::PI;
use widefront::numerics::elliptic::{complete, mutual_inductance};
use widefront::technology::SpiralProcess;
use widefront::technology::inductor::{self, SpiralGeometry, filaments};

const TABLE_17_1: &str = "Abramowitz and Stegun (1964), table 17.1; from memory";
const GROVER: &str = "Grover (1946), ch. 11; from memory";
const RING: &str = "µ0 a (ln(8a/g) − 2) (Grover 1946; from memory)";
const SHEET: &str = "current sheet of Mohan et al. (1999); coefficients from memory";
const BARS: &str = "straight bars, computed apart; circle to polygon by the current sheets";
const LAYOUT: &str = "published layout, modified Wheeler formula of Mohan et al. (1999)";

const VACUUM_PERMEABILITY_H_M: f64 = 4e-7 * PI;

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

/// The metal's inductance in nH at 10 MHz: even current, as the printed formulas have it. Lengths in µm.
fn inductance_nh(turns: u32, trace: f64, spacing: f64, inner: f64) -> f64 {
    let n = f64::from(turns);
    let geometry = SpiralGeometry {
        turns,
        trace_m: trace * 1e-6,
        diameter_m: (inner + 2.0 * (n * trace + (n - 1.0) * spacing)) * 1e-6,
    };
    let process = aluminium(0.5e-6, spacing * 1e-6);
    filaments::series_impedance(&process, &geometry, 2.0 * PI * 1e7).inductance_h * 1e9
}

/// c1..c4 of the current sheet.
const SQUARE: [f64; 4] = [1.27, 2.07, 0.18, 0.13];
const OCTAGON: [f64; 4] = [1.07, 2.29, 0.0, 0.19];
const CIRCLE: [f64; 4] = [1.00, 2.46, 0.0, 0.20];

/// ½µ0 n² d c1 (ln(c2/ρ) + c3 ρ + c4 ρ²), nH. Lengths in µm.
fn sheet_nh(shape: [f64; 4], turns: u32, trace: f64, spacing: f64, inner: f64) -> f64 {
    let n = f64::from(turns);
    let outer = inner + 2.0 * (n * trace + (n - 1.0) * spacing);
    let (mean, fill) = (
        0.5 * (outer + inner) * 1e-6,
        (outer - inner) / (outer + inner),
    );
    let [c1, c2, c3, c4] = shape;
    let bracket = (c2 / fill).ln() + c3 * fill + c4 * fill * fill;
    0.5e9 * VACUUM_PERMEABILITY_H_M * n * n * mean * c1 * bracket
}

fn integrals() -> Vec<Line> {
    let table = [
        (0.5, "1.854074677301372", "1.350643881047675"),
        (0.1, "2.578092113348173", "1.104774732704073"),
        (0.01, "3.695637362989874", "1.015993545025224"),
    ];
    let values = table.iter().flat_map(|(m1, k, e)| {
        let (first, second) = complete(*m1);
        [(*k, first), (*e, second)]
    });
    vec![
        Line {
            quantity: "K and E at m 0.5, 0.9, 0.99".into(),
            source: TABLE_17_1,
            values: values.collect(),
            // A few roundings.
            within: Within::Fraction(1e-14),
        },
        Line {
            quantity: "coaxial circles of radii 25 and 20 cm, 10 cm apart, µH".into(),
            source: GROVER,
            values: vec![("0.24879", mutual_inductance(0.25, 0.20, 0.10) * 1e6)],
            within: Within::Units(5.1e-6),
        },
    ]
}

/// Thin rings at 1 MHz: g = 0.2235(w + t), and the resistance of metal that the current fills.
fn rings() -> Vec<Line> {
    let rings = [(2e-6, 200e-6), (4e-6, 500e-6), (10e-6, 900e-6)].map(|(trace_m, diameter_m)| {
        let geometry = SpiralGeometry {
            turns: 1,
            trace_m,
            diameter_m,
        };
        filaments::series_impedance(&aluminium(1e-6, 3e-6), &geometry, 2.0 * PI * 1e6)
    });
    let inductance = ["0.63128", "1.70837", "2.95146"];
    let resistance = ["8.2420", "10.3233", "7.4094"];
    let line = |quantity: &str, values| Line {
        quantity: format!("rings of 2, 4, 10 µm by 1 µm, 200, 500, 900 µm across: {quantity}"),
        source: RING,
        values,
        // The ring of filaments is no thin one: its width is up to a fiftieth of its radius.
        within: Within::Fraction(0.01),
    };
    vec![
        line(
            "inductance, nH",
            inductance
                .into_iter()
                .zip(rings.map(|r| r.inductance_h * 1e9))
                .collect(),
        ),
        line(
            "resistance at low frequency, Ω",
            resistance
                .into_iter()
                .zip(rings.map(|r| r.resistance_ohm))
                .collect(),
        ),
    ]
}

/// The published few per cent, and a little for the metal's thickness, which the expression leaves out.
const FEW_PER_CENT: f64 = 0.04;

fn circles() -> Line {
    let spirals = [
        (2, 12.0, 3.0, 200.0, "1.730"),
        (3, 10.0, 2.0, 150.0, "2.701"),
        (4, 8.0, 2.0, 120.0, "3.712"),
        (5, 10.0, 2.0, 100.0, "4.788"),
    ];
    Line {
        quantity: "circular spirals, turns/trace/spacing/inner µm 2/12/3/200, 3/10/2/150, 4/8/2/120, 5/10/2/100, nH".into(),
        source: SHEET,
        values: spirals.map(|(n, w, s, d, printed)| (printed, inductance_nh(n, w, s, d))).to_vec(),
        within: Within::Fraction(FEW_PER_CENT),
    }
}

fn polygons() -> Vec<Line> {
    let bars = [
        (SQUARE, 3, 10.0, 3.0, 80.0, "1.598"),
        (SQUARE, 5, 10.0, 2.0, 100.0, "5.561"),
        (OCTAGON, 3, 10.0, 2.0, 150.0, "2.710"),
        (OCTAGON, 2, 12.0, 3.0, 200.0, "1.738"),
    ];
    let as_polygon = |shape, n, w, s, d| {
        inductance_nh(n, w, s, d) * sheet_nh(shape, n, w, s, d) / sheet_nh(CIRCLE, n, w, s, d)
    };
    vec![
        Line {
            quantity: "squares 3/10/3/80 and 5/10/2/100, octagons 3/10/2/150 and 2/12/3/200, nH"
                .into(),
            source: BARS,
            values: bars
                .map(|(shape, n, w, s, d, printed)| (printed, as_polygon(shape, n, w, s, d)))
                .to_vec(),
            within: Within::Fraction(FEW_PER_CENT),
        },
        Line {
            quantity: "octagon 2/12/3/200, nH".into(),
            source: LAYOUT,
            values: vec![("1.805", as_polygon(OCTAGON, 2, 12.0, 3.0, 200.0))],
            within: Within::Fraction(FEW_PER_CENT),
        },
    ]
}

pub fn lines() -> Vec<Line> {
    let mut lines = integrals();
    lines.extend(rings());
    lines.push(circles());
    lines.extend(polygons());
    lines
}

#[test]
fn published_inductances() {
    lines().iter().for_each(Line::check);
    // The current sheet itself gives what is printed for it.
    for (shape, n, w, s, d, printed) in [
        (SQUARE, 3, 10.0, 3.0, 80.0, 1.638),
        (SQUARE, 5, 10.0, 2.0, 100.0, 5.715),
        (OCTAGON, 3, 10.0, 2.0, 150.0, 2.810),
        (OCTAGON, 2, 12.0, 3.0, 200.0, 1.807),
    ] {
        assert!((sheet_nh(shape, n, w, s, d) - printed).abs() < 0.00051);
    }
}

/// Skin effect of a wide trace: more than the direct current's resistance, and less than metal of one skin depth
/// δ(1 − e^{−t/δ}) below one surface would have (Yue and Wong 1998; from memory: 1.167 µm of 2 µm of aluminium at
/// 2.4 GHz), for the current uses both surfaces.
#[test]
fn law_skin_effect_raises_resistance() {
    let process = aluminium(2e-6, 3e-6);
    let geometry = SpiralGeometry {
        turns: 1,
        trace_m: 20e-6,
        diameter_m: 300e-6,
    };
    let at = |hz: f64| inductor::solve(&process, &geometry, hz).unwrap();
    let (low, high) = (at(1e6), at(2.4e9));
    let growth = high.series_resistance_ohm / low.series_resistance_ohm;
    assert!(growth > 1.1 && growth < 2.0 / 1.167, "{growth}");
    assert!(high.series_inductance_h < low.series_inductance_h);
    assert!(low.self_resonance_hz.unwrap() > 5e9);
}
