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
