//! The sheet as Markdown, for people.

use super::currents::Current;
use super::names::{NONE, moved, named, shown};
use super::records::{DrawnCapacitor, DrawnDevice, Sheet};
use crate::budget::LOSS_NAMES;
use crate::quantity::{format, format_in, micrometres};
use crate::study::Network;
use std::fmt::Write;

/// The whole text. `drawing` is the file name of the drawing beside it.
pub fn markdown(sheet: &Sheet, drawing: &str) -> String {
    let mut text = format!(
        "# Design {}\n\n{}\n\n{} at {}, {}, technology {} ({}), pair `{}`, {} leg{}, {} device{} a side. widefront {}.\n\n",
        sheet.id,
        sheet.title,
        format(sheet.frequency_hz, "Hz"),
        format_in(sheet.temperature_k, "degC"),
        format_in(sheet.evaluation.design.supply_v, "V"),
        sheet.technology,
        sheet.source,
        sheet.device,
        sheet.legs,
        if sheet.legs == 1 { "" } else { "s" },
        sheet.stack,
        if sheet.stack == 1 { "" } else { "s" },
        sheet.version,
    );
    if !sheet.cautions.is_empty() {
        list(&mut text, "Cautions", &sheet.cautions);
    }
    let _ = write!(text, "![The stage to scale]({drawing})\n\n");
    circuit(&mut text, sheet);
    headline(&mut text, sheet);
    limits(&mut text, sheet);
    devices(&mut text, sheet);
    currents(&mut text, sheet);
    passives(&mut text, sheet);
    voltages(&mut text, sheet);
    losses(&mut text, sheet);
    list(&mut text, "Assumptions", &sheet.assumptions);
    list(
        &mut text,
        "To be checked by the foundry's rules or licensed practice",
        &sheet.to_be_checked,
    );
    text
}

/// A table: headings, then rows of as many cells; the first column is text, the others numbers.
fn table(text: &mut String, headings: &[&str], rows: &[Vec<String>]) {
    let _ = writeln!(text, "| {} |", headings.join(" | "));
    let marks = vec!["---:"; headings.len() - 1].join(" | ");
    let _ = writeln!(text, "| --- | {marks} |");
    for row in rows {
        let _ = writeln!(text, "| {} |", row.join(" | "));
    }
    text.push('\n');
}

fn list(text: &mut String, heading: &str, items: &[String]) {
    let _ = write!(text, "## {heading}\n\n");
    for item in items {
        let _ = writeln!(text, "- {item}");
    }
    text.push('\n');
}

fn optional(value: Option<f64>, show: impl Fn(f64) -> String) -> String {
    value.map_or(NONE.to_owned(), show)
}

/// The circuit in words, for who has nothing but the sheet.
fn circuit(text: &mut String, sheet: &Sheet) {
    let design = &sheet.evaluation.design;
    let _ = write!(
        text,
        "## Circuit\n\nEach leg: {} driver stages swinging over {} drive the gates of N (to ground) and P (to the supply){}. \
         Both are off for {:.2} % of a period ({}) at each transition. Their common drain feeds the series capacitor, its \
         bottom plate on the drain, then the spiral, then the antenna of {}",
        design.stages,
        format(sheet.swing_v, "V"),
        if sheet.stack == 2 {
            ", each under a cascode of the same width with its gate at half the supply"
        } else {
            ""
        },
        100.0 * design.dead_time,
        format(design.dead_time / sheet.frequency_hz, "s"),
        format(sheet.antenna_resistance_ohm, "ohm"),
    );
    if sheet.legs == 2 {
        text.push_str(", whose other side the second leg feeds half a period later");
    }
    if sheet.network == Network::LowPass {
        text.push_str("; the shunt capacitor lies across the antenna");
    }
    let _ = write!(
        text,
        ". Behind the antenna's port {} dB are lost.\n\n",
        sheet.antenna_loss_db
    );
}

fn limits(text: &mut String, sheet: &Sheet) {
    if sheet.limits.is_empty() {
        return;
    }
    text.push_str("## Limits of the study\n\n");
    let rows: Vec<Vec<String>> = sheet
        .limits
        .iter()
        .map(|l| {
            let show = |v| shown(&l.figure, v);
            vec![
                named(&l.figure),
                optional(l.at_least, show),
                optional(l.at_most, show),
                optional(l.drawn, show),
                if l.kept { "yes" } else { "**no**" }.into(),
            ]
        })
        .collect();
    table(
        text,
        &["figure", "at least", "at most", "drawn", "kept"],
        &rows,
    );
}

