//! One device and polarity: every figure of its section, with its error and where it is from.

use super::capacitance::{self, Gate, Junction};
use super::leakage::{self, Off};
use super::notes::{deviations, notes};
use super::options::{Options, SHARED_DRAIN_M};
use super::points::{self, Curves, Point};
use super::residual::{CHECK, GATE, JUNCTION, OFF, ON, Residual};
use super::resistance::{self, Law, VARIABLES};
use super::section::{Builder, Figure, SECTION, complete};
use super::table::{Kind, Polarity, Tables};
use super::write::Existing;
use super::{FitError, LARGEST_MISS};
use crate::quantity::Dimension;
use crate::technology::Transistor;
use crate::technology::transistor::WarmTransistor;

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
    match points::collect(tables, device, polarity, length, from_v)? {
        Some(curves) => on_resistance(context, &mut out, &mut builder, curves)?,
        None if tables
            .rows(Kind::Current, device, polarity)
            .next()
            .is_none()
            && existing.has_all(name, polarity, SECTION.iter().take(8).map(|(key, ..)| *key)) => {}
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

/// Between the bounds of a slope.
const SLOPE_SPAN: f64 = 0.6;

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
            let untold = key == "slope" && figure.error.is_some_and(|e| e > SLOPE_SPAN);
            if untold {
                figure.note =
                    "any from 1 to 1.6 would do: the on-resistances do not tell it".to_owned();
            }
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
