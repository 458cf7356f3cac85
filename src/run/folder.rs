//! The folder of a run on disk: locked while it is written, every file whole or absent.

use super::records::{CellRecord, SCHEMA};
use super::{RunError, digest};
use crate::study::MOST_CELLS;
use crate::study::raw::open;
use atomic_write_file::AtomicWriteFile;
use serde::de::DeserializeOwned;
use serde::{Deserialize, Serialize};
use serde_json::Value;
use std::ffi::OsStr;
use std::fs::{File, TryLockError};
use std::io::{Read, Write};
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

fn write(path: &Path) -> impl FnOnce(std::io::Error) -> RunError + '_ {
    move |error| RunError::Write {
        path: path.to_owned(),
        error,
    }
}

impl RunFolder {
    /// Makes a new run folder and locks it before any work.
    ///
    /// # Errors
    /// [`RunError::Exists`], [`RunError::NotARun`], [`RunError::Busy`] or [`RunError::Make`].
    pub fn create(path: &Path) -> Result<Self, RunError> {
        let record = path.join(RECORD);
        if record.exists() {
            // Held by a running search, it is busy rather than finished.
            return Err(match lock(path) {
                Err(busy @ RunError::Busy(_)) => busy,
                _ => RunError::Exists(path.to_owned()),
            });
        }
        if path.is_dir() && holds_other_than_a_beginning(path).map_err(io(path))? {
            return Err(RunError::NotARun(path.to_owned()));
        }
        let folder = std::fs::create_dir_all(path)
            .map_err(write(path))
            .and_then(|()| Self::locked(path))
            .map_err(RunError::before_work)?;
        // Another search may have come and gone before the lock was ours.
        if record.exists() {
            return Err(RunError::Exists(path.to_owned()));
        }
        Ok(folder)
    }

    /// Locks an existing run folder to go on with it.
    ///
    /// # Errors
    /// [`RunError::Damaged`] when there is no run, [`RunError::Busy`] or [`RunError::Write`].
    pub fn open(path: &Path) -> Result<Self, RunError> {
        let record = path.join(RECORD);
        if !record.exists() {
            return Err(RunError::Damaged {
                path: record,
                reason: "is not there, so there is no run to go on with; start it without --resume"
                    .into(),
            });
        }
        Self::locked(path)
    }

