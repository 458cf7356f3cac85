//! What people look at: figures of a run, drawn from its records.

pub mod figures;
