//! `widefront search` and `widefront join`: runs and their progress.

use super::{Failure, Loaded, load, print};
use crate::quantity::format as engineering;
use crate::report::figures::{self, CellBest, FigureInput};
use crate::run::RunError;
use crate::run::records::CellRecord;
use crate::run::session::{self, Finished, Job, Observer, Part};
use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};
use std::fmt::Write;
use std::io::IsTerminal;
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Arc, Mutex};
use std::time::{Duration, Instant};

#[derive(Debug, clap::Args)]
pub struct SearchArguments {
    /// The study file.
    study: PathBuf,
    /// The run folder [default: results/ and the study's name].
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
    /// Threads [default: all cores].
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=1024))]
    threads: Option<u16>,
    /// Go on with the run that is in the folder.
    #[arg(long)]
    resume: bool,
    /// Do a share of the cells: 3/16 is the third of sixteen.
    #[arg(long, value_name = "K/N", value_parser = part)]
    part: Option<Part>,
    /// No progress.
    #[arg(long, short)]
    quiet: bool,
}

#[derive(Debug, clap::Args)]
pub struct JoinArguments {
    /// The study file that the parts were made with.
    study: PathBuf,
    /// The run folder to make.
    out: PathBuf,
    /// The folders of all parts.
    #[arg(required = true)]
    parts: Vec<PathBuf>,
}

fn part(text: &str) -> Result<Part, String> {
    let allowed = "K/N with 1 ≤ K ≤ N ≤ 100000, for example 3/16";
    let (index, count) = text.split_once('/').ok_or(allowed)?;
    let number = |s: &str| s.parse::<usize>().map_err(|_| allowed.to_owned());
    let part = Part {
        index: number(index)?,
        count: number(count)?,
    };
    if (1..=part.count).contains(&part.index) && part.count <= 100_000 {
        Ok(part)
    } else {
        Err(allowed.into())
    }
}

impl From<RunError> for Failure {
    fn from(error: RunError) -> Self {
        let text = error.to_string();
        match error {
            RunError::NoSpace | RunError::Exists(_) | RunError::NotARun(_) => Self::Input(text),
            _ => Self::Run(text),
        }
    }
}

/// Runs a search.
pub fn run(arguments: &SearchArguments) -> Result<(), Failure> {
    let loaded = load(&arguments.study, &[])?;
    let out = match &arguments.out {
        Some(out) => out.clone(),
        None => default_folder(&arguments.study, arguments.part)?,
    };
    let stop = Arc::new(AtomicBool::new(false));
    let raised = Arc::clone(&stop);
    ctrlc::set_handler(move || raised.store(true, Ordering::Relaxed))
        .map_err(|e| Failure::Run(format!("cannot listen for signals: {e}")))?;
    let job = job(
        &loaded,
        &out,
        arguments.resume,
        arguments.part,
        arguments.threads.map(usize::from),
    );
    let progress = Progress::new(arguments.quiet);
    let finished = session::run(&job, &stop, &progress);
    progress.end();
    close(&loaded, &out, finished?)
}

/// Joins parts.
pub fn join(arguments: &JoinArguments) -> Result<(), Failure> {
    let loaded = load(&arguments.study, &[])?;
    let job = job(&loaded, &arguments.out, false, None, None);
    let finished = session::join(&job, &arguments.parts, &Progress::new(true))?;
    close(&loaded, &arguments.out, finished)
}

fn job<'a>(
    loaded: &'a Loaded,
    out: &'a Path,
    resume: bool,
    part: Option<Part>,
    threads: Option<usize>,
) -> Job<'a> {
    Job {
        study: &loaded.file.study,
        technology: &loaded.technology,
        setup: &loaded.setup,
        out,
        resume,
        part,
        threads,
    }
}

fn default_folder(study: &Path, part: Option<Part>) -> Result<PathBuf, Failure> {
    let stem = study
        .file_stem()
        .ok_or_else(|| Failure::Input(format!("{}: names no file; use --out", study.display())))?;
    let mut name = stem.to_owned();
    if let Some(part) = part {
        name.push(format!("-{}-of-{}", part.index, part.count));
    }
    Ok(Path::new("results").join(name))
}

