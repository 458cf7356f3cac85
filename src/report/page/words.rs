//! What the report says in words.

use crate::quantity::{format, format_in};
use crate::run::records::DesignRecord;
use serde_json::Value;

/// What the figures rest on.
pub const ASSUMPTIONS: [&str; 6] = [
    "A parametric model for early tradeoffs: it does not replace simulation with the foundry's models.",
    "The loop between legs and antenna is linear and its periodic steady state exact; on-resistances hold at the current \
     that flows, capacitances are charge equivalents over the swing.",
    "Body diodes do not conduct: a drain that would leave their clamps in a dead time breaks a limit.",
    "Spirals are solved as concentric circles with skin and proximity effect; their resistance at the carrier is used at the \
     harmonics too.",
    "No bond wires, package, supply impedance, mismatch, ageing, heating or modulation; no parasitics of wires beyond the \
     routing resistance.",
    "Each point is first-order optimal to the residual it carries; nothing proves that no better hill exists.",
];

/// What can hurt people or break law.
pub const CAUTIONS: [&str; 5] = [
    "Radio-frequency power burns, and exposure to its fields is limited by law: the local safety code decides.",
    "Gates and drains near their rating wear out; oxide stress, hot carriers and start-up are for the foundry's rules.",
    "Electromigration, self-heating and latch-up are for the foundry's rules at the real temperature and lifetime.",
    "Emissions and harmonics are regulated: limits here are a designer's and prove no compliance with spectrum rules.",
    "Layout, test and transmission belong to licensed practice where local law asks for it.",
];

/// A string of a record; empty where it is missing.
pub fn text(run: &Value, pointer: &str) -> String {
    match run.pointer(pointer) {
        Some(Value::String(s)) => s.clone(),
        Some(Value::Null) | None => String::new(),
        Some(other) => other.to_string(),
    }
}

fn number(run: &Value, pointer: &str) -> Option<f64> {
    run.pointer(pointer).and_then(Value::as_f64)
}

fn quantity(run: &Value, pointer: &str, unit: &str) -> String {
    number(run, pointer).map_or(String::new(), |v| format(v, unit))
}

/// Three lines: the most efficient design, the strongest, the smallest.
pub fn answer(designs: &[DesignRecord]) -> Vec<String> {
    let most = |figure: &dyn Fn(&DesignRecord) -> Option<f64>| {
        designs.iter().max_by(|a, b| {
            let of = |d| figure(d).unwrap_or(f64::NEG_INFINITY);
            of(a).total_cmp(&of(b))
        })
    };
    let line = |what: &str, design: Option<&DesignRecord>| {
        let (d, f) = design.and_then(|d| Some((d, d.evaluation.figures.as_ref()?)))?;
        let sizing = &d.evaluation.design;
        Some(plain(&format!(
            "{what}: {:.1} % at {:.1} dBm on {} ({}, {} supply, loaded Q {:.2}, NMOS {})",
            100.0 * f.efficiency,
            f.output_power_dbm,
            format_in(f.area_m2, "mm^2"),
            d.id,
            format(sizing.supply_v, "V"),
            sizing.loaded_q,
            format(sizing.nmos_width_m, "m"),
        )))
    };
    let lines: Vec<String> = [
        line(
            "Most efficient",
            most(&|d| d.evaluation.figures.as_ref().map(|f| f.efficiency)),
        ),
        line(
            "Most output power",
            most(&|d| d.evaluation.figures.as_ref().map(|f| f.output_power_w)),
        ),
        line(
            "Smallest",
            most(&|d| d.evaluation.figures.as_ref().map(|f| -f.area_m2)),
        ),
    ]
    .into_iter()
    .flatten()
    .collect();
    if lines.is_empty() {
        vec!["No design meets every limit: loosen a limit or widen the space.".into()]
    } else {
        lines
    }
}

