//! What the study asked, complete: stage, technology, space, limits, objectives.

use super::words::{Rows, number, plain, text};
use crate::quantity::{format, format_in};
use serde_json::Value;

/// The study in four lists with their titles; what it does not have is left out.
pub fn asked(run: &Value) -> Vec<(&'static str, Rows)> {
    [
        ("Stage", stage(run)),
        ("Technology and signal", technology(run)),
        ("Space searched", space(run)),
        ("Limits and objectives", limits(run)),
    ]
    .into_iter()
    .map(|(title, rows)| {
        (
            title,
            rows.into_iter()
                .filter(|(_, v)| !v.is_empty())
                .collect::<Rows>(),
        )
    })
    .filter(|(_, rows)| !rows.is_empty())
    .collect()
}

/// The question in a sentence.
pub fn question(run: &Value) -> String {
    let objectives = objectives(run);
    format!(
        "Which designs give {objectives} at {} into {} within the limits below, in {} cells of loaded Q and supply?",
        listed(run, "frequencies_hz", "/study/frequency_hz", "Hz"),
        quantity(run, "/study/antenna_resistance_ohm", "ohm"),
        text(run, "/cells"),
    )
}

fn objectives(run: &Value) -> String {
    let names: Vec<&str> = run
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
    joined(&names)
}

/// `a, b and c`.
fn joined<S: AsRef<str>>(names: &[S]) -> String {
    match names {
        [] => String::new(),
        [only] => only.as_ref().to_owned(),
        [first @ .., last] => {
            let first: Vec<&str> = first.iter().map(AsRef::as_ref).collect();
            format!("{} and {}", first.join(", "), last.as_ref())
        }
    }
}

fn stage(run: &Value) -> Rows {
    let network = match text(run, "/study/stage/network").as_str() {
        "low-pass" => "low-pass L section".to_owned(),
        "direct" => "direct: the antenna is the load".to_owned(),
        other => other.to_owned(),
    };
    let crowbar = number(run, "/study/driver/crowbar").map_or(String::new(), |share| {
        format!("{} % of their charge", 100.0 * share)
    });
    vec![
        ("Legs", listed(run, "legs", "/study/stage/legs", "")),
        (
            "Devices a switch",
            listed(run, "stacks", "/study/stage/stack", ""),
        ),
        (
            "Transistor pair",
            listed(run, "devices", "/study/stage/device", ""),
        ),
        ("Network", network),
        (
            "Input capacitance",
            quantity(run, "/study/driver/input_capacitance_f", "F"),
        ),
        (
            "Drivers' PMOS/NMOS",
            number(run, "/study/driver/ratio").map_or(String::new(), tidy),
        ),
        ("Drivers' overlap loss", crowbar),
        ("Drivers' swing", swing(run.pointer("/study/driver/swing"))),
    ]
}

fn technology(run: &Value) -> Rows {
    let list = run.pointer("/technologies").and_then(Value::as_array);
    let all: Vec<&Value> = match list {
        Some(list) if !list.is_empty() => list.iter().collect(),
        _ => run.pointer("/technology").into_iter().collect(),
    };
    let each = |pointer: &str| joined(&all.iter().map(|t| text(t, pointer)).collect::<Vec<_>>());
    let mut coils: Vec<String> = all.iter().map(|t| text(t, "/inductor/model")).collect();
    coils.dedup();
    let loss = number(run, "/study/antenna_loss_db").map_or(String::new(), |db| format!("{db} dB"));
    vec![
        ("Technology", each("/name")),
        ("Its source", each("/source")),
        ("Inductor", joined(&coils)),
        ("Rating of the pair", rating(run, &all)),
        (
            "Carrier",
            listed(run, "frequencies_hz", "/study/frequency_hz", "Hz"),
        ),
        (
            "Antenna",
            quantity(run, "/study/antenna_resistance_ohm", "ohm"),
        ),
        ("Loss behind the port", loss),
        (
            "Junction",
            listed(run, "temperatures_k", "/study/temperature_k", "degC"),
        ),
    ]
}