fn close(loaded: &Loaded, out: &Path, finished: Finished) -> Result<(), Failure> {
    let (record, summary) = (&finished.record, &finished.summary);
    let cells: Vec<CellBest> = summary.cells.iter().map(CellBest::from).collect();
    let input = FigureInput {
        title: &loaded.file.study.title,
        designs: &summary.front,
        cells: &cells,
        sweep: finished.sweep.as_ref(),
        period: finished.period.as_ref(),
    };
    figures::write_all(&finished.folder.path().join("figures"), &input).map_err(|e| {
        Failure::Run(format!(
            "{e}; the run is whole but for its figures; mend this and draw them by search --resume"
        ))
    })?;
    let mut text = String::new();
    // Writing to a String cannot fail.
    let _ = writeln!(
        text,
        "{} cells, {} evaluations, {} designs on the overall front, hypervolume {:.6} W mm^2",
        record.cells_finished, record.evaluations, record.front_size, record.hypervolume
    );
    if let Some(r) = &record.residuals {
        let _ = writeln!(
            text,
            "optimality: {} of {} points certified, residual median {:.1e}, worst {:.1e}",
            r.certified, r.points, r.median, r.worst
        );
    }
    for (what, figures) in [
        ("most efficient", summary.front.first()),
        (
            "most output power",
            summary.front.iter().max_by(|a, b| {
                let power = |d: &&crate::run::records::DesignRecord| {
                    d.evaluation
                        .figures
                        .as_ref()
                        .map_or(0.0, |f| f.output_power_w)
                };
                power(a).total_cmp(&power(b))
            }),
        ),
    ] {
        if let Some(design) = figures
            && let Some(f) = &design.evaluation.figures
        {
            let _ = writeln!(
                text,
                "{what:<18} {}: {:.2} %, {:.2} dBm, {:.4} mm^2 at {} and loaded Q {:.3}",
                design.id,
                100.0 * f.efficiency,
                f.output_power_dbm,
                f.area_m2 * 1e6,
                engineering(design.evaluation.design.supply_v, "V"),
                design.evaluation.design.loaded_q,
            );
        }
    }
    let _ = writeln!(text, "written to {}", out.display());
    print(&text)
}

/// A bar on a terminal, a plain line every few seconds elsewhere, nothing when quiet.
struct Progress {
    quiet: bool,
    bar: Option<ProgressBar>,
    state: Mutex<State>,
}

struct State {
    began: Instant,
    last_line: Instant,
    cells: usize,
    /// Finished before this sitting.
    earlier: usize,
    now: usize,
    evaluations: u64,
    best_efficiency: f64,
}

/// Time between lines when standard error is no terminal.
const LINE_EVERY: Duration = Duration::from_secs(5);

impl Progress {
    fn new(quiet: bool) -> Self {
        let bar = (!quiet && std::io::stderr().is_terminal()).then(|| {
            let bar = ProgressBar::with_draw_target(Some(0), ProgressDrawTarget::stderr());
            if let Ok(style) = ProgressStyle::with_template("{bar:30} {pos}/{len} cells  {msg}") {
                bar.set_style(style);
            }
            bar.enable_steady_tick(Duration::from_millis(250));
            bar
        });
        Self {
            quiet,
            bar,
            state: Mutex::new(State {
                began: Instant::now(),
                last_line: Instant::now(),
                cells: 0,
                earlier: 0,
                now: 0,
                evaluations: 0,
                best_efficiency: 0.0,
            }),
        }
    }

    fn end(&self) {
        if let Some(bar) = &self.bar {
            bar.finish_and_clear();
        }
    }
}

impl State {
    /// Rate, time left from the cells measured so far, best efficiency.
    fn described(&self) -> String {
        let elapsed = self.began.elapsed().as_secs_f64();
        let left = self.cells - self.earlier - self.now;
        let seconds = elapsed / self.now.max(1) as f64 * left as f64;
        format!(
            "{:.0} evaluations/s, about {} left, best efficiency {:.2} %",
            self.evaluations as f64 / elapsed.max(1e-9),
            clock(seconds),
            100.0 * self.best_efficiency
        )
    }
}

fn clock(seconds: f64) -> String {
    let s = seconds.ceil() as u64;
    if s >= 3600 {
        format!("{} h {:02} min", s / 3600, s % 3600 / 60)
    } else if s >= 60 {
        format!("{} min {:02} s", s / 60, s % 60)
    } else {
        format!("{s} s")
    }
}

impl Observer for Progress {
    fn begins(&self, cells: usize, finished: usize) {
        if let Ok(mut state) = self.state.lock() {
            state.began = Instant::now();
            state.last_line = Instant::now();
            state.cells = cells;
            state.earlier = finished;
        }
        if let Some(bar) = &self.bar {
            bar.set_length(cells as u64);
            bar.set_position(finished as u64);
        }
        if finished > 0 && !self.quiet {
            eprintln!("going on: {finished} of {cells} cells are finished");
        }
    }

    fn damaged(&self, error: &RunError) {
        eprintln!("warning: {error}; this cell is searched again");
    }

    fn finished(&self, cell: &CellRecord) {
        let Ok(mut state) = self.state.lock() else {
            return;
        };
        state.now += 1;
        state.evaluations += cell.evaluations;
        let best = cell
            .designs
            .first()
            .and_then(|d| d.evaluation.figures.as_ref());
        state.best_efficiency = best
            .map_or(0.0, |f| f.efficiency)
            .max(state.best_efficiency);
        if let Some(bar) = &self.bar {
            bar.set_position((state.earlier + state.now) as u64);
            bar.set_message(state.described());
        } else if !self.quiet && state.last_line.elapsed() >= LINE_EVERY {
            state.last_line = Instant::now();
            eprintln!(
                "{}/{} cells, {}",
                state.earlier + state.now,
                state.cells,
                state.described()
            );
        }
    }
}
