//! Files that are too much: hundreds of megabytes, a million keys, deep nesting, spaces without end. The program must
//! say so with exit code 2 (1 for a damaged run), in an address space of half a gibibyte.

use std::fs::File;
use std::io::{BufWriter, Write};
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

/// Address space of the program, KiB: code, threads and what a bounded reader may gather.
const MOST_KIB: u32 = 512 * 1024;
/// Processor time of the program, s: one that hangs is stopped rather than waited for.
const MOST_CPU_S: u32 = 60;
const HUNDRED_MB: usize = 100_000_000;
/// Just below the longest study that is read.
const JUST_READ: usize = (1 << 20) - 20_000;

fn here(path: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join(path)
}

/// Runs the program with little memory.
fn run(arguments: &[&str]) -> Output {
    Command::new("sh")
        .arg("-c")
        .arg(format!(
            "ulimit -v {MOST_KIB} && ulimit -t {MOST_CPU_S} && exec \"$0\" \"$@\""
        ))
        .arg(env!("CARGO_BIN_EXE_widefront"))
        .args(arguments)
        .output()
        .unwrap()
}

/// What the program says of bad input, which must be short.
fn refused(arguments: &[&str], code: i32) -> String {
    const LONGEST_ANSWER: usize = 100_000;
    let output = run(arguments);
    let said = String::from_utf8(output.stderr).unwrap();
    assert_eq!(
        output.status.code(),
        Some(code),
        "{arguments:?}: {:.2000}",
        said
    );
    assert!(
        said.len() < LONGEST_ANSWER,
        "{} bytes: {said:.2000}",
        said.len()
    );
    assert!(output.stdout.is_empty());
    said
}

fn text(path: &Path) -> &str {
    path.to_str().unwrap()
}

/// A file of `piece` over and over, at least `size` bytes.
fn repeated(folder: &Path, name: &str, head: &str, piece: &str, size: usize) -> PathBuf {
    let path = folder.join(name);
    let mut file = BufWriter::new(File::create(&path).unwrap());
    file.write_all(head.as_bytes()).unwrap();
    let block = piece.repeat(1 + 65_536 / piece.len());
    let mut written = 0;
    while written < size {
        file.write_all(block.as_bytes()).unwrap();
        written += block.len();
    }
    file.flush().unwrap();
    path
}

fn written(folder: &Path, name: &str, text: &str) -> PathBuf {
    let path = folder.join(name);
    std::fs::write(&path, text).unwrap();
    path
}

#[test]
fn law_studies_of_a_hundred_megabytes_are_refused() {
    let folder = tempfile::tempdir().unwrap();
    for (name, piece) in [
        ("comments.toml", "# nothing\n"),
        ("keys.toml", "a = 1\n"),
        ("one-line.toml", "a"),
        ("zeros.toml", "\0"),
    ] {
        let path = repeated(folder.path(), name, "", piece, HUNDRED_MB);
        for command in ["check", "evaluate", "search"] {
            let said = refused(&[command, text(&path)], 2);
            assert!(said.contains("is longer than 1048576 bytes"), "{said}");
        }
        let said = refused(&["fit", "none.csv", "--into", text(&path)], 2);
        assert!(
            said.contains("none.csv") || said.contains("is longer than"),
            "{said}"
        );
        std::fs::remove_file(path).unwrap();
    }
}

