//! A run's records as the page's script reads them: a column a figure, whole; curves to six significant digits.

use super::PageInput;
use super::variants::Variants;
use crate::run::records::{DesignRecord, WidthSweep};
use serde_json::{Map, Number, Value, json};

/// JSON for a `script` element: nothing in it can end the element.
pub fn embedded(input: &PageInput<'_>) -> String {
    let waveforms: Map<String, Value> = input
        .periods
        .iter()
        .map(|p| {
            let wave = json!({
                "drain_v": list(p.waveform.drain_v.iter().copied()),
                "current_a": list(p.waveform.current_a.iter().copied()),
            });
            (p.id.clone(), wave)
        })
        .collect();
    let sheets: Map<String, Value> = input.sheets.iter().cloned().collect();
    let data = json!({
        "count": input.designs.len(), "cells": input.cells,
        "variants": Variants::of(input.cells).embedded(), "waveforms": waveforms,
        "sweep": input.sweep.and_then(sweep), "sheets": sheets,
    });
    // The columns are most of the page; they go in as text, each once.
    let mut text = String::from("{\"columns\":{");
    for (place, (name, column)) in columns(input.designs).into_iter().enumerate() {
        text += if place > 0 { "," } else { "" };
        push_escaped(&mut text, &Value::from(name).to_string());
        text += ":";
        push_escaped(&mut text, &column.json());
    }
    text += "},";
    push_escaped(&mut text, &data.to_string()[1..]);
    text
}

/// Adds JSON in which nothing can end the script's element.
fn push_escaped(text: &mut String, json: &str) {
    for letter in json.chars() {
        match letter {
            '<' => *text += "\\u003c",
            '>' => *text += "\\u003e",
            '&' => *text += "\\u0026",
            other => text.push(other),
        }
    }
}

/// A figure of all designs as JSON text; a tree of values would take ten times the memory.
#[derive(Default)]
struct Column {
    /// Values so far, each followed by a comma.
    list: String,
    count: usize,
    /// The first value, while all are like it.
    common: Option<String>,
}

impl Column {
    fn push(&mut self, value: String) {
        if self.count == 0 {
            self.common = Some(value.clone());
        } else if self.common.as_ref() != Some(&value) {
            self.common = None;
        }
        self.count += 1;
        self.list += &value;
        self.list.push(',');
    }

    /// Nulls for the designs up to `count` that lack it.
    fn fill(&mut self, count: usize) {
        while self.count < count {
            self.push("null".into());
        }
    }

    /// What all designs share stands once.
    fn json(self) -> String {
        match self.common {
            Some(common) => format!("{{\"all\":{common}}}"),
            None => format!("[{}]", self.list.trim_end_matches(',')),
        }
    }
}

/// Every figure's column by its name.
fn columns(designs: &[DesignRecord]) -> Vec<(String, Column)> {
    let mut columns: Vec<(String, Column)> = Vec::new();
    for (place, design) in designs.iter().enumerate() {
        for (name, value) in flattened(design) {
            let at = columns.iter().position(|(n, _)| *n == name);
            let at = at.unwrap_or_else(|| {
                columns.push((name, Column::default()));
                columns.len() - 1
            });
            let column = &mut columns[at].1;
            column.fill(place);
            column.push(value.to_string());
        }
    }
    for (_, column) in &mut columns {
        column.fill(designs.len());
    }
    columns
}

/// The widths at which the design exists; none when it exists at fewer than two.
fn sweep(sweep: &WidthSweep) -> Option<Value> {
    let found: Vec<_> = sweep
        .nmos_width_m
        .iter()
        .zip(&sweep.evaluations)
        .filter_map(|(width_m, e)| Some((1e6 * width_m, e.feasible, e.figures.as_ref()?)))
        .collect();
    let terms = found.first().map(|(_, _, f)| f.losses_w.terms().len())?;
    (found.len() > 1).then(|| {
        let loss = |k: usize| list(found.iter().map(|(_, _, f)| f.losses_w.terms()[k]));
        json!({
            "id": sweep.id,
            "width_um": list(found.iter().map(|(width_um, _, _)| *width_um)),
            "feasible": found.iter().map(|(_, feasible, _)| *feasible).collect::<Vec<_>>(),
            "efficiency": list(found.iter().map(|(_, _, f)| f.efficiency)),
            "losses": (0..terms).map(loss).collect::<Vec<_>>(),
        })
    })
}

/// A record with nested names joined by dots.
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
            other => {
                flat.insert(name, other);
            }
        }
    }
}

fn list(values: impl Iterator<Item = f64>) -> Vec<Value> {
    values.map(rounded).collect()
}

/// Six significant digits; what is no number stays empty.
fn rounded(x: f64) -> Value {
    let short: f64 = format!("{x:.5e}").parse().unwrap_or(x);
    Number::from_f64(short).map_or(Value::Null, Value::Number)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn law_six_digits_are_kept_and_what_is_no_number_stays_empty() {
        assert_eq!(rounded(0.123_456_789), json!(0.123_457));
        assert_eq!(rounded(0.0), json!(0.0));
        assert_eq!(rounded(f64::NAN), Value::Null);
        assert_eq!(rounded(f64::INFINITY), Value::Null);
    }

    #[test]
    fn law_text_of_the_records_cannot_end_the_script() {
        let input = PageInput {
            run: &Value::Null,
            designs: &[],
            cells: &[],
            periods: &[],
            sweep: None,
            sheets: &[("</script><img src=x>&".to_owned(), Value::Null)],
        };
        let text = embedded(&input);
        assert!(!text.contains(['<', '>', '&']), "{text}");
        let back: Value = serde_json::from_str(&text).unwrap();
        assert!(back["sheets"].get("</script><img src=x>&").is_some());
    }
}