/// The rating of the pair asked for, where one pair of one technology is.
fn rating(run: &Value, technologies: &[&Value]) -> String {
    let [technology] = technologies else {
        return String::new();
    };
    let pair = &technology["transistors"][text(run, "/study/stage/device")];
    let is_one = run.pointer("/study/sweep/devices").is_none();
    pair["rating_v"]
        .as_f64()
        .filter(|_| is_one)
        .map_or(String::new(), |v| format(v, "V"))
}

fn space(run: &Value) -> Rows {
    let range = |key: &str, unit: &str| span(run.pointer(&format!("/study/space/{key}")), unit);
    vec![
        ("Supply", range("supply_v", "V")),
        ("Loaded Q", range("loaded_q", "")),
        ("NMOS width", range("nmos_width_m", "m")),
        ("PMOS/NMOS", range("width_ratio", "")),
        ("Turns", range("turns", "")),
        ("Trace", range("trace_m", "m")),
        ("Diameter", range("diameter_m", "m")),
        ("Optimum resistance", range("resistance_ohm", "ohm")),
        ("Load angle x", range("reactance", "")),
        ("Dead time", range("dead_time", "%")),
        ("Driver stages", range("stages", "")),
    ]
}

/// Limits, those always held among them, and what is traded.
fn limits(run: &Value) -> Rows {
    let at = |key: &str| number(run, &format!("/study/limits/{key}"));
    let bounds = |key: &str, say: fn(f64) -> String| {
        let bound = |word: &str, end: &str| {
            at(&format!("{key}/{end}")).map(|v| format!("{word} {}", say(v)))
        };
        let ends = [bound("at least", "at_least"), bound("at most", "at_most")];
        joined(&ends.into_iter().flatten().collect::<Vec<_>>())
    };
    let most = |key: &str, say: fn(f64) -> String| {
        at(key).map_or(String::new(), |v| format!("at most {}", say(v)))
    };
    let dbc: fn(f64) -> String = |v| plain(&format!(" {v} dBc")).trim_start().to_owned();
    let percent: fn(f64) -> String = |v| format!("{} %", tidy(100.0 * v));
    let rows: Rows = vec![
        (
            "Output power",
            bounds("output_power_w", |v| plain(&format_in(v, "dBm"))),
        ),
        ("Area", bounds("area_m2", |v| plain(&format_in(v, "mm^2")))),
        ("Efficiency", bounds("efficiency", percent)),
        ("Second harmonic", most("second_harmonic_dbc", dbc)),
        ("Third harmonic", most("third_harmonic_dbc", dbc)),
        (
            "Edge time, 10 to 90 %",
            most("edge_time", |v| {
                format!("{} % of the period", tidy(100.0 * v))
            }),
        ),
        ("Overdrive use", most("overdrive_use", tidy)),
    ];
    let mut rows: Rows = rows.into_iter().filter(|(_, v)| !v.is_empty()).collect();
    if run.pointer("/study").is_some() {
        rows.push((
            "Always held",
            "supply within the rating; drain within the body diodes' clamps in dead times".into(),
        ));
    }
    rows.push(("Objectives", objectives(run)));
    rows.push(("Fronts", fronts(run).unwrap_or_default()));
    rows
}

/// What the overall front is taken over; none in a study of one variant.
pub fn fronts(run: &Value) -> Option<String> {
    let by: Vec<&str> = run
        .pointer("/study/search/fronts_by")
        .and_then(Value::as_array)
        .into_iter()
        .flatten()
        .filter_map(Value::as_str)
        .map(|key| match key {
            "legs" => "number of legs",
            "stack" => "number of devices a switch",
            "frequency" => "carrier",
            "temperature" => "junction temperature",
            "device" => "transistor pair",
            other => other,
        })
        .collect();
    let is_sweep = run.pointer("/study/sweep").is_some();
    match (by.is_empty(), is_sweep) {
        (false, _) => Some(format!("one for each {}", joined(&by))),
        (true, true) => Some("one over all variants".into()),
        (true, false) => None,
    }
}

fn quantity(run: &Value, pointer: &str, unit: &str) -> String {
    number(run, pointer).map_or(String::new(), |v| said(v, unit))
}

