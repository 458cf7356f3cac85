//! The hand-off of one design to layout: snapped to the technology's grid, evaluated again exactly, written for people,
//! tables and programs, and drawn to scale.

mod block;
mod currents;
mod drawing;
mod floorplan;
mod limits;
mod markdown;
mod names;
mod records;
mod shapes;
mod snap;
mod table;
mod voltages;
mod words;

pub use currents::{Current, Currents, Strip};
pub use drawing::drawing;
pub use markdown::markdown;
pub use records::*;
pub use snap::{Fingers, Snapped, Units, Wanted, fingers, on_grid, snap, units};
pub use table::csv;
pub use voltages::Voltage;

use crate::evaluate::{
    DrawnEvaluation, DrawnInductor, Evaluation, Figures, Setup, evaluate_drawn, tapered_widths_m,
};
use crate::run::records::DesignRecord;
use crate::stage::Impossible;
use crate::study::Study;
use crate::technology::{DrawingRules, Inductor, Technology};
use serde_json::Value;
use thiserror::Error;

/// Samples of a period: a hundredth of the charge of a picosecond spike at 2.45 GHz.
const SAMPLES: usize = 1 << 14;

/// Figures whose change by snapping is shown; names of the JSON.
const HEADLINES: [&str; 30] = [
    "output_power_dbm",
    "output_power_w",
    "efficiency",
    "drain_efficiency",
    "pae",
    "area_m2",
    "dc_power_w",
    "total_power_w",
    "second_harmonic_dbc",
    "third_harmonic_dbc",
    "edge_time_fraction",
    "on_resistance_n_ohm",
    "on_resistance_p_ohm",
    "gate_capacitance_f",
    "drain_capacitance_f",
    "optimum_resistance_ohm",
    "inductance_h",
    "inductor_resistance_ohm",
    "inductor_q",
    "series_capacitance_f",
    "shunt_capacitance_f",
    "peak_drain_v",
    "lowest_drain_v",
    "network_current_rms_a",
    "design.loaded_q",
    "design.nmos_width_m",
    "design.width_ratio",
    "design.trace_m",
    "design.diameter_m",
    "design.reactance",
];

/// Why there is no sheet.
#[derive(Debug, Error)]
pub enum SheetError {
    /// The technology lacks rules.
    #[error(
        "technology \"{technology}\" lacks what a sheet snaps to; [rules] needs {missing}\n  \
         help: add these keys to the technology file and search again"
    )]
    NoRules {
        /// Its name.
        technology: String,
        /// Keys.
        missing: String,
    },
    /// The design has no figures.
    #[error("design {0} has no figures: it cannot exist")]
    NoFigures(String),
    /// Snapped it cannot exist.
    #[error("design {id} cannot be drawn: {reason}")]
    Impossible {
        /// Id.
        id: String,
        /// Why.
        reason: Impossible,
    },
}

/// A design snapped and evaluated as drawn.
#[derive(Debug, Clone, PartialEq)]
pub struct Made {
    /// What is drawn.
    pub snapped: Snapped,
    /// Evaluated.
    pub drawn: DrawnEvaluation,
    /// Its currents.
    pub currents: Currents,
}

/// Snaps a design and evaluates it as drawn. Fingers are made narrow enough for their metal to carry the current that
/// the drawn stage has, and to leave half of the routing resistance to the wires; its currents hardly move with the cut, so a few rounds settle it.
///
/// # Errors
/// Why the drawn stage cannot exist.
pub fn make(
    setup: &Setup,
    rules: &DrawingRules,
    evaluation: &Evaluation,
    figures: &Figures,
) -> Result<Made, Impossible> {
    const ROUNDS: usize = 4;
    let design = &evaluation.design;
    let drivers_m = tapered_widths_m(setup, design, figures.taper);
    let mut most_finger_m = [rules.most_finger_m; 2];
    let mut round = 0;
    loop {
        let snapped = snap(
            setup,
            rules,
            &Wanted {
                design,
                drivers_m: &drivers_m,
                inductance_h: figures.inductance_h,
                shunt_capacitance_f: figures.shunt_capacitance_f,
                most_finger_m,
            },
        )?;
        let drawn = evaluate_drawn(setup, &snapped.drawn, SAMPLES)?;
        let Some(drawn_figures) = &drawn.evaluation.figures else {
            return Err(Impossible::Numbers);
        };
        let currents = currents::currents(setup, rules, &drawn, drawn_figures);
        round += 1;
        let carried = [0, 1].map(|i| {
            let rms_a = [currents.ground.rms_a, currents.supply.rms_a][i];
            let width_m = snapped.switches[i].width_m;
            let route_ohm = setup.layout.routing_resistance_ohm;
            currents::most_finger_m(rules, width_m, setup.stack, rms_a, route_ohm)
        });
        let narrow = |i: usize| {
            let finger_m = snapped.switches[i].finger_m;
            finger_m <= carried[i] || finger_m <= rules.least_finger_m + rules.grid_m
        };
        if round == ROUNDS || (narrow(0) && narrow(1)) {
            return Ok(Made {
                snapped,
                drawn,
                currents,
            });
        }
        for i in 0..2 {
            if !narrow(i) {
                most_finger_m[i] = carried[i] - rules.grid_m;
            }
        }
    }
}