fn headline(text: &mut String, sheet: &Sheet) {
    let _ = write!(
        text,
        "## Headline figures\n\nSnapped to a grid of {} and evaluated again exactly as drawn; limits {}.\n\n",
        format(sheet.rules.grid_m, "m"),
        if sheet.evaluation.feasible {
            "kept"
        } else {
            "broken (see the cautions)"
        },
    );
    let rows: Vec<Vec<String>> = sheet
        .changes
        .iter()
        .filter(|c| c.searched.is_some() || c.drawn.is_some())
        .map(|c| {
            let show = |v| shown(&c.figure, v);
            vec![
                named(&c.figure),
                optional(c.searched, show),
                optional(c.drawn, show),
                moved(c),
            ]
        })
        .collect();
    table(text, &["figure", "searched", "drawn", "change"], &rows);
}

fn device(name: String, d: &DrawnDevice) -> Vec<String> {
    let f = &d.fingers;
    vec![
        name,
        micrometres(f.width_m),
        micrometres(f.finger_m),
        f.fingers.to_string(),
        f.devices.to_string(),
        format(d.figures.gate_capacitance_f, "F"),
        format(d.figures.drain_capacitance_f, "F"),
        format(d.figures.on_resistance_ohm, "ohm"),
    ]
}

fn devices(text: &mut String, sheet: &Sheet) {
    text.push_str(
        "## Transistors and drivers of a leg\n\nW = finger × fingers × devices. Gates are what the driver charges over \
         its swing, drains what a device puts on its output; on-resistances are those at no current, routes left out (the headline's are at the \
         current that flows, routes counted).\n\n",
    );
    let headings = [
        "device",
        "W",
        "finger",
        "fingers",
        "devices",
        "gate",
        "drain",
        "on-resistance",
    ];
    let each = if sheet.stack == 1 {
        "switch"
    } else {
        "switch and cascode, each"
    };
    let mut rows = vec![
        device(format!("NMOS {each}"), &sheet.switches.nmos),
        device(format!("PMOS {each}"), &sheet.switches.pmos),
    ];
    for (i, stage) in sheet.drivers.iter().enumerate() {
        rows.push(device(format!("driver {} NMOS", i + 1), &stage.nmos));
        rows.push(device(format!("driver {} PMOS", i + 1), &stage.pmos));
    }
    table(text, &headings, &rows);
    let strips = [("NMOS", &sheet.strips.nmos), ("PMOS", &sheet.strips.pmos)];
    let rows: Vec<Vec<String>> = strips
        .iter()
        .map(|(name, s)| {
            vec![
                (*name).into(),
                format(s.rms_a, "A"),
                format(s.needed_m, "m"),
                format(s.drawn_m, "m"),
                format(s.resistance_ohm, "ohm"),
                format(sheet.routing_resistance_ohm, "ohm"),
            ]
        })
        .collect();
    let headings = [
        "finger metal",
        "RMS a strip",
        "needs",
        "has",
        "resistance",
        "budgeted R_route",
    ];
    table(text, &headings, &rows);
}

fn current(name: &str, c: &Current) -> Vec<String> {
    // What is zero by the law of charge leaves behind what sampling loses.
    let sampled = 1e-5 * c.rms_a;
    let mean = if c.mean_a.abs() < sampled {
        0.0
    } else {
        c.mean_a
    };
    vec![
        name.into(),
        format(c.rms_a, "A"),
        format(mean, "A"),
        format(c.peak_a, "A"),
        format(c.top_metal_m, "m"),
    ]
}

fn currents(text: &mut String, sheet: &Sheet) {
    let c = &sheet.currents;
    let _ = write!(
        text,
        "## Currents of a leg\n\nTop metal for the larger of mean and RMS at {}.\n\n",
        format_in(sheet.rules.top_current_a_m, "mA/um")
    );
    let mut rows = vec![
        current("supply, through P", &c.supply),
        current("ground, through N", &c.ground),
        current("drain node, P less N", &c.drain),
        current("inductor", &c.inductor),
        current("series capacitor", &c.series_capacitor),
    ];
    if let Some(shunt) = &c.shunt_capacitor {
        rows.push(current("shunt capacitor", shunt));
    }
    rows.push(current("antenna", &c.antenna));
    rows.push(vec![
        "drivers".into(),
        NONE.into(),
        format(c.driver_mean_a, "A"),
        NONE.into(),
        format(c.driver_mean_a / sheet.rules.top_current_a_m, "m"),
    ]);
    table(
        text,
        &["current", "RMS", "mean", "peak", "top metal"],
        &rows,
    );
}

