//! Figures of a run as SVG and PNG, the same drawing for both, readable at half a page.

mod bars;
mod budgets;
mod chosen;
mod fitted;
mod front;
mod losses;
mod map;
mod period;
mod spectrum;
mod style;
mod supplies;

use crate::run::records::{DesignRecord, PeriodRecord, SupplyFront, WidthSweep};
use crate::run::summary::CellLine;
pub use fitted::{DeviceFit, MeasuredPoint, Series};
use plotters::backend::{BitMapBackend, DrawingBackend, SVGBackend};
use plotters::coord::Shift;
use plotters::drawing::{DrawingArea, IntoDrawingArea};
use std::path::{Path, PathBuf};
use style::SIZE;
use thiserror::Error;

/// A figure that could not be made.
#[derive(Debug, Error)]
pub enum FigureError {
    /// The drawing failed.
    #[error("{path}: cannot be drawn: {reason}", path = .path.display())]
    Drawing {
        /// The file.
        path: PathBuf,
        /// Why.
        reason: String,
    },
    /// The system refused.
    #[error("{path}: {error}", path = .path.display())]
    Io {
        /// The file.
        path: PathBuf,
        /// What it said.
        error: std::io::Error,
    },
}

/// The records that figures show.
#[derive(Debug, Clone, Copy)]
pub struct FigureInput<'a> {
    /// The study's title.
    pub title: &'a str,
    /// The overall front.
    pub designs: &'a [DesignRecord],
    /// Every cell: loaded Q, supply, best efficiency.
    pub cells: &'a [CellBest],
    /// What those designs give at least, W; any where none is asked for.
    pub map_power_w: Option<f64>,
    /// Fronts by supply; empty where the supply is free.
    pub supplies: &'a [SupplyFront],
    /// Carrier, Hz.
    pub frequency_hz: f64,
    /// The study's limit, dBc.
    pub second_harmonic_limit_dbc: Option<f64>,
    /// The study's limit, dBc.
    pub third_harmonic_limit_dbc: Option<f64>,
    /// Losses against width around one design.
    pub sweep: Option<&'a WidthSweep>,
    /// One period of that design.
    pub period: Option<&'a PeriodRecord>,
}

/// The best efficiency of one cell.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct CellBest {
    /// Q_L; none where it is free.
    pub loaded_q: Option<f64>,
    /// V_DD, V; none where it is free.
    pub supply_v: Option<f64>,
    /// None without a feasible design.
    pub efficiency: Option<f64>,
}

impl From<&CellLine> for CellBest {
    fn from(cell: &CellLine) -> Self {
        Self {
            loaded_q: cell.loaded_q,
            supply_v: cell.supply_v,
            efficiency: cell.best_efficiency,
        }
    }
}

/// The best of each loaded Q and supply, variants of a sweep taken together.
pub fn best_cells(cells: &[CellLine]) -> Vec<CellBest> {
    let mut best: Vec<CellBest> = Vec::new();
    for cell in cells.iter().map(CellBest::from) {
        let same = |c: &&mut CellBest| (c.loaded_q, c.supply_v) == (cell.loaded_q, cell.supply_v);
        match best.iter_mut().find(same) {
            Some(there) => {
                let most = [there.efficiency, cell.efficiency].into_iter().flatten();
                there.efficiency = most.reduce(f64::max);
            }
            None => best.push(cell),
        }
    }
    best
}

type Drawn = Result<(), String>;

