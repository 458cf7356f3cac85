//! A technology file to a [`Technology`], and whether a study goes with it.

use super::*;
use crate::quantity::Dimension::{self, *};
use crate::study::diagnostics::{Fault, Faults, nearest, one_of};
use crate::study::document::{self, Reader, Span, Table, span};
use crate::study::{Network, Range, StudyFile, Swing, schema};
use std::collections::BTreeMap;
use std::path::Path;

const VOLTAGE: Span = span(1e-3, 100.0, "1 mV to 100 V");
const DRIFT: Span = span(-0.02, 0.02, "-20 mV/K to 20 mV/K");
const POSITIVE: Span = span(f64::MIN_POSITIVE, 1e30, "above 0");
const NOT_NEGATIVE: Span = span(0.0, 1e30, "0 or more");
const SLOPE: Span = span(1.0, 4.0, "1 to 4");
const DEGRADATION: Span = span(0.0, 20.0, "0 to 20 1/V");
const EXPONENT: Span = span(-5.0, 2.0, "-5 to 2");
const GRADING: Span = span(0.01, 0.95, "0.01 to 0.95");
const PERMITTIVITY: Span = span(1.0, 100.0, "1 to 100");
const QUALITY: Span = span(0.5, 1e15, "0.5 to 1e15");
const PLATE: Span = span(0.0, 1.0, "0 to 1");
const RIPPLE: Span = span(1e-6, 1.0, "above 0 and up to 1");

/// Reads and resolves a technology file.
///
/// # Errors
/// Every fault found.
pub fn read(path: &Path) -> Result<Technology, Faults> {
    read_str(&document::load(path)?, path)
}

/// As [`read`], from text.
///
/// # Errors
/// Every fault found.
pub fn read_str(text: &str, path: &Path) -> Result<Technology, Faults> {
    let reader = Reader::new(path.display().to_string(), text);
    let parsed = reader.parse()?;
    let root = reader.root(&parsed);
    let technology = technology(&root);
    root.refuse_others();
    reader.finish()?;
    // Every absence is a fault, so `finish` has returned it.
    technology.ok_or(Faults(Vec::new()))
}

/// A value that must be there.
fn need(t: &Table<'_, '_>, key: &str, dimension: Option<Dimension>, s: Span) -> Option<f64> {
    let allowed = match dimension {
        Some(d) => format!("{}, for example \"{}\"", d.name(), d.example()),
        None => format!("a number, {}", s.text),
    };
    t.need(key, &allowed)?.measured(dimension, s)
}

fn technology(root: &Table<'_, '_>) -> Option<Technology> {
    let schema = schema(root);
    let name = root.need("name", "text in quotes").and_then(|e| e.text());
    let source = root
        .need("source", "text: where the figures come from")
        .and_then(|e| e.text());
    let transistors = root.need_table("transistor").and_then(|t| {
        let pairs: Vec<Option<(String, TransistorPair)>> = t
            .keys()
            .into_iter()
            .map(|key| {
                let pair = t.table(&key).and_then(|p| pair(&p))?;
                Some((key, pair))
            })
            .collect();
        if pairs.is_empty() {
            t.refuse_empty("at least one [transistor.NAME]");
        }
        pairs.into_iter().collect::<Option<BTreeMap<_, _>>>()
    });
    let inductor = root.need_table("inductor").and_then(|t| inductor(&t));
    let capacitor = root.need_table("capacitor").and_then(|t| {
        let density = need(&t, "density", Some(CapacitancePerArea), POSITIVE);
        let quality = need(&t, "quality", None, QUALITY);
        let bottom_plate = need(&t, "bottom_plate", None, PLATE);
        t.refuse_others();
        Some(Capacitor {
            density_f_m2: density?,
            quality: quality?,
            bottom_plate: bottom_plate?,
        })
    });
    let layout = root.need_table("layout").and_then(|t| {
        let routing = need(&t, "routing_resistance", Some(Resistance), NOT_NEGATIVE);
        let width_area = need(&t, "width_area", Some(Length), POSITIVE);
        let ripple = need(&t, "supply_ripple", None, RIPPLE);
        let decoupling = need(&t, "decoupling_density", Some(CapacitancePerArea), POSITIVE);
        t.refuse_others();
        Some(Layout {
            routing_resistance_ohm: routing?,
            width_area_m: width_area?,
            supply_ripple: ripple?,
            decoupling_density_f_m2: decoupling?,
        })
    });
    schema?;
    Some(Technology {
        name: name?.to_owned(),
        source: source?.to_owned(),
        transistors: transistors?,
        inductor: inductor?,
        capacitor: capacitor?,
        layout: layout?,
    })
}

