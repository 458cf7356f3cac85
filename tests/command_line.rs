//! The commands as a user types them: exit codes, what goes where.

use assert_cmd::Command;
use std::path::Path;

fn widefront() -> Command {
    let mut command = Command::cargo_bin("widefront").unwrap();
    command.current_dir(env!("CARGO_MANIFEST_DIR"));
    command
}

fn files(folder: &str) -> Vec<std::path::PathBuf> {
    let mut files: Vec<_> = std::fs::read_dir(Path::new(env!("CARGO_MANIFEST_DIR")).join(folder))
        .unwrap()
        .map(|e| e.unwrap().path())
        .filter(|p| p.extension().is_some_and(|e| e == "toml"))
        .collect();
    files.sort();
    files
}

#[test]
fn law_every_study_of_ours_checks_and_its_design_evaluates() {
    let studies = files("configs/studies");
    assert!(studies.len() >= 4);
    for study in studies {
        widefront().arg("check").arg(&study).assert().success();
        let output = widefront()
            .args(["evaluate", "--variant", "1", "--json"])
            .arg(&study)
            .assert()
            .success();
        let json: serde_json::Value = serde_json::from_slice(&output.get_output().stdout).unwrap();
        assert!(
            json["efficiency"].as_f64().unwrap() > 0.2,
            "{}",
            study.display()
        );
        assert!(json["losses_w"]["conduction"].as_f64().unwrap() > 0.0);
        assert!(json["design"]["supply_v"].as_f64().unwrap() > 0.5);
    }
}

#[test]
fn law_bad_input_is_told_on_standard_error_with_code_two() {
    let bad = files("tests/studies/bad");
    assert!(bad.len() >= 30);
    for study in bad {
        let output = widefront().arg("check").arg(&study).assert().code(2);
        let output = output.get_output();
        assert!(output.stdout.is_empty());
        let text = String::from_utf8(output.stderr.clone()).unwrap();
        assert!(
            text.starts_with("error: ") && !text.contains("panicked"),
            "{text}"
        );
    }
    widefront()
        .arg("check")
        .arg("no/such/study.toml")
        .assert()
        .code(2);
    let temp = tempfile::tempdir().unwrap();
    let pipe = temp.path().join("pipe.toml");
    assert!(
        std::process::Command::new("mkfifo")
            .arg(&pipe)
            .status()
            .unwrap()
            .success()
    );
    widefront().arg("check").arg(&pipe).assert().code(2);
    widefront().arg("no-such-command").assert().code(2);
    widefront()
        .args(["search", "configs/studies/quick.toml", "--part", "4/3"])
        .assert()
        .code(2);
}

#[test]
fn law_set_changes_the_design() {
    let power = |set: &[&str]| {
        let mut command = widefront();
        command.args(["evaluate", "configs/studies/quick.toml", "--json"]);
        for s in set {
            command.args(["--set", s]);
        }
        let output = command.assert().success();
        let json: serde_json::Value = serde_json::from_slice(&output.get_output().stdout).unwrap();
        json["output_power_w"].as_f64().unwrap()
    };
    assert!(power(&["supply=1.0V"]) < power(&["supply=1.2 V"]));
    let output = widefront()
        .args([
            "evaluate",
            "configs/studies/quick.toml",
            "--set",
            "suply=1V",
        ])
        .assert()
        .code(2);
    let text = String::from_utf8(output.get_output().stderr.clone()).unwrap();
    assert!(text.contains("supply"));
}

#[test]
fn law_a_design_that_cannot_exist_says_why() {
    let output = widefront()
        .args([
            "evaluate",
            "configs/studies/quick.toml",
            "--json",
            "--set",
            "diameter=100um",
            "--set",
            "turns=5",
            "--set",
            "trace=30um",
        ])
        .assert()
        .success();
    let json: serde_json::Value = serde_json::from_slice(&output.get_output().stdout).unwrap();
    assert_eq!(json["feasible"], false);
    assert!(json["reason"].as_str().unwrap().starts_with("spiral"));
    assert!(json.get("efficiency").is_none());
}

#[test]
fn law_the_map_shows_the_best_of_each_cell_from_a_power_on() {
    const LEAST_DBM: f64 = 14.0;
    let room = tempfile::tempdir().unwrap();
    let reference = Path::new(env!("CARGO_MANIFEST_DIR")).join("results/reference");
    std::fs::create_dir(room.path().join("cells")).unwrap();
    for name in ["run.json", "front.json", "cells.csv"] {
        std::fs::copy(reference.join(name), room.path().join(name)).unwrap();
    }
    let mut best = Vec::new();
    for cell in 0..4 {
        let name = format!("cells/{cell:05}.json");
        let bytes = std::fs::read(reference.join(&name)).unwrap();
        std::fs::write(room.path().join(&name), &bytes).unwrap();
        let record: serde_json::Value = serde_json::from_slice(&bytes).unwrap();
        let figure = |design: &serde_json::Value, name: &str| design[name].as_f64().unwrap();
        let strong = record["record"]["designs"].as_array().unwrap().iter();
        let strong = strong.filter(|d| figure(d, "output_power_dbm") >= LEAST_DBM);
        best.push(strong.map(|d| figure(d, "efficiency")).fold(0.0, f64::max));
    }
    let run = room.path().to_str().unwrap();
    widefront()
        .args(["report", run, "--map-power", "14 dBm"])
        .assert()
        .success();
    let map = std::fs::read_to_string(room.path().join("figures/map.svg")).unwrap();
    assert!(map.contains("from 14 dBm on"), "{map}");
    for efficiency in best {
        let shown = format!("\n{:.1}\n", 100.0 * efficiency);
        assert!(efficiency == 0.0 || map.contains(&shown), "{shown}");
    }
    let refused = widefront()
        .args(["report", run, "--map-power", "14 mm"])
        .assert()
        .code(2);
    let said = String::from_utf8_lossy(&refused.get_output().stderr).into_owned();
    assert!(said.contains("--map-power: read \"14 mm\""), "{said}");
}
