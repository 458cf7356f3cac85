//! Figures in words: their names and values as people write them.

use super::records::Change;
use crate::quantity::{format, format_in, micrometres};

/// What stands where a figure does not exist.
pub const NONE: &str = "–";

/// Endings of names that say a unit; of two that fit the first counts.
const UNITS: [(&str, &str); 11] = [
    ("_dbm", "dBm"),
    ("_dbc", "dBc"),
    ("_m2", "mm^2"),
    ("_w", "W"),
    ("_ohm", "ohm"),
    ("_f", "F"),
    ("_h", "H"),
    ("_hz", "Hz"),
    ("_v", "V"),
    ("_a", "A"),
    ("_m", "m"),
];

/// Figures that are shares of one, shown in per cent.
const SHARES: [&str; 4] = [
    "efficiency",
    "drain_efficiency",
    "pae",
    "edge_time_fraction",
];

/// Figures that may be about 0, where a relative change says nothing.
const ABOUT_ZERO: [&str; 2] = ["lowest_drain_v", "design.reactance"];

fn unit(name: &str) -> Option<(&'static str, &'static str)> {
    UNITS.into_iter().find(|(end, _)| name.ends_with(end))
}

/// A name of the JSON in words: `on_resistance_n_ohm` is `on-resistance, N`.
pub fn named(name: &str) -> String {
    let known = [
        ("pae", "power-added efficiency"),
        ("on_resistance_n_ohm", "on-resistance, N"),
        ("on_resistance_p_ohm", "on-resistance, P"),
        ("inductance_h", "inductance of the loop"),
        ("inductor_resistance_ohm", "inductor resistance of the loop"),
        ("inductor_q", "inductor Q"),
        ("series_capacitance_f", "series capacitance of the loop"),
        ("gate_capacitance_f", "gate capacitance of a leg"),
        ("drain_capacitance_f", "drain capacitance of a leg"),
        ("network_current_rms_a", "network current, RMS"),
        ("edge_time_fraction", "edge time, of a period"),
        ("dc_power_w", "power of the output stage"),
        ("total_power_w", "power with drivers"),
        ("design.loaded_q", "loaded Q"),
        ("design.nmos_width_m", "NMOS width"),
        ("design.width_ratio", "width ratio, P to N"),
        ("design.reactance", "net reactance, of R_opt"),
    ];
    if let Some((_, words)) = known.iter().find(|(known, _)| *known == name) {
        return (*words).to_owned();
    }
    let name = name.strip_prefix("design.").unwrap_or(name);
    let stem = unit(name).map_or(name, |(end, _)| name.strip_suffix(end).unwrap_or(name));
    stem.replace('_', " ")
}

/// A value by its name in the JSON, with its unit.
pub fn shown(name: &str, value: f64) -> String {
    if SHARES.contains(&name) {
        return format!("{:.3} %", 100.0 * value);
    }
    match unit(name) {
        Some((_, "dBm")) => format!("{value:.3} dBm"),
        Some((_, "dBc")) => format!("{value:.2} dBc"),
        Some((_, "mm^2")) => format_in(value, "mm^2"),
        Some((_, "m")) => micrometres(value),
        Some((_, unit)) => format(value, unit),
        None => format!("{value:.5}"),
    }
}

/// By how much: levels in decibels, shares in points, what may be about 0 as a difference, all else relative.
pub fn moved(change: &Change) -> String {
    let (Some(a), Some(b)) = (change.searched, change.drawn) else {
        return NONE.to_owned();
    };
    let name = change.figure.as_str();
    let (by, unit) = if name.ends_with("_dbm") || name.ends_with("_dbc") {
        (b - a, "dB")
    } else if SHARES.contains(&name) {
        (100.0 * (b - a), "points")
    } else if ABOUT_ZERO.contains(&name) {
        return shown(name, b - a);
    } else if a != 0.0 {
        (100.0 * (b - a) / a.abs(), "%")
    } else {
        return NONE.to_owned();
    };
    if by.abs() < 0.5e-4 {
        "none".to_owned()
    } else {
        format!("{by:+.4} {unit}")
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn regress_names_and_values_in_words() {
        assert_eq!(named("third_harmonic_dbc"), "third harmonic");
        assert_eq!(named("design.trace_m"), "trace");
        assert_eq!(shown("area_m2", 4.2e-7), "0.42 mm^2");
        assert_eq!(shown("pae", 0.5), "50.000 %");
    }

    #[test]
    fn law_changes_say_their_measure() {
        let change = |figure: &str, searched, drawn| {
            moved(&Change {
                figure: figure.into(),
                searched: Some(searched),
                drawn: Some(drawn),
            })
        };
        assert_eq!(change("efficiency", 0.5, 0.49), "-1.0000 points");
        assert_eq!(change("output_power_dbm", 10.0, 10.5), "+0.5000 dB");
        assert_eq!(change("area_m2", 2e-7, 1e-7), "-50.0000 %");
        assert_eq!(change("inductance_h", 1e-9, 1e-9), "none");
    }
}