fn pair(t: &Table<'_, '_>) -> Option<TransistorPair> {
    let rating = need(t, "rating", Some(Voltage), VOLTAGE);
    let clamp = need(t, "clamp", Some(Voltage), VOLTAGE);
    let nmos = t.need_table("nmos").and_then(|d| transistor(&d));
    let pmos = t.need_table("pmos").and_then(|d| transistor(&d));
    t.refuse_others();
    Some(TransistorPair {
        rating_v: rating?,
        clamp_v: clamp?,
        nmos: nmos?,
        pmos: pmos?,
    })
}

fn transistor(t: &Table<'_, '_>) -> Option<Transistor> {
    let transconductance = need(t, "transconductance", Some(Transconductance), POSITIVE);
    let length = need(t, "length", Some(Length), POSITIVE);
    let threshold = need(t, "threshold", Some(Voltage), VOLTAGE);
    let drift = need(t, "threshold_drift", Some(VoltageDrift), DRIFT);
    let slope = need(t, "slope", None, SLOPE);
    let degradation = need(t, "degradation", Some(PerVoltage), DEGRADATION);
    let exponent = need(t, "mobility_exponent", None, EXPONENT);
    let access = need(t, "access_resistance", Some(ResistanceLength), NOT_NEGATIVE);
    let gate = need(t, "gate_capacitance", Some(CapacitancePerLength), POSITIVE);
    let overlap = need(
        t,
        "overlap_capacitance",
        Some(CapacitancePerLength),
        NOT_NEGATIVE,
    );
    let junction = need(
        t,
        "junction_capacitance",
        Some(CapacitancePerLength),
        POSITIVE,
    );
    let grading = need(t, "junction_grading", None, GRADING);
    let potential = need(t, "junction_potential", Some(Voltage), VOLTAGE);
    let off = need(t, "off_current", Some(CurrentPerLength), NOT_NEGATIVE);
    t.refuse_others();
    Some(Transistor {
        transconductance_a_v2: transconductance?,
        length_m: length?,
        threshold_v: threshold?,
        threshold_drift_v_k: drift?,
        slope: slope?,
        degradation_per_v: degradation?,
        mobility_exponent: exponent?,
        access_resistance_ohm_m: access?,
        gate_capacitance_f_m: gate?,
        overlap_capacitance_f_m: overlap?,
        junction_capacitance_f_m: junction?,
        junction_grading: grading?,
        junction_potential_v: potential?,
        off_current_a_m: off?,
    })
}

fn inductor(t: &Table<'_, '_>) -> Option<Inductor> {
    let spiral = t
        .need("model", "\"spiral\" or \"fixed\"")?
        .choice(&[("spiral", true), ("fixed", false)])?;
    if !spiral {
        let quality = need(t, "quality", None, QUALITY);
        let base = need(t, "area_base", Some(Area), NOT_NEGATIVE);
        let slope = need(t, "area_slope", Some(AreaPerInductance), NOT_NEGATIVE);
        t.refuse_others();
        return Some(Inductor::Fixed {
            quality: quality?,
            area_base_m2: base?,
            area_slope_m2_h: slope?,
        });
    }
    let resistivity = need(t, "resistivity", Some(ResistanceLength), POSITIVE);
    let thickness = need(t, "thickness", Some(Length), POSITIVE);
    let spacing = need(t, "spacing", Some(Length), POSITIVE);
    let height = need(t, "oxide_height", Some(Length), POSITIVE);
    let permittivity = need(t, "oxide_permittivity", None, PERMITTIVITY);
    let substrate_c = need(
        t,
        "substrate_capacitance",
        Some(CapacitancePerArea),
        NOT_NEGATIVE,
    );
    let substrate_g = need(
        t,
        "substrate_conductance",
        Some(ConductancePerArea),
        POSITIVE,
    );
    let underpass = need(t, "underpass_height", Some(Length), POSITIVE);
    let keep_out = need(t, "keep_out", Some(Length), NOT_NEGATIVE);
    t.refuse_others();
    Some(Inductor::Spiral(SpiralProcess {
        resistivity_ohm_m: resistivity?,
        thickness_m: thickness?,
        spacing_m: spacing?,
        oxide_height_m: height?,
        oxide_permittivity: permittivity?,
        substrate_capacitance_f_m2: substrate_c?,
        substrate_conductance_s_m2: substrate_g?,
        underpass_height_m: underpass?,
        keep_out_m: keep_out?,
    }))
}

