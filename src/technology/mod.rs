//! Technologies: what a process gives, read from TOML, validated and resolved to SI.

pub mod inductor;
pub mod transistor;
mod types;

pub use types::*;
