//! Studies: what a user asks, read from TOML, validated and resolved to SI.

pub mod diagnostics;
pub mod document;
mod read;
mod resolved;

pub(crate) use read::schema;
pub use read::{StudyFile, read, read_str, set_design};
pub use resolved::*;
