//! Studies that list several values: the product of their variants in one run.

use assert_cmd::Command;
use serde_json::Value;
use std::collections::BTreeSet;
use std::fs;
use std::path::{Path, PathBuf};
use tempfile::TempDir;

const LEGS: &str = "legs = [1, 2]";
const FREQUENCIES: &str = "frequency = [\"0.9 GHz\", \"2.45 GHz\"]";

/// The demo's sweep, small: two bands, two numbers of legs, one supply, two loaded Q, one number of turns.
fn study(room: &TempDir, name: &str, changes: &[(&str, &str)]) -> PathBuf {
    let configs = Path::new(env!("CARGO_MANIFEST_DIR")).join("configs");
    let mut text = fs::read_to_string(configs.join("studies/sweep.toml")).unwrap();
    let technology = configs.join("technology/demo55.toml");
    let small = [
        ("\"../technology/demo55.toml\"", &*format!("{technology:?}")),
        ("[\"-10 degC\", \"45 degC\"]", "\"27 degC\""),
        ("frequency = [\"2.45 GHz\", \"0.87 GHz\"]", FREQUENCIES),
        (
            "{ from = \"1.0 V\", to = \"1.2 V\", steps = 2 }",
            "\"1.2 V\"",
        ),
        ("{ from = 1, to = 3 }", "2"),
        ("{ from = 3, to = 6 }", "4"),
    ];
    for (from, to) in small.iter().chain(changes) {
        assert!(text.contains(from), "{from}");
        text = text.replacen(from, to, 1);
    }
    let path = room.path().join(format!("{name}.toml"));
    fs::write(&path, text).unwrap();
    path
}

fn widefront(arguments: &[&str]) -> assert_cmd::assert::Assert {
    Command::cargo_bin("widefront")
        .unwrap()
        .args(arguments)
        .assert()
}

fn searched(study: &Path, out: &Path, more: &[&str]) {
    let mut arguments = vec!["search", study.to_str().unwrap(), "--quiet", "--out"];
    arguments.push(out.to_str().unwrap());
    arguments.extend(more);
    widefront(&arguments).success();
}

fn json(path: &Path) -> Value {
    serde_json::from_slice(&fs::read(path).unwrap()).unwrap()
}

/// Designs of a cell without what only says where they stand.
fn designs(run: &Path, cell: usize) -> Vec<Value> {
    let record = json(&run.join(format!("cells/{cell:05}.json")));
    let mut designs = record["record"]["designs"].as_array().unwrap().clone();
    for design in &mut designs {
        let fields = design.as_object_mut().unwrap();
        for place in ["id", "cell", "variant"] {
            fields.remove(place);
        }
    }
    designs
}

#[test]
fn law_a_variant_s_cells_are_those_of_its_study_alone() {
    let room = TempDir::new().unwrap();
    let run = room.path().join("run");
    searched(&study(&room, "all", &[]), &run, &[]);
    let (mut first, mut compared) = (0, 0);
    for legs in [1, 2] {
        for frequency in ["0.9 GHz", "2.45 GHz"] {
            let name = format!("{legs}-{}", frequency.len());
            let alone = study(
                &room,
                &name,
                &[
                    (LEGS, &format!("legs = {legs}")),
                    (FREQUENCIES, &format!("frequency = \"{frequency}\"")),
                ],
            );
            let own = room.path().join(&name);
            searched(&alone, &own, &[]);
            for cell in 0..2 {
                let expected = designs(&own, cell);
                compared += expected.len();
                assert_eq!(
                    designs(&run, first + cell),
                    expected,
                    "{legs} legs, {frequency}"
                );
            }
            first += 2;
        }
    }
    assert!(compared > 100, "{compared}");
    assert_eq!(json(&run.join("run.json"))["cells"], first);
}

#[test]
fn regress_what_one_of_several_technologies_lacks_names_it() {
    let room = TempDir::new().unwrap();
    let configs = Path::new(env!("CARGO_MANIFEST_DIR")).join("configs/technology");
    let [one, two] =
        ["demo55", "open130"].map(|t| format!("{:?}", configs.join(format!("{t}.toml"))));
    let changes = [
        (one.as_str(), format!("[{one}, {two}]")),
        (
            "device = \"core\"",
            "device = [\"core\", \"io\"]".to_owned(),
        ),
    ];
    let changes = changes.each_ref().map(|(from, to)| (*from, to.as_str()));
    let file = study(&room, "two", &changes);
    let refused = widefront(&["check", file.to_str().unwrap()]).code(2);
    let said = String::from_utf8_lossy(&refused.get_output().stderr).into_owned();
    assert!(
        said.contains("device: read \"io\"")
            && said.contains("\n  with ")
            && said.contains("demo55.toml"),
        "{said}"
    );
}

