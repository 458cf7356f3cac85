//! One sitting of a search: what is missing is searched on all threads, each finished cell on disk at once.

use super::folder::{RunFolder, cell_name, read_cell, read_run};
use super::records::{
    CellRecord, DesignRecord, HypervolumeReference, PeriodRecord, RunRecord, SCHEMA, WidthSweep,
};
use super::summary::{Summary, front_hypervolume, summarise};
use super::{RunError, digest};
use crate::evaluate::{Setup, evaluate, loop_waveform};
use crate::search::Context;
use crate::search::cell::{CERTIFIED_RESIDUAL, CellFront, search_cell};
use crate::search::space::{self, Cell};
use crate::study::{Design, Space, Study};
use crate::technology::{Inductor, Technology};
use rayon::prelude::*;
use serde_json::Value;
use std::path::{Path, PathBuf};
use std::sync::Mutex;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::{SystemTime, UNIX_EPOCH};

/// A share of a run's cells: the `index`-th (from 1) of `count`, dealt in turn.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Part {
    /// From 1.
    pub index: usize,
    /// How many.
    pub count: usize,
}

impl Part {
    fn holds(part: Option<Self>, cell: usize) -> bool {
        part.is_none_or(|p| cell % p.count == p.index - 1)
    }
}

impl std::fmt::Display for Part {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{}/{}", self.index, self.count)
    }
}

/// What is asked of a sitting.
#[derive(Debug)]
pub struct Job<'a> {
    /// The study.
    pub study: &'a Study,
    /// Its technology.
    pub technology: &'a Technology,
    /// Both together.
    pub setup: &'a Setup,
    /// The run folder.
    pub out: &'a Path,
    /// Go on with a run that is there.
    pub resume: bool,
    /// A share of the cells only.
    pub part: Option<Part>,
    /// Threads; all cores when none.
    pub threads: Option<usize>,
}

/// Told what happens; called from several threads.
pub trait Observer: Sync {
    /// Work starts: cells in all, of these already finished.
    fn begins(&self, cells: usize, finished: usize);
    /// A file of an earlier sitting was damaged; its cell is searched again.
    fn damaged(&self, error: &RunError);
    /// A cell is on disk.
    fn finished(&self, cell: &CellRecord);
}

/// A finished run.
#[derive(Debug)]
pub struct Finished {
    /// What the cells amount to.
    pub summary: Summary,
    /// `run.json`.
    pub record: RunRecord,
    /// Losses against width around the most efficient design.
    pub sweep: Option<WidthSweep>,
    /// One period of that design.
    pub period: Option<PeriodRecord>,
    /// The folder, still locked.
    pub folder: RunFolder,
}

/// The area a hypervolume is measured from: the study's limit, or twice the largest inductors and switches.
pub fn hypervolume_reference(study: &Study, setup: &Setup, space: &Space) -> HypervolumeReference {
    let area_m2 = study.limits.area_m2.at_most.unwrap_or_else(|| {
        let legs = f64::from(setup.legs);
        let coil = match &setup.inductor {
            Inductor::Spiral(process) => {
                let side = space.diameter_m.as_ref().map_or(0.0, space::largest)
                    + 2.0 * process.keep_out_m;
                side * side
            }
            Inductor::Fixed {
                area_base_m2,
                area_slope_m2_h,
                ..
            } => {
                let ohm = space
                    .resistance_ohm
                    .as_ref()
                    .map_or(setup.network.antenna_resistance_ohm, space::largest);
                area_base_m2
                    + area_slope_m2_h * space::largest(&space.loaded_q) * ohm
                        / setup.network.angular_frequency
            }
        };
        let switches = f64::from(setup.stack)
            * space::largest(&space.nmos_width_m)
            * (1.0 + space::largest(&space.width_ratio))
            * setup.layout.width_area_m;
        2.0 * legs * (coil + switches)
    });
    HypervolumeReference { area_m2 }
}

fn now() -> u64 {
    SystemTime::now()
        .duration_since(UNIX_EPOCH)
        .map_or(0, |d| d.as_secs())
}

