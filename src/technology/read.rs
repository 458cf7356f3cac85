//! From the text of a technology file to a [`Technology`].

use super::types::*;
use crate::quantity::Dimension;
use crate::study::figure::{Figure, above, between, number, quantity, whole, within};
use crate::study::raw::{Section, load, walk};
use crate::study::{FaultKind, Faults, Lines, Warning, WarningKind};
use std::path::Path;

/// Version of the technology format.
pub const SCHEMA: i64 = 1;
/// Most transistor pairs; a process has some tens of flavours.
const MOST_PAIRS: usize = 100;

/// A technology and what later checks need to speak of its file.
#[derive(Debug, Clone, PartialEq)]
pub struct TechnologyFile {
    /// The technology, resolved.
    pub technology: Technology,
    /// Where every key stands.
    pub lines: Lines,
    /// What may not be meant.
    pub warnings: Vec<Warning>,
    /// The file as read, for hashing and copying.
    pub text: String,
}

/// Reads and validates a technology file.
pub fn read(path: &Path) -> Result<TechnologyFile, Faults> {
    read_str(&load(path)?, path)
}

/// Validates the text of a technology file; `path` stands in messages.
pub fn read_str(text: &str, path: &Path) -> Result<TechnologyFile, Faults> {
    let walked = walk(text, path, SCHEMA, build)?;
    Ok(TechnologyFile {
        technology: walked.value,
        lines: walked.lines,
        warnings: walked.warnings,
        text: text.to_owned(),
    })
}

fn build(root: &Section<'_, '_>) -> Technology {
    let name = root.text("name");
    let source = root.text("source");
    let pairs = root.section("transistor");
    let count = pairs.len();
    if count > MOST_PAIRS {
        let (read, allowed) = (
            format!("{count} transistor pairs"),
            format!("at most {MOST_PAIRS}"),
        );
        pairs.fault_here(FaultKind::OutOfRange { read, allowed });
        pairs.accept_all();
    }
    let sections = match count {
        0..=MOST_PAIRS => pairs.sections(),
        _ => Vec::new(),
    };
    let transistors: std::collections::BTreeMap<_, _> = sections
        .into_iter()
        .map(|(name, section)| (name, pair(&section)))
        .collect();
    if count == 0 && root.has_section("transistor") {
        let allowed = "at least one pair, [transistor.NAME]".to_owned();
        root.fault(
            "transistor",
            FaultKind::MissingKey {
                allowed,
                example: None,
            },
        );
    }
    Technology {
        name,
        source,
        transistors,
        inductor: inductor(&root.section("inductor")),
        capacitor: capacitor(&root.section("capacitor")),
        layout: layout(&root.section("layout")),
        rules: root
            .optional_section("rules")
            .map_or_else(Rules::default, |section| rules(&section)),
    }
}

fn pair(section: &Section<'_, '_>) -> TransistorPair {
    TransistorPair {
        rating_v: section.required("rating", quantity(Dimension::Voltage, within(0.1, 20.0))),
        clamp_v: section.required("clamp", quantity(Dimension::Voltage, within(0.0, 2.0))),
        nmos: transistor(&section.section("nmos")),
        pmos: transistor(&section.section("pmos")),
    }
}

fn transistor(section: &Section<'_, '_>) -> Transistor {
    // 1 aF/um to 100 fF/um: a metre of gate width of any process lies well inside
    let per_width = quantity(Dimension::CapacitancePerLength, within(1e-12, 1e-7));
    let access = quantity(Dimension::ResistanceLength, within(0.0, 0.1));
    let off = quantity(Dimension::CurrentPerLength, within(0.0, 10.0));
    let degradation = quantity(Dimension::PerVoltage, within(0.0, 10.0));
    let transconductance = quantity(Dimension::Transconductance, within(1e-6, 1e-2));
    let drift = quantity(Dimension::VoltageDrift, within(-5e-3, 5e-3));
    Transistor {
        transconductance_a_v2: section.required("transconductance", transconductance),
        length_m: section.required("length", quantity(Dimension::Length, within(1e-9, 1e-5))),
        threshold_v: section.required("threshold", quantity(Dimension::Voltage, above(0.0, 5.0))),
        threshold_drift_v_k: falling(section, "threshold_drift", drift),
        slope: section.required("slope", number(within(1.0, 3.0))),
        degradation_per_v: section.required("degradation", degradation),
        mobility_exponent: falling(section, "mobility_exponent", number(within(-4.0, 4.0))),
        access_resistance_ohm_m: section.required("access_resistance", access),
        gate_capacitance_f_m: section.required("gate_capacitance", per_width),
        overlap_capacitance_f_m: section.required("overlap_capacitance", per_width),
        junction_capacitance_f_m: section.required("junction_capacitance", per_width),
        junction_grading: section.required("junction_grading", number(between(0.0, 1.0))),
        junction_potential_v: section.required(
            "junction_potential",
            quantity(Dimension::Voltage, within(0.1, 3.0)),
        ),
        off_current_a_m: section.required("off_current", off),
    }
}

