//! `widefront search` and `widefront join`.

use super::progress::Progress;
use super::{Failure, complain, load, print};
use crate::quantity::format as engineering;
use crate::report;
use crate::run::RunError;
use crate::run::join;
use crate::run::session::{self, Finished, Job, Part};
use signal_hook::consts::{SIGINT, SIGTERM};
use signal_hook::iterator::Signals;
use std::fmt::Write;
use std::path::{Path, PathBuf};
use std::str::FromStr;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::Duration;

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
    #[arg(long, value_name = "K/N", value_parser = Part::from_str)]
    part: Option<Part>,
    /// No progress.
    #[arg(long, short)]
    quiet: bool,
}

#[derive(Debug, clap::Args)]
pub struct JoinArguments {
    /// The run folder to make.
    out: PathBuf,
    /// The folders of all parts.
    #[arg(required = true)]
    parts: Vec<PathBuf>,
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
    let stop = stop_at_signals(&out)?;
    let job = Job {
        study: &loaded.file.study,
        variants: &loaded.variants,
        out: &out,
        resume: arguments.resume,
        part: arguments.part,
        threads: arguments.threads.map(usize::from),
    };
    let progress = Progress::new(arguments.quiet);
    let finished = session::run(&job, &stop, &progress);
    progress.end();
    close(&out, finished?)
}

/// Raised by Ctrl-C and SIGTERM. What does not look at it in time is ended: every file is whole at any moment. SIGHUP is
/// left as it comes, so that `nohup` works.
fn stop_at_signals(out: &Path) -> Result<Arc<AtomicBool>, Failure> {
    /// A signal ends the program within a second.
    const PATIENCE: Duration = Duration::from_millis(700);
    let stop = Arc::new(AtomicBool::new(false));
    let raised = Arc::clone(&stop);
    let out = out.to_owned();
    let mut signals = Signals::new([SIGINT, SIGTERM])
        .map_err(|e| Failure::Run(format!("cannot listen for signals: {e}")))?;
    std::thread::spawn(move || {
        if signals.forever().next().is_none() {
            return;
        }
        raised.store(true, Ordering::Relaxed);
        std::thread::sleep(PATIENCE);
        complain(&format!(
            "stopped; the finished cells are kept in {}, --resume goes on",
            out.display()
        ));
        std::process::exit(1);
    });
    Ok(stop)
}

/// Joins parts.
pub fn join(arguments: &JoinArguments) -> Result<(), Failure> {
    let finished = join::join(&arguments.out, &arguments.parts, &Progress::new(true))?;
    close(&arguments.out, finished)
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

fn close(out: &Path, finished: Finished) -> Result<(), Failure> {
    let text = told(&finished);
    // The report reads what it shows; a large front is not held twice.
    let Finished { folder, .. } = finished;
    report::write(&folder, None).map_err(|e| {
        Failure::Run(format!(
            "{e}; the run is whole but for its report; mend this and make it by `widefront report {}` or search --resume",
            out.display()
        ))
    })?;
    print(&format!("{text}written to {}\n", out.display()))
}

/// What a finished run came to.
fn told(finished: &Finished) -> String {
    let (record, summary) = (&finished.record, &finished.summary);
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
    text
}
