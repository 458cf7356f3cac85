//! What the report says in words.

use crate::quantity::{civil_date, format, format_in};
use crate::run::records::DesignRecord;
use crate::run::summary::headlines;
use serde_json::Value;

/// What can hurt people or break law.
pub const CAUTIONS: [&str; 5] = [
    "Radio-frequency power burns, and exposure to its fields is limited by law: the local safety code decides.",
    "Gates and drains near their rating wear out; oxide stress, hot carriers and start-up are for the foundry's rules.",
    "Electromigration, self-heating and latch-up are for the foundry's rules at the real temperature and lifetime.",
    "Emissions and harmonics are regulated: limits here are a designer's and prove no compliance with spectrum rules.",
    "Layout, test and transmission belong to licensed practice where local law asks for it.",
];

/// What the figures rest on, for this run.
pub fn assumptions(run: &Value) -> Vec<&'static str> {
    let stage = |key: &str| run.pointer(&format!("/study/stage/{key}"));
    let coil = if run.pointer("/technology/inductor/model") == Some(&Value::from("spiral")) {
        "Spirals are solved as concentric circles with skin and proximity effect, within 1 % of a finer mesh; their resistance \
         at the carrier is used at the harmonics too."
    } else {
        "The inductor's quality is the technology's one figure, whatever its inductance; its resistance at the carrier is used \
         at the harmonics too."
    };
    let mut lines = vec![
        "A parametric model for early tradeoffs: it does not replace simulation with the foundry's models. Against a full \
         nonlinear simulation of one leg it came out high: output power by 0.3 to 2.7 %, efficiency by 0.2 to 2.7 % with a dead \
         time, by 3 to 6 % without.",
        "The loop between legs and antenna is linear and its periodic steady state exact; on-resistances hold at the current \
         that flows, capacitances are charge equivalents over the swing.",
        "Body diodes do not conduct: a drain that would leave their clamps in a dead time breaks a limit.",
        coil,
    ];
    if stage("stack").and_then(Value::as_u64) == Some(2) {
        lines.push(
            "Cascodes stand at an ideal bias of half the supply; the charge of the nodes between is a lower estimate.",
        );
    }
    if stage("legs").and_then(Value::as_u64) == Some(2) {
        lines.push("Both legs are equal and switch half a period apart: even harmonics vanish.");
    }
    lines.push(
        "No bond wires, package, supply impedance, mismatch, ageing, heating or modulation; no parasitics of wires beyond the \
         routing resistance.",
    );
    lines.push(
        "Each point is first-order optimal to the residual it carries; nothing proves that no better hill exists.",
    );
    lines
}

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
    number(run, pointer).map_or(String::new(), |v| plain(&format(v, unit)))
}

/// A line of the answer.
#[derive(Debug)]
pub struct Line<'a> {
    /// What the design is first in.
    pub what: &'static str,
    /// Its figures.
    pub figures: String,
    /// The design; none when there is none.
    pub id: Option<&'a str>,
}

/// Three lines: the most efficient design, the strongest, the smallest.
pub fn answer(designs: &[DesignRecord]) -> Vec<Line<'_>> {
    let lines: Vec<Line<'_>> = ["Most efficient", "Most output power", "Smallest"]
        .into_iter()
        .zip(headlines(designs))
        .filter_map(|(what, design)| {
            let design = design?;
            let f = design.evaluation.figures.as_ref()?;
            let sizing = &design.evaluation.design;
            let figures = plain(&format!(
                ": {:.1} % at {:.1} dBm on {}, with {} supply, loaded Q {:.2}, NMOS {}",
                100.0 * f.efficiency,
                f.output_power_dbm,
                format_in(f.area_m2, "mm^2"),
                format(sizing.supply_v, "V"),
                sizing.loaded_q,
                format(sizing.nmos_width_m, "m"),
            ));
            Some(Line {
                what,
                figures,
                id: Some(&design.id),
            })
        })
        .collect();
    if lines.is_empty() {
        vec![Line {
            what: "No design meets every limit",
            figures: ": loosen a limit or widen the space.".into(),
            id: None,
        }]
    } else {
        lines
    }
}

