//! What people look at: figures and one page of a run, made from its records alone.

pub mod figures;
pub mod page;

use crate::run::RunError;
use crate::run::folder::{RunFolder, read_cell, read_front, read_optional, read_run};
use crate::run::records::{DesignList, PeriodRecord, SupplyFront, WidthSweep};
use crate::run::summary::{CellLine, read_cells};
use figures::{FigureError, FigureInput};
use page::PageInput;
use serde_json::Value;
use std::path::{Path, PathBuf};
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

/// The records that a report is made of.
struct Records {
    run: Value,
    front: DesignList,
    cells: Vec<CellLine>,
    sweep: Option<WidthSweep>,
    period: Option<PeriodRecord>,
    waveforms: Vec<PeriodRecord>,
    sheets: Vec<(String, Value)>,
}

impl Records {
    fn read(path: &Path) -> Result<Self, ReportError> {
        let waveforms: Option<_> = read_optional(path, "waveforms.json")?;
        let front = read_front(path)?;
        let mut sheets = Vec::new();
        for design in &front.designs {
            // An id that an altered record makes a path names no sheet.
            if Path::new(&design.id).components().count() != 1 {
                continue;
            }
            if let Some(sheet) = read_optional(path, &format!("sheets/{}.json", design.id))? {
                sheets.push((design.id.clone(), sheet));
            }
        }
        Ok(Self {
            run: read_run(path)?,
            cells: read_cells(path)?,
            sweep: read_optional(path, "figures/width_sweep.json")?,
            period: read_optional(path, "figures/period.json")?,
            waveforms: waveforms.unwrap_or_default(),
            front,
            sheets,
        })
    }

    fn page(&self) -> String {
        page::page(&PageInput {
            run: &self.run,
            designs: &self.front.designs,
            cells: &self.cells,
            periods: &self.waveforms,
            sweep: self.sweep.as_ref(),
            sheets: &self.sheets,
        })
    }
}

/// The page of the run in `path`; nothing there is changed.
///
/// # Errors
/// [`ReportError::Records`].
pub fn page_of(path: &Path) -> Result<String, ReportError> {
    Ok(Records::read(path)?.page())
}

/// Best efficiency of each cell among the designs of its front that give `power_w` at least, in the place of its best.
fn from_power(path: &Path, cells: &mut [CellLine], power_w: f64) -> Result<(), RunError> {
    for cell in cells {
        let designs = read_cell(path, cell.cell)?.map_or(Vec::new(), |record| record.designs);
        let strong = designs.iter().filter_map(|d| d.evaluation.figures.as_ref());
        let strong = strong.filter(|f| f.output_power_w >= power_w);
        cell.best_efficiency = strong.map(|f| f.efficiency).reduce(f64::max);
    }
    Ok(())
}

/// Makes figures and page of the run in `folder` from its records; returns the page's file. The figure of cells counts
/// designs of `map_power_w` at least.
///
/// # Errors
/// [`ReportError`]; every file is the old or the new one, whole.
pub fn write(folder: &RunFolder, map_power_w: Option<f64>) -> Result<PathBuf, ReportError> {
    let path = folder.path();
    let records = Records::read(path)?;
    let mut cells = records.cells.clone();
    if let Some(power_w) = map_power_w {
        from_power(path, &mut cells, power_w)?;
    }
    let supplies: Option<Vec<SupplyFront>> = read_optional(path, "figures/supplies.json")?;
    let limit = |name: &str| records.run["study"]["limits"][name].as_f64();
    let best = figures::best_cells(&cells);
    let input = FigureInput {
        title: records.run["study"]["title"].as_str().unwrap_or_default(),
        designs: &records.front.designs,
        cells: &best,
        map_power_w,
        supplies: supplies.as_deref().unwrap_or_default(),
        frequency_hz: records.run["study"]["frequency_hz"]
            .as_f64()
            .unwrap_or_default(),
        second_harmonic_limit_dbc: limit("second_harmonic_dbc"),
        third_harmonic_limit_dbc: limit("third_harmonic_dbc"),
        sweep: records.sweep.as_ref(),
        period: records.period.as_ref(),
    };
    figures::write_all(&path.join("figures"), &input)?;
    folder.write("report.html", records.page().as_bytes())?;
    Ok(path.join("report.html"))
}