#[test]
fn law_a_hundred_thousand_keys_are_told_in_short() {
    let folder = tempfile::tempdir().unwrap();
    let good = std::fs::read_to_string(here("tests/studies/good/plain.toml")).unwrap();
    let keys: String = (0..JUST_READ / 10)
        .map(|i| format!("k{i:06}=1\n"))
        .collect();
    let inline: String = (0..JUST_READ / 10).map(|i| format!("k{i:06}=1,")).collect();
    let near: String = (0..JUST_READ / 12)
        .map(|i| format!("lega{i:05}=1\n"))
        .collect();
    let objectives = "\"area\",".repeat(JUST_READ / 8);
    for (name, content) in [
        ("top.toml", format!("{keys}{good}")),
        ("section.toml", format!("{good}\n{keys}")),
        ("inline.toml", format!("x = {{{inline}}}\n{good}")),
        (
            "near.toml",
            good.replace("[stage]\n", &format!("[stage]\n{near}")),
        ),
        (
            "list.toml",
            good.replace("objectives = [", &format!("objectives = [{objectives}")),
        ),
    ] {
        assert!(content.len() < 1 << 20, "{name}");
        let path = written(folder.path(), name, &content);
        let said = refused(&["check", text(&path)], 2);
        assert!(
            said.contains("unknown key") || said.contains("more faults"),
            "{name}: {said:.500}"
        );
    }
    let technology =
        std::fs::read_to_string(here("tests/studies/good/technology/fixed.toml")).unwrap();
    let pairs: String = (0..JUST_READ / 30)
        .map(|i| format!("[transistor.t{i:06}]\na=1\n"))
        .collect();
    let path = written(
        folder.path(),
        "technology.toml",
        &format!("{technology}\n{pairs}"),
    );
    let said = refused(&["check", text(&path)], 2);
    assert!(
        said.contains("transistor pairs, allowed at most 100"),
        "{said:.500}"
    );
}

#[test]
fn law_deep_nesting_is_told() {
    let folder = tempfile::tempdir().unwrap();
    let good = std::fs::read_to_string(here("tests/studies/good/plain.toml")).unwrap();
    let deep = JUST_READ / 2 - 4000;
    for (name, content) in [
        (
            "lists.toml",
            format!("x = {}{}\n{good}", "[".repeat(deep), "]".repeat(deep)),
        ),
        ("open.toml", format!("{good}x = {}", "[".repeat(2 * deep))),
        (
            "tables.toml",
            format!(
                "x = {}1{}\n{good}",
                "{a=".repeat(deep / 2),
                "}".repeat(deep / 2)
            ),
        ),
        ("dotted.toml", format!("x{} = 1\n{good}", ".a".repeat(deep))),
        ("header.toml", format!("{good}\n[x{}]\n", ".a".repeat(deep))),
        (
            "array-header.toml",
            format!("{good}\n[[x{}]]\n", ".a".repeat(deep)),
        ),
        (
            "many-headers.toml",
            format!(
                "{good}\n{}",
                format!("[[x{}]]\n", ".a".repeat(70)).repeat(deep / 80)
            ),
        ),
    ] {
        assert!(content.len() < 1 << 20, "{name}");
        let path = written(folder.path(), name, &content);
        refused(&["check", text(&path)], 2);
        refused(
            &[
                "fit",
                text(&here("tests/studies/good/plain.toml")),
                "--into",
                text(&path),
            ],
            2,
        );
    }
}

#[test]
fn law_spaces_without_end_are_told() {
    let folder = tempfile::tempdir().unwrap();
    let good = std::fs::read_to_string(here("configs/studies/default.toml")).unwrap();
    let technology = here("configs/technology/demo55.toml");
    let good = good.replace("../technology/demo55.toml", text(&technology));
    let with = |key: &str, range: &str| -> String {
        let mut space = false;
        let lines = good.lines().map(|line| {
            space = if line.starts_with('[') {
                line.starts_with("[space]")
            } else {
                space
            };
            if space && line.starts_with(key) {
                format!("{key} = {range}\n")
            } else {
                format!("{line}\n")
            }
        });
        lines.collect()
    };
    for (key, range) in [
        ("loaded_q", "{ from = 2.0, to = 6.0, steps = 1000000000 }"),
        (
            "loaded_q",
            "{ from = 2.0, to = 6.0, steps = 18446744073709551617 }",
        ),
        ("loaded_q", "{ from = 2.0, to = 6.0, steps = -1 }"),
        ("turns", "{ from = 1, to = 1000000000 }"),
        ("stages", "{ from = 2, to = 4294967298 }"),
        ("nmos_width", "{ from = \"1 um\", to = \"1e300 m\" }"),
    ] {
        let path = written(folder.path(), "steps.toml", &with(key, range));
        for command in ["check", "search"] {
            let said = refused(&[command, text(&path)], 2);
            assert!(said.contains(key), "{key}: {said}");
        }
    }
    // Every grid as fine as it may be: the product is past any memory.
    let mut fine = good.clone();
    for key in [
        "nmos_width",
        "width_ratio",
        "trace",
        "diameter",
        "reactance",
        "dead_time",
    ] {
        let begin = fine.find(&format!("\n{key} ")).unwrap();
        let end = begin + fine[begin..].find('}').unwrap();
        fine.insert_str(end, ", steps = 1000 ");
    }
    let path = written(folder.path(), "product.toml", &fine);
    for command in ["check", "search"] {
        let said = refused(&[command, text(&path)], 2);
        assert!(said.contains("[space]: read 3.0e19 combinations"), "{said}");
        assert!(said.contains("allowed at most 10000"), "{said}");
    }
}