#[test]
fn regress_technologies_of_one_name_are_refused() {
    let room = TempDir::new().unwrap();
    let technology = Path::new(env!("CARGO_MANIFEST_DIR")).join("configs/technology/demo55.toml");
    fs::copy(&technology, room.path().join("copy.toml")).unwrap();
    let one = format!("{technology:?}");
    let file = study(&room, "two", &[(&one, &format!("[{one}, \"copy.toml\"]"))]);
    let refused = widefront(&["check", file.to_str().unwrap()]).code(2);
    let said = String::from_utf8_lossy(&refused.get_output().stderr).into_owned();
    assert!(
        said.contains("demo55.toml and of ")
            && said.contains("copy.toml; allowed: names that differ"),
        "{said}"
    );
}

#[test]
fn law_threads_and_parts_change_no_byte_and_groups_keep_their_fronts() {
    let room = TempDir::new().unwrap();
    let file = study(&room, "all", &[]);
    let run = |name: &str| room.path().join(name);
    searched(&file, &run("one"), &["--threads", "1"]);
    for part in ["1/2", "2/2"] {
        searched(&file, &run(&part.replace('/', "-")), &["--part", part]);
    }
    let paths = ["joined", "1-2", "2-2"].map(|n| run(n).to_str().unwrap().to_owned());
    let mut arguments = vec!["join"];
    arguments.extend(paths.iter().map(String::as_str));
    widefront(&arguments).success();
    for name in ["front.csv", "cells.csv"] {
        let bytes = |at: &str| fs::read(run(at).join(name)).unwrap();
        assert_eq!(bytes("one"), bytes("joined"), "{name}");
    }
    let legs = |run: &Path| -> Vec<u64> {
        let front = json(&run.join("front.json"));
        let of = |d: &Value| d["variant"]["legs"].as_u64().unwrap();
        front["designs"]
            .as_array()
            .unwrap()
            .iter()
            .map(of)
            .collect()
    };
    let by_legs = legs(&run("one"));
    assert_eq!(by_legs.iter().collect::<BTreeSet<_>>().len(), 2);
    let over_all = study(&room, "over", &[("fronts_by = [\"legs\"]", "")]);
    searched(&over_all, &run("over"), &[]);
    assert!(legs(&run("over")).len() < by_legs.len());
}

#[test]
fn law_designs_of_a_sweep_have_sheets_of_their_own_variant() {
    let room = TempDir::new().unwrap();
    let run = room.path().join("run");
    searched(&study(&room, "all", &[]), &run, &[]);
    let front = json(&run.join("front.json"));
    for legs in [1, 2] {
        let of = |d: &&Value| d["variant"]["legs"] == legs;
        let design = front["designs"]
            .as_array()
            .unwrap()
            .iter()
            .find(of)
            .unwrap();
        let id = design["id"].as_str().unwrap();
        widefront(&["sheet", run.to_str().unwrap(), id]).success();
        let sheet = json(&run.join(format!("sheets/{id}.json")));
        assert_eq!(sheet["legs"], legs);
        assert_eq!(sheet["frequency_hz"], design["variant"]["frequency_hz"]);
    }
}

#[test]
fn regress_evaluate_asks_which_variant() {
    let room = TempDir::new().unwrap();
    let file = study(&room, "all", &[]);
    let file = file.to_str().unwrap();
    for (more, code, words) in [
        (vec![], 2, "read no variant"),
        (vec!["--variant", "5"], 2, "allowed: 1 to 4"),
        (vec!["--variant", "2"], 0, ""),
    ] {
        let mut arguments = vec!["evaluate", file, "--json"];
        arguments.extend(more);
        let ended = widefront(&arguments).code(code);
        let said = String::from_utf8_lossy(&ended.get_output().stderr).into_owned();
        assert!(said.contains(words), "{said}");
    }
    let checked = widefront(&["check", file]).success();
    let text = String::from_utf8_lossy(&checked.get_output().stdout).into_owned();
    assert!(text.contains("8: 2 of each of 4 variants") && text.contains("variant 4"));
}
