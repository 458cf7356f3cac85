//! What the program is built of: licences that let it be shipped, no crate that nothing uses, no second version of a
//! crate that is not explained here.

use serde_json::Value;
use std::collections::{BTreeMap, BTreeSet};
use std::path::{Path, PathBuf};
use std::process::Command;

/// Licences that ask for no more than that their text goes along.
const PERMISSIVE: [&str; 10] = [
    "0BSD",
    "Apache-2.0",
    "BSD-2-Clause",
    "BSD-3-Clause",
    "BSL-1.0",
    "CC0-1.0",
    "MIT",
    "Unicode-3.0",
    "Unlicense",
    "Zlib",
];

/// Crates built in two versions on Linux, and what keeps the older one.
const TWICE: [(&str, &str); 4] = [
    (
        "bitflags",
        "png 0.17, by image 0.24 of plotters' bitmap backend",
    ),
    (
        "miniz_oxide",
        "png 0.17, by image 0.24 of plotters' bitmap backend",
    ),
    ("rand_core", "rand_xoshiro 0.7 of argmin"),
    (
        "syn",
        "macros of thiserror, maud and others; clap and serde have the newer one",
    ),
];

fn cargo(arguments: &[&str]) -> String {
    let output = Command::new(env!("CARGO"))
        .args(arguments)
        .arg("--locked")
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .output()
        .unwrap();
    let said = String::from_utf8_lossy(&output.stderr);
    assert!(output.status.success(), "{said}");
    String::from_utf8(output.stdout).unwrap()
}

/// Packages built on Linux, by `name version`, with their licence.
fn built() -> BTreeMap<String, String> {
    let lines = cargo(&["tree", "--prefix", "none", "--format", "{p}|{l}"]);
    let named = lines.lines().filter_map(|line| line.trim().split_once('|'));
    named
        .map(|(package, rest)| {
            let mut words = package.split(' ');
            let name = words.by_ref().take(2).collect::<Vec<_>>().join(" ");
            (name, rest.trim_end_matches(" (*)").to_owned())
        })
        .collect()
}

/// True when every part of `A AND B` has an alternative of `C OR D` that is permissive. Old manifests write `/` for OR.
fn is_permissive(licence: &str) -> bool {
    let plain = licence.replace('/', " OR ").replace(['(', ')'], " ");
    plain.split(" AND ").all(|part| {
        part.split(" OR ")
            .any(|one| PERMISSIVE.contains(&one.trim()))
    })
}

#[test]
fn law_licences_are_permissive() {
    assert!(is_permissive("(MIT OR GPL-3.0) AND Unicode-3.0"));
    assert!(!is_permissive("MIT AND GPL-3.0") && !is_permissive(""));
    let built = built();
    assert!(built.len() > 50, "{built:?}");
    for (package, licence) in &built {
        assert!(is_permissive(licence), "{package}: {licence}");
    }
}

#[test]
fn law_second_versions_are_explained() {
    let mut versions: BTreeMap<String, usize> = BTreeMap::new();
    for package in built().keys() {
        let name = package.split(' ').next().unwrap();
        *versions.entry(name.to_owned()).or_default() += 1;
    }
    let twice: BTreeSet<&str> = versions
        .iter()
        .filter(|(_, count)| **count > 1)
        .map(|(name, _)| name.as_str())
        .collect();
    assert_eq!(twice, TWICE.map(|(name, _)| name).into());
}

fn sources(folder: &Path, text: &mut String) {
    for entry in std::fs::read_dir(folder).unwrap() {
        let path: PathBuf = entry.unwrap().path();
        if path.is_dir() {
            sources(&path, text);
        } else if path.extension().is_some_and(|ending| ending == "rs") {
            *text += &std::fs::read_to_string(path).unwrap();
        }
    }
}

#[test]
fn law_every_dependency_is_used() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let metadata: Value =
        serde_json::from_str(&cargo(&["metadata", "--no-deps", "--format-version", "1"])).unwrap();
    let dependencies = metadata["packages"][0]["dependencies"].as_array().unwrap();
    let (mut src, mut tests) = (String::new(), String::new());
    sources(&root.join("src"), &mut src);
    sources(&root.join("tests"), &mut tests);
    assert!(dependencies.len() > 20);
    for dependency in dependencies {
        let name = dependency["name"].as_str().unwrap().replace('-', "_");
        // metalforge's library goes by another name.
        let name = if name == "metalforge" {
            "forge_core"
        } else {
            &name
        };
        let (text, room) = match dependency["kind"].as_str() {
            Some("dev") => (&tests, "tests"),
            _ => (&src, "src"),
        };
        let used = ["::", ";"]
            .iter()
            .any(|end| text.contains(&format!("{name}{end}")));
        assert!(used, "{name} is used nowhere in {room}");
    }
}
