//! One run folder of the parts of a run.

use super::RunError;
use super::folder::{RunFolder, cell_name, read_cell, read_run};
use super::same::same_run;
use super::session::{Finished, Job, Observer, Part, new_record, run};
use super::variant::{run_cells, variants_of_run};
use serde_json::Value;
use std::path::{Path, PathBuf};
use std::sync::atomic::AtomicBool;

/// Cells named in a message before the rest is only counted.
const NAMED: usize = 20;

/// Makes one run folder of parts: every part of the same run, every cell there and sound. What was asked is in the parts.
///
/// # Errors
/// [`RunError::Parts`] naming what is missing, [`RunError::Different`] for a part of another run, and all of [`run`].
pub fn join(out: &Path, parts: &[PathBuf], observer: &impl Observer) -> Result<Finished, RunError> {
    let first = parts
        .first()
        .ok_or_else(|| RunError::Parts("no part is given".into()))?;
    let (study, variants) = variants_of_run(first)?;
    let job = Job {
        study: &study,
        variants: &variants,
        out,
        resume: false,
        part: None,
        threads: None,
    };
    let space = study.space.as_ref().ok_or(RunError::NoSpace)?;
    let wanted = new_record(&job, space)?;
    let mut given: Vec<Option<Part>> = Vec::new();
    for part in parts {
        let mut there = read_run(part)?;
        given.push(there["part"].as_str().and_then(|text| text.parse().ok()));
        there["part"] = Value::Null;
        same_run(part, &there, &wanted)?;
    }
    let cells = run_cells(space, variants.len());
    let mut missing = Vec::new();
    let mut records = Vec::with_capacity(cells.len());
    for cell in &cells {
        let mut found = None;
        let mut damaged = None;
        for part in parts {
            match read_cell(part, cell.index) {
                Ok(Some(_)) => {
                    found = Some(part.join(cell_name(cell.index)));
                    break;
                }
                Ok(None) => {}
                Err(error @ RunError::Damaged { .. }) => damaged = Some(error),
                Err(error) => return Err(error),
            }
        }
        match (found, damaged) {
            (Some(path), _) => records.push(path),
            (None, Some(error)) => {
                return Err(RunError::Parts(format!(
                    "{error}; search that part again with --resume, then join"
                )));
            }
            (None, None) => missing.push(cell.index),
        }
    }
    if !missing.is_empty() {
        return Err(RunError::Parts(what_is_missing(
            &missing,
            cells.len(),
            &given,
        )));
    }
    let folder = if out.join("run.json").exists() {
        // A join that did not end is done again.
        let folder = RunFolder::open(out)?;
        same_run(out, &read_run(out)?, &wanted)?;
        folder
    } else {
        RunFolder::create(out)?
    };
    folder
        .write_json("run.json", &wanted)
        .map_err(RunError::before_work)?;
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
        ..job
    };
    run(&job, &AtomicBool::new(false), observer)
}

/// Names the cells and, where all parts are dealt alike, the parts that should hold them.
fn what_is_missing(missing: &[usize], cells: usize, given: &[Option<Part>]) -> String {
    let mut names: Vec<String> = missing.iter().take(NAMED).map(usize::to_string).collect();
    if missing.len() > NAMED {
        names.push(format!("and {} more", missing.len() - NAMED));
    }
    let names = names.join(", ");
    let mut text = format!(
        "{} of {cells} cells are in none of the parts: {names}",
        missing.len()
    );
    let counts: Option<Vec<usize>> = given.iter().map(|p| p.map(|p| p.count)).collect();
    if let Some(count) = counts.and_then(|c| c.iter().all(|n| *n == c[0]).then(|| c[0])) {
        let mut owners: Vec<Part> = Vec::new();
        for cell in missing {
            let owner = Part::owner(*cell, count);
            if !owners.contains(&owner) {
                owners.push(owner);
            }
        }
        for owner in owners {
            let state = if given.contains(&Some(owner)) {
                "finished"
            } else {
                "given"
            };
            text.push_str(&format!("; part {owner} is not {state}"));
        }
    }
    text.push_str("; finish those parts first");
    text
}