type Rows = Vec<(&'static str, String)>;

/// The study in short; what it does not have is left out.
pub fn asked(run: &Value) -> Rows {
    let range = |pointer: &str, unit: &str| span(run.pointer(pointer), unit);
    let rows = vec![
        ("Carrier", quantity(run, "/study/frequency_hz", "Hz")),
        (
            "Antenna",
            quantity(run, "/study/antenna_resistance_ohm", "ohm"),
        ),
        (
            "Junction",
            number(run, "/study/temperature_k").map_or(String::new(), |t| format_in(t, "degC")),
        ),
        ("Legs", text(run, "/study/stage/legs")),
        ("Devices a side", text(run, "/study/stage/stack")),
        ("Transistor pair", text(run, "/study/stage/device")),
        ("Network", text(run, "/study/stage/network")),
        ("Supply", range("/study/space/supply_v", "V")),
        ("Loaded Q", range("/study/space/loaded_q", "")),
        ("NMOS width", range("/study/space/nmos_width_m", "m")),
        ("Driver stages", range("/study/space/stages", "")),
        ("Turns", range("/study/space/turns", "")),
        ("Limits", limits(run.pointer("/study/limits"))),
    ];
    rows.into_iter()
        .filter(|(_, v)| !v.is_empty())
        .map(|(name, v)| (name, plain(&v)))
        .collect()
}

/// A range of the space as the record holds it.
fn span(range: Option<&Value>, unit: &str) -> String {
    let mut numbers = Vec::new();
    collect(range.unwrap_or(&Value::Null), &mut numbers);
    let shown = |v: f64| {
        if unit.is_empty() {
            format!("{v}")
        } else {
            format(v, unit)
        }
    };
    match (numbers.first(), numbers.last()) {
        (Some(&low), Some(&high)) if low != high => format!("{} to {}", shown(low), shown(high)),
        (Some(&only), _) => shown(only),
        _ => String::new(),
    }
}

fn collect(value: &Value, numbers: &mut Vec<f64>) {
    match value {
        Value::Number(n) => numbers.extend(n.as_f64()),
        Value::Array(list) => list.iter().for_each(|v| collect(v, numbers)),
        Value::Object(fields) => fields.values().for_each(|v| collect(v, numbers)),
        _ => {}
    }
}

/// Limits in words; those that the study leaves open are left out.
fn limits(limits: Option<&Value>) -> String {
    let Some(Value::Object(fields)) = limits else {
        return String::new();
    };
    let mut parts = Vec::new();
    for (name, value) in fields {
        let bounds = match value {
            Value::Object(bounds) => bounds.iter().map(|(b, v)| (b.as_str(), v)).collect(),
            bound => vec![("at_most", bound)],
        };
        for (bound, value) in bounds {
            let Some(value) = value.as_f64() else {
                continue;
            };
            let (words, shown) = match name.as_str() {
                "output_power_w" => ("output power", format_in(value, "dBm")),
                "area_m2" => ("area", format_in(value, "mm^2")),
                "second_harmonic_dbc" => ("second harmonic", format!("{value} dBc")),
                "third_harmonic_dbc" => ("third harmonic", format!("{value} dBc")),
                "edge_time" => ("edge time", format!("{value} of a period")),
                other => (other, value.to_string()),
            };
            let words = words.replace('_', " ");
            parts.push(format!("{words} {} {shown}", bound.replace('_', " ")));
        }
    }
    plain(&parts.join("; "))
}

/// Units as they are printed, not as they are typed.
fn plain(text: &str) -> String {
    text.replace("mm^2", "mm²")
        .replace(" um", " µm")
        .replace("degC", "°C")
        .replace(" ohm", " Ω")
}

/// How the search ended.
pub fn ended(run: &Value) -> Rows {
    let residual = |name: &str| {
        number(run, &format!("/residuals/{name}")).map_or(String::new(), |r| format!("{r:.1e}"))
    };
    vec![
        ("Ended because", text(run, "/ended_because")),
        (
            "Cells",
            format!(
                "{} of {}",
                text(run, "/cells_finished"),
                text(run, "/cells")
            ),
        ),
        ("Assessments", text(run, "/evaluations")),
        (
            "Overall front",
            format!("{} designs", text(run, "/front_size")),
        ),
        (
            "Hypervolume",
            number(run, "/hypervolume").map_or(String::new(), |v| {
                format!(
                    "{v:.6} (efficiency × W × mm² under {})",
                    number(run, "/hypervolume_reference/area_m2")
                        .map_or(String::new(), |a| plain(&format_in(a, "mm^2")))
                )
            }),
        ),
        (
            "Certified optimal",
            format!(
                "{} of {} points of all cells, residual at most 1e-4",
                text(run, "/residuals/certified"),
                text(run, "/residuals/points")
            ),
        ),
        ("Residual, median", residual("median")),
        ("Residual, 99 in 100 below", residual("percentile_99")),
        ("Residual, worst", residual("worst")),
    ]
}

/// Where the figures come from.
pub fn provenance(run: &Value) -> Rows {
    let spent = match (number(run, "/started_unix_s"), number(run, "/ended_unix_s")) {
        (Some(start), Some(end)) => format!("{:.0} s", end - start),
        _ => String::new(),
    };
    vec![
        ("Program", format!("widefront {}", text(run, "/version"))),
        ("Technology", text(run, "/technology/name")),
        ("Its source", text(run, "/technology/source")),
        ("Study, blake3", text(run, "/study_hash")),
        ("Technology, blake3", text(run, "/technology_hash")),
        ("Seed", text(run, "/seed")),
        ("Threads", text(run, "/threads")),
        ("Last sitting", spent),
    ]
}
