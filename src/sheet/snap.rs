//! From a design to what can be drawn: fingers, grid, unit capacitors.

use crate::evaluate::{Drawn, DrawnInductor, Setup, spiral_of};
use crate::stage::Impossible;
use crate::study::Design;
use crate::technology::inductor::SpiralGeometry;
use crate::technology::{DrawingRules, Inductor};
use serde::{Deserialize, Serialize};

/// A width cut into fingers of equal width: `width = finger · fingers · devices`.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct Fingers {
    /// Before snapping, m.
    pub wanted_width_m: f64,
    /// As drawn, m.
    pub width_m: f64,
    /// Width of a finger, on the grid, m.
    pub finger_m: f64,
    /// Fingers of one device.
    pub fingers: u32,
    /// Equal devices side by side (the multiplicity).
    pub devices: u32,
}

/// `length_m` as a whole number of grid steps, at least one.
pub fn on_grid(length_m: f64, grid_m: f64) -> f64 {
    from_steps((length_m / grid_m).round().max(1.0), grid_m)
}

/// A number of grid steps as a length that reads as the grid is written: 1 nm and finer, no dust in the last digits.
fn from_steps(steps: f64, grid_m: f64) -> f64 {
    let value = steps * grid_m;
    format!("{value:.11e}").parse().unwrap_or(value)
}

/// Cuts a width into the fewest fingers of at most `most_finger_m` (and at least the rules' least); an even number of
/// them where `even`, so that a device begins and ends with a source. What is off stays below half a grid step a
/// finger, unless the width is too small for the least finger.
pub fn fingers(rules: &DrawingRules, width_m: f64, most_finger_m: f64, even: bool) -> Fingers {
    let least = (rules.least_finger_m / rules.grid_m - 1e-6).ceil().max(1.0);
    let most = (most_finger_m.min(rules.most_finger_m) / rules.grid_m + 1e-6)
        .floor()
        .max(least);
    let whole = |count: f64| {
        let count = count.max(1.0);
        if even {
            2.0 * (count / 2.0).ceil()
        } else {
            count
        }
    };
    let most_fingers = if even {
        rules.most_fingers - rules.most_fingers % 2
    } else {
        rules.most_fingers
    };
    let total = whole((width_m / (most * rules.grid_m) - 1e-9).ceil());
    let devices = (total / f64::from(most_fingers)).ceil();
    let each = whole((total / devices).ceil());
    let steps = (width_m / (each * devices * rules.grid_m))
        .round()
        .clamp(least, most);
    let finger_m = from_steps(steps, rules.grid_m);
    Fingers {
        wanted_width_m: width_m,
        width_m: from_steps(steps * each * devices, rules.grid_m),
        finger_m,
        fingers: each as u32,
        devices: devices as u32,
    }
}

/// A capacitor as an array of equal units.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct Units {
    /// Before snapping, F.
    pub wanted_capacitance_f: f64,
    /// As drawn, F.
    pub capacitance_f: f64,
    /// Units.
    pub units: u32,
}

/// The nearest whole number of units, at least one.
pub fn units(rules: &DrawingRules, capacitance_f: f64) -> Units {
    let units = (capacitance_f / rules.capacitor_unit_f).round().max(1.0);
    Units {
        wanted_capacitance_f: capacitance_f,
        capacitance_f: units * rules.capacitor_unit_f,
        units: units as u32,
    }
}

/// What snapping starts from.
#[derive(Debug, Clone, Copy)]
pub struct Wanted<'a> {
    /// The design, its derived values filled in.
    pub design: &'a Design,
    /// N and P of each driver stage, m.
    pub drivers_m: &'a [[f64; 2]],
    /// L of the loop, H.
    pub inductance_h: f64,
    /// C_p, F.
    pub shunt_capacitance_f: Option<f64>,
    /// Widest finger of N and P that its metal carries the current of, m.
    pub most_finger_m: [f64; 2],
}

/// A design snapped.
#[derive(Debug, Clone, PartialEq)]
pub struct Snapped {
    /// What is evaluated.
    pub drawn: Drawn,
    /// N and P of a leg, one device a side (a stacked side has two of them).
    pub switches: [Fingers; 2],
    /// N and P of each driver stage.
    pub drivers: Vec<[Fingers; 2]>,
    /// A leg's own series capacitor.
    pub series: Units,
    /// The shunt capacitor.
    pub shunt: Option<Units>,
}

/// Snaps widths, spiral and shunt capacitor to the nearest that can be drawn, then the series capacitor to the nearest
/// that keeps the load angle x with them: `C_s = 1/(ω0 (Q_L − Q_m − x) R_opt)`, equation (12), a leg's own B times it.
/// The radius of the spiral is put on the grid, its diameter on twice the grid.
///
/// # Errors
/// Why no such stage exists.
pub fn snap(
    setup: &Setup,
    rules: &DrawingRules,
    wanted: &Wanted<'_>,
) -> Result<Snapped, Impossible> {
    let design = wanted.design;
    let wanted_widths = [
        design.nmos_width_m,
        design.nmos_width_m * design.width_ratio,
    ];
    let switches = [0, 1].map(|i| fingers(rules, wanted_widths[i], wanted.most_finger_m[i], true));
    let drivers: Vec<[Fingers; 2]> = wanted
        .drivers_m
        .iter()
        .map(|w| w.map(|width| fingers(rules, width, rules.most_finger_m, false)))
        .collect();
    let legs = f64::from(setup.legs);
    let (inductor, inductance_h) = match &setup.inductor {
        Inductor::Fixed { .. } => (
            DrawnInductor::Fixed(wanted.inductance_h),
            wanted.inductance_h,
        ),
        Inductor::Spiral(_) => {
            let missing = |key| Impossible::Missing { key };
            let geometry = SpiralGeometry {
                turns: design.turns.ok_or(missing("turns"))?,
                trace_m: on_grid(design.trace_m.ok_or(missing("trace"))?, rules.grid_m),
                diameter_m: on_grid(
                    design.diameter_m.ok_or(missing("diameter"))?,
                    2.0 * rules.grid_m,
                ),
            };
            let spiral = spiral_of(setup, &geometry)?;
            (DrawnInductor::Spiral(geometry), legs * spiral.inductance_h)
        }
    };
    let w = setup.network.angular_frequency;
    let antenna = setup.network.antenna_resistance_ohm;
    let shunt = wanted.shunt_capacitance_f.map(|c| units(rules, c));
    let matching_q = shunt.map_or(0.0, |c| w * antenna * c.capacitance_f);
    let optimum = antenna / (1.0 + matching_q * matching_q);
    let factor = w * inductance_h / optimum - matching_q - design.reactance;
    if factor.is_nan() || factor <= 0.0 {
        return Err(Impossible::SeriesCapacitor { factor });
    }
    let series = units(rules, legs / (w * factor * optimum));
    Ok(Snapped {
        drawn: Drawn {
            supply_v: design.supply_v,
            dead_time: design.dead_time,
            widths_m: switches.map(|f| f.width_m),
            drivers_m: drivers.iter().map(|s| s.map(|f| f.width_m)).collect(),
            inductor,
            leg_series_capacitance_f: series.capacitance_f,
            shunt_capacitance_f: shunt.map(|c| c.capacitance_f),
        },
        switches,
        drivers,
        series,
        shunt,
    })
}
