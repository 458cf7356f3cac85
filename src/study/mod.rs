//! Studies: what a user asks, read from TOML, validated and resolved to SI.

mod resolved;

pub use resolved::*;