    /// Locks the folder, makes its rooms and clears them of what writes that were killed left.
    fn locked(path: &Path) -> Result<Self, RunError> {
        let folder = Self {
            path: path.to_owned(),
            _lock: lock(path)?,
        };
        for room in ROOMS {
            let room = path.join(room);
            std::fs::create_dir_all(&room).map_err(write(&room))?;
        }
        let sheets = path.join("sheets");
        for place in rooms(path).chain([sheets]).filter(|room| room.is_dir()) {
            for entry in std::fs::read_dir(&place).map_err(io(&place))?.flatten() {
                if is_leftover(&entry.file_name()) {
                    // One that stays does no harm: nothing reads it.
                    let _ = std::fs::remove_file(entry.path());
                }
            }
        }
        Ok(folder)
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
        written.map_err(write(&path))
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
const RECORD: &str = "run.json";
const ROOMS: [&str; 2] = ["cells", "figures"];

/// The folder and its rooms.
fn rooms(path: &Path) -> impl Iterator<Item = PathBuf> + '_ {
    std::iter::once(path.to_owned()).chain(ROOMS.iter().map(|room| path.join(room)))
}

/// Whether a file is the temporary of a write that was killed: `.00003.json.Ab12Cd`, `.report.html.Ab12Cd`,
/// `.front.tmp.png`.
fn is_leftover(name: &OsStr) -> bool {
    let name = name.to_string_lossy();
    name.starts_with('.')
        && [".json.", ".csv.", ".html.", ".md.", ".svg.", ".tmp."]
            .iter()
            .any(|m| name.contains(m))
}

/// Whether a folder without a record holds more than a search leaves that was killed before it wrote one.
fn holds_other_than_a_beginning(path: &Path) -> std::io::Result<bool> {
    for place in rooms(path).filter(|place| place.is_dir()) {
        for entry in std::fs::read_dir(&place)? {
            let name = entry?.file_name();
            let ours = place == path && (name == LOCK || ROOMS.iter().any(|room| name == *room));
            if !ours && !is_leftover(&name) {
                return Ok(true);
            }
        }
    }
    Ok(false)
}

/// Name of a cell's file in its folder.
pub fn cell_name(cell: usize) -> String {
    format!("cells/{cell:05}.json")
}

/// Longest run record or cell that is read, bytes: a record has some thousands, a design of a cell two thousand.
const LONGEST_RECORD: u64 = 1 << 26;
/// Longest overall front, bytes.
const LONGEST_FRONT: u64 = 1 << 30;

/// A whole file, if it is one and not far too long.
fn load(name: &Path, longest: u64) -> Result<Vec<u8>, std::io::Error> {
    let mut bytes = Vec::new();
    open(name)?.take(longest + 1).read_to_end(&mut bytes)?;
    if bytes.len() as u64 > longest {
        return Err(std::io::Error::other(format!(
            "is longer than {longest} bytes, the most it may have"
        )));
    }
    Ok(bytes)
}

fn lock(path: &Path) -> Result<File, RunError> {
    let name = path.join(LOCK);
    let file = File::options()
        .create(true)
        .truncate(false)
        .write(true)
        .open(&name)
        .map_err(write(&name))?;
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
    let name = path.join(RECORD);
    let text = load(&name, LONGEST_RECORD).map_err(io(&name))?;
    let damaged = |reason: String| RunError::Damaged {
        path: name.clone(),
        reason,
    };
    let value: Value =
        serde_json::from_slice(&text).map_err(|e| damaged(format!("is no run record: {e}")))?;
    if value["schema"] == SCHEMA {
        Ok(value)
    } else {
        Err(damaged(format!(
            "has schema {}; this program reads {SCHEMA}",
            value["schema"]
        )))
    }
}

/// The study, the technology or the technologies of a run record as resolved, if they are what the run was started with.
///
/// # Errors
/// [`RunError::Damaged`] when it was altered or is none.
pub fn resolved<T: DeserializeOwned>(path: &Path, run: &Value, key: &str) -> Result<T, RunError> {
    let damaged = |reason: String| RunError::Damaged {
        path: path.join(RECORD),
        reason: format!("its {key} is damaged: {reason}"),
    };
    let mut hashed = run[key].clone();
    let hash = if key == "study" {
        unplaced(&mut hashed);
        "study_hash"
    } else {
        "technology_hash"
    };
    let found = digest(&hashed).map_err(|e| damaged(e.to_string()))?;
    if run[hash] != found {
        return Err(damaged("it does not match its hash".into()));
    }
    serde_json::from_value(run[key].clone()).map_err(|e| damaged(e.to_string()))
}

/// Takes away where technology files lie, which is no part of what a run is.
pub(super) fn unplaced(study: &mut Value) {
    if let Some(map) = study.as_object_mut() {
        map.shift_remove("technology");
        if let Some(Value::Object(sweep)) = map.get_mut("sweep") {
            sweep.shift_remove("technologies");
        }
    }
}

/// Reads a cell; `Ok(None)` when it is not there.
///
/// # Errors
/// [`RunError::Damaged`] when it is truncated, altered or another cell's, or the system's.
pub fn read_cell(path: &Path, cell: usize) -> Result<Option<CellRecord>, RunError> {
    let name = path.join(cell_name(cell));
    let text = match load(&name, LONGEST_RECORD) {
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
    read_record(&path.join("front.json"))
}

/// Reads a record that a run may lack, as one that was cut short or found no design.
///
/// # Errors
/// As [`read_front`].
pub fn read_optional<T: DeserializeOwned>(path: &Path, name: &str) -> Result<Option<T>, RunError> {
    let file = path.join(name);
    if file.exists() {
        read_record(&file).map(Some)
    } else {
        Ok(None)
    }
}

fn read_record<T: DeserializeOwned>(file: &Path) -> Result<T, RunError> {
    let text = load(file, LONGEST_FRONT).map_err(io(file))?;
    serde_json::from_slice(&text).map_err(|e| RunError::Damaged {
        path: file.to_owned(),
        reason: format!("is damaged: {e}"),
    })
}

/// Reads the fronts of all cells that are finished, in their order.
///
/// # Errors
/// As [`read_run`] and [`read_cell`].
pub fn read_all_fronts(path: &Path) -> Result<super::records::DesignList, RunError> {
    let run = read_run(path)?;
    let cells = run["cells"].as_u64().unwrap_or(0);
    if cells > MOST_CELLS as u64 {
        return Err(RunError::Damaged {
            path: path.join(RECORD),
            reason: format!("counts {cells} cells; no study has more than {MOST_CELLS}"),
        });
    }
    let mut designs = Vec::new();
    for cell in 0..cells as usize {
        if let Some(record) = read_cell(path, cell)? {
            designs.extend(record.designs);
        }
    }
    Ok(super::records::DesignList { designs })
}
