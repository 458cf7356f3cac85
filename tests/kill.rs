//! A search that is killed at any moment goes on to the same bytes; signals end it with what is finished kept.

#[path = "common/program.rs"]
mod program;

use program::{STUDY, search};
use std::fs;
use std::io::{BufRead, BufReader};
use std::path::Path;
use std::process::{Child, Command, Stdio};
use std::time::{Duration, Instant};

/// Kills in an ordinary run; more by the environment variable WIDEFRONT_KILLS.
const KILLS: u64 = 20;
/// A signal ends a search within a second; one more for a machine that is busy with other tests.
const LONGEST_END: Duration = Duration::from_secs(2);

fn program(study: &Path, out: &Path, resume: bool) -> Command {
    let mut command = search(study, out, resume);
    command.stderr(Stdio::null());
    command
}

fn start(out: &Path) -> Child {
    program(Path::new(STUDY), out, out.join("run.json").exists())
        .spawn()
        .unwrap()
}

fn unbroken(folder: &Path) -> (Vec<u8>, Duration) {
    let out = folder.join("unbroken");
    let began = Instant::now();
    assert!(
        program(Path::new(STUDY), &out, false)
            .status()
            .unwrap()
            .success()
    );
    let front = fs::read(out.join("front.csv")).unwrap();
    (front, began.elapsed())
}

/// The next of a fixed sequence in 0..1 (a linear congruential generator; Knuth's multiplier).
fn next(state: &mut u64) -> f64 {
    *state = state
        .wrapping_mul(6_364_136_223_846_793_005)
        .wrapping_add(1_442_695_040_888_963_407);
    (*state >> 11) as f64 / (1u64 << 53) as f64
}

#[test]
fn law_a_killed_search_goes_on_to_the_same_bytes() {
    let temp = tempfile::tempdir().unwrap();
    let (front, whole) = unbroken(temp.path());
    let kills = std::env::var("WIDEFRONT_KILLS").map_or(KILLS, |text| text.parse().unwrap());
    let mut state = 7;
    let (mut killed, mut sittings, mut finished) = (0, 0, 0);
    while killed < kills {
        let out = temp.path().join(format!("run-{finished}"));
        let mut child = start(&out);
        sittings += 1;
        assert!(sittings < 10 * kills, "it is hardly ever caught at work");
        std::thread::sleep(whole.mul_f64(1.1 * next(&mut state)));
        // SIGKILL; an already ended search is no error here.
        child.kill().unwrap();
        if child.wait().unwrap().success() {
            assert_is_whole(&out, &front);
            finished += 1;
        } else {
            killed += 1;
        }
    }
    let out = temp.path().join(format!("run-{finished}"));
    assert!(start(&out).wait().unwrap().success());
    assert_is_whole(&out, &front);
    println!(
        "killed {killed} times in {sittings} sittings of {} runs",
        finished + 1
    );
}

fn assert_is_whole(out: &Path, front: &[u8]) {
    assert!(fs::read(out.join("front.csv")).unwrap() == front);
    for room in [".", "cells", "figures"] {
        for entry in fs::read_dir(out.join(room)).unwrap() {
            let name = entry.unwrap().file_name().into_string().unwrap();
            assert!(!name.starts_with('.'), "{room}/{name} was left behind");
        }
    }
}

/// Whether a folder is there and holds a cell, not the temporary of one.
fn holds_files(folder: &Path) -> bool {
    let mut entries = fs::read_dir(folder).into_iter().flatten().flatten();
    entries.any(|e| !e.file_name().to_string_lossy().starts_with('.'))
}

fn send(signal: &str, child: &Child) {
    let sent = Command::new("kill")
        .args(["-s", signal, &child.id().to_string()])
        .status()
        .unwrap();
    assert!(sent.success());
}

/// Sends a signal; the exit code, which has to come soon.
fn ended_by(signal: &str, child: &mut Child) -> Option<i32> {
    send(signal, child);
    let began = Instant::now();
    loop {
        if let Some(status) = child.try_wait().unwrap() {
            return status.code();
        }
        assert!(
            began.elapsed() < LONGEST_END,
            "SIG{signal} does not end it in {LONGEST_END:?}"
        );
        std::thread::sleep(Duration::from_millis(5));
    }
}

