//! `widefront report`: figures and one page of a run.

use super::{Failure, print};
use crate::quantity::{Dimension, Quantity};
use crate::report::{self, ReportError};
use crate::run::folder::{RunFolder, read_run};
use atomic_write_file::AtomicWriteFile;
use std::io::Write;
use std::path::{Path, PathBuf};

#[derive(Debug, clap::Args)]
pub struct ReportArguments {
    /// The run folder.
    run: PathBuf,
    /// Write the page alone to this file and leave the run folder as it is.
    #[arg(long, value_name = "FILE")]
    out: Option<PathBuf>,
    /// The figure of cells shows the best efficiency of designs that give at least this output power.
    #[arg(long, value_name = "POWER", conflicts_with = "out")]
    map_power: Option<String>,
}

impl From<ReportError> for Failure {
    fn from(error: ReportError) -> Self {
        Self::Run(error.to_string())
    }
}

/// Makes them from the run's records.
pub fn run(arguments: &ReportArguments) -> Result<(), Failure> {
    let path: &Path = &arguments.run;
    read_run(path)?;
    if let Some(out) = &arguments.out {
        let page = report::page_of(path)?;
        let written = AtomicWriteFile::open(out).and_then(|mut file| {
            file.write_all(page.as_bytes())?;
            file.commit()
        });
        written.map_err(|e| Failure::Run(format!("{}: {e}", out.display())))?;
        return print(&format!("wrote {}\n", out.display()));
    }
    let map_power_w = arguments.map_power.as_ref().map(|text| {
        Quantity::parse(text, Dimension::Power)
            .map_err(|e| Failure::Input(format!("--map-power: {e}")))
    });
    let page = report::write(&RunFolder::open(path)?, map_power_w.transpose()?)?;
    print(&format!("wrote {} and figures\n", page.display()))
}
