//! Searches: a closed-form optimum, the same bytes at any thread count, going on after a stop.

mod common;

use assert_cmd::Command;
use std::f64::consts::PI;
use std::fs;
use std::path::{Path, PathBuf};
use std::sync::atomic::AtomicBool;
use widefront::evaluate::{Setup, evaluate};
use widefront::search::Context;
use widefront::search::cell::search_cell;
use widefront::search::space::cells;
use widefront::study::{Design, Network, Objective, Range, Space};
use widefront::technology::Inductor;

/// What the issue of this program asks for.
const WIDTH_TOLERANCE: f64 = 1e-6;

/// Resistance ρ/W against gate charge bW: the loss (R + ρ/W) + κ(R + ρ/W)² W of a tuned stage, κ = π²b/(2V²), is least at
/// W = √(ρ(1 + κρ)/κ)/R. Only the access resistance is left of the transistors, only the gates of the charges.
#[test]
fn published_width_of_least_loss_in_closed_form() {
    let (rho, gate_f_m, supply, hz) = (500e-6, 1e-9, 1.0, 1e9);
    let mut technology = common::ideal_technology();
    let pair = technology.transistors.get_mut("core").unwrap();
    for device in [&mut pair.nmos, &mut pair.pmos] {
        device.access_resistance_ohm_m = rho;
        device.gate_capacitance_f_m = gate_f_m;
    }
    let mut study = common::direct_study();
    study.frequency_hz = hz;
    study.stage.network = Network::Direct;
    study.search.objectives = vec![Objective::Efficiency];
    technology.inductor = Inductor::Fixed {
        quality: 1e14,
        area_base_m2: 1e-8,
        area_slope_m2_h: 0.0,
    };
    // 0.5 V swing on its own rail: below the sum of the thresholds, so no overlap current.
    let space = Space {
        supply_v: Range::Fixed(supply),
        loaded_q: Range::Fixed(5000.0),
        nmos_width_m: Range::Free {
            from: 1e-5,
            to: 1e-2,
        },
        width_ratio: Range::Fixed(1.0),
        turns: None,
        trace_m: None,
        diameter_m: None,
        resistance_ohm: None,
        reactance: Range::Fixed(0.0),
        dead_time: Range::Fixed(0.0),
        stages: Range::Fixed(1.0),
    };
    let setup = Setup::new(&study, &technology).unwrap();
    let context = Context::new(&setup, &space, &study.search.objectives, 3);
    let cell = cells(&space)[0];
    let front = search_cell(&context, &cell, &AtomicBool::new(false)).unwrap();
    assert_eq!(front.points.len(), 1);
    // Progress counts what the cells count.
    assert!(front.evaluations > 0 && context.spent() == front.evaluations);
    let found = front.points[0].evaluation.design.nmos_width_m;
    // Both gates at full swing, B = 1, κ_driver = 0.
    let charge_w_m = hz * supply * supply * 2.0 * gate_f_m;
    let kappa = PI * PI * charge_w_m / (2.0 * supply * supply);
    let expected = (rho * (1.0 + kappa * rho) / kappa).sqrt() / 50.0;
    assert!(
        (found / expected - 1.0).abs() < WIDTH_TOLERANCE,
        "{found} instead of {expected}"
    );
    // And it is a maximum: a per cent either way is worse.
    let efficiency = |nmos_width_m: f64| {
        let design = Design {
            nmos_width_m,
            loaded_q: 5000.0,
            ..common::direct_design()
        };
        evaluate(&setup, &design).figures.unwrap().efficiency
    };
    assert!(efficiency(found) > efficiency(0.99 * found));
    assert!(efficiency(found) > efficiency(1.01 * found));
}

fn study_path(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("configs/studies")
        .join(name)
}

fn search(arguments: &[&str]) -> assert_cmd::assert::Assert {
    Command::cargo_bin("widefront")
        .unwrap()
        .arg("search")
        .arg(study_path("quick.toml"))
        .args(arguments)
        .assert()
}

fn read(folder: &Path, name: &str) -> Vec<u8> {
    fs::read(folder.join(name)).unwrap()
}

