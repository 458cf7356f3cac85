//! A transistor's section in the technology file: its keys, and figures as the file will hold them.

use super::device::{Context, FittedDevice};
use crate::quantity::{Dimension, Quantity};

/// A figure to be written.
#[derive(Debug, Clone, PartialEq)]
pub struct Figure {
    /// Key in the technology file.
    pub key: &'static str,
    /// SI, as the file will hold it.
    pub value: f64,
    /// As the file will hold it.
    pub text: String,
    /// Said after it: error or assumption.
    pub note: String,
    /// Half of the interval that holds the true value 95 times in 100, SI.
    pub error: Option<f64>,
    /// No table gave it.
    pub assumed: bool,
}

/// The keys of a section in their order, what they measure (`None`: a bare number), and a figure to assume where no
/// table and no file gives one: common for gates of 100 nm, and said to be assumed wherever it is used.
pub(super) const SECTION: [(&str, Option<Dimension>, Option<f64>); 14] = [
    ("transconductance", Some(Dimension::Transconductance), None),
    ("length", Some(Dimension::Length), None),
    ("threshold", Some(Dimension::Voltage), None),
    ("threshold_drift", Some(Dimension::VoltageDrift), None),
    ("slope", None, None),
    ("degradation", Some(Dimension::PerVoltage), None),
    ("mobility_exponent", None, None),
    ("access_resistance", Some(Dimension::ResistanceLength), None),
    (
        "gate_capacitance",
        Some(Dimension::CapacitancePerLength),
        Some(0.9e-9),
    ),
    (
        "overlap_capacitance",
        Some(Dimension::CapacitancePerLength),
        Some(0.3e-9),
    ),
    (
        "junction_capacitance",
        Some(Dimension::CapacitancePerLength),
        Some(0.5e-9),
    ),
    ("junction_grading", None, Some(0.4)),
    ("junction_potential", Some(Dimension::Voltage), Some(0.8)),
    ("off_current", Some(Dimension::CurrentPerLength), Some(1e-3)),
];

/// A value as text of the file, and the value that the text holds.
fn written(value: f64, dimension: Option<Dimension>) -> (String, f64) {
    match dimension {
        Some(dimension) => {
            let text = dimension.show(value);
            let held = Quantity::parse(&text, dimension).unwrap_or(value);
            (format!("\"{text}\""), held)
        }
        None => {
            let held = format!("{value:.4}").parse().unwrap_or(value);
            // TOML wants a point in a number that is not whole by nature
            (format!("{held:?}"), held)
        }
    }
}

/// An error with two digits.
fn rounded(error: f64, dimension: Option<Dimension>) -> String {
    let two: f64 = format!("{error:.1e}").parse().unwrap_or(error);
    match dimension {
        Some(dimension) => dimension.show(two),
        None => format!("{two}"),
    }
}

/// Figures as they come.
#[derive(Default)]
pub(super) struct Builder {
    pub figures: Vec<Figure>,
}

impl Builder {
    pub fn add(&mut self, key: &'static str, value: f64, error: Option<f64>, note: Option<String>) {
        let dimension = SECTION
            .iter()
            .find(|(k, ..)| *k == key)
            .and_then(|(_, d, _)| *d);
        let (text, value) = written(value, dimension);
        let note = note.unwrap_or_else(|| match error {
            Some(error) => format!("+- {}", rounded(error, dimension)),
            None => String::new(),
        });
        self.figures.push(Figure {
            key,
            value,
            text,
            note,
            error,
            assumed: false,
        });
    }

    pub fn value(&self, key: &str) -> Option<f64> {
        self.figures
            .iter()
            .find(|figure| figure.key == key)
            .map(|figure| figure.value)
    }
}

/// Keeps or assumes what no table gave, and sorts the figures as a section has them.
pub(super) fn complete(context: &Context<'_>, out: &mut FittedDevice, mut builder: Builder) {
    for (key, _, assumed) in SECTION {
        if builder.value(key).is_some() {
            continue;
        }
        match assumed {
            _ if context
                .existing
                .has_all(context.name, out.polarity, [key].into_iter()) =>
            {
                out.kept.push(key)
            }
            Some(value) => {
                builder.add(
                    key,
                    value,
                    None,
                    Some("assumed: no table gives it".to_owned()),
                );
                if let Some(figure) = builder.figures.last_mut() {
                    figure.assumed = true;
                    out.warnings.push(format!(
                        "{key}: no table gives it; {} is assumed",
                        figure.text.trim_matches('"')
                    ));
                }
            }
            None => {}
        }
    }
    let place = |key: &str| SECTION.iter().position(|(k, ..)| *k == key);
    builder.figures.sort_by_key(|figure| place(figure.key));
    out.figures = builder.figures;
}
