//! Technologies: what a process gives, read from TOML, validated and resolved to SI.

mod fit;
pub mod inductor;
mod read;
mod rules;
pub mod transistor;
mod types;

pub use fit::{fit, read_for};
pub use read::{SCHEMA, TechnologyFile, read, read_str};
pub use types::*;