#[test]
fn law_the_same_bytes_at_any_thread_count_in_parts_and_after_damage() {
    let temp = tempfile::tempdir().unwrap();
    let at = |name: &str| temp.path().join(name);
    let text = |path: &Path| path.to_str().unwrap().to_owned();
    let one = at("one");
    search(&["--quiet", "--threads", "1", "--out", &text(&one)]).success();
    let front = read(&one, "front.csv");
    assert!(front.len() > 10_000);

    let two = at("two");
    search(&["--quiet", "--threads", "2", "--out", &text(&two)]).success();
    assert!(read(&two, "front.csv") == front);

    // A second run into the folder is refused, and changes nothing.
    search(&["--quiet", "--out", &text(&two)]).code(2);
    assert!(read(&two, "front.csv") == front);

    // A cell lost, one cut short, one altered: named, redone, the same bytes.
    let cells = two.join("cells");
    fs::remove_file(cells.join("00000.json")).unwrap();
    let cut = read(&two, "cells/00001.json");
    fs::write(cells.join("00001.json"), &cut[..cut.len() / 2]).unwrap();
    let altered = String::from_utf8(read(&two, "cells/00002.json")).unwrap();
    let altered = altered.replacen("\"efficiency\":0.", "\"efficiency\":0.9", 1);
    fs::write(cells.join("00002.json"), altered).unwrap();
    let resumed = search(&["--resume", "--out", &text(&two)]).success();
    let complaints = String::from_utf8(resumed.get_output().stderr.clone()).unwrap();
    assert!(complaints.contains("00001.json") && complaints.contains("00002.json"));
    assert!(complaints.contains("digest does not match"));
    assert!(read(&two, "front.csv") == front);

    // Another study does not go on with this run; what differs is said.
    let other = Command::cargo_bin("widefront")
        .unwrap()
        .arg("search")
        .arg(study_path("stacked.toml"))
        .args(["--resume", "--out", &text(&two)])
        .assert()
        .code(1);
    let complaints = String::from_utf8(other.get_output().stderr.clone()).unwrap();
    assert!(complaints.contains("another study"));

    // Parts, joined.
    let parts: Vec<PathBuf> = (1..=3).map(|k| at(&format!("part{k}"))).collect();
    for (k, part) in parts.iter().enumerate() {
        let share = format!("{}/3", k + 1);
        search(&["--quiet", "--part", &share, "--out", &text(part)]).success();
    }
    let join = |parts: &[PathBuf]| {
        Command::cargo_bin("widefront")
            .unwrap()
            .arg("join")
            .arg(at("joined"))
            .args(parts)
            .assert()
    };
    let missing = join(&parts[..2]).code(1);
    let complaints = String::from_utf8(missing.get_output().stderr.clone()).unwrap();
    assert!(complaints.contains("in none of the parts: 2; part 3/3 is not given"));
    let lost = parts[2].join("cells/00002.json");
    let kept = fs::read(&lost).unwrap();
    fs::remove_file(&lost).unwrap();
    let missing = join(&parts).code(1);
    let complaints = String::from_utf8(missing.get_output().stderr.clone()).unwrap();
    assert!(complaints.contains("in none of the parts: 2; part 3/3 is not finished"));
    fs::write(&lost, &kept[1..]).unwrap();
    let damaged = join(&parts).code(1);
    let complaints = String::from_utf8(damaged.get_output().stderr.clone()).unwrap();
    assert!(complaints.contains("part3/cells/00002.json: is damaged"));
    fs::write(&lost, &kept).unwrap();
    // A part of another study is refused.
    let record = parts[1].join("run.json");
    let sound = fs::read_to_string(&record).unwrap();
    let mut other: serde_json::Value = serde_json::from_str(&sound).unwrap();
    other["study"]["antenna_loss_db"] = 1.0.into();
    other["study_hash"] = "another".into();
    fs::write(&record, other.to_string()).unwrap();
    let foreign = join(&parts).code(1);
    let complaints = String::from_utf8(foreign.get_output().stderr.clone()).unwrap();
    assert!(
        complaints.contains("part2") && complaints.contains("another study (study.antenna_loss_db"),
        "{complaints}"
    );
    fs::write(&record, sound).unwrap();
    join(&parts).success();
    assert!(read(&at("joined"), "front.csv") == front);
    // A join that was broken off is done again.
    fs::remove_file(at("joined").join("cells/00002.json")).unwrap();
    fs::remove_file(at("joined").join("front.csv")).unwrap();
    join(&parts).success();
    assert!(read(&at("joined"), "front.csv") == front);
    // Into a folder of another run it is refused.
    let refused = Command::cargo_bin("widefront")
        .unwrap()
        .arg("join")
        .arg(&parts[0])
        .args(&parts)
        .assert()
        .code(1);
    let complaints = String::from_utf8(refused.get_output().stderr.clone()).unwrap();
    assert!(complaints.contains("part \"1/3\""), "{complaints}");
    assert!(read(&at("joined"), "cells.csv") == read(&one, "cells.csv"));
}

#[test]
fn law_what_cannot_be_written_is_an_error_and_no_panic() {
    let temp = tempfile::tempdir().unwrap();
    let file = temp.path().join("a-file");
    fs::write(&file, "not a folder").unwrap();
    let inside = file.join("run");
    search(&["--quiet", "--out", inside.to_str().unwrap()]).code(1);
    let foreign = temp.path().join("foreign");
    fs::create_dir(&foreign).unwrap();
    fs::write(foreign.join("thesis.txt"), "three years of work").unwrap();
    search(&["--quiet", "--out", foreign.to_str().unwrap()]).code(2);
    assert_eq!(
        fs::read(foreign.join("thesis.txt")).unwrap(),
        b"three years of work"
    );
    search(&["--quiet", "--resume", "--out", foreign.to_str().unwrap()]).code(1);
    // What a search leaves that was killed before it wrote its record is no obstacle.
    let early = temp.path().join("early");
    fs::create_dir_all(early.join("cells")).unwrap();
    fs::write(early.join("lock"), "").unwrap();
    let leftover = early.join(".run.json.Ab12Cd");
    fs::write(&leftover, "{").unwrap();
    search(&["--quiet", "--part", "1/4", "--out", early.to_str().unwrap()]).success();
    assert!(!leftover.exists());
    // Cells of who knows which study are not taken for this one's.
    fs::remove_file(early.join("run.json")).unwrap();
    for list in ["front.csv", "front.json", "cells.csv"] {
        fs::remove_file(early.join(list)).unwrap();
    }
    search(&["--quiet", "--part", "1/4", "--out", early.to_str().unwrap()]).code(2);
}
