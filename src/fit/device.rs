//! One device and polarity: every figure of its section, with its error and where it is from.

use super::capacitance::{self, Gate, Junction};
use super::leakage::{self, Off};
use super::least_squares::{Minimum, student_95};
use super::options::{Options, SHARED_DRAIN_M};
use super::resistance::{self, Curves, Law, Point, VARIABLES};
use super::table::{Polarity, Tables};
use super::write::Existing;
use super::{FitError, LARGEST_MISS};
use crate::quantity::{Dimension, Quantity};
use crate::technology::Transistor;
use crate::technology::transistor::WarmTransistor;

/// Pairs of figures with a correlation above this are said not to be told apart.
const STRONG_CORRELATION: f64 = 0.95;

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

/// A measured point against the model.
#[derive(Debug, Clone, PartialEq)]
pub struct Residual {
    /// What was measured, with its SI unit.
    pub quantity: &'static str,
    /// K.
    pub temperature_k: f64,
    /// V: V_GS, V_DS or reverse voltage.
    pub voltage_v: f64,
    /// SI.
    pub measured: f64,
    /// SI.
    pub model: f64,
}

impl Residual {
    /// Model over measured, less 1.
    pub fn error(&self) -> f64 {
        self.model / self.measured - 1.0
    }
}

/// A device and polarity after its fit.
#[derive(Debug, Clone, PartialEq)]
pub struct FittedDevice {
    /// n or p.
    pub polarity: Polarity,
    /// Figures to be written, in the order of the file.
    pub figures: Vec<Figure>,
    /// Keys that keep what the file has.
    pub kept: Vec<&'static str>,
    /// What was measured for equation (1).
    pub curves: Option<Curves>,
    /// Gate capacitances.
    pub gate: Option<Gate>,
    /// The junction.
    pub junction: Option<Junction>,
    /// The off current.
    pub off: Option<Off>,
    /// Every measured point against the model with the figures as written.
    pub residuals: Vec<Residual>,
    /// What the fit says of itself; comments of the file and lines of the report.
    pub notes: Vec<String>,
    /// What a user should know before using it.
    pub warnings: Vec<String>,
}

/// What a device is fitted from.
pub(super) struct Context<'c> {
    pub tables: &'c Tables,
    pub device: usize,
    pub name: &'c str,
    pub options: &'c Options,
    pub existing: &'c Existing,
    pub rating_v: f64,
    pub nominal_v: f64,
    pub from_v: f64,
}

