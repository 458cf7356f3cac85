//! Technologies: what a process gives, read from TOML, validated and resolved to SI.

mod types;

pub use types::*;
