//! Studies: what a user asks, read from TOML, validated and resolved to SI.

mod assign;
mod diagnostics;
mod entries;
pub(crate) mod figure;
mod lines;
pub(crate) mod raw;
mod read;
mod resolved;
mod spelling;
mod sweep;
mod variables;

pub use assign::{DESIGN_KEYS, set_design};
pub use diagnostics::{Fault, FaultKind, Faults, Origin, Warning, WarningKind};
pub use lines::Lines;
pub use read::{MOST_CELLS, SCHEMA, StudyFile, read, read_str};
pub use resolved::*;
pub use spelling::nearest;
pub use sweep::{LISTED, Listed, Sweep};
