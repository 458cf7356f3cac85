//! The corpus of study and technology files: good ones are read, each bad one gives the message that stands beside it.

use std::path::{Path, PathBuf};
use widefront::study::{self, Faults, StudyFile};
use widefront::technology::{self, TechnologyFile};

/// Fewer bad files than this means that the corpus went missing.
const LEAST_BAD_FILES: usize = 36;

/// Files of a folder with an ending, by name; paths relative to the crate, so that messages are the same everywhere.
fn files(folder: &str, ending: &str) -> Vec<PathBuf> {
    let entries = std::fs::read_dir(folder).unwrap();
    let paths = entries.map(|entry| Path::new(folder).join(entry.unwrap().file_name()));
    let mut paths: Vec<PathBuf> = paths
        .filter(|path| path.extension().is_some_and(|other| other == ending))
        .collect();
    paths.sort();
    paths
}

fn both(path: &Path) -> Result<(StudyFile, TechnologyFile), Faults> {
    let study = study::read(path)?;
    let technology = technology::read_for(&study)?;
    Ok((study, technology))
}

/// Compares faults with the file beside them; gives the differences, so that all show at once.
fn compare(path: &Path, outcome: Result<(), Faults>) -> Option<String> {
    let expected = std::fs::read_to_string(path.with_extension("message")).unwrap_or_default();
    let found = match outcome {
        Ok(()) => "no fault".to_owned(),
        Err(faults) => faults.to_string(),
    };
    let path = path.display();
    (found != expected.trim_end()).then(|| format!("{path} gives\n{found}\nexpected\n{expected}\n"))
}

#[test]
fn law_each_bad_file_gives_the_message_beside_it() {
    let studies = files("tests/studies/bad", "toml");
    let technologies = files("tests/studies/bad/technology", "toml");
    let count = studies.len() + technologies.len();
    assert!(count >= LEAST_BAD_FILES, "{count} bad files");
    let studies = studies
        .iter()
        .map(|path| compare(path, both(path).map(drop)));
    let technologies = technologies
        .iter()
        .map(|path| compare(path, technology::read(path).map(drop)));
    let differences: Vec<String> = studies.chain(technologies).flatten().collect();
    assert!(differences.is_empty(), "{}", differences.join("\n"));
}

#[test]
fn law_each_message_has_its_file() {
    for folder in ["tests/studies/bad", "tests/studies/bad/technology"] {
        for message in files(folder, "message") {
            assert!(
                message.with_extension("toml").exists(),
                "{}",
                message.display()
            );
        }
    }
}

#[test]
fn law_good_files_are_read_with_the_warnings_beside_them() {
    let mut studies = files("tests/studies/good", "toml");
    assert!(studies.len() >= 8, "{} good files", studies.len());
    studies.extend(files("configs/studies", "toml"));
    for path in &studies {
        let (study, technology) = both(path).unwrap_or_else(|faults| panic!("{faults}"));
        let warnings = study.warnings.iter().chain(&technology.warnings);
        let found: Vec<String> = warnings.map(ToString::to_string).collect();
        let expected = std::fs::read_to_string(path.with_extension("message")).unwrap_or_default();
        assert_eq!(found.join("\n"), expected.trim_end(), "{}", path.display());
    }
    let technologies = files("configs/technology", "toml");
    assert!(technologies.len() >= 2);
    for path in &technologies {
        let file = technology::read(path).unwrap_or_else(|faults| panic!("{faults}"));
        assert_eq!(file.warnings, []);
    }
}

#[test]
fn law_line_ends_byte_order_marks_and_order_change_nothing() {
    let plain = study::read(Path::new("tests/studies/good/plain.toml")).unwrap();
    for other in [
        "line-ends.toml",
        "byte-order-mark.toml",
        "another-order.toml",
    ] {
        let path = Path::new("tests/studies/good").join(other);
        assert_eq!(study::read(&path).unwrap().study, plain.study, "{other}");
    }
    let crlf = std::fs::read("tests/studies/good/line-ends.toml").unwrap();
    assert!(
        crlf.windows(2).any(|pair| pair == b"\r\n"),
        "the file lost its line ends"
    );
    let marked = std::fs::read("tests/studies/good/byte-order-mark.toml").unwrap();
    assert!(
        marked.starts_with(b"\xEF\xBB\xBF"),
        "the file lost its mark"
    );
}

#[test]
fn law_files_no_person_wrote_are_refused_before_they_are_read_through() {
    let folder = tempfile::tempdir().unwrap();
    let long = folder.path().join("long.toml");
    std::fs::write(&long, "# a study\n".repeat(110_000)).unwrap();
    let faults = study::read(&long).unwrap_err().to_string();
    assert!(
        faults.ends_with(
            "is longer than 1048576 bytes, the most a study or technology file may have"
        ),
        "{faults}"
    );
    let faults = study::read(folder.path()).unwrap_err().to_string();
    assert!(
        faults.ends_with("cannot be read: it is a folder"),
        "{faults}"
    );
    let faults = technology::read(&folder.path().join("none.toml"))
        .unwrap_err()
        .to_string();
    assert!(
        faults.ends_with("none.toml: cannot be read: no such file"),
        "{faults}"
    );
}

#[test]
fn law_a_set_value_at_odds_with_the_technology_names_the_argument() {
    let mut study = study::read(Path::new("tests/studies/good/plain.toml")).unwrap();
    study::set_design(&mut study, "resistance=5 ohm").unwrap();
    study::set_design(&mut study, "supply=1.5V").unwrap();
    let faults = technology::read_for(&study).unwrap_err().to_string();
    let expected = "--set resistance=5 ohm: [design] resistance: not allowed here: with a spiral it is a result of \
                    geometry and loaded_q\n  help: remove it";
    assert_eq!(faults, expected);
    study.study.design.as_mut().unwrap().resistance_ohm = None;
    let warnings = technology::read_for(&study).unwrap().warnings;
    let warnings: Vec<String> = warnings.iter().map(ToString::to_string).collect();
    let expected = "--set supply=1.5V: warning: [design] supply: designs above 1.32 V (device \"core\", 1 in a stack) \
                    break the limit supply_rating";
    assert_eq!(warnings, [expected]);
}
