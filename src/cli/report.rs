//! `widefront report`: figures and one page of a run.

use super::{Failure, print};
use crate::report::{self, ReportError};
use crate::run::folder::{RunFolder, read_run};
use std::path::{Path, PathBuf};

#[derive(Debug, clap::Args)]
pub struct ReportArguments {
    /// The run folder.
    run: PathBuf,
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
    let page = report::write(&RunFolder::open(path)?)?;
    print(&format!("wrote {} and figures\n", page.display()))
}