type Rows = Vec<(&'static str, String)>;

/// What was asked, in a sentence or two.
pub fn question(run: &Value) -> String {
    let objectives: Vec<&str> = run
        .pointer("/objectives")
        .and_then(Value::as_array)
        .into_iter()
        .flatten()
        .filter_map(Value::as_str)
        .map(|name| match name {
            "efficiency" => "most efficiency",
            "output_power" => "most output power",
            "area" => "least area",
            other => other,
        })
        .collect();
    let limits = limits(run.pointer("/study/limits"));
    let within = if limits.is_empty() {
        String::new()
    } else {
        format!(" Limits: {limits}.")
    };
    format!(
        "Which designs give {} at {} into {}, the {} network and the pair {} of {} given, in {} cells of loaded Q and supply?{within}",
        objectives.join(", "),
        quantity(run, "/study/frequency_hz", "Hz"),
        quantity(run, "/study/antenna_resistance_ohm", "ohm"),
        text(run, "/study/stage/network"),
        text(run, "/study/stage/device"),
        text(run, "/technology/name"),
        text(run, "/cells"),
    )
}

/// The study in short; what it does not have is left out.
pub fn asked(run: &Value) -> Rows {
    let range = |key: &str, unit: &str| span(run.pointer(&format!("/study/space/{key}")), unit);
    let stage = |key: &str| text(run, &format!("/study/stage/{key}"));
    let driver = |key: &str| text(run, &format!("/study/driver/{key}"));
    let rows = vec![
        ("Carrier", quantity(run, "/study/frequency_hz", "Hz")),
        (
            "Antenna",
            quantity(run, "/study/antenna_resistance_ohm", "ohm"),
        ),
        ("Loss behind the port", decibels(run)),
        (
            "Junction",
            number(run, "/study/temperature_k")
                .map_or(String::new(), |t| plain(&format_in(t, "degC"))),
        ),
        ("Legs", stage("legs")),
        ("Devices a switch", stage("stack")),
        ("Transistor pair", stage("device")),
        ("Network", stage("network")),
        (
            "Driven by",
            quantity(run, "/study/driver/input_capacitance_f", "F"),
        ),
        ("Drivers' PMOS/NMOS", driver("ratio")),
        ("Drivers' overlap", driver("crowbar")),
        ("Drivers' swing", swing(run.pointer("/study/driver/swing"))),
        ("Supply", range("supply_v", "V")),
        ("Loaded Q", range("loaded_q", "")),
        ("NMOS width", range("nmos_width_m", "m")),
        ("PMOS/NMOS", range("width_ratio", "")),
        ("Turns", range("turns", "")),
        ("Trace", range("trace_m", "m")),
        ("Diameter", range("diameter_m", "m")),
        ("Optimum resistance", range("resistance_ohm", "ohm")),
        ("Load angle x", range("reactance", "")),
        ("Dead time, of a period", range("dead_time", "")),
        ("Driver stages", range("stages", "")),
        ("Limits", limits(run.pointer("/study/limits"))),
    ];
    rows.into_iter().filter(|(_, v)| !v.is_empty()).collect()
}

fn decibels(run: &Value) -> String {
    number(run, "/study/antenna_loss_db").map_or(String::new(), |db| format!("{db} dB"))
}

fn swing(swing: Option<&Value>) -> String {
    let mut numbers = Vec::new();
    collect(swing.unwrap_or(&Value::Null), &mut numbers);
    match (numbers.first(), swing) {
        (Some(&v), _) => format(v, "V"),
        (None, Some(Value::String(name))) => format!("the {name}"),
        _ => String::new(),
    }
}

/// A range of the space as the record holds it.
fn span(range: Option<&Value>, unit: &str) -> String {
    let mut numbers = Vec::new();
    collect(range.unwrap_or(&Value::Null), &mut numbers);
    let shown = |v: f64| {
        if unit.is_empty() {
            format!("{v}")
        } else {
            plain(&format(v, unit))
        }
    };
    let is_grid = range.is_some_and(|r| r.get("grid").is_some());
    match (numbers.first(), numbers.last()) {
        (Some(&low), Some(&high)) if low != high && is_grid => {
            format!(
                "{} to {}, {} values",
                shown(low),
                shown(high),
                numbers.len()
            )
        }
        (Some(&low), Some(&high)) if low != high => {
            format!("{} to {}, free", shown(low), shown(high))
        }
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
        .replace(" mohm", " mΩ")
        .replace(" kohm", " kΩ")
        .replace(" -", " −")
}

/// How the search ended.
pub fn ended(run: &Value) -> Rows {
    let residual = |name: &str| {
        number(run, &format!("/residuals/{name}")).map_or(String::new(), |r| format!("{r:.1e}"))
    };
    let rows = vec![
        ("Ended because", text(run, "/ended_because")),
        (
            "Cells",
            format!(
                "{} of {}",
                text(run, "/cells_finished"),
                text(run, "/cells")
            ),
        ),
        ("Part", text(run, "/part")),
        ("Evaluations", text(run, "/evaluations")),
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
            number(run, "/residuals/points").map_or(String::new(), |points| {
                format!(
                    "{} of {points} points of all cells, residual at most 1e-4",
                    text(run, "/residuals/certified"),
                )
            }),
        ),
        ("Residual, median", residual("median")),
        ("Residual, 99 of 100 under", residual("percentile_99")),
        ("Residual, worst", residual("worst")),
    ];
    rows.into_iter().filter(|(_, v)| !v.is_empty()).collect()
}

/// Where the figures come from.
pub fn provenance(run: &Value) -> Rows {
    let at = |pointer: &str| number(run, pointer).map_or(String::new(), moment);
    vec![
        ("Program", format!("widefront {}", text(run, "/version"))),
        ("Technology", text(run, "/technology/name")),
        ("Its source", text(run, "/technology/source")),
        ("Study, blake3", text(run, "/study_hash")),
        ("Technology, blake3", text(run, "/technology_hash")),
        ("Seed", text(run, "/seed")),
        (
            "Threads",
            format!(
                "{} on {} cores",
                text(run, "/threads"),
                text(run, "/host_cores")
            ),
        ),
        ("Last sitting began", at("/started_unix_s")),
        ("It ended", at("/ended_unix_s")),
    ]
    .into_iter()
    .filter(|(_, v)| !v.is_empty())
    .collect()
}

/// Seconds since 1970 as a date and time of day.
fn moment(unix_s: f64) -> String {
    let s = unix_s as i64;
    let of_day = s.rem_euclid(86_400);
    format!(
        "{} {:02}:{:02}:{:02} UTC",
        civil_date(s.div_euclid(86_400)),
        of_day / 3600,
        of_day % 3600 / 60,
        of_day % 60
    )
}

#[cfg(test)]
mod tests {
    use super::*;
    use serde_json::json;

    #[test]
    fn law_moments_are_dates_and_times_of_day() {
        assert_eq!(moment(0.0), "1970-01-01 00:00:00 UTC");
        assert_eq!(moment(1_796_127_533.0), "2026-12-01 12:18:53 UTC");
    }

    #[test]
    fn law_what_a_study_lacks_is_left_out() {
        let study = json!({"space": {"turns": null, "supply_v": {"grid": [1.0, 1.2]}, "loaded_q": {"fixed": 3.0}}});
        let rows = asked(&json!({"study": study}));
        assert!(rows.contains(&("Supply", "1 V to 1.2 V, 2 values".into())));
        assert!(rows.contains(&("Loaded Q", "3".into())));
        assert_eq!(rows.len(), 2, "{rows:?}");
        assert!(
            ended(&Value::Null)
                .iter()
                .all(|(name, _)| *name != "Certified optimal")
        );
    }

    #[test]
    fn law_limits_are_said_in_the_units_of_the_trade() {
        let asked = json!({
            "third_harmonic_dbc": -30.0, "second_harmonic_dbc": null,
            "output_power_w": {"at_least": 0.1, "at_most": null}, "area_m2": {"at_least": null, "at_most": 6e-7},
        });
        assert_eq!(
            limits(Some(&asked)),
            "third harmonic at most −30 dBc; output power at least 20 dBm; area at most 0.6 mm²"
        );
    }
}
