//! What a sheet holds, as written to its JSON; Markdown, CSV and drawing are made from it alone.

use super::currents::{Currents, Strip};
use super::snap::{Fingers, Units};
use super::voltages::Voltage;
use crate::evaluate::{DeviceFigures, Evaluation};
use crate::study::Network;
use crate::technology::DrawingRules;
use serde::{Deserialize, Serialize};

/// A figure before and after snapping, SI.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Change {
    /// Name of the JSON.
    pub figure: String,
    /// As searched; none where it does not exist.
    pub searched: Option<f64>,
    /// As drawn.
    pub drawn: Option<f64>,
}

/// A limit of the study and what the drawn stage has.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Kept {
    /// Name of the figure that is limited.
    pub figure: String,
    /// Lowest allowed, SI.
    pub at_least: Option<f64>,
    /// Highest allowed, SI.
    pub at_most: Option<f64>,
    /// As drawn; none where it does not exist.
    pub drawn: Option<f64>,
    /// Whether it is kept.
    pub kept: bool,
}

/// One drawn transistor of a leg.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct DrawnDevice {
    /// Its fingers.
    pub fingers: Fingers,
    /// Its capacitances and resistance.
    pub figures: DeviceFigures,
}

/// N and P together.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct Pair<T> {
    /// The n-channel device.
    pub nmos: T,
    /// The p-channel device.
    pub pmos: T,
}

/// One spiral as drawn.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct DrawnSpiral {
    /// Turns.
    pub turns: u32,
    /// Trace width, m.
    pub trace_m: f64,
    /// Spacing, m.
    pub spacing_m: f64,
    /// Outer diameter, m.
    pub diameter_m: f64,
    /// Inner diameter, m.
    pub inner_diameter_m: f64,
    /// Clear space around, m.
    pub keep_out_m: f64,
    /// At the carrier, substrate and underpass counted, H.
    pub inductance_h: f64,
    /// The same, Ω.
    pub resistance_ohm: f64,
    /// ω0 L/R.
    pub quality: f64,
    /// Hz; none below 1 THz.
    pub self_resonance_hz: Option<f64>,
}

/// A capacitor as drawn.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct DrawnCapacitor {
    /// Its units.
    pub units: Units,
    /// Area of one unit, m².
    pub unit_area_m2: f64,
    /// Bottom plate to ground, F.
    pub bottom_plate_f: f64,
}

/// Supply decoupling of the whole stage.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct Decoupling {
    /// F.
    pub capacitance_f: f64,
    /// m².
    pub area_m2: f64,
    /// Ripple it allows, a fraction of the supply.
    pub ripple: f64,
}

/// The whole sheet.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Sheet {
    /// Id of the design in its run.
    pub id: String,
    /// Title of the study.
    pub title: String,
    /// Name of the technology.
    pub technology: String,
    /// Where its figures come from.
    pub source: String,
    /// Program version.
    pub version: String,
    /// Carrier, Hz.
    pub frequency_hz: f64,
    /// Junction temperature, K.
    pub temperature_k: f64,
    /// Legs.
    pub legs: u32,
    /// Devices a side.
    pub stack: u32,
    /// Transistor pair.
    pub device: String,
    /// Load network.
    pub network: Network,
    /// Antenna (differential with two legs), Ω.
    pub antenna_resistance_ohm: f64,
    /// Loss behind the antenna's port, dB.
    pub antenna_loss_db: f64,
    /// Swing of the drivers V, V.
    pub swing_v: f64,
    /// The rules snapped to.
    pub rules: DrawingRules,
    /// a_w, the area a width of transistor, m.
    pub width_area_m: f64,
    /// R_route budgeted, Ω.
    pub routing_resistance_ohm: f64,
    /// Headline figures before and after.
    pub changes: Vec<Change>,
    /// Limits of the study.
    pub limits: Vec<Kept>,
    /// The drawn stage.
    pub evaluation: Evaluation,
    /// Output switches of a leg; a stacked side has two of each.
    pub switches: Pair<DrawnDevice>,
    /// Driver stages of a leg, first stage first.
    pub drivers: Vec<Pair<DrawnDevice>>,
    /// Currents of a leg.
    pub currents: Currents,
    /// Metal along the fingers of the switches.
    pub strips: Pair<Strip>,
    /// The spiral of a leg; none with a fixed inductor.
    pub spiral: Option<DrawnSpiral>,
    /// A leg's own series capacitor.
    pub series_capacitor: DrawnCapacitor,
    /// Across the antenna.
    pub shunt_capacitor: Option<DrawnCapacitor>,
    /// Decoupling.
    pub decoupling: Decoupling,
    /// Voltages against ratings.
    pub voltages: Vec<Voltage>,
    /// What the figures rest on.
    pub assumptions: Vec<String>,
    /// What is wrong or close with this design.
    pub cautions: Vec<String>,
    /// What the foundry's rules or licensed practice must decide.
    pub to_be_checked: Vec<String>,
}