const HEADER: &str = "device,polarity,width_m,length_m,temperature_k,v_gs,v_ds,i_d\n";

#[test]
fn law_tables_of_a_hundred_megabytes_are_told() {
    let folder = tempfile::tempdir().unwrap();
    let into = folder.path().join("technology.toml");
    let fit = |table: &Path| refused(&["fit", text(table), "--into", text(&into)], 2);
    let faulty = "core,nmos,1e-5,1.3e-7,300,0.9,0.05,\n";
    for (name, head, piece, expected) in [
        ("header.csv", "", "a,", "longer than 1048576 bytes"),
        ("field.csv", HEADER, "a", "longer than 1048576 bytes"),
        (
            "quoted.csv",
            &format!("{HEADER}\""),
            "core\n",
            "longer than 1048576 bytes",
        ),
        (
            "comments.csv",
            HEADER,
            "# nothing\n",
            "longer than 1048576 bytes",
        ),
        ("zeros.csv", HEADER, "\0", "longer than 1048576 bytes"),
        ("faulty.csv", HEADER, faulty, "i_d"),
    ] {
        let path = repeated(folder.path(), name, head, piece, HUNDRED_MB);
        let said = fit(&path);
        assert!(said.contains(expected), "{name}: {said:.500}");
        std::fs::remove_file(path).unwrap();
    }
    let mut devices = String::from(HEADER);
    for i in 0..200_000 {
        devices += &format!("d{i},nmos,1e-5,1.3e-7,300,0.9,0.05,1e-4\n");
    }
    let said = fit(&written(folder.path(), "devices.csv", &devices));
    assert!(
        said.contains("allowed at most 100 in all tables"),
        "{said:.500}"
    );
}

#[test]
fn law_run_folders_of_a_hundred_megabytes_are_told() {
    let folder = tempfile::tempdir().unwrap();
    let run_folder = folder.path();
    let reference = here("results/reference");
    let record = std::fs::read_to_string(reference.join("run.json")).unwrap();
    std::fs::create_dir(run_folder.join("cells")).unwrap();
    let pick = |all: bool| {
        let mut arguments = vec!["pick", text(run_folder)];
        if all {
            arguments.push("--all");
        }
        refused(&arguments, 1)
    };
    // Many cells that are not there.
    let endless = record.replacen("\"cells\":4,", "\"cells\":18446744073709551615,", 1);
    assert_ne!(endless, record);
    written(run_folder, "run.json", &endless);
    assert!(pick(true).contains("no study has more than 1000000"));
    for (piece, expected) in [("[", "damaged"), ("{\"a\":", "damaged"), ("\"", "damaged")] {
        written(run_folder, "run.json", &record);
        let front = repeated(run_folder, "front.json", "{\"designs\":", piece, HUNDRED_MB);
        let said = pick(false);
        assert!(said.contains(expected), "{said:.500}");
        std::fs::remove_file(front).unwrap();
        let cell = repeated(run_folder, "cells/00000.json", "", piece, HUNDRED_MB);
        let said = pick(true);
        assert!(
            said.contains("is longer than 67108864 bytes"),
            "{said:.500}"
        );
        std::fs::remove_file(cell).unwrap();
        let path = repeated(run_folder, "run.json", "", piece, HUNDRED_MB);
        let said = pick(false);
        assert!(
            said.contains("is longer than 67108864 bytes"),
            "{said:.500}"
        );
        std::fs::remove_file(path).unwrap();
    }
    let keys: String = (0..1_000_000).map(|i| format!("\"k{i}\":1,")).collect();
    written(run_folder, "run.json", &format!("{{{keys}\"schema\":7}}"));
    let said = pick(false);
    assert!(said.contains("has schema 7"), "{said:.500}");
}
