//! Technologies: what a process gives, read from TOML, validated and resolved to SI.

pub mod inductor;
mod read;
pub mod transistor;
mod types;

pub use read::{match_study, read, read_str};
pub use types::*;
