//! A search that is killed at any moment goes on to the same bytes; signals end it with what is finished kept.

use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Stdio};
use std::time::{Duration, Instant};

/// Kills in an ordinary run; more by the environment variable WIDEFRONT_KILLS.
const KILLS: u64 = 20;
/// A hang guard, not a speed claim.
const LONGEST_END: Duration = Duration::from_secs(20);

fn program(out: &Path, resume: bool) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_widefront"));
    let study = Path::new(env!("CARGO_MANIFEST_DIR")).join("configs/studies/quick.toml");
    command
        .arg("search")
        .arg(study)
        .arg("--quiet")
        .arg("--out")
        .arg(out);
    if resume {
        command.arg("--resume");
    }
    command.stdout(Stdio::null()).stderr(Stdio::null());
    command
}

fn start(out: &Path) -> Child {
    program(out, out.join("run.json").exists()).spawn().unwrap()
}

fn unbroken(folder: &Path) -> (PathBuf, Vec<u8>, Duration) {
    let out = folder.join("unbroken");
    let began = Instant::now();
    assert!(program(&out, false).status().unwrap().success());
    let front = fs::read(out.join("front.csv")).unwrap();
    (out, front, began.elapsed())
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
    let (_, front, whole) = unbroken(temp.path());
    let kills = std::env::var("WIDEFRONT_KILLS").map_or(KILLS, |text| text.parse().unwrap());
    let mut state = 7;
    let mut in_the_midst = 0;
    let mut finished = 0;
    let mut out = temp.path().join("killed-0");
    for kill in 0..kills {
        let mut child = start(&out);
        std::thread::sleep(whole.mul_f64(1.1 * next(&mut state)));
        // SIGKILL; an already ended search is no error here.
        child.kill().unwrap();
        let status = child.wait().unwrap();
        in_the_midst += u32::from(!status.success());
        if status.success() {
            assert!(fs::read(out.join("front.csv")).unwrap() == front);
            finished += 1;
            out = temp.path().join(format!("killed-{}", kill + 1));
        }
    }
    if out.exists() {
        assert!(
            program(&out, out.join("run.json").exists())
                .status()
                .unwrap()
                .success()
        );
        assert!(fs::read(out.join("front.csv")).unwrap() == front);
        finished += 1;
    }
    assert!(in_the_midst > 0 && finished > 0);
}

#[test]
fn law_signals_end_a_search_with_what_is_finished_kept() {
    let temp = tempfile::tempdir().unwrap();
    let (_, front, whole) = unbroken(temp.path());
    for signal in ["INT", "TERM"] {
        let out = temp.path().join(signal);
        let mut child = start(&out);
        std::thread::sleep(whole.mul_f64(0.6));
        let sent = Command::new("kill")
            .args(["-s", signal, &child.id().to_string()])
            .status()
            .unwrap();
        assert!(sent.success());
        let began = Instant::now();
        let code = loop {
            if let Some(status) = child.try_wait().unwrap() {
                break status.code();
            }
            assert!(began.elapsed() < LONGEST_END, "SIG{signal} does not end it");
            std::thread::sleep(Duration::from_millis(5));
        };
        assert_eq!(code, Some(1));
        let run: serde_json::Value =
            serde_json::from_slice(&fs::read(out.join("run.json")).unwrap()).unwrap();
        assert_eq!(run["ended_because"], "stopped");
        assert!(program(&out, true).status().unwrap().success());
        assert!(fs::read(out.join("front.csv")).unwrap() == front);
    }
}
