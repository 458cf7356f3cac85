//! What a run leaves behind, as written to its folder. Figures, sheets and the report read these, never the physics.

use super::variant::VariantLabel;
use crate::evaluate::Evaluation;
use crate::steady::waveform::Waveform;
use crate::study::{Objective, Study};
use crate::technology::Technology;
use serde::{Deserialize, Serialize};

/// Layout of the run folder; a reader refuses another.
pub const SCHEMA: u32 = 1;

/// One design of a front. Serialises flat: the evaluation's figures beside these.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct DesignRecord {
    /// Cell and place in the cell's front, `012-007`; the same as long as the run is.
    pub id: String,
    /// Index of its cell.
    pub cell: usize,
    /// How far from first-order optimal, scaled.
    pub residual: f64,
    /// Whether the residual is small enough to call the point optimal.
    pub certified: bool,
    /// Its variant, where the study lists several.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub variant: Option<VariantLabel>,
    /// The evaluation.
    #[serde(flatten)]
    pub evaluation: Evaluation,
}

/// One finished cell.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct CellRecord {
    /// Its index.
    pub cell: usize,
    /// Q_L; none where it is free.
    pub loaded_q: Option<f64>,
    /// V_DD, V; none where it is free.
    pub supply_v: Option<f64>,
    /// Its variant, where the study lists several.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub variant: Option<VariantLabel>,
    /// Assessments spent.
    pub evaluations: u64,
    /// Hypervolume of its front against the run's reference.
    pub hypervolume: f64,
    /// The front, best efficiency first.
    pub designs: Vec<DesignRecord>,
}

/// A list of designs, as in `front.json`.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct DesignList {
    /// The designs.
    pub designs: Vec<DesignRecord>,
}

/// The point hypervolume is measured from: efficiency 0, output power 0, this area. The volume is
/// efficiency × W × mm².
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct HypervolumeReference {
    /// m².
    pub area_m2: f64,
}

/// How the front's optimality residuals are spread.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct Residuals {
    /// Points of all cells' fronts.
    pub points: usize,
    /// Of these certified.
    pub certified: usize,
    /// Median residual.
    pub median: f64,
    /// 99th percentile.
    pub percentile_99: f64,
    /// Largest.
    pub worst: f64,
}

/// `run.json`.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct RunRecord {
    /// [`SCHEMA`].
    pub schema: u32,
    /// Program version.
    pub version: String,
    /// The study as resolved.
    pub study: Study,
    /// The technology as resolved; the first where several are listed.
    pub technology: Technology,
    /// All that are listed, in that order; empty where one is given.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub technologies: Vec<Technology>,
    /// blake3 of the study as resolved.
    pub study_hash: String,
    /// blake3 of the technology as resolved.
    pub technology_hash: String,
    /// Seed.
    pub seed: u64,
    /// Objectives traded.
    pub objectives: Vec<Objective>,
    /// Cores of the host.
    pub host_cores: usize,
    /// Threads used.
    pub threads: usize,
    /// Seconds since 1970 at the start of the (last) session.
    pub started_unix_s: u64,
    /// Seconds since 1970 at its end; none while it runs.
    pub ended_unix_s: Option<u64>,
    /// The share of the cells this folder holds, `3/16`; none for all of them.
    pub part: Option<String>,
    /// Cells of the study.
    pub cells: usize,
    /// Cells finished.
    pub cells_finished: usize,
    /// Assessments of all finished cells.
    pub evaluations: u64,
    /// Designs of the overall front.
    pub front_size: usize,
    /// Hypervolume of the overall front.
    pub hypervolume: f64,
    /// What it is measured from.
    pub hypervolume_reference: HypervolumeReference,
    /// Spread of the residuals; none without a point.
    pub residuals: Option<Residuals>,
    /// Why the run ended.
    pub ended_because: String,
}

/// Losses of the chosen design as its NMOS width alone is changed, for a figure.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct WidthSweep {
    /// Id of the design.
    pub id: String,
    /// Widths, m, rising.
    pub nmos_width_m: Vec<f64>,
    /// Evaluations at these widths.
    pub evaluations: Vec<Evaluation>,
}

/// One period of the chosen design, for a figure.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct PeriodRecord {
    /// Id of the design.
    pub id: String,
    /// Carrier, Hz.
    pub frequency_hz: f64,
    /// V_DD, V.
    pub supply_v: f64,
    /// Dead time, a fraction of the period a transition.
    pub dead_time: f64,
    /// The samples, from the turn-on of P.
    pub waveform: Waveform,
}

/// One point of a supply's front, for a figure.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct SupplyPoint {
    /// Id of the design.
    pub id: String,
    /// P_out, dBm.
    pub output_power_dbm: f64,
    /// P_out/P_total.
    pub efficiency: f64,
}

/// The front of efficiency and output power at one supply, over every loaded Q and area.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct SupplyFront {
    /// V_DD, V.
    pub supply_v: f64,
    /// The front, output power rising.
    pub points: Vec<SupplyPoint>,
}
