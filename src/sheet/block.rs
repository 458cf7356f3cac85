//! Rectangles of a floor plan, micrometres: devices with their fingers, arrays of units.

use super::records::{DrawnCapacitor, DrawnDevice};
use crate::quantity::{format, micrometres};

/// What a block is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Kind {
    /// An output switch.
    Switch,
    /// A driver stage.
    Driver,
    /// Series or shunt capacitor.
    Capacitor,
    /// Decoupling.
    Decoupling,
    /// An inductor of which only the area is known.
    Inductor,
}

/// A rectangle with equal cells.
#[derive(Debug, Clone, PartialEq)]
pub struct Block {
    /// What.
    pub kind: Kind,
    /// Its name.
    pub label: String,
    /// Its measure in words, a line each.
    pub detail: Vec<String>,
    /// Left edge.
    pub x: f64,
    /// Upper edge.
    pub y: f64,
    /// Width.
    pub width: f64,
    /// Height.
    pub height: f64,
    /// Columns of cells.
    pub columns: u32,
    /// Cells in all; the last row may be short.
    pub cells: u32,
    /// Fingers of a cell; 0 for no transistor.
    pub fingers: u32,
    /// Share of a cell's height that is gate.
    pub active: f64,
}

impl Block {
    /// Equal cells of `cell_width` × `cell_height` in as square an array as they make.
    fn array(kind: Kind, label: String, cells: u32, cell_width: f64, cell_height: f64) -> Self {
        let cells = cells.max(1);
        let columns = (f64::from(cells) * cell_height / cell_width).sqrt().round();
        let columns = (columns as u32).clamp(1, cells);
        let rows = cells.div_ceil(columns);
        Self {
            kind,
            label,
            detail: Vec::new(),
            x: 0.0,
            y: 0.0,
            width: f64::from(columns) * cell_width,
            height: f64::from(rows) * cell_height,
            columns,
            cells,
            fingers: 0,
            active: 1.0,
        }
    }

    /// A transistor: each device is n fingers at the pitch wide and as high as makes its area `W a_w`.
    pub fn transistor(
        kind: Kind,
        label: String,
        device: &DrawnDevice,
        pitch_m: f64,
        width_area_m: f64,
    ) -> Self {
        let f = &device.fingers;
        let width = f64::from(f.fingers) * pitch_m * 1e6;
        let height = f.finger_m * 1e6 * width_area_m / pitch_m;
        Self {
            fingers: f.fingers,
            detail: vec![format!(
                "{} = {} × {} × {}",
                micrometres(f.width_m),
                f.devices,
                f.fingers,
                micrometres(f.finger_m)
            )],
            active: (pitch_m / width_area_m).min(1.0),
            ..Self::array(kind, label, f.devices, width, height)
        }
    }

    /// An array of unit capacitors.
    pub fn capacitor(label: String, capacitor: &DrawnCapacitor) -> Self {
        let side = capacitor.unit_area_m2.sqrt() * 1e6;
        Self {
            detail: vec![
                format(capacitor.units.capacitance_f, "F"),
                format!("{} units", capacitor.units.units),
            ],
            ..Self::array(Kind::Capacitor, label, capacitor.units.units, side, side)
        }
    }

    /// A plain rectangle of `area_m2`, `width` wide.
    pub fn plain(kind: Kind, label: String, area_m2: f64, width: f64) -> Self {
        Self::array(kind, label, 1, width, area_m2 * 1e12 / width)
    }

    /// The block with its upper left corner there.
    pub fn at(mut self, x: f64, y: f64) -> Self {
        self.x = x;
        self.y = y;
        self
    }

    /// Right edge.
    pub fn right(&self) -> f64 {
        self.x + self.width
    }

    /// Lower edge.
    pub fn bottom(&self) -> f64 {
        self.y + self.height
    }
}