/// A temperature coefficient, with a warning when it has the sign that transistors do not have.
fn falling(section: &Section<'_, '_>, key: &str, figure: Figure) -> f64 {
    let value = section.required(key, figure);
    if value > 0.0 {
        let read = figure.show(value);
        section.warning(key, WarningKind::RisesWithTemperature { read });
    }
    value
}

fn inductor(section: &Section<'_, '_>) -> Inductor {
    match section.choice("model", &[("spiral", true), ("fixed", false)]) {
        Some(true) => Inductor::Spiral(spiral(section)),
        Some(false) => Inductor::Fixed {
            quality: section.required("quality", number(above(0.0, 1e4))),
            area_base_m2: section
                .required("area_base", quantity(Dimension::Area, within(0.0, 1e-4))),
            area_slope_m2_h: section.required(
                "area_slope",
                quantity(Dimension::AreaPerInductance, within(0.0, 1e5)),
            ),
        },
        None => {
            // without a model no key can be called unknown
            section.accept_all();
            Inductor::Fixed {
                quality: 1.0,
                area_base_m2: 0.0,
                area_slope_m2_h: 0.0,
            }
        }
    }
}

fn spiral(section: &Section<'_, '_>) -> SpiralProcess {
    let thickness = quantity(Dimension::Length, within(1e-8, 1e-3));
    let spacing = quantity(Dimension::Length, within(1e-8, 1e-4));
    let resistivity = quantity(Dimension::ResistanceLength, within(1e-9, 1e-5));
    let conductance = quantity(Dimension::ConductancePerArea, above(0.0, 1e8));
    let capacitance = quantity(Dimension::CapacitancePerArea, within(0.0, 1e-2));
    SpiralProcess {
        resistivity_ohm_m: section.required("resistivity", resistivity),
        thickness_m: section.required("thickness", thickness),
        spacing_m: section.required("spacing", spacing),
        oxide_height_m: section.required("oxide_height", thickness),
        oxide_permittivity: section.required("oxide_permittivity", number(within(1.0, 20.0))),
        substrate_capacitance_f_m2: section.required("substrate_capacitance", capacitance),
        substrate_conductance_s_m2: section.required("substrate_conductance", conductance),
        underpass_height_m: section.required("underpass_height", thickness),
        keep_out_m: section.required("keep_out", quantity(Dimension::Length, within(0.0, 1e-3))),
    }
}

fn capacitor(section: &Section<'_, '_>) -> Capacitor {
    let density = quantity(Dimension::CapacitancePerArea, above(0.0, 1.0));
    Capacitor {
        density_f_m2: section.required("density", density),
        quality: section.required("quality", number(above(0.0, 1e5))),
        bottom_plate: section.required("bottom_plate", number(within(0.0, 1.0))),
    }
}

fn layout(section: &Section<'_, '_>) -> Layout {
    let routing = quantity(Dimension::Resistance, within(0.0, 100.0));
    let pitch = quantity(Dimension::Length, above(0.0, 1e-4));
    let density = quantity(Dimension::CapacitancePerArea, above(0.0, 1.0));
    Layout {
        routing_resistance_ohm: section.required("routing_resistance", routing),
        width_area_m: section.required("width_area", pitch),
        supply_ripple: section.required("supply_ripple", number(between(0.0, 1.0))),
        decoupling_density_f_m2: section.required("decoupling_density", density),
    }
}

fn rules(section: &Section<'_, '_>) -> Rules {
    let length = |key, from| section.optional(key, quantity(Dimension::Length, above(from, 1e-3)));
    let density = quantity(Dimension::CurrentPerLength, above(0.0, 1e6));
    let (least_finger_m, most_finger_m) = (length("least_finger", 0.0), length("most_finger", 0.0));
    if let (Some(from), Some(to)) = (least_finger_m, most_finger_m)
        && from > to
    {
        let show = |value| Dimension::Length.show(value);
        section.fault(
            "least_finger",
            FaultKind::NotRising {
                low: "least_finger",
                high: "most_finger",
                from: show(from),
                to: show(to),
            },
        );
    }
    Rules {
        grid_m: length("grid", 1e-11),
        least_finger_m,
        most_finger_m,
        most_fingers: section
            .optional("most_fingers", whole(2, 10_000))
            .map(|count| count as u32),
        finger_pitch_m: length("finger_pitch", 0.0),
        finger_metal_width_m: length("finger_metal_width", 0.0),
        finger_sheet_resistance_ohm: section.optional(
            "finger_sheet_resistance",
            quantity(Dimension::Resistance, within(0.0, 10.0)),
        ),
        finger_current_a_m: section.optional("finger_current", density),
        top_current_a_m: section.optional("top_current", density),
        current_temperature_k: section.optional(
            "current_temperature",
            quantity(Dimension::Temperature, within(200.0, 500.0)),
        ),
        capacitor_unit_f: section.optional(
            "capacitor_unit",
            quantity(Dimension::Capacitance, above(0.0, 1e-9)),
        ),
    }
}
