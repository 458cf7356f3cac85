//! Measured points against the model.

/// A measured point against the model.
#[derive(Debug, Clone, PartialEq)]
pub struct Residual {
    /// What was measured, with its SI unit.
    pub quantity: &'static str,
    /// K.
    pub temperature_k: f64,
    /// V: V_GS, V_DS or reverse voltage.
    pub voltage_v: f64,
    /// SI.
    pub measured: f64,
    /// SI.
    pub model: f64,
}

impl Residual {
    /// Model over measured, less 1.
    pub fn error(&self) -> f64 {
        self.model / self.measured - 1.0
    }
}

/// Names of what is measured.
pub const ON: &str = "on_resistance_ohm_m";
/// Output curves, where transfer curves were fitted.
pub const CHECK: &str = "on_resistance_of_output_ohm_m";
/// Mean over a swing.
pub const GATE: &str = "gate_and_overlap_capacitance_f_m";
/// Of the structures.
pub const JUNCTION: &str = "junction_capacitance_f";
/// At V_GS = 0.
pub const OFF: &str = "off_current_a_m";
