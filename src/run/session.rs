//! One sitting of a search: what is missing is searched on all threads, each finished cell on disk at once.

use super::folder::{RunFolder, read_cell, read_run, unplaced};
use super::illustrations::illustrations;
use super::records::{CellRecord, DesignRecord, HypervolumeReference, RunRecord, SCHEMA};
use super::same::same_run;
use super::summary::{Standing, Summary, front_hypervolume, hypervolume_reference, summarise};
use super::variant::{RunCell, Variant, VariantLabel, run_cells};
use super::work::in_order;
use super::{RunError, digest};
use crate::search::cell::{CERTIFIED_RESIDUAL, CellFront, search_cell};
use crate::search::space;
use crate::search::{Context, Spirals};
use crate::study::{Space, Study};
use crate::technology::Technology;
use std::path::{Path, PathBuf};
use std::str::FromStr;
use std::sync::atomic::{AtomicBool, AtomicU64, AtomicUsize, Ordering};
use std::sync::{Arc, Mutex, mpsc};
use std::time::{Duration, SystemTime, UNIX_EPOCH};

/// A share of a run's cells: the `index`-th (from 1) of `count`, dealt in turn.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Part {
    /// From 1.
    pub index: usize,
    /// How many.
    pub count: usize,
}

impl Part {
    /// Cells are dealt in turn: dear ones lie side by side.
    pub fn owner(cell: usize, count: usize) -> Self {
        Self {
            index: cell % count + 1,
            count,
        }
    }
}

impl FromStr for Part {
    type Err = &'static str;

