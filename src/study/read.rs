//! From the text of a study to a [`Study`].

use super::diagnostics::{FaultKind, Faults, Warning, WarningKind};
use super::figure::{above, number, quantity, whole, within};
use super::lines::Lines;
use super::raw::{Section, load, walk};
use super::resolved::*;
use super::sweep::{LISTED, Sweep};
use super::variables::*;
use crate::quantity::Dimension;
use std::path::Path;

/// Version of the study format.
pub const SCHEMA: i64 = 1;
/// Junction temperature when the study gives none, K (27 degC).
const DEFAULT_TEMPERATURE_K: f64 = 300.15;
/// Most variants of a study: more is a slip of the pen, and each takes memory.
const MOST_VARIANTS: usize = 10_000;
/// Most cells of all variants together: their files fill a folder, their records the memory of what reads them.
pub const MOST_CELLS: usize = 1_000_000;
/// Most combinations of a cell: each is searched for some hundredths of a second, and kept in memory.
const MOST_COMBINATIONS: u128 = 10_000;
/// Seed when the study gives none.
const DEFAULT_SEED: u32 = 1;

/// A study and what later checks need to speak of its file.
#[derive(Debug, Clone, PartialEq)]
pub struct StudyFile {
    /// The study, resolved.
    pub study: Study,
    /// Where every key stands.
    pub lines: Lines,
    /// What may not be meant.
    pub warnings: Vec<Warning>,
    /// The file as read, for hashing and copying.
    pub text: String,
    /// The technology's path as the study has it.
    pub(crate) technology_as_written: String,
    /// All of them, where several are listed.
    pub(crate) technologies_as_written: Vec<String>,
}

/// Reads and validates a study.
pub fn read(path: &Path) -> Result<StudyFile, Faults> {
    read_str(&load(path)?, path)
}

/// Validates the text of a study; `path` stands in messages, and the technology's path is taken from its folder.
pub fn read_str(text: &str, path: &Path) -> Result<StudyFile, Faults> {
    let folder = path.parent().unwrap_or(Path::new(""));
    let walked = walk(text, path, SCHEMA, |root| {
        let written = root.texts("technology");
        let study = build(root, written.iter().map(|w| folder.join(w)).collect());
        (study, written)
    })?;
    let (study, technologies_as_written) = walked.value;
    Ok(StudyFile {
        study,
        lines: walked.lines,
        warnings: walked.warnings,
        text: text.to_owned(),
        technology_as_written: technologies_as_written[0].clone(),
        technologies_as_written,
    })
}

fn build(root: &Section<'_, '_>, technologies: Vec<std::path::PathBuf>) -> Study {
    let title = root.text("title");
    let temperature = quantity(Dimension::Temperature, within(213.15, 473.15));
    let temperatures_k = if root.has("temperature") {
        root.figures("temperature", temperature)
    } else {
        root.optional("temperature", temperature);
        vec![DEFAULT_TEMPERATURE_K]
    };
    let frequency = quantity(Dimension::Frequency, within(1e6, 3e11));
    let frequencies_hz = root.section("signal").figures("frequency", frequency);
    let antenna = root.section("antenna");
    let resistance = quantity(Dimension::Resistance, within(0.1, 1e4));
    let antenna_resistance_ohm = antenna.required("resistance", resistance);
    let loss = quantity(Dimension::Decibel, within(0.0, 30.0));
    let antenna_loss_db = antenna.optional("loss", loss).unwrap_or(0.0);
    drop(antenna);
    let section = root.section("stage");
    let numbers = |key| -> Vec<u32> {
        let read = section.figures(key, whole(1, 2));
        read.into_iter().map(|n| n as u32).collect()
    };
    let (legs, stacks) = (numbers("legs"), numbers("stack"));
    let devices = section.texts("device");
    let networks = [("direct", Network::Direct), ("low-pass", Network::LowPass)];
    let stage = StageChoice {
        legs: legs[0],
        stack: stacks[0],
        device: devices[0].clone(),
        network: section
            .choice("network", &networks)
            .unwrap_or(Network::LowPass),
    };
    drop(section);
    let least_stacked = stacks.iter().copied().min().unwrap_or(1);
    let driver = driver(&root.section("driver"), least_stacked);
    let space = root
        .optional_section("space")
        .map(|section| space(&section));
    let limits = root.optional_section("limits");
    let limits = limits.map_or_else(Limits::default, |section| read_limits(&section));
    let search = search(root.optional_section("search").as_ref());
    let design = root
        .optional_section("design")
        .map(|section| design(&section));
    if space.is_none() && design.is_none() {
        root.warning("", WarningKind::NothingToDo);
    }
    let sweep = Sweep {
        technologies: several(&technologies),
        devices: several(&devices),
        stacks: several(&stacks),
        legs: several(&legs),
        frequencies_hz: several(&frequencies_hz),
        temperatures_k: several(&temperatures_k),
    };
    if sweep.variants() > MOST_VARIANTS {
        let read = format!("lists of {} variants", sweep.variants());
        let allowed = format!("at most {MOST_VARIANTS}, the product of all lists");
        root.fault("", FaultKind::WrongType { read, allowed });
    }
    let cells = space.as_ref().map_or(1, Space::cells);
    if cells.saturating_mul(sweep.variants()) > MOST_CELLS {
        let read = format!("{cells} cells of each of {} variants", sweep.variants());
        let allowed =
            format!("at most {MOST_CELLS} cells in all; take fewer steps of loaded_q and supply");
        root.fault("space", FaultKind::OutOfRange { read, allowed });
    }
    Study {
        title,
        technology: technologies[0].clone(),
        temperature_k: temperatures_k[0],
        frequency_hz: frequencies_hz[0],
        antenna_resistance_ohm,
        antenna_loss_db,
        stage,
        driver,
        space,
        limits,
        search,
        design,
        sweep,
    }
}

