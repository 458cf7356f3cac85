//! L sections.

use crate::class_d::figures;
use crate::common::{direct_design, direct_study, ideal_technology};
use crate::{Line, Within};
use std::f64::consts::TAU;
use widefront::stage::network::{LoadNetwork, NetworkGivens};
use widefront::study::{Design, Network};
use widefront::technology::Inductor;

const TEXTBOOK: &str = "textbook L section, computed apart";
const BOWICK: &str = "Bowick, RF Circuit Design, L-network example; from memory";
const EFFICIENCY: &str = "closed form of the lossy section, computed apart";

/// Half of the fourth printed digit.
const FOUR_DIGITS: f64 = 1.3e-4;
/// Half of the sixth decimal, and the harmonics at a loaded Q of 400.
const SIX_DECIMALS: f64 = 3e-6;

/// The section's own series inductance (what is left of L beside the series capacitor), H, and its shunt capacitance, F.
fn section(antenna_ohm: f64, small_ohm: f64, frequency_hz: f64) -> [f64; 2] {
    let w = TAU * frequency_hz;
    let givens = NetworkGivens {
        kind: Network::LowPass,
        angular_frequency: w,
        antenna_resistance_ohm: antenna_ohm,
        capacitor_quality: 1e15,
    };
    let loaded_q = 6.0;
    let inductance_h: f64 = loaded_q * small_ohm / w;
    let network = LoadNetwork::new(&givens, loaded_q, 0.0, inductance_h, 0.0).unwrap();
    [
        network.inductance_h - 1.0 / (w * w * network.series_capacitance_f),
        network.shunt.unwrap().capacitance_f,
    ]
}

fn sections() -> Vec<Line> {
    let w = TAU * 2.4e9;
    let [l, c] = section(50.0, 5.0, 2.4e9);
    let [l_bowick, c_bowick] = section(1000.0, 100.0, 1e8);
    vec![
        Line {
            quantity: "50 Ω to 5 Ω at 2.4 GHz: series and shunt reactance, Ω; L, nH; C, pF".into(),
            source: TEXTBOOK,
            values: vec![
                ("15", w * l),
                ("16.667", 1.0 / (w * c)),
                ("0.9947", l * 1e9),
                ("3.979", c * 1e12),
            ],
            within: Within::Fraction(FOUR_DIGITS),
        },
        Line {
            quantity: "100 Ω to 1000 Ω at 100 MHz: L, nH; C, pF".into(),
            source: BOWICK,
            values: vec![("477.5", l_bowick * 1e9), ("4.775", c_bowick * 1e12)],
            within: Within::Fraction(FOUR_DIGITS),
        },
    ]
}

/// Efficiency of a whole ideal stage with a lossy fixed inductor: that of the section, whose inductor of quality Q is a
/// part of the loop's.
fn efficiency(quality: f64, ratio: f64) -> f64 {
    let loaded_q = 400.0;
    let mut study = direct_study();
    study.stage.network = Network::LowPass;
    let antenna = study.antenna_resistance_ohm;
    // The source takes the ratio with the inductor's loss inside the smaller resistance. Without it that resistance is
    // R_opt = R_a/(1 + Q_m²), the section's inductor is Q_m R_opt and its loss Q_m R_opt/Q: R_opt(1 + Q_m/Q) = R_a/r.
    let matching_q = {
        let linear = ratio / quality;
        0.5 * (linear + (linear * linear + 4.0 * (ratio - 1.0)).sqrt())
    };
    let mut technology = ideal_technology();
    technology.inductor = Inductor::Fixed {
        quality: quality * loaded_q / matching_q,
        area_base_m2: 1e-8,
        area_slope_m2_h: 30.0,
    };
    let design = Design {
        loaded_q,
        resistance_ohm: Some(antenna / (1.0 + matching_q * matching_q)),
        ..direct_design()
    };
    figures(&study, &technology, &design).drain_efficiency
}

fn efficiencies() -> Vec<Line> {
    let ratios = [2.0, 5.0, 10.0, 20.0, 50.0];
    let table = [
        (
            10.0,
            ["0.900496", "0.815291", "0.738477", "0.646323", "0.501680"],
        ),
        (
            20.0,
            ["0.950062", "0.903795", "0.859830", "0.803617", "0.705200"],
        ),
    ];
    table
        .into_iter()
        .map(|(quality, printed)| Line {
            quantity: format!(
                "efficiency of an L section, inductor of Q {quality}, ratio 2, 5, 10, 20, 50"
            ),
            source: EFFICIENCY,
            values: printed
                .into_iter()
                .zip(ratios.map(|r| efficiency(quality, r)))
                .collect(),
            within: Within::Units(SIX_DECIMALS),
        })
        .collect()
}

pub fn lines() -> Vec<Line> {
    [sections(), efficiencies()].into_iter().flatten().collect()
}

#[test]
fn published_l_sections() {
    lines().iter().for_each(Line::check);
}