/// Searches what is missing and closes the run.
///
/// # Errors
/// [`RunError`]; whatever is finished stays on disk.
pub fn run(
    job: &Job<'_>,
    stop: &AtomicBool,
    observer: &impl Observer,
) -> Result<Finished, RunError> {
    let space = job.study.space.as_ref().ok_or(RunError::NoSpace)?;
    let mut record = new_record(job, space)?;
    let folder = if job.resume {
        let folder = RunFolder::open(job.out)?;
        same_run(job.out, &read_run(job.out)?, &record)?;
        folder
    } else {
        RunFolder::create(job.out)?
    };
    let begun = folder.write_json("run.json", &record);
    if job.resume {
        begun?;
    } else {
        begun.map_err(RunError::before_work)?;
    }

    let cells: Vec<Cell> = space::cells(space)
        .into_iter()
        .filter(|c| Part::holds(job.part, c.index))
        .collect();
    let missing: Vec<Cell> = cells
        .iter()
        .filter_map(|cell| match read_cell(job.out, cell.index) {
            Ok(Some(_)) => None,
            Ok(None) => Some(Ok(*cell)),
            Err(error @ RunError::Damaged { .. }) => {
                observer.damaged(&error);
                Some(Ok(*cell))
            }
            Err(error) => Some(Err(error)),
        })
        .collect::<Result<_, _>>()?;
    let finished = cells.len() - missing.len();
    observer.begins(cells.len(), finished);
    search_missing(job, space, &record, &folder, &missing, stop, observer)?;

    let summary = summarise(
        &folder,
        cells.iter().map(|c| c.index),
        &record.objectives,
        &record.hypervolume_reference,
    )?;
    close(&mut record, &summary, cells.len());
    if summary.finished < cells.len() {
        "stopped".clone_into(&mut record.ended_because);
        folder.write_json("run.json", &record)?;
        return Err(RunError::Stopped {
            path: job.out.to_owned(),
            finished: summary.finished,
            cells: cells.len(),
        });
    }
    folder.write_json("run.json", &record)?;
    if summary.front.is_empty() && job.part.is_none() {
        return Err(RunError::NothingFeasible);
    }
    let (sweep, period) = illustrations(job, &folder, &summary)?;
    Ok(Finished {
        summary,
        record,
        sweep,
        period,
        folder,
    })
}

fn new_record(job: &Job<'_>, space: &Space) -> Result<RunRecord, RunError> {
    let damaged = |e: serde_json::Error| RunError::Damaged {
        path: job.out.join("run.json"),
        reason: format!("cannot be written as JSON: {e}"),
    };
    // Where the technology file lies is no part of what a run is.
    let mut study = serde_json::to_value(job.study).map_err(damaged)?;
    if let Some(map) = study.as_object_mut() {
        map.shift_remove("technology");
    }
    let cores = std::thread::available_parallelism().map_or(1, usize::from);
    Ok(RunRecord {
        schema: SCHEMA,
        version: env!("CARGO_PKG_VERSION").into(),
        study: job.study.clone(),
        technology: job.technology.clone(),
        study_hash: digest(&study).map_err(damaged)?,
        technology_hash: digest(job.technology).map_err(damaged)?,
        seed: job.study.search.seed,
        objectives: job.study.search.objectives.clone(),
        host_cores: cores,
        threads: job.threads.unwrap_or(cores),
        started_unix_s: now(),
        ended_unix_s: None,
        part: job.part.map(|p| p.to_string()),
        cells: space::cells(space).len(),
        cells_finished: 0,
        evaluations: 0,
        front_size: 0,
        hypervolume: 0.0,
        hypervolume_reference: hypervolume_reference(job.study, job.setup, space),
        residuals: None,
        ended_because: "still running".into(),
    })
}