/// The sheet of a design of a run.
///
/// # Errors
/// [`SheetError`].
pub fn sheet(
    study: &Study,
    technology: &Technology,
    setup: &Setup,
    record: &DesignRecord,
) -> Result<Sheet, SheetError> {
    let rules = technology
        .rules
        .complete()
        .map_err(|missing| SheetError::NoRules {
            technology: technology.name.clone(),
            missing: missing.join(", "),
        })?;
    let id = &record.id;
    let searched = &record.evaluation;
    let figures = searched
        .figures
        .as_ref()
        .ok_or_else(|| SheetError::NoFigures(id.clone()))?;
    let made = make(setup, &rules, searched, figures).map_err(|reason| SheetError::Impossible {
        id: id.clone(),
        reason,
    })?;
    let drawn = &made.drawn;
    let Some(drawn_figures) = &drawn.evaluation.figures else {
        return Err(SheetError::NoFigures(id.clone()));
    };
    let mut sheet = Sheet {
        id: id.clone(),
        title: study.title.clone(),
        technology: technology.name.clone(),
        source: technology.source.clone(),
        version: env!("CARGO_PKG_VERSION").into(),
        frequency_hz: setup.frequency_hz,
        temperature_k: study.temperature_k,
        legs: setup.legs,
        stack: setup.stack,
        device: study.stage.device.clone(),
        network: study.stage.network,
        antenna_resistance_ohm: setup.network.antenna_resistance_ohm,
        antenna_loss_db: setup.antenna_loss_db,
        swing_v: setup.swing_v(drawn.evaluation.design.supply_v),
        rules,
        width_area_m: setup.layout.width_area_m,
        routing_resistance_ohm: setup.layout.routing_resistance_ohm,
        changes: changes(searched, &drawn.evaluation),
        limits: limits::limits(&setup.limits, &drawn.evaluation, drawn_figures),
        evaluation: drawn.evaluation.clone(),
        switches: pair(&made.snapped.switches, &drawn.switches),
        drivers: made
            .snapped
            .drivers
            .iter()
            .zip(&drawn.drivers)
            .map(|(fingers, figures)| pair(fingers, figures))
            .collect(),
        currents: made.currents,
        strips: Pair {
            nmos: currents::strip(
                &rules,
                &made.snapped.switches[0],
                setup.stack,
                made.currents.ground.rms_a,
            ),
            pmos: currents::strip(
                &rules,
                &made.snapped.switches[1],
                setup.stack,
                made.currents.supply.rms_a,
            ),
        },
        spiral: spiral(setup, &made),
        series_capacitor: capacitor(setup, &rules, made.snapped.series),
        shunt_capacitor: made
            .snapped
            .shunt
            .map(|units| capacitor(setup, &rules, units)),
        decoupling: Decoupling {
            capacitance_f: drawn_figures.area_parts_m2.decoupling
                * setup.layout.decoupling_density_f_m2,
            area_m2: drawn_figures.area_parts_m2.decoupling,
            ripple: setup.layout.supply_ripple,
        },
        voltages: voltages::voltages(setup, drawn, drawn_figures, &made.snapped.series),
        assumptions: Vec::new(),
        cautions: Vec::new(),
        to_be_checked: words::to_be_checked(),
    };
    let fixed = matches!(setup.inductor, Inductor::Fixed { .. });
    sheet.assumptions = words::assumptions(&sheet, fixed);
    sheet.cautions = words::cautions(&sheet);
    Ok(sheet)
}

fn pair(
    fingers: &[Fingers; 2],
    figures: &[crate::evaluate::DeviceFigures; 2],
) -> Pair<DrawnDevice> {
    let device = |i: usize| DrawnDevice {
        fingers: fingers[i],
        figures: figures[i],
    };
    Pair {
        nmos: device(0),
        pmos: device(1),
    }
}

fn spiral(setup: &Setup, made: &Made) -> Option<DrawnSpiral> {
    let (Inductor::Spiral(process), DrawnInductor::Spiral(geometry), Some(solved)) = (
        &setup.inductor,
        made.snapped.drawn.inductor,
        made.drawn.spiral,
    ) else {
        return None;
    };
    Some(DrawnSpiral {
        turns: geometry.turns,
        trace_m: geometry.trace_m,
        spacing_m: process.spacing_m,
        diameter_m: geometry.diameter_m,
        inner_diameter_m: geometry.inner_diameter_m(process.spacing_m),
        keep_out_m: process.keep_out_m,
        inductance_h: solved.inductance_h,
        resistance_ohm: solved.resistance_ohm,
        quality: solved.quality,
        self_resonance_hz: solved.self_resonance_hz,
    })
}

fn capacitor(setup: &Setup, rules: &DrawingRules, units: Units) -> DrawnCapacitor {
    DrawnCapacitor {
        units,
        unit_area_m2: rules.capacitor_unit_f / setup.capacitor.density_f_m2,
        bottom_plate_f: units.capacitance_f * setup.capacitor.bottom_plate,
    }
}

fn changes(searched: &Evaluation, drawn: &Evaluation) -> Vec<Change> {
    let json = |e: &Evaluation| serde_json::to_value(e).unwrap_or(Value::Null);
    let (before, after) = (json(searched), json(drawn));
    let value = |json: &Value, name: &str| {
        name.split('.')
            .try_fold(json, |v, key| v.get(key))
            .and_then(Value::as_f64)
    };
    HEADLINES
        .iter()
        .map(|name| Change {
            figure: (*name).into(),
            searched: value(&before, name),
            drawn: value(&after, name),
        })
        .collect()
}