/// The keys of a section in their order, what they measure (`None`: a bare number), and a figure to assume where no
/// table and no file gives one: common for gates of 100 nm, and said to be assumed wherever it is used.
const SECTION: [(&str, Option<Dimension>, Option<f64>); 14] = [
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

#[derive(Default)]
struct Builder {
    figures: Vec<Figure>,
}

impl Builder {
    fn add(&mut self, key: &'static str, value: f64, error: Option<f64>, note: Option<String>) {
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

    fn value(&self, key: &str) -> Option<f64> {
        self.figures
            .iter()
            .find(|figure| figure.key == key)
            .map(|figure| figure.value)
    }
}

/// Fits what the tables give; the rest is kept from the file, or assumed and said so.
pub(super) fn fit(context: &Context<'_>, polarity: Polarity) -> Result<FittedDevice, FitError> {
    let Context {
        tables,
        device,
        name,
        options,
        existing,
        from_v,
        ..
    } = *context;
    let mut out = FittedDevice {
        polarity,
        figures: Vec::new(),
        kept: Vec::new(),
        curves: None,
        gate: None,
        junction: None,
        off: None,
        residuals: Vec::new(),
        notes: Vec::new(),
        warnings: Vec::new(),
    };
    let mut builder = Builder::default();
    let length = options.length_m.of(name, Some(polarity.name()));
    match resistance::collect(tables, device, polarity, length, from_v)? {
        Some(curves) => on_resistance(context, &mut out, &mut builder, curves)?,
        None if existing.has_all(name, polarity, SECTION.iter().take(8).map(|(key, ..)| *key)) => {}
        None => {
            let length = length.map_or_else(String::new, |l| {
                format!(", length {}", Dimension::Length.show(l))
            });
            let (device, polarity) = (name.to_owned(), polarity.name());
            return Err(FitError::NoCurves {
                device,
                polarity,
                from: from_v,
                length,
            });
        }
    }
    capacitances(context, &mut out, &mut builder)?;
    leakage(context, &mut out, &mut builder);
    complete(context, &mut out, builder);
    let worst = |quantity: &'static str| {
        let of = out.residuals.iter().filter(move |r| r.quantity == quantity);
        of.max_by(|a, b| a.error().abs().total_cmp(&b.error().abs()))
    };
    for (quantity, voltage) in [
        (ON, "V_GS"),
        (CHECK, "V_GS"),
        (GATE, "a swing of"),
        (JUNCTION, "V_R"),
    ] {
        if let Some(r) = worst(quantity).filter(|r| r.error().abs() > LARGEST_MISS) {
            out.warnings.push(format!(
                "{quantity}: the model misses by {:+.1} % at {voltage} {:.3} V and {:.1} K (measured {:.4e}, model {:.4e})",
                100.0 * r.error(), r.voltage_v, r.temperature_k, r.measured, r.model
            ));
        }
    }
    Ok(out)
}

/// Names of what is measured.
pub const ON: &str = "on_resistance_ohm_m";
/// Output curves, where transfer curves were fitted.
pub const CHECK: &str = "on_resistance_of_output_ohm_m";
/// Mean over a swing.
pub const GATE: &str = "gate_and_overlap_capacitance_f_m";
/// Of the structures.
pub const JUNCTION: &str = "junction_capacitance_f";
/// At V_GS = 0.
pub const OFF: &str = "off_current_a_m";

fn on_resistance(
    context: &Context<'_>,
    out: &mut FittedDevice,
    builder: &mut Builder,
    curves: Curves,
) -> Result<(), FitError> {
    let (device, polarity) = (context.name.to_owned(), out.polarity.name());
    let law = Law::new(&curves);
    let (unknown, temperatures) = (law.unknown(), curves.temperatures_k.len());
    let read = curves.points.len();
    if read <= unknown {
        let (from, least) = (context.from_v, unknown + 1);
        return Err(FitError::TooFew {
            device,
            polarity,
            read,
            temperatures,
            from,
            least,
            unknown,
        });
    }
    let mut minimum = law
        .solve()
        .ok_or(FitError::NoMinimum { device, polarity })?;
    let (tables, index, nominal_v) = (context.tables, context.device, context.nominal_v);
    let of = out.polarity;
    let growth =
        |figures: &Transistor| leakage::off(tables, index, of, nominal_v, figures)?.growth_miss();
    if let Some(chosen) = law.chosen_slope(&minimum, growth) {
        minimum = chosen;
        out.notes.push(
            "slope: of those that the on-resistances cannot tell apart, the one nearest the off currents over temperature"
                .to_owned(),
        );
    }
    let errors = deviations(&minimum).map(|d| resistance::errors(&minimum.variables, d));
    let values = resistance::figures(&minimum.variables);
    let single = temperatures == 1;
    for k in 0..VARIABLES {
        let key = resistance::KEYS[k];
        let assumed = single && (key == "threshold_drift" || key == "mobility_exponent");
        let note = match (assumed, errors) {
            (true, _) => Some("assumed: one temperature was measured".to_owned()),
            (false, None) => Some("error unknown: the points do not tell it".to_owned()),
            (false, Some(_)) => None,
        };
        builder.add(
            key,
            values[k],
            errors.filter(|_| !assumed).map(|e| e[k]),
            note,
        );
        if let Some(figure) = builder.figures.last_mut() {
            figure.assumed = assumed;
            if minimum.at_bound[k] {
                figure.note.push_str(", at a bound");
            }
        }
        if k == 0 {
            builder.add("length", curves.length_m, None, None);
        }
    }
    notes(out, &curves, &minimum, single);
    let held: [f64; VARIABLES] =
        std::array::from_fn(|k| builder.value(resistance::KEYS[k]).unwrap_or(values[k]));
    let rounded = resistance::transistor(curves.length_m, &held);
    let residual = |quantity: &'static str| {
        let rounded = &rounded;
        move |point: &Point| Residual {
            quantity,
            temperature_k: point.temperature_k,
            voltage_v: point.applied_v,
            measured: point.resistance_ohm_m,
            model: WarmTransistor::new(rounded, point.temperature_k)
                .on_resistance_ohm_m(point.gate_v),
        }
    };
    out.residuals.extend(curves.points.iter().map(residual(ON)));
    out.residuals
        .extend(curves.checks.iter().map(residual(CHECK)));
    let fitted = || out.residuals.iter().filter(|r| r.quantity == ON);
    let worst = fitted().map(|r| r.error().abs()).fold(0.0, f64::max);
    let rms = (fitted().map(|r| r.error().powi(2)).sum::<f64>() / read as f64).sqrt();
    out.notes.push(format!(
        "on-resistance: worst miss {:.2} %, rms {:.2} %",
        100.0 * worst,
        100.0 * rms
    ));
    out.curves = Some(curves);
    Ok(())
}