/// Refuses to go on with a run of something else, and says what differs.
fn same_run(path: &Path, there: &Value, here: &RunRecord) -> Result<(), RunError> {
    let mut differences = Vec::new();
    let here_value = serde_json::to_value(here).map_err(|e| RunError::Damaged {
        path: path.join("run.json"),
        reason: e.to_string(),
    })?;
    if there["version"] != here_value["version"] {
        differences.push(format!(
            "program version {} (this is {})",
            there["version"], here_value["version"]
        ));
    }
    for (what, hash) in [("study", "study_hash"), ("technology", "technology_hash")] {
        if there[hash] != here_value[hash] {
            let place = first_difference(what, &there[what], &here_value[what]);
            differences.push(format!(
                "another {what}{}",
                place.map_or(String::new(), |p| format!(" ({p})"))
            ));
        }
    }
    if there["part"] != here_value["part"] {
        differences.push(format!(
            "part {} (this is {})",
            there["part"], here_value["part"]
        ));
    }
    if differences.is_empty() {
        Ok(())
    } else {
        Err(RunError::Different {
            path: path.to_owned(),
            differences: differences.join(", "),
        })
    }
}

fn first_difference(path: &str, a: &Value, b: &Value) -> Option<String> {
    match (a, b) {
        (Value::Object(x), Value::Object(y)) => x
            .iter()
            .filter(|(key, _)| path != "study" || key.as_str() != "technology")
            .find_map(|(key, value)| {
                first_difference(
                    &format!("{path}.{key}"),
                    value,
                    y.get(key).unwrap_or(&Value::Null),
                )
            })
            .or_else(|| {
                let extra = y.keys().find(|k| !x.contains_key(*k))?;
                Some(format!("{path}.{extra} is new"))
            }),
        _ if a == b => None,
        _ => Some(format!("{path} was {a}, is {b}")),
    }
}

fn search_missing(
    job: &Job<'_>,
    space: &Space,
    record: &RunRecord,
    folder: &RunFolder,
    missing: &[Cell],
    stop: &AtomicBool,
    observer: &impl Observer,
) -> Result<(), RunError> {
    if missing.is_empty() {
        return Ok(());
    }
    let pool = rayon::ThreadPoolBuilder::new()
        .num_threads(record.threads)
        .build()
        .map_err(|e| RunError::Io {
            path: PathBuf::from("threads"),
            error: std::io::Error::other(e),
        })?;
    let failed: Mutex<Option<RunError>> = Mutex::new(None);
    pool.install(|| {
        let context = Context::new(job.setup, space, &record.objectives, record.seed);
        // One cell at a time a thread: cells differ in cost, and a kill should lose as little as it can.
        missing.par_iter().with_max_len(1).for_each(|cell| {
            if stop.load(Ordering::Relaxed) {
                return;
            }
            let Some(front) = search_cell(&context, cell, stop) else {
                return;
            };
            let cell_record = cell_record(record, front);
            match folder.write_cell(&cell_record) {
                Ok(()) => observer.finished(&cell_record),
                Err(error) => {
                    stop.store(true, Ordering::Relaxed);
                    if let Ok(mut slot) = failed.lock() {
                        slot.get_or_insert(error);
                    }
                }
            }
        });
    });
    match failed.into_inner() {
        Ok(Some(error)) => Err(error),
        _ => Ok(()),
    }
}

fn cell_record(run: &RunRecord, front: CellFront) -> CellRecord {
    let cell = front.cell;
    let designs: Vec<DesignRecord> = front
        .points
        .into_iter()
        .enumerate()
        .map(|(place, point)| DesignRecord {
            id: format!("{:05}-{place:03}", cell.index),
            cell: cell.index,
            residual: point.residual,
            certified: point.residual <= CERTIFIED_RESIDUAL,
            evaluation: point.evaluation,
        })
        .collect();
    CellRecord {
        cell: cell.index,
        loaded_q: cell.loaded_q,
        supply_v: cell.supply_v,
        evaluations: front.evaluations,
        hypervolume: front_hypervolume(&run.objectives, &run.hypervolume_reference, &designs),
        designs,
    }
}