/// A value with its unit; one without as it is.
fn said(v: f64, unit: &str) -> String {
    match unit {
        "" => tidy(v),
        "%" => format!("{} %", tidy(100.0 * v)),
        "degC" => plain(&format!(" {}", format_in(v, unit)))
            .trim_start()
            .to_owned(),
        _ => plain(&format(v, unit)),
    }
}

/// Without the digits that a product of decimals leaves behind.
fn tidy(v: f64) -> String {
    let short: f64 = format!("{v:.9e}").parse().unwrap_or(v);
    short.to_string()
}

/// What a sweep lists, or the study's one value.
fn listed(run: &Value, list: &str, single: &str, unit: &str) -> String {
    let say = |value: &Value| match value {
        Value::Number(n) => n.as_f64().map_or(String::new(), |v| said(v, unit)),
        Value::String(s) => s.clone(),
        _ => String::new(),
    };
    match run.pointer(&format!("/study/sweep/{list}")) {
        Some(Value::Array(values)) if !values.is_empty() => {
            joined(&values.iter().map(say).collect::<Vec<_>>())
        }
        _ => run.pointer(single).map_or(String::new(), say),
    }
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
    let is_grid = range.is_some_and(|r| r.get("grid").is_some());
    let of_period = if unit == "%" { " of the period" } else { "" };
    match numbers[..] {
        [] => String::new(),
        [only] => said(only, unit) + of_period,
        [low, .., high] if !is_grid => format!(
            "{} to {}{of_period}, free",
            said(low, unit),
            said(high, unit)
        ),
        [low, .., high] => format!(
            "{} to {}{of_period}, {} values",
            said(low, unit),
            said(high, unit),
            numbers.len()
        ),
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

#[cfg(test)]
mod tests {
    use super::*;
    use serde_json::json;

    fn rows(run: &Value, title: &str) -> Rows {
        asked(run)
            .into_iter()
            .find(|(t, _)| *t == title)
            .map_or(Vec::new(), |(_, rows)| rows)
    }

    #[test]
    fn law_what_a_study_lacks_is_left_out() {
        let study = json!({"space": {"turns": null, "supply_v": {"grid": [1.0, 1.2]}, "loaded_q": {"fixed": 3.0},
            "dead_time": {"free": {"from": 0.0, "to": 0.12}}}});
        let rows = rows(&json!({"study": study}), "Space searched");
        assert_eq!(
            rows,
            [
                ("Supply", "1 V to 1.2 V, 2 values".into()),
                ("Loaded Q", "3".into()),
                ("Dead time", "0 % to 12 % of the period, free".into()),
            ]
        );
        assert!(asked(&Value::Null).is_empty());
    }

    #[test]
    fn law_limits_are_said_in_the_units_of_the_trade() {
        let limits = json!({
            "third_harmonic_dbc": -30.0, "second_harmonic_dbc": null,
            "output_power_w": {"at_least": 0.1, "at_most": null}, "area_m2": {"at_least": 3e-7, "at_most": 6e-7},
        });
        let rows = rows(
            &json!({"study": {"limits": limits}}),
            "Limits and objectives",
        );
        assert_eq!(
            rows[..3],
            [
                ("Output power", "at least 20 dBm".into()),
                ("Area", "at least 0.3 mm² and at most 0.6 mm²".into()),
                ("Third harmonic", "at most −30 dBc".into()),
            ]
        );
    }

    #[test]
    fn law_lists_of_a_sweep_stand_for_its_first_values() {
        let run = json!({"study": {"temperature_k": 263.15, "frequency_hz": 2.45e9, "stage": {"legs": 1},
            "sweep": {"temperatures_k": [263.15, 318.15], "legs": [1, 2]}, "search": {"fronts_by": ["legs"]}}});
        let signal = rows(&run, "Technology and signal");
        assert!(
            signal.contains(&("Junction", "−10 °C and 45 °C".into())),
            "{signal:?}"
        );
        assert!(
            signal.contains(&("Carrier", "2.45 GHz".into())),
            "{signal:?}"
        );
        assert!(rows(&run, "Stage").contains(&("Legs", "1 and 2".into())));
        assert!(
            rows(&run, "Limits and objectives")
                .contains(&("Fronts", "one for each number of legs".into()))
        );
    }
}
