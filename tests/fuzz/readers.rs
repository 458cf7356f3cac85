//! The readers, each with good and bad files to start from and with what the program does next to what was read.

use crate::damage::{Random, damaged};
use std::path::{Path, PathBuf};
use tempfile::TempDir;
use widefront::evaluate::{Setup, evaluate};
use widefront::fit::{self, Existing, Options};
use widefront::pick::{Catalogue, binding};
use widefront::quantity::{Dimension, Quantity};
use widefront::run::folder::{RunFolder, read_all_fronts, read_cell, read_front, read_run};
use widefront::run::records::{CellRecord, DesignList};
use widefront::search::space;
use widefront::study::{self, StudyFile};
use widefront::technology::{self, Technology};

/// What a reader said.
pub enum Answer {
    Read,
    Refused,
}

fn answer<T, E: ToString>(result: Result<T, E>) -> Answer {
    match result {
        Ok(_) => Answer::Read,
        Err(error) => {
            assert!(!error.to_string().is_empty());
            Answer::Refused
        }
    }
}

/// Kinds of input, as often as they are named here.
const KINDS: [&str; 10] = [
    "study",
    "study",
    "technology",
    "technology merged into",
    "table",
    "cell",
    "front",
    "run record",
    "argument",
    "argument",
];

/// Spirals of more turns are left out: their solution takes long, not their reading.
const MOST_TURNS: u32 = 2;

pub struct Readers {
    studies: Vec<Vec<u8>>,
    technologies: Vec<Vec<u8>>,
    tables: Vec<Vec<u8>>,
    cells: Vec<Vec<u8>>,
    fronts: Vec<Vec<u8>>,
    runs: Vec<Vec<u8>>,
    arguments: Vec<Vec<u8>>,
    study: StudyFile,
    technology: Technology,
    fixed: Technology,
    designs: DesignList,
    run: serde_json::Value,
    folder: TempDir,
    /// A run whose cells stay as they are.
    sound: TempDir,
}

fn here(path: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join(path)
}

/// Files of folders, by name.
fn files(folders: &[&str]) -> Vec<Vec<u8>> {
    let mut paths: Vec<PathBuf> = folders
        .iter()
        .flat_map(|folder| std::fs::read_dir(here(folder)).unwrap())
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|ending| ending == "toml"))
        .collect();
    paths.sort();
    paths
        .iter()
        .map(|path| std::fs::read(path).unwrap())
        .collect()
}

/// Tables of every kind, few rows each.
fn tables() -> Vec<Vec<u8>> {
    let mut transfer =
        String::from("device,polarity,width_um,length_m,temperature_degc,v_gs,v_ds,i_d_ua\n");
    let mut gate = String::from(
        "device,polarity,width_m,length_m,temperature_k,v_gs,terminals,capacitance_f\n",
    );
    let mut junction = String::from(
        "# a comment\ndevice,polarity,structure,area_m2,perimeter_m,temperature_k,v_reverse,capacitance_f\n",
    );
    let mut off = String::from("device,polarity,width_m,length_m,temperature_k,v_ds,i_d\n");
    for polarity in ["nmos", "pmos"] {
        for celsius in [27, 125] {
            for step in 6..14 {
                let v = 0.1 * f64::from(step);
                let i = 50.0 * (v - 0.4) / (1.0 + 0.5 * v) * if celsius > 100 { 0.8 } else { 1.0 };
                transfer += &format!("core,{polarity},10,1.3e-7,{celsius},{v:.2},0.05,{i:.4}\n");
            }
            off += &format!(
                "core,{polarity},1e-5,1.3e-7,{},1.2,{}\n",
                celsius + 273,
                1e-10 * f64::from(celsius)
            );
        }
        for step in 0..5 {
            let v = 0.3 * f64::from(step);
            gate += &format!(
                "core,{polarity},1e-4,1.3e-7,300,{v:.1},gate_to_source_drain,{:e}\n",
                1e-13 * (1.0 + v)
            );
            for (area, edge) in [(1e-9, 2e-4), (1e-10, 1e-3)] {
                let c = (area * 1e-3 + edge * 1e-10) / (1.0 + v / 0.8).powf(0.4);
                junction += &format!("core,{polarity},s,{area:e},{edge:e},300,{v:.1},{c:e}\n");
            }
        }
    }
    [transfer, gate, junction, off]
        .map(String::into_bytes)
        .to_vec()
}

