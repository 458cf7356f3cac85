//! Modules import only from what stands before them on the way data takes.

use std::fs;
use std::path::{Path, PathBuf};

/// The way data takes, first to last. A room may use itself and what stands before it.
const WAY: [&str; 15] = [
    "quantity",
    "numerics",
    "study",
    "technology",
    "stage",
    "steady",
    "budget",
    "evaluate",
    "search",
    "run",
    "pick",
    "sheet",
    "report",
    "fit",
    "cli",
];

fn sources(folder: &Path, files: &mut Vec<PathBuf>) {
    for entry in fs::read_dir(folder).unwrap() {
        let path = entry.unwrap().path();
        if path.is_dir() {
            sources(&path, files);
        } else if path.extension().is_some_and(|e| e == "rs") {
            files.push(path);
        }
    }
}

/// Rooms that a line of code names by `crate::room`.
fn rooms_named(line: &str) -> Vec<String> {
    line.split("crate::")
        .skip(1)
        .map(|rest| {
            rest.chars()
                .take_while(|c| c.is_alphanumeric() || *c == '_')
                .collect::<String>()
        })
        .filter(|room| !room.is_empty())
        .collect()
}

#[test]
fn law_imports_go_one_way() {
    let src = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let mut files = Vec::new();
    sources(&src, &mut files);
    let mut imports = 0;
    for file in &files {
        let inside = file.strip_prefix(&src).unwrap();
        let first = inside.components().next().unwrap().as_os_str();
        let room = Path::new(first).file_stem().unwrap().to_str().unwrap();
        if room == "lib" || room == "main" {
            continue;
        }
        let place = WAY
            .iter()
            .position(|w| *w == room)
            .unwrap_or_else(|| panic!("{room} has no place on the way of data"));
        for (number, line) in fs::read_to_string(file).unwrap().lines().enumerate() {
            for named in rooms_named(line) {
                let Some(other) = WAY.iter().position(|w| *w == named) else {
                    continue;
                };
                imports += 1;
                assert!(
                    other <= place,
                    "{}:{}: {room} imports {named}, which comes after it",
                    inside.display(),
                    number + 1
                );
            }
        }
    }
    assert!(imports > 50, "the lines were not read");
}

#[test]
fn law_figures_and_pages_read_records_not_physics() {
    let src = Path::new(env!("CARGO_MANIFEST_DIR")).join("src/report");
    let mut files = Vec::new();
    sources(&src, &mut files);
    assert!(!files.is_empty());
    for file in files {
        for line in fs::read_to_string(&file).unwrap().lines() {
            for named in rooms_named(line) {
                assert!(
                    !["stage", "numerics", "search"].contains(&named.as_str()),
                    "{}: {line}",
                    file.display()
                );
            }
        }
    }
}

#[test]
fn law_main_stays_thin_and_the_top_level_is_agreed() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let main = fs::read_to_string(root.join("src/main.rs")).unwrap();
    assert!(main.lines().count() < 60);
    let agreed = [
        "Cargo.toml",
        "Cargo.lock",
        "README.md",
        "DEVELOPERS.md",
        "LICENSE",
        "src",
        "configs",
        "tests",
        "results",
        "target",
    ];
    for entry in fs::read_dir(root).unwrap() {
        let name = entry.unwrap().file_name().into_string().unwrap();
        assert!(
            name.starts_with('.') || agreed.contains(&name.as_str()),
            "{name} is no agreed top-level name"
        );
    }
}
