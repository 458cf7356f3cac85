//! Hand-off sheets of the committed reference run.

use assert_cmd::Command;
use serde_json::Value;
use std::fs;
use std::path::{Path, PathBuf};
use tempfile::TempDir;

const ENDINGS: [&str; 4] = ["md", "csv", "json", "svg"];

/// Currents are sampled: what a period's sums lose to 2^14 samples at the switches' jumps.
const SAMPLED: f64 = 2e-3;
/// Lengths on the grid, rounding of the decimal digits alone.
const ON_GRID: f64 = 1e-6;
const EXACT: f64 = 1e-12;

fn copied_run() -> (TempDir, PathBuf) {
    let room = TempDir::new().unwrap();
    let run = room.path().join("run");
    let from = Path::new(env!("CARGO_MANIFEST_DIR")).join("results/reference");
    fs::create_dir_all(run.join("cells")).unwrap();
    for part in ["", "cells"] {
        for entry in fs::read_dir(from.join(part)).unwrap() {
            let entry = entry.unwrap();
            if entry.file_type().unwrap().is_file() {
                fs::copy(entry.path(), run.join(part).join(entry.file_name())).unwrap();
            }
        }
    }
    (room, run)
}

fn sheet(run: &Path, design: &str) -> assert_cmd::assert::Assert {
    let mut command = Command::cargo_bin("widefront").unwrap();
    command.arg("sheet").arg(run).arg(design).assert()
}

fn first_design(run: &Path) -> String {
    let front: Value = serde_json::from_slice(&fs::read(run.join("front.json")).unwrap()).unwrap();
    front["designs"][0]["id"].as_str().unwrap().to_owned()
}

fn made() -> (TempDir, Value) {
    let (room, run) = copied_run();
    let id = first_design(&run);
    sheet(&run, &id).success();
    let text = fs::read(run.join(format!("sheets/{id}.json"))).unwrap();
    (room, serde_json::from_slice(&text).unwrap())
}

fn number(value: &Value, path: &str) -> f64 {
    path.split('.')
        .fold(value, |v, key| &v[key])
        .as_f64()
        .unwrap_or_else(|| panic!("{path}"))
}

#[test]
fn law_devices_are_whole_fingers_on_the_grid() {
    let (_room, sheet) = made();
    let grid = number(&sheet, "rules.grid_m");
    let mut devices = vec![];
    for side in ["nmos", "pmos"] {
        let switch = &sheet["switches"][side]["fingers"];
        assert_eq!(switch["fingers"].as_u64().unwrap() % 2, 0);
        devices.push(switch);
        devices.extend(
            sheet["drivers"]
                .as_array()
                .unwrap()
                .iter()
                .map(|stage| &stage[side]["fingers"]),
        );
    }
    for device in devices {
        let finger = number(device, "finger_m");
        let steps = finger / grid;
        assert!((steps - steps.round()).abs() < ON_GRID, "{device}");
        assert!(finger <= number(&sheet, "rules.most_finger_m") * (1.0 + EXACT));
        let cut = finger * number(device, "fingers") * number(device, "devices");
        assert!((cut / number(device, "width_m") - 1.0).abs() < EXACT);
    }
    for length in ["spiral.trace_m", "spiral.diameter_m"] {
        let steps = number(&sheet, length) / grid;
        assert!((steps - steps.round()).abs() < ON_GRID, "{length}");
    }
    let series = &sheet["series_capacitor"]["units"];
    let unit = number(&sheet, "rules.capacitor_unit_f");
    let whole = number(series, "units") * unit;
    assert!((whole / number(series, "capacitance_f") - 1.0).abs() < EXACT);
}

#[test]
fn law_currents_agree_with_the_powers() {
    let (_room, sheet) = made();
    let figures = &sheet["evaluation"];
    let supply_v = number(figures, "design.supply_v");
    let mean = number(&sheet, "currents.supply.mean_a");
    assert!((mean * supply_v / number(figures, "dc_power_w") - 1.0).abs() < SAMPLED);
    // What comes from the supply goes to ground: the series capacitor passes no mean.
    assert!((mean / number(&sheet, "currents.ground.mean_a") - 1.0).abs() < SAMPLED);
    let rms = number(&sheet, "currents.inductor.rms_a");
    assert!((rms / number(figures, "network_current_rms_a") - 1.0).abs() < SAMPLED);
    for part in ["supply", "ground", "drain", "inductor", "antenna"] {
        let current = &sheet["currents"][part];
        let (rms, peak) = (number(current, "rms_a"), number(current, "peak_a"));
        assert!(
            rms >= number(current, "mean_a").abs() && peak >= rms,
            "{part}"
        );
    }
}