/// A list of more than one; empty for a single value.
fn several<T: Clone>(list: &[T]) -> Vec<T> {
    if list.len() > 1 {
        list.to_vec()
    } else {
        Vec::new()
    }
}

fn driver(section: &Section<'_, '_>, stack: u32) -> DriverChoice {
    let capacitance = quantity(Dimension::Capacitance, within(1e-16, 1e-9));
    let supply = ("supply", Swing::Supply);
    let driver = DriverChoice {
        input_capacitance_f: section.required("input_capacitance", capacitance),
        ratio: section.required("ratio", number(within(0.1, 20.0))),
        crowbar: section.required("crowbar", number(within(0.0, 1.0))),
        swing: section.word_or("swing", supply, SUPPLY, Swing::Voltage),
    };
    if stack > 1 && driver.swing != Swing::Supply {
        section.warning("swing", WarningKind::SwingUnused);
    }
    driver
}

fn space(section: &Section<'_, '_>) -> Space {
    let space = Space {
        supply_v: section.required_range("supply", SUPPLY),
        loaded_q: section.required_range("loaded_q", LOADED_Q),
        nmos_width_m: section.required_range("nmos_width", NMOS_WIDTH),
        width_ratio: section.required_range("width_ratio", WIDTH_RATIO),
        turns: section.optional_range("turns", TURNS),
        trace_m: section.optional_range("trace", TRACE),
        diameter_m: section.optional_range("diameter", DIAMETER),
        resistance_ohm: section.optional_range("resistance", RESISTANCE),
        reactance: section.required_range("reactance", REACTANCE),
        dead_time: section.required_range("dead_time", DEAD_TIME),
        stages: section.required_range("stages", STAGES),
    };
    let combinations = space.combinations();
    if combinations > MOST_COMBINATIONS {
        section.fault_here(FaultKind::OutOfRange {
            read: format!(
                "{:.1e} combinations of whole numbers and grid values a cell",
                combinations as f64
            ),
            allowed: format!(
                "at most {MOST_COMBINATIONS}; leave out steps where anything between from and to will do"
            ),
        });
    }
    space
}

fn read_limits(section: &Section<'_, '_>) -> Limits {
    let harmonic = quantity(Dimension::Carrier, within(-200.0, 0.0));
    let power = quantity(Dimension::Power, within(1e-12, 1e3));
    let area = quantity(Dimension::Area, above(0.0, 1e-2));
    Limits {
        edge_time: section.optional("edge_time", number(above(0.0, 0.5))),
        second_harmonic_dbc: section.optional("second_harmonic", harmonic),
        third_harmonic_dbc: section.optional("third_harmonic", harmonic),
        overdrive_use: section.optional("overdrive_use", number(above(0.0, 10.0))),
        output_power_w: section.bounds("output_power", power),
        area_m2: section.bounds("area", area),
        efficiency: section.bounds("efficiency", number(within(0.0, 1.0))),
    }
}

fn search(section: Option<&Section<'_, '_>>) -> SearchSettings {
    let names = [
        ("efficiency", Objective::Efficiency),
        ("output_power", Objective::OutputPower),
        ("area", Objective::Area),
    ];
    let objectives = section.and_then(|section| section.choices("objectives", &names));
    let fronts_by = section.and_then(|section| section.choices("fronts_by", &LISTED));
    let seed = section.and_then(|section| section.optional("seed", whole(0, u32::MAX)));
    SearchSettings {
        objectives: objectives.unwrap_or(names.map(|(_, objective)| objective).to_vec()),
        seed: seed.unwrap_or(f64::from(DEFAULT_SEED)) as u64,
        fronts_by: fronts_by.unwrap_or_default(),
    }
}

