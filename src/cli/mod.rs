//! The command line: parse, dispatch, exit code. Results go to standard output, diagnostics to standard error.

mod check;
mod evaluate;
mod fit;
mod pick;
mod progress;
mod report;
mod search;
mod sheet;

use crate::evaluate::Setup;
use crate::run::variant::Variant;
use crate::study::{self, Faults, StudyFile};
use crate::technology::{self, Technology};
use clap::{Parser, Subcommand};
use std::collections::{BTreeMap, BTreeSet};
use std::io::Write;
use std::path::{Path, PathBuf};
use std::process::ExitCode;

/// Pareto fronts of efficiency, output power and area for switch-mode CMOS output stages.
#[derive(Debug, Parser)]
#[command(name = "widefront", version, about, long_about = None, arg_required_else_help = true)]
struct Arguments {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Read and validate a study, or a technology alone; print what it resolves to.
    Check {
        /// The study or technology file.
        study: PathBuf,
        /// Of a technology: RMS current that the width of least loss is for.
        #[arg(long, default_value = "10 mA")]
        current: String,
        /// Of a technology: frequency that the width of least loss is for.
        #[arg(long, default_value = "2.45 GHz")]
        frequency: String,
    },
    /// Fit a technology's transistors to measured or simulated tables.
    Fit(Box<fit::FitArguments>),
    /// Evaluate the design of a study.
    Evaluate {
        /// The study file.
        study: PathBuf,
        /// Change a value of [design], as the file would hold it: supply=1.0V. May be repeated.
        #[arg(long, value_name = "KEY=VALUE")]
        set: Vec<String>,
        /// Which variant of a study that lists several values, as `check` numbers them.
        #[arg(long, value_name = "N")]
        variant: Option<usize>,
        /// Print one JSON object and nothing else.
        #[arg(long)]
        json: bool,
    },
    /// Search every cell of loaded Q and supply for its Pareto front; write a run folder.
    Search(search::SearchArguments),
    /// Make one run folder of the parts of a run.
    Join(search::JoinArguments),
    /// The designs of a run that meet a specification, best first.
    Pick(pick::PickArguments),
    /// The hand-off of one design to layout: snapped to the grid, evaluated again, drawn to scale.
    Sheet(sheet::SheetArguments),
    /// Figures and one self-contained page of a run, made again from its records.
    Report(report::ReportArguments),
}

/// Why a command did not succeed.
#[derive(Debug)]
pub(crate) enum Failure {
    /// The input is at fault: exit code 2.
    Input(String),
    /// It ran and failed: exit code 1.
    Run(String),
}

impl From<Faults> for Failure {
    fn from(faults: Faults) -> Self {
        Self::Input(faults.to_string())
    }
}

/// Runs the command line and gives its exit code.
pub fn run() -> ExitCode {
    let result = match Arguments::parse().command {
        Command::Check {
            study,
            current,
            frequency,
        } => match crate::study::raw::load(&study) {
            Ok(text) if crate::fit::is_technology(&text) => {
                fit::merits(&study, &text, &current, &frequency)
            }
            _ => check::run(&study),
        },
        Command::Fit(arguments) => fit::run(&arguments),
        Command::Evaluate {
            study,
            set,
            variant,
            json,
        } => evaluate::run(&study, &set, variant, json),
        Command::Search(arguments) => search::run(&arguments),
        Command::Join(arguments) => search::join(&arguments),
        Command::Pick(arguments) => pick::run(&arguments),
        Command::Report(arguments) => report::run(&arguments),
        Command::Sheet(arguments) => sheet::run(&arguments),
    };
    match result {
        Ok(()) => ExitCode::SUCCESS,
        Err(Failure::Input(message)) => {
            complain(&message);
            ExitCode::from(2)
        }
        Err(Failure::Run(message)) => {
            complain(&message);
            ExitCode::from(1)
        }
    }
}

fn complain(message: &str) {
    for line in message.lines() {
        if line.starts_with("  ") {
            tell(line);
        } else {
            tell(&format!("error: {line}"));
        }
    }
}

/// A line on standard error. One that nobody can read is no reason to end a night's work.
pub(crate) fn tell(line: &str) {
    let _ = writeln!(std::io::stderr().lock(), "{line}");
}

/// Writes to standard output; a reader that went away is no error of ours.
pub(crate) fn print(text: &str) -> Result<(), Failure> {
    let mut out = std::io::stdout().lock();
    match out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
        Err(e) if e.kind() == std::io::ErrorKind::BrokenPipe => Ok(()),
        Err(e) => Err(Failure::Run(format!("standard output: {e}"))),
        Ok(()) => Ok(()),
    }
}

/// A study with its variants, at least one.
pub(crate) struct Loaded {
    pub file: StudyFile,
    pub variants: Vec<Variant>,
}

/// Reads a study and its technologies and holds them to each other; warnings go to standard error, each once.
pub(crate) fn load(path: &Path, set: &[String]) -> Result<Loaded, Failure> {
    let mut file = study::read(path)?;
    for assignment in set {
        study::set_design(&mut file, assignment)?;
    }
    let mut told = BTreeSet::new();
    let mut warn = |warning: String| {
        if told.insert(warning.clone()) {
            tell(&warning);
        }
    };
    for warning in &file.warnings {
        warn(warning.to_string());
    }
    let mut technologies: BTreeMap<PathBuf, Technology> = BTreeMap::new();
    let mut variants = Vec::new();
    for variant in file.variants() {
        let held = |faults: Faults| {
            let of = match file.study.sweep.technologies.len() {
                0 => String::new(),
                _ => format!("\n  with {}", variant.study.technology.display()),
            };
            Failure::Input(format!("{faults}{of}"))
        };
        let technology = match technologies.get(&variant.study.technology) {
            Some(technology) => {
                for warning in technology::fit(&variant, technology).map_err(held)? {
                    warn(warning.to_string());
                }
                technology.clone()
            }
            None => {
                let read = technology::read_for(&variant).map_err(held)?;
                for warning in &read.warnings {
                    warn(warning.to_string());
                }
                let name = &read.technology.name;
                if let Some((other, _)) = technologies.iter().find(|(_, t)| t.name == *name) {
                    return Err(Failure::Input(format!(
                        "{}: technology: read \"{name}\" as the name of {} and of {}; allowed: names that differ, as designs \
                         are told apart by them",
                        path.display(),
                        other.display(),
                        variant.study.technology.display()
                    )));
                }
                technologies.insert(variant.study.technology.clone(), read.technology.clone());
                read.technology
            }
        };
        let setup =
            Setup::new(&variant.study, &technology).map_err(|e| Failure::Input(e.to_string()))?;
        variants.push(Variant {
            study: variant.study,
            technology,
            setup,
        });
    }
    Ok(Loaded { file, variants })
}

impl Loaded {
    /// The variant of a number from 1; the only one when none is asked for.
    pub(crate) fn variant(&self, number: Option<usize>) -> Result<&Variant, Failure> {
        let count = self.variants.len();
        let asked = match number {
            None if count > 1 => "no variant".to_owned(),
            None => "1".to_owned(),
            Some(number) => number.to_string(),
        };
        let place = number.unwrap_or(if count > 1 { 0 } else { 1 });
        let found = place.checked_sub(1).and_then(|i| self.variants.get(i));
        found.ok_or_else(|| {
            Failure::Input(format!(
                "--variant: read {asked}; allowed: 1 to {count}, as this study lists several values\n  help: \
                 `widefront check` numbers them"
            ))
        })
    }
}
