//! What came of a fit, as a table for people and as CSV.

use super::device::FittedDevice;
use super::residual::{GATE, JUNCTION, OFF, ON, Residual};
use super::{FittedPair, Given, Tables};
use crate::quantity::format as engineering;
use std::fmt::Write;

/// Rows of a table of residuals; more gate voltages are gathered, the worst of each gathering shown.
const MOST_ROWS: usize = 24;

/// The figures with their errors, and the residuals.
pub fn report(pairs: &[FittedPair]) -> String {
    let mut out = String::new();
    for pair in pairs {
        let given = |given| match given {
            Given::Option => "given",
            Given::Kept => "kept from the file",
            Given::Assumed => "assumed",
        };
        // Writing to a String cannot fail.
        let _ = writeln!(
            out,
            "{}: rating {} ({}), nominal swing {}, fitted from V_GS = {}",
            pair.name,
            engineering(pair.rating_v.0, "V"),
            given(pair.rating_v.1),
            engineering(pair.nominal_v, "V"),
            engineering(pair.from_v, "V"),
        );
        for device in &pair.devices {
            device_lines(&mut out, &pair.name, device);
        }
    }
    out
}

fn device_lines(out: &mut String, name: &str, device: &FittedDevice) {
    let _ = writeln!(out, "\n{name} {}", device.polarity.name());
    for figure in &device.figures {
        let text = figure.text.trim_matches('"');
        let _ = writeln!(out, "  {:<22} {text:<18} {}", figure.key, figure.note);
    }
    if !device.kept.is_empty() {
        let _ = writeln!(out, "  kept from the file: {}", device.kept.join(", "));
    }
    for note in &device.notes {
        let _ = writeln!(out, "  {note}");
    }
    let of = |quantity: &'static str| {
        let residuals = device.residuals.iter();
        residuals
            .filter(move |r| r.quantity == quantity)
            .collect::<Vec<_>>()
    };
    for (quantity, title) in [
        (
            ON,
            "on-resistance, model over measured less 1, %, by V_GS and temperature",
        ),
        (GATE, "gate and overlap capacitance over a swing of V, %"),
        (
            JUNCTION,
            "junction capacitance, %, worst of the structures, by reverse voltage",
        ),
        (OFF, "off current, %, by V_DS and temperature"),
    ] {
        let residuals = of(quantity);
        if !residuals.is_empty() {
            let _ = writeln!(out, "  {title}");
            table(out, &residuals);
        }
    }
}

/// Voltages down, temperatures across.
fn table(out: &mut String, residuals: &[&Residual]) {
    let mut kelvins: Vec<i64> = residuals
        .iter()
        .map(|r| r.temperature_k.round() as i64)
        .collect();
    kelvins.sort_unstable();
    kelvins.dedup();
    let mut volts: Vec<i64> = residuals
        .iter()
        .map(|r| (r.voltage_v * 1e3).round() as i64)
        .collect();
    volts.sort_unstable();
    volts.dedup();
    // a table for people; every point is in the CSV
    kelvins.truncate(8);
    let columns: Vec<String> = kelvins.iter().map(|k| format!("{k:>6} K")).collect();
    let _ = writeln!(out, "    {:>8}  {}", "V", columns.join(" "));
    for group in volts.chunks(volts.len().div_ceil(MOST_ROWS).max(1)) {
        let (low, high) = (group[0], group[group.len() - 1]);
        let cells: Vec<String> = kelvins
            .iter()
            .map(|kelvin| {
                let here = residuals.iter().filter(|r| {
                    let mv = (r.voltage_v * 1e3).round() as i64;
                    r.temperature_k.round() as i64 == *kelvin && mv >= low && mv <= high
                });
                let worst = here.max_by(|a, b| a.error().abs().total_cmp(&b.error().abs()));
                worst.map_or_else(
                    || format!("{:>8}", "-"),
                    |r| format!("{:>+8.2}", 100.0 * r.error()),
                )
            })
            .collect();
        let _ = writeln!(out, "    {:>8.3}  {}", high as f64 / 1e3, cells.join(" "));
    }
}

/// Every measured point against the model; columns carry SI units.
pub fn residuals_csv(pairs: &[FittedPair], tables: &Tables) -> String {
    let mut out =
        String::from("device,polarity,quantity,temperature_k,voltage_v,measured,model,error\n");
    for pair in pairs
        .iter()
        .filter(|pair| tables.devices.contains(&pair.name))
    {
        for device in &pair.devices {
            for r in &device.residuals {
                let _ = writeln!(
                    out,
                    "{},{},{},{},{},{:e},{:e},{:.6}",
                    pair.name,
                    device.polarity.name(),
                    r.quantity,
                    r.temperature_k,
                    r.voltage_v,
                    r.measured,
                    r.model,
                    r.error()
                );
            }
        }
    }
    out
}