    fn from_str(text: &str) -> Result<Self, Self::Err> {
        const ALLOWED: &str = "K/N with 1 ≤ K ≤ N ≤ 100000, for example 3/16";
        let (index, count) = text.split_once('/').ok_or(ALLOWED)?;
        let number = |s: &str| s.parse::<usize>().map_err(|_| ALLOWED);
        let part = Self {
            index: number(index)?,
            count: number(count)?,
        };
        if (1..=part.count).contains(&part.index) && part.count <= 100_000 {
            Ok(part)
        } else {
            Err(ALLOWED)
        }
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
    /// The study, lists and all.
    pub study: &'a Study,
    /// Its variants, in their order, at least one.
    pub variants: &'a [Variant],
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
    /// Work starts: cells in all, and what is finished of them.
    fn begins(&self, cells: usize, earlier: &Standing);
    /// Told twice a second while cells are searched: assessments of this sitting, those of unfinished cells too.
    fn spent(&self, evaluations: u64);
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
    /// The folder, still locked.
    pub folder: RunFolder,
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

    let cells: Vec<RunCell> = run_cells(space, job.variants.len())
        .into_iter()
        .filter(|c| job.part.is_none_or(|p| p == Part::owner(c.index, p.count)))
        .collect();
    let mut missing = Vec::new();
    let mut earlier = Standing::default();
    for cell in &cells {
        match read_cell(job.out, cell.index) {
            Ok(Some(record)) => earlier.add(&record),
            Ok(None) => missing.push(*cell),
            Err(error @ RunError::Damaged { .. }) => {
                observer.damaged(&error);
                missing.push(*cell);
            }
            Err(error) => return Err(error),
        }
    }
    observer.begins(cells.len(), &earlier);
    let finished =
        earlier.cells + search_missing(job, space, &record, &folder, &missing, stop, observer)?;

    let whole = finished == cells.len();
    record.ended_because = match (whole, job.part) {
        (false, _) => "stopped",
        (true, Some(_)) => "every cell of this part searched",
        (true, None) => "every cell searched",
    }
    .into();
    if !whole {
        // First of all: a signal leaves a second, and many cells take longer to sum up.
        record.ended_unix_s = Some(now());
        record.cells_finished = finished;
        folder.write_json("run.json", &record)?;
    }
    let summary = summarise(
        &folder,
        cells.iter().map(|c| c.index),
        &job.study.search,
        &record.hypervolume_reference,
    )?;
    close(&mut record, &summary);
    folder.write_json("run.json", &record)?;
    if !whole {
        return Err(RunError::Stopped {
            path: job.out.to_owned(),
            finished,
            cells: cells.len(),
        });
    }
    if summary.front.is_empty() && job.part.is_none() {
        return Err(RunError::NothingFeasible);
    }
    illustrations(job, &folder, &summary)?;
    Ok(Finished {
        summary,
        record,
        folder,
    })
}

pub(super) fn new_record(job: &Job<'_>, space: &Space) -> Result<RunRecord, RunError> {
    let damaged = |e: serde_json::Error| RunError::Damaged {
        path: job.out.join("run.json"),
        reason: format!("cannot be written as JSON: {e}"),
    };
    let mut study = serde_json::to_value(job.study).map_err(damaged)?;
    unplaced(&mut study);
    // Technology is the outermost list.
    let listed = &job.study.sweep.technologies;
    let a_technology = job.variants.len() / listed.len().max(1);
    let technologies: Vec<Technology> = job
        .variants
        .iter()
        .step_by(a_technology.max(1))
        .take(listed.len())
        .map(|v| v.technology.clone())
        .collect();
    let first = job.variants.first().ok_or(RunError::NoSpace)?;
    let technology_hash = if technologies.is_empty() {
        digest(&first.technology)
    } else {
        digest(&technologies)
    };
    let largest = job
        .variants
        .iter()
        .map(|v| hypervolume_reference(&v.study, &v.setup, space).area_m2)
        .fold(0.0, f64::max);
    let cores = std::thread::available_parallelism().map_or(1, usize::from);
    Ok(RunRecord {
        schema: SCHEMA,
        version: env!("CARGO_PKG_VERSION").into(),
        study: job.study.clone(),
        technology: first.technology.clone(),
        technologies,
        study_hash: digest(&study).map_err(damaged)?,
        technology_hash: technology_hash.map_err(damaged)?,
        seed: job.study.search.seed,
        objectives: job.study.search.objectives.clone(),
        host_cores: cores,
        threads: job.threads.unwrap_or(cores),
        started_unix_s: now(),
        ended_unix_s: None,
        part: job.part.map(|p| p.to_string()),
        cells: space::cells(space).len() * job.variants.len(),
        cells_finished: 0,
        evaluations: 0,
        front_size: 0,
        hypervolume: 0.0,
        hypervolume_reference: HypervolumeReference { area_m2: largest },
        residuals: None,
        ended_because: "still running".into(),
    })
}

/// Time between two reports of what is spent.
const TELL_EVERY: Duration = Duration::from_millis(500);

/// Searches cells; returns how many it finished.
fn search_missing(
    job: &Job<'_>,
    space: &Space,
    record: &RunRecord,
    folder: &RunFolder,
    missing: &[RunCell],
    stop: &AtomicBool,
    observer: &impl Observer,
) -> Result<usize, RunError> {
    if missing.is_empty() {
        return Ok(0);
    }
    let pool = rayon::ThreadPoolBuilder::new()
        .num_threads(record.threads)
        .build()
        .map_err(|e| RunError::Io {
            path: PathBuf::from("threads"),
            error: std::io::Error::other(e),
        })?;
    let failed: Mutex<Option<RunError>> = Mutex::new(None);
    let finished = AtomicUsize::new(0);
    let search = |context: &Context<'_>, cell: &RunCell| {
        let Some(front) = search_cell(context, &cell.cell, stop) else {
            return;
        };
        let cell_record = cell_record(record, job.variants, cell, front);
        match folder.write_cell(&cell_record) {
            Ok(()) => {
                finished.fetch_add(1, Ordering::Relaxed);
                observer.finished(&cell_record);
            }
            Err(error) => {
                stop.store(true, Ordering::Relaxed);
                if let Ok(mut slot) = failed.lock() {
                    slot.get_or_insert(error);
                }
            }
        }
    };
    // Spirals depend on these and the space alone.
    let spirals_of = |cell: &RunCell| {
        let study = &job.variants[cell.variant].study;
        (study.technology.as_path(), study.frequency_hz.to_bits())
    };
    let spent = Arc::new(AtomicU64::new(0));
    let (working, ended) = mpsc::channel::<()>();
    std::thread::scope(|scope| {
        let told = Arc::clone(&spent);
        scope.spawn(move || {
            while ended.recv_timeout(TELL_EVERY) == Err(mpsc::RecvTimeoutError::Timeout) {
                observer.spent(told.load(Ordering::Relaxed));
            }
        });
        in_order(
            record.threads,
            missing,
            stop,
            spirals_of,
            |cell| {
                let setup = &job.variants[cell.variant].setup;
                Arc::new(pool.install(|| Spirals::new(setup, space)))
            },
            |spirals, cell| {
                let context = Context::sharing(
                    &job.variants[cell.variant].setup,
                    space,
                    &record.objectives,
                    record.seed,
                    Arc::clone(spirals),
                    Arc::clone(&spent),
                );
                search(&context, cell);
            },
        );
        drop(working);
    });
    match failed.into_inner() {
        Ok(Some(error)) => Err(error),
        _ => Ok(finished.into_inner()),
    }
}

fn cell_record(
    run: &RunRecord,
    variants: &[Variant],
    at: &RunCell,
    front: CellFront,
) -> CellRecord {
    let cell = front.cell;
    let variant = (variants.len() > 1).then(|| VariantLabel::new(&variants[at.variant]));
    let designs: Vec<DesignRecord> = front
        .points
        .into_iter()
        .enumerate()
        .map(|(place, point)| DesignRecord {
            id: format!("{:05}-{place:03}", at.index),
            cell: at.index,
            residual: point.residual,
            certified: point.residual <= CERTIFIED_RESIDUAL,
            variant: variant.clone(),
            evaluation: point.evaluation,
        })
        .collect();
    CellRecord {
        cell: at.index,
        loaded_q: cell.loaded_q,
        supply_v: cell.supply_v,
        variant,
        evaluations: front.evaluations,
        hypervolume: front_hypervolume(&run.objectives, &run.hypervolume_reference, &designs),
        designs,
    }
}

fn close(record: &mut RunRecord, summary: &Summary) {
    record.ended_unix_s = Some(now());
    record.cells_finished = summary.finished;
    record.evaluations = summary.evaluations;
    record.front_size = summary.front.len();
    record.hypervolume = summary.hypervolume;
    record.residuals = summary.residuals;
}
