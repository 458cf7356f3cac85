//! Designs of a run that meet a specification, best first, from the run's records alone.

use crate::quantity::{Dimension, Quantity};
use crate::run::records::DesignRecord;
use crate::study::nearest;
use serde_json::Value;
use std::cmp::Ordering;
use thiserror::Error;

/// Endings of recorded names and what they measure. `dbm` stands beside watts and is not asked for by itself.
const UNITS: [(&str, Dimension); 10] = [
    ("_w", Dimension::Power),
    ("_m2", Dimension::Area),
    ("_ohm", Dimension::Resistance),
    ("_f", Dimension::Capacitance),
    ("_h", Dimension::Inductance),
    ("_hz", Dimension::Frequency),
    ("_v", Dimension::Voltage),
    ("_a", Dimension::Current),
    ("_dbc", Dimension::Carrier),
    ("_m", Dimension::Length),
];

/// Figures of which more is better; of all others less is.
const MORE_IS_BETTER: [&str; 6] = [
    "efficiency",
    "drain_efficiency",
    "pae",
    "output_power",
    "inductor_q",
    "self_resonance",
];

/// A request that cannot be understood.
#[derive(Debug, Error)]
pub enum PickError {
    /// No recorded figure has this name.
    #[error("read the unknown figure \"{key}\"; allowed: {known}{help}")]
    UnknownKey {
        /// As read.
        key: String,
        /// All names.
        known: String,
        /// The nearest.
        help: String,
    },
    /// Not `KEY=VALUE`.
    #[error("read \"{0}\"; allowed: KEY=VALUE, for example output_power=20dBm")]
    NotAssignment(String),
    /// The value does not suit the figure.
    #[error("{key}: {reason}")]
    Value {
        /// The figure.
        key: String,
        /// Why.
        reason: String,
    },
    /// The run has no designs.
    #[error("the run's front holds no design")]
    NoDesigns,
}

/// A recorded figure that can be asked for.
#[derive(Debug, Clone, PartialEq)]
pub struct Figure {
    /// Name without its unit.
    pub key: String,
    /// Where it stands in the JSON.
    path: Vec<String>,
    /// What it measures; none for a pure number.
    pub dimension: Option<Dimension>,
}

/// One condition.
#[derive(Debug, Clone, PartialEq)]
pub struct Condition {
    /// The figure.
    pub figure: Figure,
    /// SI.
    pub bound: f64,
    /// From below (`at least`) or above.
    pub at_least: bool,
}

/// The designs as JSON, with the figures that can be asked for.
#[derive(Debug)]
pub struct Catalogue {
    designs: Vec<(DesignRecord, Value)>,
    figures: Vec<Figure>,
}

impl Catalogue {
    /// Of the designs of a run.
    ///
    /// # Errors
    /// [`PickError::NoDesigns`].
    pub fn new(designs: Vec<DesignRecord>) -> Result<Self, PickError> {
        let designs: Vec<(DesignRecord, Value)> = designs
            .into_iter()
            .filter_map(|d| {
                let value = serde_json::to_value(&d).ok()?;
                Some((d, value))
            })
            .collect();
        let mut figures = Vec::new();
        let (_, first) = designs.first().ok_or(PickError::NoDesigns)?;
        collect(first, &mut Vec::new(), None, &mut figures);
        Ok(Self { designs, figures })
    }

    /// The figure of a name; `supply` stands for `design.supply` where nothing else has the name.
    ///
    /// # Errors
    /// [`PickError::UnknownKey`] with the nearest name.
    pub fn figure(&self, key: &str) -> Result<&Figure, PickError> {
        let named = |name: &str| self.figures.iter().find(|f| f.key == name);
        named(key)
            .or_else(|| named(&format!("design.{key}")))
            .ok_or_else(|| {
                let names = || self.figures.iter().map(|f| f.key.as_str());
                PickError::UnknownKey {
                    key: key.into(),
                    known: names().collect::<Vec<_>>().join(", "),
                    help: nearest(key, names()).map_or(String::new(), |n| {
                        format!("\n  help: did you mean \"{n}\"?")
                    }),
                }
            })
    }

    /// A condition from `KEY=VALUE`, the value with its unit.
    ///
    /// # Errors
    /// [`PickError`].
    pub fn condition(&self, text: &str, at_least: bool) -> Result<Condition, PickError> {
        let (key, value) = text
            .split_once('=')
            .ok_or_else(|| PickError::NotAssignment(text.into()))?;
        let figure = self.figure(key.trim())?.clone();
        let wrong = |reason: String| PickError::Value {
            key: figure.key.clone(),
            reason,
        };
        let bound = match figure.dimension {
            Some(dimension) => {
                Quantity::parse(value, dimension).map_err(|e| wrong(e.to_string()))?
            }
            None => match value.trim().parse::<f64>() {
                Ok(v) if v.is_finite() => v,
                _ => return Err(wrong(format!("read {value:?}, allowed a number"))),
            },
        };
        Ok(Condition {
            figure,
            bound,
            at_least,
        })
    }

    /// The designs that meet all conditions, best first by the figures in turn.
    pub fn pick(&self, conditions: &[Condition], best: &[Figure]) -> Vec<&DesignRecord> {
        let mut found: Vec<&(DesignRecord, Value)> = self
            .designs
            .iter()
            .filter(|(_, v)| conditions.iter().all(|c| shortfall(c, v) <= 0.0))
            .collect();
        found.sort_by(|a, b| {
            best.iter()
                .map(|figure| compare(figure, &a.1, &b.1))
                .find(|o| o.is_ne())
                .unwrap_or(Ordering::Equal)
                .then_with(|| a.0.id.cmp(&b.0.id))
        });
        found.into_iter().map(|(d, _)| d).collect()
    }

