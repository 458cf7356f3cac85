//! `widefront check`: what a study resolves to.

use super::{Failure, Loaded, load, print};
use crate::quantity::format as engineering;
use crate::run::variant::VariantLabel;
use crate::search::space;
use crate::stage::driver::{fastest_taper, inverter_capacitances};
use crate::study::{Range, Space};
use crate::technology::transistor::WarmTransistor;
use std::fmt::Write;
use std::path::Path;

/// Reads, validates and prints.
pub fn run(path: &Path) -> Result<(), Failure> {
    print(&described(&load(path, &[])?))
}

fn described(loaded: &Loaded) -> String {
    let first = &loaded.variants[0];
    let (study, setup) = (&loaded.file.study, &first.setup);
    let mut out = String::new();
    let mut line = |label: &str, value: String| {
        // Writing to a String cannot fail.
        let _ = writeln!(out, "{label:<28} {value}");
    };
    line("study", study.title.clone());
    line(
        "technology",
        format!("{} ({})", first.technology.name, first.technology.source),
    );
    line("carrier", engineering(study.frequency_hz, "Hz"));
    line(
        "junction temperature",
        format!("{:.1} degC", study.temperature_k - 273.15),
    );
    let highest = f64::from(setup.stack) * setup.rating_v;
    line("highest supply", engineering(highest, "V"));
    let nominal = study.space.as_ref().map_or_else(
        || study.design.as_ref().map_or(highest, |d| d.supply_v),
        |s| space::largest(&s.supply_v).min(highest),
    );
    let swing = setup.swing_v(nominal);
    line("driver swing there", engineering(swing, "V"));
    for (name, device) in [("NMOS", &setup.pair.nmos), ("PMOS", &setup.pair.pmos)] {
        line(
            &format!("{name}, a micrometre of width"),
            device_line(device, swing, nominal),
        );
    }
    let (input, own) = inverter_capacitances(&setup.pair, setup.chain.ratio, swing);
    line(
        "drivers' taper for speed",
        format!(
            "{:.3} (own over input capacitance {:.3})",
            fastest_taper(own / input),
            own / input
        ),
    );
    match &study.space {
        Some(s) => space_lines(s, loaded.variants.len(), &mut line),
        None => line(
            "design space",
            "none: this study can be evaluated, not searched".into(),
        ),
    }
    if loaded.variants.len() > 1 {
        line("above this, figures of", "variant 1".into());
        let keys = study.sweep.listed();
        for (number, variant) in loaded.variants.iter().take(MOST_LISTED).enumerate() {
            let label = VariantLabel::new(variant);
            line(&format!("variant {}", number + 1), label.told(&keys));
        }
        if let Some(more) = loaded.variants.len().checked_sub(MOST_LISTED + 1) {
            line("", format!("and {} more", more + 1));
        }
    }
    out
}

/// Variants printed before the rest is only counted.
const MOST_LISTED: usize = 24;

fn device_line(device: &WarmTransistor, swing: f64, supply: f64) -> String {
    let micrometre = 1e-6;
    format!(
        "r_on {}, gate {}, overlap {}, junction {}, off {}",
        engineering(device.on_resistance_ohm_m(swing) / micrometre, "ohm"),
        engineering(device.gate_capacitance_f_m * micrometre, "F"),
        engineering(device.overlap_capacitance_f_m * micrometre, "F"),
        engineering(device.junction_capacitance_f_m(supply) * micrometre, "F"),
        engineering(device.off_current_a_m * micrometre, "A"),
    )
}

/// Assessments a slice takes when it is traced in full, measured on the default study.
const ASSESSMENTS_A_SLICE: f64 = 500.0;

fn space_lines(s: &Space, variants: usize, line: &mut impl FnMut(&str, String)) {
    let cells = space::cells(s).len() * variants;
    let combinations = s.combinations();
    line(
        "cells",
        match variants {
            1 => cells.to_string(),
            _ => format!(
                "{cells}: {} of each of {variants} variants",
                cells / variants
            ),
        },
    );
    line(
        "combinations a cell",
        format!("{combinations} of whole numbers and grid values"),
    );
    let free = [
        ("supply", Some(&s.supply_v)),
        ("loaded_q", Some(&s.loaded_q)),
        ("nmos_width", Some(&s.nmos_width_m)),
        ("width_ratio", Some(&s.width_ratio)),
        ("trace", s.trace_m.as_ref()),
        ("diameter", s.diameter_m.as_ref()),
        ("resistance", s.resistance_ohm.as_ref()),
        ("reactance", Some(&s.reactance)),
        ("dead_time", Some(&s.dead_time)),
    ]
    .into_iter()
    .filter(|(_, r)| matches!(r, Some(Range::Free { .. })))
    .map(|(name, _)| name)
    .collect::<Vec<_>>();
    line("free variables", free.join(", "));
    line(
        "evaluations expected",
        format!(
            "about {:.1e}",
            cells as f64 * combinations as f64 * ASSESSMENTS_A_SLICE
        ),
    );
}