fn design(section: &Section<'_, '_>) -> Design {
    Design {
        supply_v: section.required("supply", SUPPLY),
        loaded_q: section.required("loaded_q", LOADED_Q),
        nmos_width_m: section.required("nmos_width", NMOS_WIDTH),
        width_ratio: section.required("width_ratio", WIDTH_RATIO),
        turns: section.optional("turns", TURNS).map(|turns| turns as u32),
        trace_m: section.optional("trace", TRACE),
        diameter_m: section.optional("diameter", DIAMETER),
        resistance_ohm: section.optional("resistance", RESISTANCE),
        reactance: section.required("reactance", REACTANCE),
        dead_time: section.required("dead_time", DEAD_TIME),
        stages: section.required("stages", STAGES) as u32,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    const STUDY: &str = include_str!("../../tests/studies/good/plain.toml");

    fn read(text: &str) -> Result<StudyFile, Faults> {
        read_str(text, Path::new("a.toml"))
    }

    #[test]
    fn law_what_is_written_is_what_is_resolved() {
        let study = read(STUDY).unwrap().study;
        assert_eq!(study.title, "Frost sensor");
        assert_eq!(study.frequency_hz, 2.45e9);
        assert_eq!(study.temperature_k, DEFAULT_TEMPERATURE_K);
        assert_eq!(study.antenna_loss_db, 0.0);
        assert_eq!(study.stage.network, Network::LowPass);
        assert_eq!(study.driver.input_capacitance_f, 20e-15);
        assert_eq!(study.driver.swing, Swing::Supply);
        let objectives = [Objective::Efficiency, Objective::Area];
        assert_eq!(study.search.objectives, objectives);
        assert_eq!(study.search.seed, 7);
        assert_eq!(study.limits.edge_time, Some(0.12));
        assert_eq!(study.limits.output_power_w.at_most, None);
        let space = study.space.unwrap();
        assert_eq!(space.supply_v, Range::Grid(vec![0.8, 0.9, 1.0, 1.1, 1.2]));
        let free = Range::Free {
            from: 5e-5,
            to: 4e-3,
        };
        assert_eq!(space.nmos_width_m, free);
        assert_eq!(space.width_ratio, Range::Fixed(2.0));
        let turns = Range::Grid(vec![1.0, 2.0, 3.0, 4.0, 5.0]);
        assert_eq!(space.turns, Some(turns));
        let design = study.design.unwrap();
        assert_eq!((design.turns, design.trace_m), (Some(2), Some(1.5e-5)));
    }

    #[test]
    fn law_grids_rise_evenly_and_keep_both_ends() {
        for steps in 2..=60 {
            let grid = format!("steps = {steps} }}\nloaded_q");
            let study = read(&STUDY.replacen("steps = 5 }\nloaded_q", &grid, 1)).unwrap();
            let Some(Range::Grid(values)) = study.study.space.map(|space| space.supply_v) else {
                panic!("no grid of {steps}");
            };
            assert_eq!(values.len(), steps);
            assert_eq!((values[0], values[steps - 1]), (0.8, 1.2));
            assert!(values.is_sorted_by(|one, next| one < next));
        }
    }

    #[test]
    fn law_the_technology_lies_in_the_study_s_folder() {
        let file = read_str(STUDY, Path::new("jobs/frost/a.toml")).unwrap();
        let expected = "jobs/frost/../../../configs/technology/demo55.toml";
        assert_eq!(file.study.technology, Path::new(expected));
    }

    /// Faults that cannot be told must not be made up either: each names its file.
    fn faults_name_the_file(text: &str) -> Result<(), TestCaseError> {
        if let Err(faults) = read(text) {
            prop_assert!(faults.iter().count() > 0);
            for fault in faults.iter() {
                prop_assert!(fault.to_string().starts_with("a.toml"), "{fault}");
            }
        }
        Ok(())
    }

    proptest! {
        #[test]
        fn law_no_text_breaks_the_reader(text in ".{0,200}") {
            faults_name_the_file(&text)?;
            faults_name_the_file(&format!("schema = 1\n{text}"))?;
        }

        #[test]
        fn law_no_change_of_a_good_study_breaks_the_reader(
            cut in 0..STUDY.len(), length in 0usize..30, put in "[-a-z0-9.\"={}\\[\\] \n\u{b5}]{0,12}"
        ) {
            let mut text = STUDY.to_owned();
            text.replace_range(cut..(cut + length).min(STUDY.len()), &put);
            faults_name_the_file(&text)?;
        }
    }
}
