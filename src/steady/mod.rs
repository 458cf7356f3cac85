//! The exact periodic steady state of the output stage: no time stepping.

pub mod circuit;
pub mod period;
pub mod rails;
pub mod waveform;