/// Half widths of the intervals that hold a variable 95 times in 100.
fn deviations<const N: usize>(minimum: &Minimum<N>) -> Option<[f64; N]> {
    let covariance = minimum.covariance?;
    let t = student_95(minimum.freedom);
    Some(std::array::from_fn(|k| {
        t * covariance[k][k].max(0.0).sqrt()
    }))
}

fn notes(out: &mut FittedDevice, curves: &Curves, minimum: &Minimum<VARIABLES>, single: bool) {
    let (low, high) = curves.range_v();
    let kelvins: Vec<String> = curves
        .temperatures_k
        .iter()
        .map(|k| format!("{k:.2}"))
        .collect();
    out.notes.push(format!(
        "fitted: gate length {}, V_GS {low:.3} V to {high:.3} V, {} K, {} points; {} of 8 starts agreed",
        Dimension::Length.show(curves.length_m),
        kelvins.join(", "),
        curves.points.len(),
        minimum.starts_agreed
    ));
    if !curves.other_lengths_m.is_empty() {
        let others: Vec<String> = curves
            .other_lengths_m
            .iter()
            .map(|l| Dimension::Length.show(*l))
            .collect();
        out.notes.push(format!(
            "other lengths in the tables, not used: {}",
            others.join(", ")
        ));
    }
    if single {
        let at = curves.temperatures_k.first().copied().unwrap_or(0.0);
        out.warnings.push(format!(
            "measured at {at:.2} K alone: threshold_drift and mobility_exponent are assumed, {} and {}",
            Dimension::VoltageDrift.show(resistance::ASSUMED_DRIFT_V_K),
            resistance::ASSUMED_EXPONENT
        ));
    } else if !curves
        .temperatures_k
        .iter()
        .any(|k| resistance::is_reference(*k))
    {
        out.notes
            .push("no measurement at 300.15 K: the figures there lie between others".to_owned());
    }
    let bounds: Vec<&str> = (0..VARIABLES)
        .filter(|&k| minimum.at_bound[k])
        .map(|k| resistance::KEYS[k])
        .collect();
    if !bounds.is_empty() {
        out.notes.push(format!(
            "at a bound of what is physical: {}",
            bounds.join(", ")
        ));
    }
    match &minimum.covariance {
        None => out
            .warnings
            .push("the points do not tell the figures apart: no errors can be given".to_owned()),
        Some(covariance) => {
            for a in 0..VARIABLES {
                for b in 0..a {
                    let rho = covariance[a][b] / (covariance[a][a] * covariance[b][b]).sqrt();
                    if rho.abs() > STRONG_CORRELATION {
                        out.notes.push(format!(
                            "not told apart: {} and {} (correlation {rho:+.3})",
                            resistance::KEYS[b],
                            resistance::KEYS[a]
                        ));
                    }
                }
            }
        }
    }
}

