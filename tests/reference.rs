//! Whole designs against the independent model of `tests/reference` (numpy and scipy, written apart from this crate).

use serde_json::Value;
use std::collections::BTreeMap;
use std::path::PathBuf;
use widefront::evaluate::{Evaluation, Setup, evaluate, evaluate_with_coil};
use widefront::stage::Coil;
use widefront::study::{
    Design, DriverChoice, Limits, Network, Objective, SearchSettings, StageChoice, Study, Swing,
};
use widefront::technology::{
    Capacitor, Inductor, Layout, Rules, SpiralProcess, Technology, Transistor, TransistorPair,
    inductor,
};

/// Both sides are exact to about 1e-11; squares of the reference come from a quadrature to 1e-12.
const FIGURES_TOLERANCE: f64 = 1e-6;
/// The reference's filament mesh is converged to 0.2 %; ours is coarser.
const COIL_TOLERANCE: f64 = 0.015;
/// A loss that nearly vanishes is compared against the whole power, not against itself.
const LOSS_FLOOR: f64 = 1e-4;

fn values() -> Value {
    let path = concat!(env!("CARGO_MANIFEST_DIR"), "/tests/reference/values.json");
    serde_json::from_str(&std::fs::read_to_string(path).expect("reference values")).expect("JSON")
}

fn number(v: &Value, key: &str) -> f64 {
    v[key]
        .as_f64()
        .unwrap_or_else(|| panic!("{key} is not a number in {v}"))
}

fn transistor(v: &Value) -> Transistor {
    Transistor {
        transconductance_a_v2: number(v, "transconductance_a_v2"),
        length_m: number(v, "length_m"),
        threshold_v: number(v, "threshold_v"),
        threshold_drift_v_k: number(v, "threshold_drift_v_k"),
        slope: number(v, "slope"),
        degradation_per_v: number(v, "degradation_per_v"),
        mobility_exponent: number(v, "mobility_exponent"),
        access_resistance_ohm_m: number(v, "access_resistance_ohm_m"),
        gate_capacitance_f_m: number(v, "gate_capacitance_f_m"),
        overlap_capacitance_f_m: number(v, "overlap_capacitance_f_m"),
        junction_capacitance_f_m: number(v, "junction_capacitance_f_m"),
        junction_grading: number(v, "junction_grading"),
        junction_potential_v: number(v, "junction_potential_v"),
        off_current_a_m: number(v, "off_current_a_m"),
    }
}

fn spiral(v: &Value) -> SpiralProcess {
    SpiralProcess {
        resistivity_ohm_m: number(v, "resistivity_ohm_m"),
        thickness_m: number(v, "thickness_m"),
        spacing_m: number(v, "spacing_m"),
        oxide_height_m: number(v, "oxide_height_m"),
        oxide_permittivity: number(v, "oxide_permittivity"),
        substrate_capacitance_f_m2: number(v, "substrate_capacitance_f_m2"),
        substrate_conductance_s_m2: number(v, "substrate_conductance_s_m2"),
        underpass_height_m: number(v, "underpass_height_m"),
        keep_out_m: number(v, "keep_out_m"),
    }
}

fn technology(v: &Value) -> Technology {
    let pair = &v["pair"];
    let (coil, capacitor, layout) = (&v["inductor"], &v["capacitor"], &v["layout"]);
    Technology {
        name: "case".into(),
        source: "reference".into(),
        transistors: BTreeMap::from([(
            "core".into(),
            TransistorPair {
                rating_v: number(pair, "rating_v"),
                clamp_v: number(pair, "clamp_v"),
                nmos: transistor(&pair["nmos"]),
                pmos: transistor(&pair["pmos"]),
            },
        )]),
        inductor: if coil["model"] == "fixed" {
            Inductor::Fixed {
                quality: number(coil, "quality"),
                area_base_m2: number(coil, "area_base_m2"),
                area_slope_m2_h: number(coil, "area_slope_m2_h"),
            }
        } else {
            Inductor::Spiral(spiral(coil))
        },
        capacitor: Capacitor {
            density_f_m2: number(capacitor, "density_f_m2"),
            quality: number(capacitor, "quality"),
            bottom_plate: number(capacitor, "bottom_plate"),
        },
        layout: Layout {
            routing_resistance_ohm: number(layout, "routing_resistance_ohm"),
            width_area_m: number(layout, "width_area_m"),
            supply_ripple: number(layout, "supply_ripple"),
            decoupling_density_f_m2: number(layout, "decoupling_density_f_m2"),
        },
        rules: Rules::default(),
    }
}