fn close(record: &mut RunRecord, summary: &Summary, cells: usize) {
    record.ended_unix_s = Some(now());
    record.cells_finished = summary.finished;
    record.evaluations = summary.evaluations;
    record.front_size = summary.front.len();
    record.hypervolume = summary.hypervolume;
    record.residuals = summary.residuals;
    record.ended_because = if summary.finished == cells && record.part.is_some() {
        "every cell of this part searched".into()
    } else {
        "every cell searched".into()
    };
}

/// What two figures show: losses against width around the most efficient design, and one period of it.
fn illustrations(
    job: &Job<'_>,
    folder: &RunFolder,
    summary: &Summary,
) -> Result<(Option<WidthSweep>, Option<PeriodRecord>), RunError> {
    /// Widths of the sweep, from a fifth to five times the design's.
    const WIDTHS: usize = 61;
    const SAMPLES: usize = 720;
    let Some(best) = summary.front.first() else {
        return Ok((None, None));
    };
    let design = &best.evaluation.design;
    let widths: Vec<f64> = (0..WIDTHS)
        .map(|i| design.nmos_width_m * 5f64.powf(2.0 * i as f64 / (WIDTHS - 1) as f64 - 1.0))
        .collect();
    let evaluations = widths
        .par_iter()
        .map(|&nmos_width_m| {
            let varied = Design {
                nmos_width_m,
                ..design.clone()
            };
            evaluate(job.setup, &varied)
        })
        .collect();
    let sweep = WidthSweep {
        id: best.id.clone(),
        nmos_width_m: widths,
        evaluations,
    };
    folder.write_json("figures/width_sweep.json", &sweep)?;
    let period = loop_waveform(job.setup, design, SAMPLES).map(|waveform| PeriodRecord {
        id: best.id.clone(),
        frequency_hz: job.setup.frequency_hz,
        supply_v: design.supply_v,
        dead_time: design.dead_time,
        waveform,
    });
    if let Some(period) = &period {
        folder.write_json("figures/period.json", period)?;
    }
    Ok((Some(sweep), period))
}

/// Makes one run folder of parts: every part of the same run, every cell there and sound.
///
/// # Errors
/// [`RunError::Parts`] naming what is missing or different, and all of [`run`].
pub fn join(
    job: &Job<'_>,
    parts: &[PathBuf],
    observer: &impl Observer,
) -> Result<Finished, RunError> {
    let space = job.study.space.as_ref().ok_or(RunError::NoSpace)?;
    let wanted = new_record(job, space)?;
    for part in parts {
        let mut there = read_run(part)?;
        there["part"] = Value::Null;
        same_run(part, &there, &wanted)?;
    }
    let cells = space::cells(space);
    let mut missing = Vec::new();
    let mut records = Vec::with_capacity(cells.len());
    for cell in &cells {
        let mut found = None;
        for part in parts {
            if read_cell(part, cell.index)?.is_some() {
                found = Some(part.join(cell_name(cell.index)));
                break;
            }
        }
        match found {
            Some(path) => records.push(path),
            None => missing.push(cell.index.to_string()),
        }
    }
    if !missing.is_empty() {
        return Err(RunError::Parts(format!(
            "{} of {} cells are in none of the parts: {}; finish those parts first",
            missing.len(),
            cells.len(),
            missing.join(", ")
        )));
    }
    let folder = if job.out.join("run.json").exists() {
        // A join that did not end is done again.
        let folder = RunFolder::open(job.out)?;
        same_run(job.out, &read_run(job.out)?, &wanted)?;
        folder
    } else {
        RunFolder::create(job.out)?
    };
    let begun = folder.write_json("run.json", &wanted);
    begun.map_err(RunError::before_work)?;
    for (cell, path) in cells.iter().zip(&records) {
        let bytes = std::fs::read(path).map_err(|error| RunError::Io {
            path: path.clone(),
            error,
        })?;
        folder.write(&cell_name(cell.index), &bytes)?;
    }
    drop(folder);
    let job = Job {
        resume: true,
        part: None,
        ..*job
    };
    run(&job, &AtomicBool::new(false), observer)
}