const ARGUMENTS: [&str; 24] = [
    "supply=1.1 V",
    "loaded_q=3.5",
    "nmos_width=600 um",
    "turns=2",
    "trace=15 um",
    "diameter=250um",
    "reactance=0.5",
    "dead_time=0.05",
    "stages=5",
    "output_power=20dBm",
    "area=0.4mm2",
    "efficiency=0.3",
    "third_harmonic=-30 dBc",
    "2.45 GHz",
    "50 ohm",
    "0.9 fF/um",
    "1.6e-3 fF/um^2",
    "-0.8 mV/K",
    "27 degC",
    "280 uA/V^2",
    "4e-8 S/um^2",
    "0.03 mm^2/nH",
    "1.9e-8 ohm m",
    "drain_capacitance=1e-12 F",
];

impl Readers {
    pub fn new() -> Self {
        let study = study::read(&here("configs/studies/default.toml")).unwrap();
        let technology = technology::read(&here("configs/technology/demo55.toml"))
            .unwrap()
            .technology;
        let fixed = technology::read(&here("tests/studies/good/technology/fixed.toml"))
            .unwrap()
            .technology;
        let reference = here("results/reference");
        let folder = tempfile::tempdir().unwrap();
        let bytes = |name: &str| std::fs::read(folder.path().join(name)).unwrap();
        // Two designs say as much as hundreds, in a hundredth of the time.
        let cell = read_cell(&reference, 0).unwrap().unwrap();
        let short = CellRecord {
            designs: cell.designs[..2].to_vec(),
            ..cell
        };
        let run = RunFolder::create(folder.path()).unwrap();
        run.write_cell(&short).unwrap();
        let designs = DesignList {
            designs: short.designs.clone(),
        };
        run.write_json("front.json", &designs).unwrap();
        let sound = tempfile::tempdir().unwrap();
        let run = RunFolder::create(sound.path()).unwrap();
        run.write_cell(&short).unwrap();
        let cells = vec![bytes("cells/00000.json")];
        let fronts = vec![bytes("front.json")];
        // Good files more often: a change of a bad one is told as before, mostly.
        let mixed = |good: &[&str], bad: &str| {
            let mut all = files(&[bad]);
            let good = files(good);
            all.extend(good.iter().cycle().take(8 * good.len()).cloned());
            all
        };
        let mut technologies = mixed(
            &["configs/technology", "tests/studies/good/technology"],
            "tests/studies/bad/technology",
        );
        technologies.push(Vec::new());
        Self {
            studies: mixed(
                &["configs/studies", "tests/studies/good"],
                "tests/studies/bad",
            ),
            technologies,
            tables: tables(),
            cells,
            fronts,
            runs: vec![std::fs::read(reference.join("run.json")).unwrap()],
            arguments: ARGUMENTS.map(|a| a.as_bytes().to_vec()).to_vec(),
            study,
            technology,
            fixed,
            designs,
            run: read_run(&reference).unwrap(),
            folder,
            sound,
        }
    }

    /// A kind of input and one of it.
    pub fn input(&self, random: &mut Random) -> (&'static str, Vec<u8>) {
        let kind = *random.of(&KINDS);
        let bases = match kind {
            "study" => &self.studies,
            "technology" | "technology merged into" => &self.technologies,
            "table" => &self.tables,
            "cell" => &self.cells,
            "front" => &self.fronts,
            "run record" => &self.runs,
            _ => &self.arguments,
        };
        let base = random.of(bases).clone();
        (kind, damaged(&base, bases, random))
    }

    fn written(&self, name: &str, bytes: &[u8]) -> PathBuf {
        let path = self.folder.path().join(name);
        std::fs::write(&path, bytes).unwrap();
        path
    }

