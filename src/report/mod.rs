//! What people look at: figures and one page of a run, made from its records alone.

pub mod figures;
pub mod page;

use crate::run::RunError;
use crate::run::folder::{RunFolder, read_front, read_optional, read_run};
use crate::run::records::{PeriodRecord, SupplyFront, WidthSweep};
use crate::run::summary::read_cells;
use figures::{FigureError, FigureInput};
use page::PageInput;
use std::path::PathBuf;
use thiserror::Error;

/// Why there is no report.
#[derive(Debug, Error)]
pub enum ReportError {
    /// The records.
    #[error(transparent)]
    Records(#[from] RunError),
    /// A figure.
    #[error(transparent)]
    Figure(#[from] FigureError),
}

/// Makes figures and page of the run in `folder` from its records; returns the page's file.
///
/// # Errors
/// [`ReportError`]; every file is the old or the new one, whole.
pub fn write(folder: &RunFolder) -> Result<PathBuf, ReportError> {
    let path = folder.path();
    let run = read_run(path)?;
    let front = read_front(path)?;
    let cells = read_cells(path)?;
    let sweep: Option<WidthSweep> = read_optional(path, "figures/width_sweep.json")?;
    let period: Option<PeriodRecord> = read_optional(path, "figures/period.json")?;
    let periods: Option<Vec<PeriodRecord>> = read_optional(path, "waveforms.json")?;
    let supplies: Option<Vec<SupplyFront>> = read_optional(path, "figures/supplies.json")?;
    let limit = |name: &str| run["study"]["limits"][name].as_f64();
    let best = figures::best_cells(&cells);
    let input = FigureInput {
        title: run["study"]["title"].as_str().unwrap_or_default(),
        designs: &front.designs,
        cells: &best,
        supplies: supplies.as_deref().unwrap_or_default(),
        frequency_hz: run["study"]["frequency_hz"].as_f64().unwrap_or_default(),
        second_harmonic_limit_dbc: limit("second_harmonic_dbc"),
        third_harmonic_limit_dbc: limit("third_harmonic_dbc"),
        sweep: sweep.as_ref(),
        period: period.as_ref(),
    };
    figures::write_all(&path.join("figures"), &input)?;
    let page = page::page(&PageInput {
        run: &run,
        designs: &front.designs,
        cells: &cells,
        periods: &periods.unwrap_or_default(),
    });
    folder.write("report.html", page.as_bytes())?;
    Ok(path.join("report.html"))
}