fn capacitor(name: &str, c: &DrawnCapacitor) -> Vec<String> {
    vec![
        name.into(),
        format(c.units.wanted_capacitance_f, "F"),
        format(c.units.capacitance_f, "F"),
        c.units.units.to_string(),
        format(c.unit_area_m2.sqrt(), "m"),
        format(c.bottom_plate_f, "F"),
    ]
}

fn passives(text: &mut String, sheet: &Sheet) {
    match &sheet.spiral {
        Some(s) => {
            text.push_str("## Spiral of a leg\n\n");
            let rows = [
                ("turns", s.turns.to_string()),
                ("trace", micrometres(s.trace_m)),
                ("spacing", micrometres(s.spacing_m)),
                ("outer diameter", micrometres(s.diameter_m)),
                ("inner diameter", micrometres(s.inner_diameter_m)),
                ("keep-out", micrometres(s.keep_out_m)),
                (
                    "trace needed by the current",
                    format(sheet.currents.inductor.top_metal_m, "m"),
                ),
                ("inductance", format(s.inductance_h, "H")),
                ("resistance", format(s.resistance_ohm, "ohm")),
                ("quality", format!("{:.3}", s.quality)),
                (
                    "self-resonance",
                    optional(s.self_resonance_hz, |f| format(f, "Hz")),
                ),
            ];
            let rows: Vec<Vec<String>> = rows.into_iter().map(|(a, b)| vec![a.into(), b]).collect();
            table(text, &["figure", "value"], &rows);
        }
        None => text.push_str("## Inductor\n\nOf fixed quality; its geometry is not known.\n\n"),
    }
    text.push_str("## Capacitors\n\n");
    let mut rows = vec![capacitor("series, of a leg", &sheet.series_capacitor)];
    if let Some(shunt) = &sheet.shunt_capacitor {
        rows.push(capacitor("shunt", shunt));
    }
    let headings = [
        "capacitor",
        "wanted",
        "drawn",
        "units",
        "side of a unit",
        "bottom plate",
    ];
    table(text, &headings, &rows);
    let _ = write!(
        text,
        "The series capacitor wanted is the one that keeps the load angle with spiral and shunt capacitor as drawn. Its \
         bottom plate is on the drain; the search counted it there. Decoupling of the whole stage: {} on {}, for a ripple of \
         {} %.\n\n",
        format(sheet.decoupling.capacitance_f, "F"),
        format_in(sheet.decoupling.area_m2, "mm^2"),
        100.0 * sheet.decoupling.ripple
    );
}

fn voltages(text: &mut String, sheet: &Sheet) {
    text.push_str("## Voltages against ratings\n\n");
    let rows: Vec<Vec<String>> = sheet
        .voltages
        .iter()
        .map(|v| {
            vec![
                v.device.clone(),
                v.between.clone(),
                format(v.highest_v, "V"),
                v.rating_v
                    .map_or("not in the technology".into(), |r| format(r, "V")),
                optional(v.rating_v, |r| format!("{:.1} %", 100.0 * v.highest_v / r)),
            ]
        })
        .collect();
    table(
        text,
        &["device", "between", "highest", "rating", "used"],
        &rows,
    );
}

fn losses(text: &mut String, sheet: &Sheet) {
    let Some(f) = &sheet.evaluation.figures else {
        return;
    };
    text.push_str("## Loss budget, all legs\n\n");
    let row = |name: &str, w: f64| {
        vec![
            name.into(),
            format(w, "W"),
            format!("{:.2} %", 100.0 * w / f.total_power_w),
        ]
    };
    let mut rows: Vec<Vec<String>> = LOSS_NAMES
        .iter()
        .zip(f.losses_w.terms())
        .map(|(name, w)| row(&name.replace('_', " "), w))
        .collect();
    rows.push(row("output power", f.output_power_w));
    rows.push(row("total power", f.total_power_w));
    table(text, &["loss", "power", "of the total"], &rows);
}