#[test]
fn law_metal_carries_the_larger_of_mean_and_rms() {
    let (_room, sheet) = made();
    let limit = number(&sheet, "rules.top_current_a_m");
    let parts = [
        "supply",
        "ground",
        "drain",
        "inductor",
        "series_capacitor",
        "shunt_capacitor",
        "antenna",
    ];
    for part in parts {
        let current = &sheet["currents"][part];
        let larger = number(current, "rms_a").max(number(current, "mean_a").abs());
        assert!((number(current, "top_metal_m") * limit / larger - 1.0).abs() < EXACT);
    }
    // A strip between two fingers takes the current of both: 2/(n M) of the side's.
    for (side, current) in [("nmos", "ground"), ("pmos", "supply")] {
        let cut = &sheet["switches"][side]["fingers"];
        let fingers = number(cut, "fingers") * number(cut, "devices");
        let strip = 2.0 * number(&sheet["currents"][current], "rms_a") / fingers;
        let needed = strip / number(&sheet, "rules.finger_current_a_m");
        let metal = &sheet["strips"][side];
        assert!((number(metal, "needed_m") / needed - 1.0).abs() < EXACT);
        assert!(needed <= number(metal, "drawn_m") * (1.0 + EXACT));
        let route = number(&sheet, "routing_resistance_ohm");
        assert!(number(metal, "resistance_ohm") < route);
    }
}

#[test]
fn law_changes_are_of_the_drawn_stage() {
    let (_room, sheet) = made();
    let changes = sheet["changes"].as_array().unwrap();
    assert!(changes.len() > 20);
    for change in changes {
        let name = change["figure"].as_str().unwrap();
        let drawn = name.split('.').fold(&sheet["evaluation"], |v, k| &v[k]);
        assert_eq!(&change["drawn"], drawn, "{name}");
        if let (Some(a), Some(b)) = (change["searched"].as_f64(), change["drawn"].as_f64()) {
            assert!(
                name.ends_with("lowest_drain_v") || (a - b).abs() < 0.1 * a.abs(),
                "{name}"
            );
        }
    }
}

#[test]
fn regress_files_are_written_whole_and_the_same_each_time() {
    let (_room, run) = copied_run();
    let id = first_design(&run);
    let read = || {
        sheet(&run, &id).success();
        ENDINGS.map(|end| fs::read(run.join(format!("sheets/{id}.{end}"))).unwrap())
    };
    let once = read();
    assert_eq!(once, read());
    let text = String::from_utf8(once[0].clone()).unwrap();
    for part in [
        "## Circuit",
        "Limits of the study",
        "Currents of a leg",
        "Loss budget",
        "Assumptions",
        "Headline figures",
        "Voltages against ratings",
        "To be checked",
        "RF burns",
    ] {
        assert!(text.contains(part), "{part}");
    }
    let mut table = csv::Reader::from_reader(once[1].as_slice());
    let rows: Vec<csv::StringRecord> = table.records().map(Result::unwrap).collect();
    let json: Value = serde_json::from_slice(&once[2]).unwrap();
    let supply = json["evaluation"]["design"]["supply_v"].to_string();
    let row = rows.iter().find(|r| &r[0] == "evaluation.design.supply_v");
    assert_eq!(&row.unwrap()[1], supply);
    let drawing = String::from_utf8(once[3].clone()).unwrap();
    assert!(drawing.starts_with("<svg") && drawing.trim_end().ends_with("</svg>"));
    assert_eq!(
        fs::read_dir(run.join("sheets")).unwrap().count(),
        ENDINGS.len()
    );
}

#[test]
fn regress_unknown_designs_and_damaged_runs() {
    let (_room, run) = copied_run();
    let id = first_design(&run);
    let stderr = |a: &assert_cmd::assert::Assert| {
        String::from_utf8_lossy(&a.get_output().stderr).into_owned()
    };
    let unknown = sheet(&run, &format!("{id}9")).code(2);
    assert!(stderr(&unknown).contains(&format!("did you mean \"{id}\"")));
    assert!(!run.join("sheets").exists());
    // What is drawn comes from records that carry a digest.
    let record = fs::read_to_string(run.join("run.json")).unwrap();
    let altered = record.replacen("\"legs\":1", "\"legs\":9", 1);
    assert_ne!(altered, record);
    fs::write(run.join("run.json"), altered).unwrap();
    let damaged = sheet(&run, &id).code(1);
    assert!(
        stderr(&damaged).contains("run.json: its study is damaged: it does not match its hash")
    );
    fs::write(run.join("run.json"), record).unwrap();
    let cell = run.join(format!("cells/{}.json", id.split_once('-').unwrap().0));
    fs::write(&cell, "{").unwrap();
    let damaged = sheet(&run, &id).code(1);
    assert!(stderr(&damaged).contains(".json: is damaged"));
    fs::write(run.join("run.json"), "{").unwrap();
    let damaged = sheet(&run, &id).code(1);
    assert!(stderr(&damaged).contains("run.json"));
    assert!(!run.join("sheets").exists());
}

#[test]
fn regress_a_technology_without_rules_is_told_what_it_lacks() {
    let (_room, run) = copied_run();
    let id = first_design(&run);
    let name = run.join("run.json");
    let mut record: Value = serde_json::from_slice(&fs::read(&name).unwrap()).unwrap();
    let rules = record["technology"]["rules"].as_object_mut().unwrap();
    rules.remove("grid_m");
    rules.remove("capacitor_unit_f");
    record["technology_hash"] = widefront::run::digest(&record["technology"])
        .unwrap()
        .into();
    fs::write(&name, record.to_string()).unwrap();
    let refused = sheet(&run, &id).code(2);
    let told = String::from_utf8_lossy(&refused.get_output().stderr).into_owned();
    assert!(
        told.contains("[rules] needs grid, capacitor_unit\n  help:"),
        "{told}"
    );
}
