//! Run folders: records, writing, reading, going on, joining.

pub mod folder;
mod illustrations;
pub mod join;
pub mod records;
mod same;
pub mod session;
pub mod summary;
mod supplies;
mod table;
pub mod variant;
mod work;

use serde::Serialize;
use std::path::PathBuf;
use thiserror::Error;

/// What can go wrong with a run folder.
#[derive(Debug, Error)]
pub enum RunError {
    /// The system refused.
    #[error("{path}: {error}", path = .path.display())]
    Io {
        /// File or folder.
        path: PathBuf,
        /// What it said.
        error: std::io::Error,
    },
    /// The run folder cannot be begun.
    #[error(
        "{path}: cannot be made: {error}; no work was started; {} and start again, or choose another folder with --out",
        remedy(.error), path = .path.display()
    )]
    Make {
        /// File or folder.
        path: PathBuf,
        /// What the system said.
        error: std::io::Error,
    },
    /// A file of a run that has begun cannot be written.
    #[error(
        "{path}: cannot be written: {error}; what is finished is kept; {} and go on (search --resume, or join again)",
        remedy(.error), path = .path.display()
    )]
    Write {
        /// File.
        path: PathBuf,
        /// What the system said.
        error: std::io::Error,
    },
    /// Another search works in this folder.
    #[error(
        "{path}: another search is writing this run; wait for it, or choose another folder with --out",
        path = .0.display()
    )]
    Busy(PathBuf),
    /// A run is there already.
    #[error(
        "{path}: holds a run already; --resume goes on with it, --out chooses another folder",
        path = .0.display()
    )]
    Exists(PathBuf),
    /// The folder holds something else.
    #[error(
        "{path}: is not empty and holds no run; choose another folder with --out",
        path = .0.display()
    )]
    NotARun(PathBuf),
    /// A file of the run cannot be read as what it should be.
    #[error("{path}: {reason}", path = .path.display())]
    Damaged {
        /// File.
        path: PathBuf,
        /// Why.
        reason: String,
    },
    /// The folder's run is of another study, technology, program or part.
    #[error("{path}: this run is of {differences}; go on with what it was started with, or choose another folder", path = .path.display())]
    Different {
        /// Folder.
        path: PathBuf,
        /// What differs, in words.
        differences: String,
    },
    /// Parts do not make a whole.
    #[error("{0}")]
    Parts(String),
    /// The study has no design space.
    #[error("the study has no [space]; a search needs one")]
    NoSpace,
    /// Stopped by a signal.
    #[error("stopped; {finished} of {cells} cells are kept in {path}, --resume goes on", path = .path.display())]
    Stopped {
        /// Folder.
        path: PathBuf,
        /// Cells finished.
        finished: usize,
        /// Cells in all.
        cells: usize,
    },
    /// Nothing found.
    #[error("no feasible design in any cell; widen [space] or loosen [limits]")]
    NothingFeasible,
}

impl RunError {
    /// The same failure when nothing is in the folder yet.
    fn before_work(self) -> Self {
        match self {
            Self::Write { path, error } => Self::Make { path, error },
            other => other,
        }
    }
}

/// What mends a refusal to write.
fn remedy(error: &std::io::Error) -> &'static str {
    use std::io::ErrorKind as Kind;
    match error.kind() {
        Kind::StorageFull | Kind::QuotaExceeded | Kind::FileTooLarge => "make room on the disk",
        Kind::ReadOnlyFilesystem | Kind::PermissionDenied => "make the folder writable",
        Kind::NotADirectory | Kind::AlreadyExists => "take the file out of its way",
        _ => "mend this",
    }
}

/// blake3 of a value's JSON, as run records and cells carry it.
///
/// # Errors
/// Of a value that JSON cannot hold.
pub fn digest<T: Serialize>(value: &T) -> Result<String, serde_json::Error> {
    Ok(blake3::hash(&serde_json::to_vec(value)?)
        .to_hex()
        .to_string())
}
