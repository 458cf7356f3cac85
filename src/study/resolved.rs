//! A study after validation: plain SI numbers, every choice made explicit.
//!
//! Physics and search see only these types. They are built by [`crate::study::read`]; tests may build them
//! directly.

use super::sweep::{Listed, Sweep};
use serde::{Deserialize, Serialize};
use std::path::PathBuf;

/// One question asked of the program: which stage, which bands of choice, which limits.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Study {
    /// Title as written by the user.
    pub title: String,
    /// The technology file, already resolved against the study's own folder.
    pub technology: PathBuf,
    /// Junction temperature T_j, K.
    pub temperature_k: f64,
    /// Carrier frequency, Hz.
    pub frequency_hz: f64,
    /// Resistance of the antenna port R_a, Ω (differential when there are two legs).
    pub antenna_resistance_ohm: f64,
    /// Loss of a balun or filter behind the port, dB, at least 0.
    pub antenna_loss_db: f64,
    /// What kind of stage.
    pub stage: StageChoice,
    /// The driver chain's givens.
    pub driver: DriverChoice,
    /// What the search may choose; absent in a study made only to evaluate.
    pub space: Option<Space>,
    /// Limits a design must keep.
    pub limits: Limits,
    /// Settings of the search.
    pub search: SearchSettings,
    /// One sizing, for `evaluate`; absent when the study has no `[design]`.
    pub design: Option<Design>,
    /// What is listed; the single values above are then the first of each list.
    #[serde(default, skip_serializing_if = "Sweep::is_empty")]
    pub sweep: Sweep,
}

/// How many output legs and stacked devices, which transistor pair, which network.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct StageChoice {
    /// 1 = single-ended, 2 = differential (`B`).
    pub legs: u32,
    /// 1 = one device a side, 2 = switch and cascode (`s`).
    pub stack: u32,
    /// Name of a transistor pair of the technology.
    pub device: String,
    /// Load network.
    pub network: Network,
}

/// Load network between the leg and the antenna.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Network {
    /// The antenna is the series load: R_opt = R_a.
    Direct,
    /// L section, shunt capacitor across the antenna.
    LowPass,
}

/// What the chain that drives the output gates is given.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct DriverChoice {
    /// Capacitance the previous block can drive, C_in, F.
    pub input_capacitance_f: f64,
    /// PMOS/NMOS width ratio of the chain's inverters, β_r.
    pub ratio: f64,
    /// The drivers' own crowbar loss as a fraction of their charge, κ.
    pub crowbar: f64,
    /// Driver swing with one device a side; a stacked leg swings half its supply whatever stands here.
    pub swing: Swing,
}

/// Swing of the driver of an unstacked leg.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Swing {
    /// The driver runs from the output stage's own supply.
    Supply,
    /// The driver has a rail of its own, V.
    Voltage(f64),
}

/// The values one variable may take.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Range {
    /// One value.
    Fixed(f64),
    /// Anything between two values, `from < to`.
    Free {
        /// Lowest value.
        from: f64,
        /// Highest value.
        to: f64,
    },
    /// These values only, rising.
    Grid(Vec<f64>),
}

impl Range {
    /// How many values a search enumerates: one of what is fixed or free.
    pub fn count(&self) -> usize {
        match self {
            Range::Fixed(_) | Range::Free { .. } => 1,
            Range::Grid(values) => values.len(),
        }
    }
}