    /// Reads the input, and goes on with what was read as the program does.
    pub fn ask(&self, kind: &str, input: &[u8], random: &mut Random) -> Answer {
        let text = String::from_utf8_lossy(input);
        let path = Path::new("somewhere/a.toml");
        match kind {
            "study" => {
                let read = study::read_str(&text, path);
                if let Ok(file) = &read {
                    self.go_on(file, random);
                }
                answer(read)
            }
            "technology" => {
                let read = technology::read_str(&text, path);
                if let Ok(file) = &read
                    && technology::fit(&self.study, &file.technology).is_ok()
                    && random.one_in(16)
                {
                    self.evaluated(&self.study, &file.technology);
                }
                answer(read)
            }
            "technology merged into" => answer(Existing::parse(&text, path)),
            "table" => self.table(input, random),
            "cell" => {
                self.written("cells/00000.json", input);
                answer(read_cell(self.folder.path(), 0))
            }
            "front" => {
                self.written("front.json", input);
                let read = read_front(self.folder.path());
                if let Ok(list) = &read {
                    self.picked(list.clone());
                }
                answer(read)
            }
            "run record" => {
                std::fs::write(self.sound.path().join("run.json"), input).unwrap();
                let read = read_run(self.sound.path());
                if let Ok(run) = &read {
                    let designs = &self.designs.designs;
                    designs.iter().for_each(|d| drop(binding(&run["study"], d)));
                    drop(read_all_fronts(self.sound.path()).map_err(|e| e.to_string()));
                }
                answer(read)
            }
            _ => self.argument(&text),
        }
    }

    fn go_on(&self, file: &StudyFile, random: &mut Random) {
        for technology in [&self.technology, &self.fixed] {
            if technology::fit(file, technology).is_ok() && random.one_in(8) {
                self.evaluated(file, technology);
            }
        }
    }

    fn evaluated(&self, file: &StudyFile, technology: &Technology) {
        let Ok(setup) = Setup::new(&file.study, technology) else {
            return;
        };
        if let Some(space) = &file.study.space {
            assert!(space.combinations() <= 10_000);
            assert!(!space::cells(space).is_empty());
        }
        if let Some(design) = &file.study.design
            && design.turns.is_none_or(|turns| turns <= MOST_TURNS)
        {
            let evaluation = evaluate(&setup, design);
            if let Some(figures) = &evaluation.figures {
                // A number that leaves the range of floating-point numbers is a reason, not a figure.
                let json = serde_json::to_string(figures).unwrap();
                assert!(
                    figures.efficiency.is_finite() && !json.contains("NaN"),
                    "{json}"
                );
            }
        }
    }

    fn table(&self, input: &[u8], random: &mut Random) -> Answer {
        let path = self.written("table.csv", input);
        // The transfer curves beside it, so that what is read can be fitted.
        let transfer = self.written("transfer.csv", &self.tables[0]);
        let read = fit::read(&[path, transfer]);
        if let Ok(tables) = &read
            && random.one_in(32)
        {
            let options = Options::new("2026-01-31");
            drop(
                fit::fit(tables, &options, &Existing::default()).map(|pairs| {
                    fit::merge(&Existing::default(), &pairs, tables, &options, "fuzzed")
                        .map_err(|e| e.to_string())
                }),
            );
        }
        answer(read)
    }

    fn picked(&self, list: DesignList) {
        let designs = list.designs.clone();
        designs
            .iter()
            .for_each(|d| drop(binding(&self.run["study"], d)));
        let Ok(catalogue) = Catalogue::new(list.designs) else {
            return;
        };
        let best: Vec<_> = ["efficiency", "area"]
            .iter()
            .filter_map(|key| catalogue.figure(key).ok().cloned())
            .collect();
        let conditions: Vec<_> = ["output_power=5dBm", "efficiency=0.9"]
            .iter()
            .filter_map(|text| catalogue.condition(text, true).ok())
            .collect();
        let picked = catalogue.pick(&conditions[..conditions.len().min(1)], &best);
        assert!(picked.len() <= designs.len());
        catalogue.least_shortfalls(&conditions);
        catalogue.nearest_designs(&conditions, 3);
    }

    fn argument(&self, text: &str) -> Answer {
        let mut file = self.study.clone();
        let set = study::set_design(&mut file, text);
        let catalogue = Catalogue::new(self.designs.designs.clone()).unwrap();
        let condition = catalogue.condition(text, false);
        let read = Dimension::ALL
            .iter()
            .any(|dimension| Quantity::parse(text, *dimension).is_ok());
        if set.is_ok() || condition.is_ok() || read {
            Answer::Read
        } else {
            answer(set)
        }
    }
}