fn capacitances(
    context: &Context<'_>,
    out: &mut FittedDevice,
    builder: &mut Builder,
) -> Result<(), FitError> {
    let Context {
        tables,
        device,
        name,
        existing,
        nominal_v,
        rating_v,
        ..
    } = *context;
    let refuse = |reason| FitError::Capacitance {
        device: name.to_owned(),
        polarity: out.polarity.name(),
        reason,
    };
    let length = builder
        .value("length")
        .or_else(|| existing.length(name, out.polarity));
    if let Some(length_m) = length {
        out.gate =
            capacitance::gate(tables, device, out.polarity, length_m, nominal_v).map_err(refuse)?;
    }
    out.junction = capacitance::junction(tables, device, out.polarity, rating_v).map_err(refuse)?;
    if let Some(gate) = &out.gate {
        builder.add(
            "gate_capacitance",
            gate.gate_f_m,
            None,
            Some(format!(
                "mean over 0 to {nominal_v:.3} V less the drain overlap"
            )),
        );
        builder.add(
            "overlap_capacitance",
            gate.overlap_f_m,
            None,
            Some("half of the value at V_GS = 0".to_owned()),
        );
        let show = |c: f64| Dimension::CapacitancePerLength.show(c);
        out.notes.push(format!(
            "gate capacitance: {} over the swing, {} at 0 V, {:.1} K, structure {} long",
            show(gate.mean_f_m),
            show(gate.off_f_m),
            gate.temperature_k,
            Dimension::Length.show(gate.structure_length_m)
        ));
        if gate.with_body {
            out.warnings.push("gate capacitance: measured with the body tied to source and drain, so the body's share is in it".to_owned());
        }
        let model = builder.value("gate_capacitance").unwrap_or(0.0)
            + builder.value("overlap_capacitance").unwrap_or(0.0);
        // the swing it is made for, give or take ten percent, is the range of this figure
        let swing = |v: f64| v >= 0.9 * nominal_v - 1e-9 && v <= 1.1 * nominal_v + 1e-9;
        for (voltage_v, measured) in gate.means.iter().copied().filter(|(v, _)| swing(*v)) {
            let temperature_k = gate.temperature_k;
            out.residuals.push(Residual {
                quantity: GATE,
                temperature_k,
                voltage_v,
                measured,
                model,
            });
        }
    }
    if let Some(junction) = &out.junction {
        let drain_m = context
            .options
            .drain_length_m
            .of(name, None)
            .unwrap_or(SHARED_DRAIN_M);
        let per_width = junction.area_f_m2 * drain_m + junction.edge_f_m;
        let errors = deviations(&junction.minimum);
        let area = Dimension::CapacitancePerArea.show(junction.area_f_m2);
        let edge = Dimension::CapacitancePerLength.show(junction.edge_f_m);
        let drain = Dimension::Length.show(drain_m);
        builder.add(
            "junction_capacitance",
            per_width,
            None,
            Some(format!(
                "{drain} of drain times {area}, and an edge of {edge}"
            )),
        );
        builder.add(
            "junction_grading",
            junction.grading,
            errors.map(|e| e[2]),
            None,
        );
        builder.add(
            "junction_potential",
            junction.potential_v,
            errors.map(|e| e[3]),
            None,
        );
        out.notes.push(format!(
            "junction: fitted 0 V to {:.3} V at {:.1} K",
            junction.to_v, junction.temperature_k
        ));
        if !junction.told_apart {
            out.notes.push(
                "junction: one shape of structure, so its edge is counted in its area".to_owned(),
            );
        }
        for &(voltage_v, measured, model) in &junction.points {
            let temperature_k = junction.temperature_k;
            out.residuals.push(Residual {
                quantity: JUNCTION,
                temperature_k,
                voltage_v,
                measured,
                model,
            });
        }
    }
    Ok(())
}

fn leakage(context: &Context<'_>, out: &mut FittedDevice, builder: &mut Builder) {
    let values: Vec<f64> = resistance::KEYS
        .iter()
        .filter_map(|key| builder.value(key))
        .collect();
    let fitted = <[f64; VARIABLES]>::try_from(values)
        .ok()
        .zip(builder.value("length"));
    let figures: Option<Transistor> =
        fitted.map(|(values, length_m)| resistance::transistor(length_m, &values));
    // without equation (1) its temperature law is not known
    let Some(figures) = figures else { return };
    let Some(off) = leakage::off(
        context.tables,
        context.device,
        out.polarity,
        context.nominal_v,
        &figures,
    ) else {
        return;
    };
    let note = format!(
        "at {:.1} K and V_DS {:.3} V",
        off.temperature_k, off.drain_v
    );
    builder.add("off_current", off.current_a_m, None, Some(note));
    let miss = |p: &&(f64, f64, f64)| (p.2 / p.1).ln().abs();
    if let Some(p) = off
        .hot()
        .max_by(|a, b| miss(a).total_cmp(&miss(b)))
        .filter(|p| miss(p) > LARGEST_MISS)
    {
        out.warnings.push(format!(
            "off current: equation (3) gives {:.2} of the measured at {:.1} K ({:.3e} A/m)",
            p.2 / p.1,
            p.0,
            p.1
        ));
    }
    for &(temperature_k, measured, model) in &off.points {
        let voltage_v = off.drain_v;
        out.residuals.push(Residual {
            quantity: OFF,
            temperature_k,
            voltage_v,
            measured,
            model,
        });
    }
    out.off = Some(off);
}

/// Keeps or assumes what no table gave, and sorts the figures as a section has them.
fn complete(context: &Context<'_>, out: &mut FittedDevice, mut builder: Builder) {
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