#[test]
fn law_signals_end_a_search_with_what_is_finished_kept() {
    let temp = tempfile::tempdir().unwrap();
    let (front, _) = unbroken(temp.path());
    for signal in ["INT", "TERM"] {
        let out = temp.path().join(signal);
        let mut child = start(&out);
        // With one cell finished, and its fellow soon, two or three are to do.
        while !holds_files(&out.join("cells")) {
            std::thread::sleep(Duration::from_millis(5));
        }
        assert_eq!(ended_by(signal, &mut child), Some(1));
        let run: serde_json::Value =
            serde_json::from_slice(&fs::read(out.join("run.json")).unwrap()).unwrap();
        assert_eq!(run["ended_because"], "stopped");
        assert!(
            program(Path::new(STUDY), &out, true)
                .status()
                .unwrap()
                .success()
        );
        assert!(fs::read(out.join("front.csv")).unwrap() == front);
    }
}

/// Spirals of many turns take many seconds to tabulate, and nothing looks at signals meanwhile.
#[test]
fn law_a_signal_before_the_first_cell_ends_it_too() {
    let temp = tempfile::tempdir().unwrap();
    let (study, out) = (temp.path().join("turns.toml"), temp.path().join("run"));
    let configs = concat!(env!("CARGO_MANIFEST_DIR"), "/configs/");
    let text = fs::read_to_string(STUDY).unwrap();
    let text = text
        .replace("../", configs)
        .replace("{ from = 1, to = 3 }", "{ from = 1, to = 16 }");
    fs::write(&study, text).unwrap();
    let mut child = program(&study, &out, false).spawn().unwrap();
    while !out.join("run.json").exists() {
        std::thread::sleep(Duration::from_millis(5));
    }
    assert_eq!(ended_by("TERM", &mut child), Some(1));
    assert!(!holds_files(&out.join("cells")));
}

/// A terminal that is closed sends SIGHUP; under `nohup` a search goes on all the same.
#[test]
fn law_nohup_keeps_a_search_going() {
    let temp = tempfile::tempdir().unwrap();
    let out = temp.path().join("run");
    let plain = program(Path::new(STUDY), &out, false);
    let mut child = Command::new("nohup")
        .arg(plain.get_program())
        .args(plain.get_args())
        .stdout(Stdio::null())
        .stderr(Stdio::null())
        .spawn()
        .unwrap();
    while !out.join("run.json").exists() {
        std::thread::sleep(Duration::from_millis(5));
    }
    send("HUP", &child);
    while !holds_files(&out.join("cells")) {
        assert!(
            child.try_wait().unwrap().is_none(),
            "SIGHUP has ended the search"
        );
        std::thread::sleep(Duration::from_millis(5));
    }
    assert_eq!(ended_by("TERM", &mut child), Some(1));
}

/// Nobody need wait for a cell to see that it works.
#[test]
fn law_progress_on_a_pipe_is_a_plain_line_between_cells_too() {
    let temp = tempfile::tempdir().unwrap();
    let study = concat!(env!("CARGO_MANIFEST_DIR"), "/configs/studies/default.toml");
    let mut child = Command::new(env!("CARGO_BIN_EXE_widefront"))
        .args(["search", study, "--threads", "1", "--out"])
        .arg(temp.path().join("run"))
        .stdout(Stdio::null())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    let said = BufReader::new(child.stderr.take().unwrap());
    let mut lines = said.lines().map(Result::unwrap);
    let line = lines.find(|line| !line.ends_with("tabulating inductors"));
    let line = line.unwrap();
    assert_eq!(ended_by("INT", &mut child), Some(1));
    let (cells, rest) = line.split_once("/81 cells, ").expect(&line);
    assert!(cells.parse::<u32>().unwrap() <= 81);
    let (rate, rest) = rest.split_once(" evaluations/s, time left ").expect(&line);
    assert!(rate.parse::<f64>().unwrap() > 0.0);
    assert!(rest.contains(", best efficiency ") && !line.contains('\r'));
}
