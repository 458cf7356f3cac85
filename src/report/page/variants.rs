//! The variants of a sweep in words, told apart by what differs among the cells of the run.

use crate::quantity::format_in;
use crate::run::summary::CellLine;
use serde_json::{Value, json};
use std::collections::BTreeMap;

/// What a sweep may list: the name in the records, words, and how a cell's value is said.
type Key = (&'static str, &'static str, fn(&CellLine) -> Option<String>);

const KEYS: [Key; 6] = [
    ("technology", "Technology", |c| c.technology.clone()),
    ("device", "Transistor pair", |c| c.device.clone()),
    ("stack", "Devices a switch", |c| {
        c.stack
            .map(|n| counted(n, "device a switch", "devices a switch"))
    }),
    ("legs", "Legs", |c| {
        c.legs.map(|n| counted(n, "leg", "legs"))
    }),
    ("frequency_hz", "Carrier", |c| {
        c.frequency_hz
            .map(|f| format_in(f, if f < 1e9 { "MHz" } else { "GHz" }))
    }),
    ("temperature_k", "Junction", |c| {
        c.temperature_k
            .map(|t| format_in(t, "degC").replace("degC", "°C").replace('-', "−"))
    }),
];

fn counted(n: u32, one: &str, many: &str) -> String {
    format!("{n} {}", if n == 1 { one } else { many })
}

/// One combination of what is listed.
#[derive(Debug, Clone, PartialEq)]
struct Variant {
    parts: Vec<String>,
    cells: Vec<usize>,
}

/// The variants of a run, in the order of its cells; none where all cells are of one.
#[derive(Debug, Clone, PartialEq)]
pub struct Variants {
    keys: Vec<(&'static str, &'static str)>,
    list: Vec<Variant>,
}

impl Variants {
    /// Of a run's table of cells.
    pub fn of(cells: &[CellLine]) -> Self {
        let differing: Vec<&Key> = KEYS
            .iter()
            .filter(|(_, _, say)| cells.windows(2).any(|w| say(&w[0]) != say(&w[1])))
            .collect();
        let mut list: Vec<Variant> = Vec::new();
        let mut places: BTreeMap<Vec<String>, usize> = BTreeMap::new();
        for cell in cells.iter().filter(|_| !differing.is_empty()) {
            let parts: Vec<String> = differing
                .iter()
                .map(|(_, _, say)| say(cell).unwrap_or_default())
                .collect();
            let place = *places.entry(parts).or_insert_with_key(|parts| {
                list.push(Variant {
                    parts: parts.clone(),
                    cells: Vec::new(),
                });
                list.len() - 1
            });
            list[place].cells.push(cell.cell);
        }
        let keys = differing.iter().map(|k| (k.0, k.1)).collect();
        Self { keys, list }
    }

    /// True when the run has one variant only.
    pub fn is_empty(&self) -> bool {
        self.list.is_empty()
    }

    /// The variant that a cell belongs to, as `2 legs, 2.45 GHz, −10 °C`.
    pub fn words(&self, cell: usize) -> Option<String> {
        let variant = self.list.iter().find(|v| v.cells.contains(&cell))?;
        Some(variant.parts.join(", "))
    }

    /// As the page's script reads them.
    pub fn embedded(&self) -> Value {
        let keys = |&(name, words): &(&str, &str)| json!({"name": name, "words": words});
        let list =
            |v: &Variant| json!({"words": v.parts.join(", "), "parts": v.parts, "cells": v.cells});
        json!({
            "keys": self.keys.iter().map(keys).collect::<Vec<_>>(),
            "list": self.list.iter().map(list).collect::<Vec<_>>(),
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn cells(rows: &str) -> Vec<CellLine> {
        let text = format!("cell,front_size,hypervolume,evaluations,legs,temperature_k\n{rows}");
        csv::Reader::from_reader(text.as_bytes())
            .deserialize()
            .map(Result::unwrap)
            .collect()
    }

    #[test]
    fn law_variants_are_named_by_what_differs_alone() {
        let sweep = Variants::of(&cells(
            "0,1,1,1,1,263.15\n1,1,1,1,1,318.15\n2,1,1,1,1,263.15\n",
        ));
        assert_eq!(sweep.words(0).as_deref(), Some("−10 °C"));
        assert_eq!(sweep.words(2), sweep.words(0));
        assert_eq!(sweep.words(1).as_deref(), Some("45 °C"));
        assert_eq!(sweep.words(3), None);
        let both = Variants::of(&cells("0,1,1,1,1,263.15\n1,1,1,1,2,318.15\n"));
        assert_eq!(both.words(1).as_deref(), Some("2 legs, 45 °C"));
    }

    #[test]
    fn law_cells_of_one_variant_need_no_name() {
        let single = Variants::of(&cells("0,1,1,1,,\n1,1,1,1,,\n"));
        assert!(single.is_empty());
        assert_eq!(single.words(0), None);
    }
}
