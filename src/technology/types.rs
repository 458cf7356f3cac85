//! A technology after validation: plain SI numbers.

pub use super::rules::{DrawingRules, Rules};

use serde::{Deserialize, Serialize};

/// Everything a process gives a designer of an output stage.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Technology {
    /// Name as written in the file.
    pub name: String,
    /// Where the figures come from.
    pub source: String,
    /// Transistor pairs by name, in the order of their names.
    pub transistors: std::collections::BTreeMap<String, TransistorPair>,
    /// The inductor.
    pub inductor: Inductor,
    /// The capacitor.
    pub capacitor: Capacitor,
    /// Layout rules that cost area or resistance.
    pub layout: Layout,
    /// What a drawing must keep; a `sheet` needs it, nothing else does.
    #[serde(default, skip_serializing_if = "Rules::is_empty")]
    pub rules: Rules,
}

/// An NMOS and a PMOS of one oxide.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct TransistorPair {
    /// Highest gate and drain voltage V_max, V.
    pub rating_v: f64,
    /// Forward voltage of the body diodes V_f, V.
    pub clamp_v: f64,
    /// The n-channel device.
    pub nmos: Transistor,
    /// The p-channel device, magnitudes.
    pub pmos: Transistor,
}

/// One polarity; capacitances, currents and resistances per metre of gate width.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Transistor {
    /// k' = µ·Cox at T0, A/V².
    pub transconductance_a_v2: f64,
    /// Gate length L, m.
    pub length_m: f64,
    /// Threshold at T0, V.
    pub threshold_v: f64,
    /// dV_T/dT, V/K.
    pub threshold_drift_v_k: f64,
    /// Slope factor n, at least 1.
    pub slope: f64,
    /// Degradation θ, 1/V.
    pub degradation_per_v: f64,
    /// Exponent of k' with temperature.
    pub mobility_exponent: f64,
    /// Access resistance, source plus drain, Ω·m.
    pub access_resistance_ohm_m: f64,
    /// Gate capacitance over a full swing without the drain overlap, F/m.
    pub gate_capacitance_f_m: f64,
    /// Drain overlap capacitance, F/m.
    pub overlap_capacitance_f_m: f64,
    /// Drain junction capacitance at 0 V, F/m.
    pub junction_capacitance_f_m: f64,
    /// Grading exponent m_j, 0..1.
    pub junction_grading: f64,
    /// Built-in potential φ_b, V.
    pub junction_potential_v: f64,
    /// Off current at T0, A/m.
    pub off_current_a_m: f64,
}

/// The inductor of the series branch.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(tag = "model", rename_all = "snake_case")]
pub enum Inductor {
    /// A planar spiral solved by filaments.
    Spiral(SpiralProcess),
    /// A fixed quality and an area law: area = base + slope·L.
    Fixed {
        /// ω0 L/R_L.
        quality: f64,
        /// Area at L = 0, m².
        area_base_m2: f64,
        /// Area an inductance, m²/H.
        area_slope_m2_h: f64,
    },
}

/// What the process gives a spiral.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct SpiralProcess {
    /// Resistivity of the metal ρ, Ω·m.
    pub resistivity_ohm_m: f64,
    /// Metal thickness t, m.
    pub thickness_m: f64,
    /// Spacing between turns s, m.
    pub spacing_m: f64,
    /// Oxide between spiral and substrate t_ox, m.
    pub oxide_height_m: f64,
    /// Relative permittivity of that oxide.
    pub oxide_permittivity: f64,
    /// Substrate capacitance C_sub, F/m².
    pub substrate_capacitance_f_m2: f64,
    /// Substrate conductance G_sub, S/m².
    pub substrate_conductance_s_m2: f64,
    /// Oxide between spiral and underpass t_under, m.
    pub underpass_height_m: f64,
    /// Clear space around the spiral, m.
    pub keep_out_m: f64,
}

/// Metal or oxide capacitor.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Capacitor {
    /// F/m².
    pub density_f_m2: f64,
    /// Quality at the carrier Q_c.
    pub quality: f64,
    /// Bottom plate over the value, κ_bp.
    pub bottom_plate: f64,
}

/// Layout givens.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Layout {
    /// R_route in series with each switch, Ω.
    pub routing_resistance_ohm: f64,
    /// Area a width of transistor, a_w, m.
    pub width_area_m: f64,
    /// Allowed supply ripple, a fraction.
    pub supply_ripple: f64,
    /// Decoupling capacitance density, F/m².
    pub decoupling_density_f_m2: f64,
}