fn study(v: &Value) -> Study {
    let (stage, driver) = (&v["stage"], &v["driver"]);
    Study {
        title: "case".into(),
        technology: PathBuf::new(),
        temperature_k: number(v, "temperature_k"),
        frequency_hz: number(v, "frequency_hz"),
        antenna_resistance_ohm: number(v, "antenna_resistance_ohm"),
        antenna_loss_db: number(v, "antenna_loss_db"),
        stage: StageChoice {
            legs: number(stage, "legs") as u32,
            stack: number(stage, "stack") as u32,
            device: "core".into(),
            network: if stage["network"] == "direct" {
                Network::Direct
            } else {
                Network::LowPass
            },
        },
        driver: DriverChoice {
            input_capacitance_f: number(driver, "input_capacitance_f"),
            ratio: number(driver, "ratio"),
            crowbar: number(driver, "crowbar"),
            swing: driver["swing_v"]
                .as_f64()
                .map_or(Swing::Supply, Swing::Voltage),
        },
        space: None,
        limits: Limits::default(),
        search: SearchSettings {
            objectives: vec![Objective::Efficiency],
            seed: 1,
            fronts_by: Vec::new(),
        },
        design: None,
        sweep: widefront::study::Sweep::default(),
    }
}

/// Every number of `expected` stands in `found`, to tolerance; returns how many were compared.
fn compare(name: &str, path: &str, expected: &Value, found: &Value, scale: f64) -> usize {
    match expected {
        Value::Object(map) => map
            .iter()
            .map(|(key, value)| {
                let scale = if key == "losses_w" {
                    LOSS_FLOOR * number(&Value::Object(map.clone()), "total_power_w")
                } else if path.ends_with("losses_w") {
                    scale
                } else {
                    0.0
                };
                compare(name, &format!("{path}.{key}"), value, &found[key], scale)
            })
            .sum(),
        Value::Number(n) => {
            let e = n.as_f64().unwrap();
            let f = found
                .as_f64()
                .unwrap_or_else(|| panic!("{name}{path}: {e} expected, read {found}"));
            assert!(
                (f - e).abs() <= FIGURES_TOLERANCE * e.abs().max(scale),
                "{name}{path}: {f} instead of {e}"
            );
            1
        }
        other => {
            assert_eq!(other, found, "{name}{path}");
            1
        }
    }
}

fn evaluated(case: &Value) -> Evaluation {
    let setup = Setup::new(&study(&case["study"]), &technology(&case["technology"])).unwrap();
    let design: Design = serde_json::from_value(case["design"].clone()).unwrap();
    match &case["coil"] {
        Value::Null => evaluate(&setup, &design),
        coil => {
            let process = spiral(&case["technology"]["inductor"]);
            // The direct network's trace is a result; its diameter is given, and area needs no more.
            let each = inductor::footprint_m2(&process, design.diameter_m.unwrap());
            evaluate_with_coil(
                &setup,
                design.clone(),
                &Coil {
                    inductance_h: number(coil, "inductance_h"),
                    resistance_ohm: number(coil, "resistance_ohm"),
                    area_m2: each * f64::from(setup.legs),
                },
                None,
            )
        }
    }
}

#[test]
fn law_whole_designs_agree_with_the_independent_model() {
    let values = values();
    let (mut designs, mut impossible, mut numbers) = (0, 0, 0);
    for case in values["cases"].as_array().unwrap() {
        let name = case["name"].as_str().unwrap();
        let evaluation = evaluated(case);
        let expected = &case["expected"];
        if let Some(reason) = expected.get("reason").and_then(Value::as_str) {
            impossible += 1;
            let found = evaluation.reason.as_deref().unwrap_or("none");
            assert!(found.starts_with(&format!("{reason}:")), "{name}: {found}");
            assert!(evaluation.figures.is_none() && !evaluation.feasible);
        } else {
            designs += 1;
            let found = serde_json::to_value(&evaluation).unwrap();
            numbers += compare(name, "", expected, &found, 0.0);
        }
    }
    assert!(designs >= 50 && impossible >= 8 && numbers > 30 * designs);
}

#[test]
fn law_spirals_agree_with_a_converged_mesh() {
    let values = values();
    let coils = values["coils"].as_array().unwrap();
    assert!(coils.len() >= 20);
    for coil in coils {
        let geometry = inductor::SpiralGeometry {
            turns: number(coil, "turns") as u32,
            trace_m: number(coil, "trace_m"),
            diameter_m: number(coil, "diameter_m"),
        };
        let solved = inductor::solve(
            &spiral(&coil["process"]),
            &geometry,
            number(coil, "frequency_hz"),
        )
        .unwrap();
        let expected = &coil["expected"];
        for (found, key) in [
            (solved.series_inductance_h, "series_inductance_h"),
            (solved.series_resistance_ohm, "series_resistance_ohm"),
            (solved.inductance_h, "inductance_h"),
            (solved.resistance_ohm, "resistance_ohm"),
            (solved.quality, "quality"),
        ] {
            let e = number(expected, key);
            assert!(
                (found / e - 1.0).abs() < COIL_TOLERANCE,
                "{key} {found} instead of {e}: {coil}"
            );
        }
    }
}