    /// For each condition how far the best design for it alone falls short, relative; 0 when some design meets it.
    pub fn least_shortfalls(&self, conditions: &[Condition]) -> Vec<f64> {
        conditions
            .iter()
            .map(|c| {
                let all = self.designs.iter().map(|(_, v)| shortfall(c, v));
                all.fold(f64::INFINITY, f64::min).max(0.0)
            })
            .collect()
    }

    /// The designs that miss the conditions by least in sum, with what each condition lacks, relative.
    pub fn nearest_designs(
        &self,
        conditions: &[Condition],
        count: usize,
    ) -> Vec<(&DesignRecord, Vec<f64>)> {
        let mut ranked: Vec<(f64, &DesignRecord, Vec<f64>)> = self
            .designs
            .iter()
            .map(|(d, v)| {
                let lacks: Vec<f64> = conditions
                    .iter()
                    .map(|c| shortfall(c, v).max(0.0))
                    .collect();
                (lacks.iter().sum(), d, lacks)
            })
            .collect();
        ranked.sort_by(|a, b| a.0.total_cmp(&b.0).then_with(|| a.1.id.cmp(&b.1.id)));
        ranked
            .into_iter()
            .take(count)
            .map(|(_, d, lacks)| (d, lacks))
            .collect()
    }
}

/// Every number of a record by its name without unit.
fn collect(
    value: &Value,
    path: &mut Vec<String>,
    outer: Option<Dimension>,
    figures: &mut Vec<Figure>,
) {
    let Value::Object(map) = value else { return };
    for (name, inner) in map {
        if name == "cell" || name.ends_with("_dbm") {
            continue;
        }
        let unit = UNITS.iter().find(|(end, _)| name.ends_with(end));
        let dimension = unit.map(|u| u.1).or(outer);
        path.push(name.clone());
        match inner {
            Value::Object(_) => collect(inner, path, dimension, figures),
            Value::Number(_) | Value::Null => {
                let bare = |n: &String| {
                    let end = UNITS.iter().find(|(end, _)| n.ends_with(end));
                    end.map_or(n.as_str(), |(end, _)| &n[..n.len() - end.len()])
                        .to_owned()
                };
                figures.push(Figure {
                    key: path.iter().map(bare).collect::<Vec<_>>().join("."),
                    path: path.clone(),
                    dimension,
                });
            }
            _ => {}
        }
        path.pop();
    }
}

fn value_of(figure: &Figure, design: &Value) -> Option<f64> {
    let mut value = design;
    for name in &figure.path {
        value = value.get(name)?;
    }
    value.as_f64()
}

/// How far a design is from a condition, relative to its bound; infinite where the figure does not exist.
fn shortfall(condition: &Condition, design: &Value) -> f64 {
    let Some(value) = value_of(&condition.figure, design) else {
        return f64::INFINITY;
    };
    let lack = if condition.at_least {
        condition.bound - value
    } else {
        value - condition.bound
    };
    lack / condition.bound.abs().max(f64::MIN_POSITIVE)
}

/// Better first; what does not exist last.
fn compare(figure: &Figure, a: &Value, b: &Value) -> Ordering {
    match (value_of(figure, a), value_of(figure, b)) {
        (Some(x), Some(y)) if MORE_IS_BETTER.contains(&figure.key.as_str()) => y.total_cmp(&x),
        (Some(x), Some(y)) => x.total_cmp(&y),
        (x, y) => y.is_some().cmp(&x.is_some()),
    }
}

/// Limits of the study (as `run.json` holds it) on which a design sits, to one part in ten thousand.
pub fn binding(study: &Value, design: &DesignRecord) -> Vec<&'static str> {
    const ON_IT: f64 = 1e-4;
    let Some(f) = &design.evaluation.figures else {
        return Vec::new();
    };
    let limits = &study["limits"];
    let on = |bound: &Value, value: f64| {
        bound
            .as_f64()
            .is_some_and(|b| (value - b).abs() <= ON_IT * b.abs())
    };
    let sides = |bounds: &Value, value: f64| {
        on(&bounds["at_least"], value) || on(&bounds["at_most"], value)
    };
    let dbc = |bound: &Value, value: Option<f64>| value.is_some_and(|v| on(bound, v));
    let overdrive = f.overdrive_use_n.max(f.overdrive_use_p);
    [
        ("edge_time", on(&limits["edge_time"], f.edge_time_fraction)),
        (
            "second_harmonic",
            dbc(&limits["second_harmonic_dbc"], f.second_harmonic_dbc),
        ),
        (
            "third_harmonic",
            dbc(&limits["third_harmonic_dbc"], f.third_harmonic_dbc),
        ),
        ("overdrive_use", on(&limits["overdrive_use"], overdrive)),
        (
            "output_power",
            sides(&limits["output_power_w"], f.output_power_w),
        ),
        ("area", sides(&limits["area_m2"], f.area_m2)),
        ("efficiency", sides(&limits["efficiency"], f.efficiency)),
    ]
    .into_iter()
    .filter(|(_, binds)| *binds)
    .map(|(name, _)| name)
    .collect()
}
