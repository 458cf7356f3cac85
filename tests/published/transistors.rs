//! Measured transistors: open 130 nm process, core devices of 130 nm, measurement files at commit 5cccb161 (IHP GmbH,
//! Apache-2.0).

use crate::{Line, Within};
use std::path::Path;
use widefront::technology;
use widefront::technology::transistor::WarmTransistor;

const MEASURED: &str = "open 130 nm process, measured at commit 5cccb161";

const GATE_V: [f64; 4] = [0.8, 1.0, 1.2, 1.35];

pub fn lines() -> Vec<Line> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let technology = technology::read(&root.join("configs/technology/open130.toml"))
        .unwrap()
        .technology;
    let pair = &technology.transistors["core"];
    let nmos = [
        (233.15, ["1369.0", "784.0", "590.1", "518.3"]),
        (300.15, ["1475.0", "896.6", "684.9", "602.7"]),
        (343.15, ["1560.6", "981.9", "756.9", "666.9"]),
        (398.15, ["1693.0", "1106.0", "861.2", "759.3"]),
    ];
    let pmos = [
        (233.15, ["4277.9", "2651.1", "2049.0", "1807.4"]),
        (300.15, ["4397.5", "2905.6", "2284.4", "2021.3"]),
        (343.15, ["4523.1", "3077.7", "2444.0", "2169.4"]),
        (398.15, ["4662.4", "3275.3", "2630.2", "2340.8"]),
    ];
    let mut lines = Vec::new();
    for (name, device, table) in [("NMOS", &pair.nmos, nmos), ("PMOS", &pair.pmos, pmos)] {
        for (temperature, printed) in table {
            let warm = WarmTransistor::new(device, temperature);
            // The drain is at 0.05 V, the channel's middle half of it above the source.
            let ours = GATE_V.map(|v| warm.on_resistance_ohm_m(v - 0.025) * 1e6);
            lines.push(Line {
                quantity: format!(
                    "open130 {name}, {temperature} K, gate 0.8, 1, 1.2, 1.35 V: Ω·µm"
                ),
                source: MEASURED,
                values: printed.into_iter().zip(ours).collect(),
                // What is left of a fit of one interpolation to all temperatures.
                within: Within::Fraction(0.03),
            });
        }
    }
    lines
}

#[test]
fn published_on_resistances() {
    lines().iter().for_each(Line::check);
}