/// Whether `technology` gives what the study asks, and what is worth a warning.
///
/// # Errors
/// Every key of the study that does not go with the technology, by line.
pub fn match_study(file: &StudyFile, technology: &Technology) -> Result<Vec<String>, Faults> {
    let mut faults = Vec::new();
    let mut warnings = Vec::new();
    let study = &file.study;
    let Some(pair) = technology.transistors.get(&study.stage.device) else {
        let names = || technology.transistors.keys().map(String::as_str);
        let device = &study.stage.device;
        return Err(Faults::from(Fault {
            help: nearest(device, names()),
            ..file.fault("stage", "device", format!("{device:?}"), one_of(names()))
        }));
    };
    let stack = f64::from(study.stage.stack);
    if let Swing::Voltage(v) = study.driver.swing {
        if study.stage.stack == 2 {
            faults.push(file.fault(
                "driver",
                "swing",
                format!("{v} V"),
                "\"supply\": a stacked leg's driver swings half the supply".into(),
            ));
        } else if v > pair.rating_v {
            faults.push(file.fault(
                "driver",
                "swing",
                format!("{v} V"),
                format!("up to the rating of {} V", pair.rating_v),
            ));
        }
    }
    faults.extend(inductor_keys(file, technology));
    let highest = stack * pair.rating_v;
    if let Some(space) = &study.space {
        let top = match &space.supply_v {
            Range::Fixed(v) => *v,
            Range::Free { to, .. } => *to,
            Range::Grid(values) => values.last().copied().unwrap_or(0.0),
        };
        if top > highest {
            warnings.push(format!(
                "{}: [space] supply reaches {top} V; above {highest} V every design breaks supply_rating",
                file.path.display()
            ));
        }
    }
    if faults.is_empty() {
        Ok(warnings)
    } else {
        faults.sort_by_key(|f| f.line);
        Err(Faults(faults))
    }
}

/// Which of turns, trace, diameter and resistance this inductor and network take.
fn inductor_keys(file: &StudyFile, technology: &Technology) -> Vec<Fault> {
    let direct = file.study.stage.network == Network::Direct;
    let spiral = matches!(technology.inductor, Inductor::Spiral(_));
    let wanted = |key: &str| match key {
        "turns" | "diameter" => spiral,
        "trace" => spiral && !direct,
        _ => !spiral && !direct,
    };
    let why = |key: &str| match (spiral, direct, key) {
        (true, _, "resistance") => "nothing: with a spiral the optimum resistance is a result",
        (true, true, "trace") => "nothing: with the direct network the trace is a result",
        (false, true, "resistance") => "nothing: with the direct network it is the antenna's",
        _ => "nothing: this technology has a fixed inductor without a geometry",
    };
    let mut faults = Vec::new();
    let mut check = |table: &str, key: &str, given: bool| {
        if given && !wanted(key) {
            faults.push(file.fault(table, key, "a value".into(), why(key).into()));
        } else if !given && wanted(key) {
            let allowed = "a value: this inductor and network need it";
            faults.push(file.fault(table, key, "nothing".into(), allowed.into()));
        }
    };
    if let Some(s) = &file.study.space {
        check("space", "turns", s.turns.is_some());
        check("space", "trace", s.trace_m.is_some());
        check("space", "diameter", s.diameter_m.is_some());
        check("space", "resistance", s.resistance_ohm.is_some());
    }
    if let Some(d) = &file.study.design {
        check("design", "turns", d.turns.is_some());
        check("design", "trace", d.trace_m.is_some());
        check("design", "diameter", d.diameter_m.is_some());
        check("design", "resistance", d.resistance_ohm.is_some());
    }
    faults
}
