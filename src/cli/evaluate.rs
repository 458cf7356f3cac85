//! `widefront evaluate`: one design.

use super::{Failure, load, print};
use crate::budget::LOSS_NAMES;
use crate::evaluate::{Evaluation, Figures, evaluate};
use crate::quantity::format as engineering;
use std::fmt::Write;
use std::path::Path;

/// Evaluates the study's design with its values changed by `set`.
pub fn run(path: &Path, set: &[String], variant: Option<usize>, json: bool) -> Result<(), Failure> {
    let loaded = load(path, set)?;
    let variant = loaded.variant(variant)?;
    let design = loaded.file.study.design.as_ref().ok_or_else(|| {
        Failure::Input(format!(
            "{}: [design]: read nothing; allowed: one sizing to evaluate\n  help: add a table [design] to the study",
            path.display()
        ))
    })?;
    let evaluation = evaluate(&variant.setup, design);
    if json {
        let text = serde_json::to_string_pretty(&evaluation)
            .map_err(|e| Failure::Run(format!("writing JSON: {e}")))?;
        return print(&format!("{text}\n"));
    }
    print(&described(&evaluation))
}

fn described(evaluation: &Evaluation) -> String {
    let mut out = String::new();
    // Writing to a String cannot fail.
    let mut line = |label: &str, value: String| {
        let _ = writeln!(out, "{label:<28} {value}");
    };
    match (&evaluation.figures, &evaluation.reason) {
        (Some(f), _) => {
            let verdict = if evaluation.feasible {
                "all kept".to_owned()
            } else {
                let names: Vec<_> = evaluation.broken_limits.iter().map(|l| l.name()).collect();
                format!("BROKEN: {}", names.join(", "))
            };
            line("limits", verdict);
            figures(f, &mut line);
        }
        (None, reason) => line("cannot exist", reason.clone().unwrap_or_default()),
    }
    out
}

fn figures(f: &Figures, line: &mut impl FnMut(&str, String)) {
    let percent = |x: f64| format!("{:.2} %", 100.0 * x);
    let eng = engineering;
    line(
        "output power",
        format!(
            "{} ({:.2} dBm)",
            eng(f.output_power_w, "W"),
            f.output_power_dbm
        ),
    );
    line("efficiency", percent(f.efficiency));
    line("drain efficiency", percent(f.drain_efficiency));
    line("power-added efficiency", percent(f.pae));
    line("area", format!("{:.4} mm^2", f.area_m2 * 1e6));
    line("power from the supply", eng(f.total_power_w, "W"));
    for (name, watt) in LOSS_NAMES.iter().zip(f.losses_w.terms()) {
        line(
            &format!("  lost in {}", name.replace('_', " ")),
            format!("{} ({})", eng(watt, "W"), percent(watt / f.total_power_w)),
        );
    }
    line(
        "on-resistance n, p",
        format!(
            "{}, {}",
            eng(f.on_resistance_n_ohm, "ohm"),
            eng(f.on_resistance_p_ohm, "ohm")
        ),
    );
    line("drain capacitance a leg", eng(f.drain_capacitance_f, "F"));
    line("gate capacitance a leg", eng(f.gate_capacitance_f, "F"));
    line("optimum resistance", eng(f.optimum_resistance_ohm, "ohm"));
    line(
        "inductor",
        format!(
            "{}, {}, Q {:.2}",
            eng(f.inductance_h, "H"),
            eng(f.inductor_resistance_ohm, "ohm"),
            f.inductor_q
        ),
    );
    if let Some(hz) = f.self_resonance_hz {
        line("self-resonance", eng(hz, "Hz"));
    }
    line("series capacitor", eng(f.series_capacitance_f, "F"));
    if let Some(farad) = f.shunt_capacitance_f {
        line("shunt capacitor", eng(farad, "F"));
    }
    line("driver taper", format!("{:.3}", f.taper));
    line(
        "edge time",
        format!("{:.4} of a period", f.edge_time_fraction),
    );
    for (label, dbc) in [
        ("second harmonic", f.second_harmonic_dbc),
        ("third harmonic", f.third_harmonic_dbc),
        ("fourth harmonic", f.fourth_harmonic_dbc),
        ("fifth harmonic", f.fifth_harmonic_dbc),
    ] {
        if let Some(dbc) = dbc {
            line(label, format!("{dbc:.2} dBc"));
        }
    }
    line(
        "drain voltage",
        format!(
            "{} to {}",
            eng(f.lowest_drain_v, "V"),
            eng(f.peak_drain_v, "V")
        ),
    );
    line("network current, RMS", eng(f.network_current_rms_a, "A"));
    line(
        "overdrive use n, p",
        format!("{:.3}, {:.3}", f.overdrive_use_n, f.overdrive_use_p),
    );
    if f.overdrive_use_n.max(f.overdrive_use_p) > OVERDRIVE_WARNING {
        line(
            "warning",
            format!(
                "overdrive use above {OVERDRIVE_WARNING}: the device leaves the triode region at the peak; the on-resistance is stretched past what was checked"
            ),
        );
    }
}

/// Overdrive use past which the on-resistance model is stretched.
const OVERDRIVE_WARNING: f64 = 0.3;