/// The variables of a search, SI. Those that the network and the technology do not use are absent:
/// a spiral takes `turns`, `diameter_m` and (low-pass) `trace_m`; a fixed inductor takes (low-pass)
/// `resistance_ohm`.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Space {
    /// V_DD, V.
    pub supply_v: Range,
    /// Q_L.
    pub loaded_q: Range,
    /// W_n, m.
    pub nmos_width_m: Range,
    /// W_p/W_n.
    pub width_ratio: Range,
    /// Spiral turns, whole numbers: `Fixed` or `Grid`.
    pub turns: Option<Range>,
    /// Trace width w, m.
    pub trace_m: Option<Range>,
    /// Outer diameter D, m.
    pub diameter_m: Option<Range>,
    /// R_opt with a fixed inductor, Ω.
    pub resistance_ohm: Option<Range>,
    /// Load angle x.
    pub reactance: Range,
    /// Dead time δ, a fraction of the period a transition.
    pub dead_time: Range,
    /// Driver stages N, whole numbers: `Fixed` or `Grid`.
    pub stages: Range,
}

impl Space {
    /// Cells of a variant: combinations of loaded Q and supply.
    pub fn cells(&self) -> usize {
        self.loaded_q.count() * self.supply_v.count()
    }

    /// Combinations of whole numbers and grid values in every cell.
    pub fn combinations(&self) -> u128 {
        let always = [
            &self.nmos_width_m,
            &self.width_ratio,
            &self.reactance,
            &self.dead_time,
            &self.stages,
        ];
        let given = [
            &self.turns,
            &self.trace_m,
            &self.diameter_m,
            &self.resistance_ohm,
        ];
        let ranges = always.into_iter().chain(given.into_iter().flatten());
        ranges
            .map(|range| range.count() as u128)
            .fold(1, u128::saturating_mul)
    }
}

/// A figure's allowed interval; `None` = unbounded.
#[derive(Debug, Clone, Copy, PartialEq, Default, Serialize, Deserialize)]
pub struct Bounds {
    /// Lowest allowed value.
    pub at_least: Option<f64>,
    /// Highest allowed value.
    pub at_most: Option<f64>,
}

/// Limits the user sets. Those that physics sets (rating, clamps) hold always and are not here.
#[derive(Debug, Clone, PartialEq, Default, Serialize, Deserialize)]
pub struct Limits {
    /// Longest 10 to 90 % edge of the output gates, a fraction of the period.
    pub edge_time: Option<f64>,
    /// Highest second harmonic at the antenna, dBc.
    pub second_harmonic_dbc: Option<f64>,
    /// Highest third harmonic at the antenna, dBc.
    pub third_harmonic_dbc: Option<f64>,
    /// Highest overdrive use of either device.
    pub overdrive_use: Option<f64>,
    /// Output power, W.
    pub output_power_w: Bounds,
    /// Area, m².
    pub area_m2: Bounds,
    /// Efficiency, 0..1.
    pub efficiency: Bounds,
}

/// What a front trades.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Objective {
    /// Output power over total power, the more the better.
    Efficiency,
    /// Power at the antenna's fundamental, the more the better.
    OutputPower,
    /// Silicon area, the less the better.
    Area,
}

/// How the search is to run.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct SearchSettings {
    /// One to three different objectives.
    pub objectives: Vec<Objective>,
    /// Seed of every random choice.
    pub seed: u64,
    /// The overall front is taken for each combination of these; over all when empty.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub fronts_by: Vec<Listed>,
}

/// One sizing, SI. `None` where the network or the technology derives the value instead.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Design {
    /// V_DD, V.
    pub supply_v: f64,
    /// Q_L.
    pub loaded_q: f64,
    /// W_n, m.
    pub nmos_width_m: f64,
    /// W_p/W_n.
    pub width_ratio: f64,
    /// Spiral turns.
    pub turns: Option<u32>,
    /// Trace width, m; a result with the direct network.
    pub trace_m: Option<f64>,
    /// Outer diameter, m.
    pub diameter_m: Option<f64>,
    /// R_opt, Ω, with a fixed inductor and the low-pass network.
    #[serde(skip_serializing_if = "Option::is_none", default)]
    pub resistance_ohm: Option<f64>,
    /// Load angle x.
    pub reactance: f64,
    /// Dead time, a fraction of the period.
    pub dead_time: f64,
    /// Driver stages N.
    pub stages: u32,
}
