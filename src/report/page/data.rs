//! A run's records as the page's script reads them: columns once, a row a design, six significant digits.

use super::PageInput;
use crate::run::records::DesignRecord;
use serde_json::{Map, Number, Value, json};
use std::collections::BTreeMap;

/// JSON for a `script` element: nothing in it can end the element.
pub fn embedded(input: &PageInput<'_>) -> String {
    let flat: Vec<Map<String, Value>> = input.designs.iter().map(flattened).collect();
    let mut columns: Vec<String> = Vec::new();
    for design in &flat {
        columns.extend(
            design
                .keys()
                .filter(|k| !columns.contains(k))
                .cloned()
                .collect::<Vec<_>>(),
        );
    }
    let rows: Vec<Vec<Value>> = flat
        .iter()
        .map(|design| {
            let value = |c: &String| design.get(c).cloned().unwrap_or(Value::Null);
            columns.iter().map(value).collect()
        })
        .collect();
    let cells: Vec<Value> = input
        .cells
        .iter()
        .map(|c| json!({"cell": c.cell, "loaded_q": c.loaded_q, "supply_v": c.supply_v}))
        .collect();
    let waveforms: BTreeMap<&str, Value> = input
        .periods
        .iter()
        .map(|p| {
            let short = |list: &[f64]| list.iter().map(|&x| rounded(x)).collect::<Vec<_>>();
            let wave = json!({
                "drain_v": short(&p.waveform.drain_v),
                "current_a": short(&p.waveform.current_a),
            });
            (p.id.as_str(), wave)
        })
        .collect();
    let data = json!({"columns": columns, "rows": rows, "cells": cells, "waveforms": waveforms});
    data.to_string()
        .replace('<', "\\u003c")
        .replace('>', "\\u003e")
        .replace('&', "\\u0026")
}

/// A record with nested names joined by dots; lists are joined by spaces.
fn flattened(design: &DesignRecord) -> Map<String, Value> {
    let mut flat = Map::new();
    // A record of numbers and strings always serialises.
    if let Ok(Value::Object(fields)) = serde_json::to_value(design) {
        flatten("", fields, &mut flat);
    }
    flat
}

fn flatten(prefix: &str, fields: Map<String, Value>, flat: &mut Map<String, Value>) {
    for (key, value) in fields {
        let name = format!("{prefix}{key}");
        match value {
            Value::Object(inner) => flatten(&format!("{name}."), inner, flat),
            Value::Array(list) => {
                let words: Vec<&str> = list.iter().filter_map(Value::as_str).collect();
                flat.insert(name, words.join(" ").into());
            }
            Value::Number(n) if !(n.is_i64() || n.is_u64()) => {
                flat.insert(name, n.as_f64().map_or(Value::Null, rounded));
            }
            other => {
                flat.insert(name, other);
            }
        }
    }
}

fn rounded(x: f64) -> Value {
    let short: f64 = format!("{x:.5e}").parse().unwrap_or(x);
    Number::from_f64(short).map_or(Value::Null, Value::Number)
}
