//! The folder of a run on disk: locked while it is written, every file whole or absent.

use super::records::{CellRecord, SCHEMA};
use super::{RunError, digest};
use atomic_write_file::AtomicWriteFile;
use serde::{Deserialize, Serialize};
use serde_json::Value;
use std::fs::{File, TryLockError};
use std::io::Write;
use std::path::{Path, PathBuf};

/// A run folder held by this process.
#[derive(Debug)]
pub struct RunFolder {
    path: PathBuf,
    /// Held until the folder is dropped.
    _lock: File,
}

/// A cell's file: the record with its digest, so that an altered file is found out.
#[derive(Serialize, Deserialize)]
struct CellFile {
    digest: String,
    record: CellRecord,
}

fn io(path: &Path) -> impl FnOnce(std::io::Error) -> RunError + '_ {
    move |error| RunError::Io {
        path: path.to_owned(),
        error,
    }
}

impl RunFolder {
    /// Makes a new run folder and locks it before any work.
    ///
    /// # Errors
    /// [`RunError::Exists`], [`RunError::NotARun`], [`RunError::Busy`] or the system's.
    pub fn create(path: &Path) -> Result<Self, RunError> {
        if path.join("run.json").exists() {
            // Held by a running search, it is busy rather than finished.
            drop(lock(path)?);
            return Err(RunError::Exists(path.to_owned()));
        }
        if path.is_dir() {
            // A search killed before it wrote its record leaves its empty rooms.
            let ours =
                |name: &std::ffi::OsStr| [LOCK, "cells", "figures"].iter().any(|o| name == *o);
            let mut entries = std::fs::read_dir(path).map_err(io(path))?;
            if entries.any(|e| e.is_ok_and(|e| !ours(&e.file_name()))) {
                return Err(RunError::NotARun(path.to_owned()));
            }
        }
        for folder in [path.to_owned(), path.join("cells"), path.join("figures")] {
            std::fs::create_dir_all(&folder).map_err(io(&folder))?;
        }
        Ok(Self {
            path: path.to_owned(),
            _lock: lock(path)?,
        })
    }

    /// Locks an existing run folder to go on with it.
    ///
    /// # Errors
    /// [`RunError::Damaged`] when there is no run, [`RunError::Busy`] or the system's.
    pub fn open(path: &Path) -> Result<Self, RunError> {
        let record = path.join("run.json");
        if !record.exists() {
            return Err(RunError::Damaged {
                path: record,
                reason: "is not there; this folder holds no run to resume".into(),
            });
        }
        Ok(Self {
            path: path.to_owned(),
            _lock: lock(path)?,
        })
    }

    /// The folder.
    pub fn path(&self) -> &Path {
        &self.path
    }

    /// Writes a file whole: a temporary beside it, flushed to the disk, then renamed.
    ///
    /// # Errors
    /// The system's, the old file untouched.
    pub fn write(&self, name: &str, bytes: &[u8]) -> Result<(), RunError> {
        let path = self.path.join(name);
        let written = AtomicWriteFile::open(&path).and_then(|mut file| {
            file.write_all(bytes)?;
            file.commit()
        });
        written.map_err(io(&path))
    }

    /// Writes a value as JSON.
    ///
    /// # Errors
    /// As [`RunFolder::write`].
    pub fn write_json<T: Serialize>(&self, name: &str, value: &T) -> Result<(), RunError> {
        let mut bytes = serde_json::to_vec(value).map_err(|e| RunError::Damaged {
            path: self.path.join(name),
            reason: format!("cannot be written as JSON: {e}"),
        })?;
        bytes.push(b'\n');
        self.write(name, &bytes)
    }

    /// Writes a finished cell.
    ///
    /// # Errors
    /// As [`RunFolder::write`].
    pub fn write_cell(&self, record: &CellRecord) -> Result<(), RunError> {
        let name = cell_name(record.cell);
        let digest = digest(record).map_err(|e| RunError::Damaged {
            path: self.path.join(&name),
            reason: format!("cannot be written as JSON: {e}"),
        })?;
        self.write_json(
            &name,
            &CellFile {
                digest,
                record: record.clone(),
            },
        )
    }
}

const LOCK: &str = "lock";

/// Name of a cell's file in its folder.
pub fn cell_name(cell: usize) -> String {
    format!("cells/{cell:05}.json")
}

fn lock(path: &Path) -> Result<File, RunError> {
    let name = path.join(LOCK);
    let file = File::options()
        .create(true)
        .truncate(false)
        .write(true)
        .open(&name)
        .map_err(io(&name))?;
    match file.try_lock() {
        Ok(()) => Ok(file),
        Err(TryLockError::WouldBlock) => Err(RunError::Busy(path.to_owned())),
        Err(TryLockError::Error(e)) => Err(io(&name)(e)),
    }
}

/// Reads `run.json` as it stands.
///
/// # Errors
/// [`RunError::Damaged`] when it is no run record of this schema, or the system's.
pub fn read_run(path: &Path) -> Result<Value, RunError> {
    let name = path.join("run.json");
    let text = std::fs::read_to_string(&name).map_err(io(&name))?;
    let damaged = |reason: String| RunError::Damaged {
        path: name.clone(),
        reason,
    };
    let value: Value =
        serde_json::from_str(&text).map_err(|e| damaged(format!("is no run record: {e}")))?;
    if value["schema"] == SCHEMA {
        Ok(value)
    } else {
        Err(damaged(format!(
            "has schema {}; this program reads {SCHEMA}",
            value["schema"]
        )))
    }
}

/// Reads a cell; `Ok(None)` when it is not there.
///
/// # Errors
/// [`RunError::Damaged`] when it is truncated, altered or another cell's, or the system's.
pub fn read_cell(path: &Path, cell: usize) -> Result<Option<CellRecord>, RunError> {
    let name = path.join(cell_name(cell));
    let text = match std::fs::read(&name) {
        Ok(text) => text,
        Err(e) if e.kind() == std::io::ErrorKind::NotFound => return Ok(None),
        Err(e) => return Err(io(&name)(e)),
    };
    let damaged = |reason: String| RunError::Damaged {
        path: name.clone(),
        reason,
    };
    let file: CellFile =
        serde_json::from_slice(&text).map_err(|e| damaged(format!("is damaged: {e}")))?;
    let found = digest(&file.record).map_err(|e| damaged(format!("is damaged: {e}")))?;
    if found != file.digest {
        return Err(damaged("is damaged: its digest does not match".into()));
    }
    if file.record.cell != cell {
        return Err(damaged(format!("holds cell {}", file.record.cell)));
    }
    Ok(Some(file.record))
}

/// Reads the overall front.
///
/// # Errors
/// [`RunError::Damaged`] when it is none, or the system's.
pub fn read_front(path: &Path) -> Result<super::records::DesignList, RunError> {
    let name = path.join("front.json");
    let text = std::fs::read(&name).map_err(io(&name))?;
    serde_json::from_slice(&text).map_err(|e| RunError::Damaged {
        path: name,
        reason: format!("is damaged: {e}"),
    })
}

/// Reads the fronts of all cells that are finished, in their order.
///
/// # Errors
/// As [`read_run`] and [`read_cell`].
pub fn read_all_fronts(path: &Path) -> Result<super::records::DesignList, RunError> {
    let run = read_run(path)?;
    let cells = run["cells"].as_u64().unwrap_or(0) as usize;
    let mut designs = Vec::new();
    for cell in 0..cells {
        if let Some(record) = read_cell(path, cell)? {
            designs.extend(record.designs);
        }
    }
    Ok(super::records::DesignList { designs })
}