/// Draws what the records allow into `folder`; returns the files.
///
/// # Errors
/// [`FigureError`]; a file of that name is then the old one or absent.
pub fn write_all(folder: &Path, input: &FigureInput<'_>) -> Result<Vec<PathBuf>, FigureError> {
    style::register_font();
    let mut files = Vec::new();
    if !input.designs.is_empty() {
        files.extend(write(folder, "front", Shape::Front(input))?);
        files.extend(write(folder, "budgets", Shape::Budgets(input))?);
        files.extend(write(folder, "areas", Shape::Areas(input))?);
        files.extend(write(folder, "spectrum", Shape::Spectrum(input))?);
    }
    if input.supplies.iter().any(|s| !s.points.is_empty()) {
        files.extend(write(folder, "supplies", Shape::Supplies(input))?);
    }
    if map::is_grid(input.cells) {
        files.extend(write(folder, "map", Shape::Map(input))?);
    }
    if let Some(sweep) = input.sweep {
        files.extend(write(folder, "losses", Shape::Losses(sweep))?);
    }
    if let Some(period) = input.period {
        files.extend(write(folder, "period", Shape::Period(period))?);
    }
    Ok(files)
}

/// Draws one fitted device, points as circles and the model as lines, as `NAME.svg` and `NAME.png`.
///
/// # Errors
/// As [`write_all`].
pub fn write_fit(folder: &Path, name: &str, fit: &DeviceFit) -> Result<[PathBuf; 2], FigureError> {
    style::register_font();
    write(folder, name, Shape::Fitted(fit))
}

/// One figure with its records.
#[derive(Clone, Copy)]
enum Shape<'a> {
    Front(&'a FigureInput<'a>),
    Budgets(&'a FigureInput<'a>),
    Areas(&'a FigureInput<'a>),
    Spectrum(&'a FigureInput<'a>),
    Supplies(&'a FigureInput<'a>),
    Map(&'a FigureInput<'a>),
    Losses(&'a WidthSweep),
    Period(&'a PeriodRecord),
    Fitted(&'a DeviceFit),
}

fn draw<B: DrawingBackend>(area: &DrawingArea<B, Shift>, shape: Shape<'_>) -> Drawn {
    area.fill(&plotters::style::WHITE).map_err(reason)?;
    match shape {
        Shape::Front(input) => front::draw(area, input),
        Shape::Budgets(input) => budgets::draw_losses(area, input),
        Shape::Areas(input) => budgets::draw_areas(area, input),
        Shape::Spectrum(input) => spectrum::draw(area, input),
        Shape::Supplies(input) => supplies::draw(area, input.title, input.supplies),
        Shape::Map(input) => map::draw(area, input),
        Shape::Losses(sweep) => losses::draw(area, sweep),
        Shape::Period(record) => period::draw(area, record),
        Shape::Fitted(fit) => fitted::draw(area, fit),
    }?;
    area.present().map_err(reason)
}

fn reason(error: impl std::fmt::Display) -> String {
    error.to_string()
}

/// Draws into memory and a temporary first, so that a failure leaves no blank file under the figure's name.
fn write(folder: &Path, name: &str, shape: Shape<'_>) -> Result<[PathBuf; 2], FigureError> {
    let svg = folder.join(format!("{name}.svg"));
    let png = folder.join(format!("{name}.png"));
    let failed = |path: &Path| {
        let path = path.to_owned();
        |reason| FigureError::Drawing { path, reason }
    };
    let mut text = String::new();
    draw(
        &SVGBackend::with_string(&mut text, SIZE).into_drawing_area(),
        shape,
    )
    .map_err(failed(&svg))?;
    let temporary = folder.join(format!(".{name}.tmp.png"));
    let drawn = draw(
        &BitMapBackend::new(&temporary, SIZE).into_drawing_area(),
        shape,
    );
    let io = |path: &Path| {
        let path = path.to_owned();
        |error| FigureError::Io { path, error }
    };
    if let Err(reason) = drawn {
        // The drawing's own error is the one to tell.
        let _ = std::fs::remove_file(&temporary);
        return Err(failed(&png)(reason));
    }
    std::fs::rename(&temporary, &png).map_err(io(&png))?;
    let temporary = folder.join(format!(".{name}.tmp.svg"));
    std::fs::write(&temporary, text).map_err(io(&svg))?;
    std::fs::rename(&temporary, &svg).map_err(io(&svg))?;
    Ok([svg, png])
}
