//! Assumptions, cautions, and what others must check.

use super::names::named;
use super::records::Sheet;
use crate::quantity::{format, format_in};

/// Overdrive use past which a device leaves the triode region at the peak.
const MOST_OVERDRIVE_USE: f64 = 0.3;

/// Figures whose change by snapping is worth a word when it is more than [`NOTABLE`]; what the drawn parts merely
/// trade among themselves (load angle, loaded Q, capacitors) is not.
const TOLD: [&str; 4] = ["output_power_w", "efficiency", "total_power_w", "area_m2"];

/// One part in a hundred.
const NOTABLE: f64 = 0.01;

/// What the figures rest on.
pub fn assumptions(sheet: &Sheet, fixed_inductor: bool) -> Vec<String> {
    let mut list = vec![
        "The loop between legs and antenna is linear; its periodic steady state is exact. On-resistances hold at the \
         current that flows, capacitances are charge equivalents over the swing."
            .to_owned(),
        format!(
            "Currents are those of the output stage in steady state at full drive, crowbar and leakage left out. Metal \
             widths take the larger of mean and RMS against the technology's limits, stated for {}.",
            format_in(sheet.rules.current_temperature_k, "degC")
        ),
        "Peaks of supply and ground are those of linear switches that take over a charged drain; a real device saturates \
         and carries less for longer, the charge and the mean stay."
            .to_owned(),
        format!(
            "The drain strips and source strips along the fingers are {} wide, fed at one end, current gathering evenly; \
             neighbouring fingers share them. Their resistance has to fit in the routing resistance of {} a leg.",
            format(sheet.rules.finger_metal_width_m, "m"),
            format(sheet.routing_resistance_ohm, "ohm")
        ),
        "The drawing is to scale in area: each block takes the area that the search counted for it. Where blocks stand is \
         a proposal."
            .to_owned(),
        "No bond wires, package, supply impedance, mismatch or ageing; no parasitics of wires beyond the routing \
         resistance."
            .to_owned(),
    ];
    list.push(if fixed_inductor {
        "The inductor is a fixed quality with an area law; its geometry is not known.".to_owned()
    } else {
        "The spiral is solved as concentric circles with the far end grounded; leads, underpass resistance and the \
         bridge between turns are not in it."
            .to_owned()
    });
    if sheet.stack == 2 {
        list.push(
            "Cascode gates are held ideally at half the supply; the mid nodes stop a threshold short of it.".to_owned(),
        );
    }
    list
}

/// What is wrong or close with this design.
pub fn cautions(sheet: &Sheet) -> Vec<String> {
    let mut list = Vec::new();
    for limit in &sheet.evaluation.broken_limits {
        list.push(format!(
            "As drawn the limit {} is broken; search with a little reserve, or pick a design that does not stand on it.",
            limit.name()
        ));
    }
    for voltage in sheet.voltages.iter().filter(|v| v.exceeds()) {
        list.push(format!(
            "{}, {}: {} is above the rating of {}.",
            voltage.device,
            voltage.between,
            format(voltage.highest_v, "V"),
            voltage.rating_v.map_or(String::new(), |r| format(r, "V"))
        ));
    }
    let sides = [
        ("NMOS", &sheet.switches.nmos.fingers, &sheet.strips.nmos),
        ("PMOS", &sheet.switches.pmos.fingers, &sheet.strips.pmos),
    ];
    for (name, fingers, strip) in sides {
        if strip.needed_m > strip.drawn_m {
            list.push(format!(
                "{name} strips need {} of metal for their current and have {}: even fingers of {} are too wide; stack \
                 more metal.",
                format(strip.needed_m, "m"),
                format(strip.drawn_m, "m"),
                format(fingers.finger_m, "m"),
            ));
        }
        if strip.resistance_ohm > sheet.routing_resistance_ohm {
            list.push(format!(
                "{name} finger metal has {} alone, more than the {} that the search counted for all of the route.",
                format(strip.resistance_ohm, "ohm"),
                format(sheet.routing_resistance_ohm, "ohm"),
            ));
        }
    }
    if let Some(spiral) = &sheet.spiral
        && sheet.currents.inductor.top_metal_m > spiral.trace_m
    {
        list.push(format!(
            "The spiral's trace of {} is too narrow for its current: {} needed.",
            format(spiral.trace_m, "m"),
            format(sheet.currents.inductor.top_metal_m, "m")
        ));
    }
    if sheet.temperature_k > sheet.rules.current_temperature_k {
        list.push(format!(
            "The junction is at {}, hotter than the {} that the current limits hold for: they are lower here.",
            format_in(sheet.temperature_k, "degC"),
            format_in(sheet.rules.current_temperature_k, "degC")
        ));
    }
    if let Some(f) = &sheet.evaluation.figures {
        for (name, used) in [("NMOS", f.overdrive_use_n), ("PMOS", f.overdrive_use_p)] {
            if used > MOST_OVERDRIVE_USE {
                list.push(format!(
                    "{name} overdrive use is {used:.3}: past {MOST_OVERDRIVE_USE} the device leaves the triode region \
                     at the peak."
                ));
            }
        }
    }
    let told = |figure: &str| TOLD.contains(&figure);
    for change in sheet.changes.iter().filter(|c| told(&c.figure)) {
        if let (Some(a), Some(b)) = (change.searched, change.drawn)
            && (b - a).abs() > NOTABLE * a.abs()
        {
            list.push(format!(
                "Snapping moved {} by {:+.2} %.",
                named(&change.figure),
                100.0 * (b - a) / a.abs()
            ));
        }
    }
    list
}

/// What the foundry's rules or licensed practice must decide.
pub fn to_be_checked() -> Vec<String> {
    [
        "Every width, spacing, density, antenna-rule and latch-up figure against the foundry's rules; the drawing rules \
         here are only those named in the technology file.",
        "Electromigration and self-heating with the foundry's own limits for mean, RMS and peak current, vias and contacts \
         included, at the real junction temperature and lifetime.",
        "Gate-oxide and drain stress of the waveforms, start-up and mismatched antenna included; ratings of the capacitors \
         against the voltages above.",
        "Extracted simulation with the foundry's models over process, supply and temperature.",
        "The spiral with a field solver, leads and neighbouring metal in it.",
        "Electrostatic discharge protection of every pad; what it adds to the antenna's node.",
        "RF burns and exposure near the antenna and its feed, on the bench too, by the local safety code.",
        "Emissions, harmonics and the right to transmit by the local spectrum rules and licensed radio practice: the \
         figures here prove no compliance.",
    ]
    .map(str::to_owned)
    .to_vec()
}
