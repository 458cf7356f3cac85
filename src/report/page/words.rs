//! What the report says in words.

use super::variants::Variants;
use crate::quantity::{civil_date, format, format_in};
use crate::run::records::DesignRecord;
use crate::run::summary::headlines;
use serde_json::Value;

/// What can hurt people or break law.
pub const CAUTIONS: [&str; 5] = [
    "Radio-frequency power burns, and exposure to its fields is limited by law: the local safety code decides.",
    "Gates and drains near their rating wear out; oxide stress, hot carriers and start-up are for the foundry's rules.",
    "Electromigration, self-heating and latch-up are for the foundry's rules at the real temperature and lifetime.",
    "Emissions and harmonics are regulated: limits here are a designer's and prove no compliance with spectrum rules.",
    "Layout, test and transmission belong to licensed practice where local law asks for it.",
];

/// What the figures rest on, for this run.
pub fn assumptions(run: &Value) -> Vec<&'static str> {
    let has = |list: &str, single: &str| {
        let listed = run.pointer(&format!("/study/sweep/{list}"));
        let listed = listed.and_then(Value::as_array);
        listed.is_some_and(|l| l.contains(&Value::from(2)))
            || run.pointer(single) == Some(&Value::from(2))
    };
    let coils = [run.pointer("/technology"), run.pointer("/technologies")];
    let has_spiral = coils
        .into_iter()
        .flatten()
        .any(|part| part.to_string().contains("\"model\":\"spiral\""));
    let coil = if has_spiral {
        "Spirals are solved as concentric circles with skin and proximity effect, within 1 % of a finer mesh; their resistance \
         at the carrier is used at the harmonics too."
    } else {
        "The inductor's quality is the technology's one figure, whatever its inductance; its resistance at the carrier is used \
         at the harmonics too."
    };
    let mut lines = vec![
        "A parametric model for early tradeoffs: it does not replace simulation with the foundry's models. Against a full \
         nonlinear simulation of one leg, single devices: output power 0.3 to 1.2 % high, efficiency 0.2 to 2.7 % high with a \
         dead time and 3 to 6 % low without; stacked: output power 1.8 to 2.7 % high, efficiency from 5.5 % low to 0.3 % high.",
        "The loop between legs and antenna is linear and its periodic steady state exact; on-resistances hold at the current \
         that flows, capacitances are charge equivalents over the swing.",
        "Body diodes do not conduct: a drain that would leave their clamps in a dead time breaks a limit.",
        coil,
    ];
    if has("stacks", "/study/stage/stack") {
        lines.push(
            "Cascodes stand at an ideal bias of half the supply; the charge of the nodes between is a lower estimate.",
        );
    }
    if has("legs", "/study/stage/legs") {
        lines.push("Two legs are equal and switch half a period apart: even harmonics vanish.");
    }
    lines.push(
        "No bond wires, package, supply impedance, mismatch, ageing, heating or modulation; no parasitics of wires beyond the \
         routing resistance.",
    );
    lines.push(
        "Each point is first-order optimal to the residual it carries; nothing proves that no better hill exists.",
    );
    lines
}

/// A string of a record; empty where it is missing.
pub fn text(run: &Value, pointer: &str) -> String {
    match run.pointer(pointer) {
        Some(Value::String(s)) => s.clone(),
        Some(Value::Null) | None => String::new(),
        Some(other) => other.to_string(),
    }
}

/// A number of a record.
pub fn number(run: &Value, pointer: &str) -> Option<f64> {
    run.pointer(pointer).and_then(Value::as_f64)
}

/// Units as they are printed, not as they are typed.
pub fn plain(text: &str) -> String {
    text.replace("mm^2", "mm²")
        .replace(" um", " µm")
        .replace("degC", "°C")
        .replace(" ohm", " Ω")
        .replace(" mohm", " mΩ")
        .replace(" kohm", " kΩ")
        .replace(" -", " −")
}

/// A line of the answer.
#[derive(Debug)]
pub struct Line<'a> {
    /// What the design is first in.
    pub what: &'static str,
    /// Its figures.
    pub figures: String,
    /// The design; none when there is none.
    pub id: Option<&'a str>,
}

/// Three lines: the most efficient design, the strongest, the smallest.
pub fn answer<'a>(designs: &'a [DesignRecord], variants: &Variants) -> Vec<Line<'a>> {
    let lines: Vec<Line<'_>> = ["Most efficient", "Most output power", "Smallest"]
        .into_iter()
        .zip(headlines(designs))
        .filter_map(|(what, design)| {
            let design = design?;
            let f = design.evaluation.figures.as_ref()?;
            let sizing = &design.evaluation.design;
            let variant = variants.words(design.cell);
            let figures = plain(&format!(
                ": {:.1} % at {:.1} dBm on {}, with {} supply, loaded Q {:.2}, NMOS {}{}{}",
                100.0 * f.efficiency,
                f.output_power_dbm,
                format_in(f.area_m2, "mm^2"),
                format(sizing.supply_v, "V"),
                sizing.loaded_q,
                micrometres_short(sizing.nmos_width_m),
                variant.map_or(String::new(), |words| format!("; {words}")),
                if design.certified {
                    ""
                } else {
                    "; not certified optimal"
                },
            ));
            Some(Line {
                what,
                figures: unbroken(&figures),
                id: Some(&design.id),
            })
        })
        .collect();
    if lines.is_empty() {
        vec![Line {
            what: "No design meets every limit",
            figures: ": loosen a limit or widen the space.".into(),
            id: None,
        }]
    } else {
        lines
    }
}

/// With units kept on the line of their numbers.
fn unbroken(text: &str) -> String {
    ["%", "dBm", "mm²", "V", "µm", "°C", "MHz", "GHz"]
        .iter()
        .fold(text.to_owned(), |text, unit| {
            text.replace(&format!(" {unit}"), &format!("\u{a0}{unit}"))
        })
}

/// Four digits are plenty in a sentence.
fn micrometres_short(width_m: f64) -> String {
    let short: f64 = format!("{width_m:.3e}").parse().unwrap_or(width_m);
    format_in(short, "um")
}

/// Names and values.
pub type Rows = Vec<(&'static str, String)>;

/// How the search ended.
pub fn ended(run: &Value, designs: &[DesignRecord]) -> Rows {
    let uncertified = designs.iter().filter(|d| !d.certified).count();
    let residual = |name: &str| {
        number(run, &format!("/residuals/{name}")).map_or(String::new(), |r| {
            if r < 0.01 {
                format!("{r:.1e}").replace("e-", "e−")
            } else {
                format!("{r:.2}")
            }
        })
    };
    let rows = vec![
        ("Ended because", text(run, "/ended_because")),
        (
            "Cells",
            format!(
                "{} of {}",
                text(run, "/cells_finished"),
                text(run, "/cells")
            ),
        ),
        ("Part", text(run, "/part")),
        ("Evaluations", grouped(&text(run, "/evaluations"))),
        (
            "Overall front",
            format!("{} designs", text(run, "/front_size")),
        ),
        (
            "Hypervolume",
            number(run, "/hypervolume").map_or(String::new(), |v| {
                format!(
                    "{v:.6} (efficiency × W × mm² under {})",
                    number(run, "/hypervolume_reference/area_m2")
                        .map_or(String::new(), |a| plain(&format_in(a, "mm^2")))
                )
            }),
        ),
        (
            "Certified optimal",
            number(run, "/residuals/points").map_or(String::new(), |points| {
                format!(
                    "{} of {points} points of all cells (residual at most 1e-4)",
                    text(run, "/residuals/certified"),
                )
            }),
        ),
        (
            "Not certified on the front",
            match uncertified {
                0 if designs.is_empty() => String::new(),
                0 => "none".into(),
                n => format!("{n}, marked ×"),
            },
        ),
        ("Residual, median", residual("median")),
        ("Residual, 99 of 100 below", residual("percentile_99")),
        ("Residual, worst", residual("worst")),
    ];
    rows.into_iter().filter(|(_, v)| !v.is_empty()).collect()
}

/// A whole number with its thousands set apart.
fn grouped(digits: &str) -> String {
    let mut text = String::new();
    for (k, digit) in digits.chars().enumerate() {
        if k > 0 && (digits.len() - k).is_multiple_of(3) {
            text.push(',');
        }
        text.push(digit);
    }
    text
}

/// Where the figures come from.
pub fn provenance(run: &Value) -> Rows {
    let at = |pointer: &str| number(run, pointer).map_or(String::new(), moment);
    vec![
        ("Program", format!("widefront {}", text(run, "/version"))),
        ("Technology", text(run, "/technology/name")),
        ("Its source", text(run, "/technology/source")),
        ("Study, blake3", text(run, "/study_hash")),
        ("Technology, blake3", text(run, "/technology_hash")),
        ("Seed", text(run, "/seed")),
        (
            "Threads",
            format!(
                "{} on {} cores",
                text(run, "/threads"),
                text(run, "/host_cores")
            ),
        ),
        ("Last sitting began", at("/started_unix_s")),
        ("It ended", at("/ended_unix_s")),
    ]
    .into_iter()
    .filter(|(_, v)| !v.is_empty())
    .collect()
}

/// Seconds since 1970 as a date and time of day.
fn moment(unix_s: f64) -> String {
    let s = unix_s as i64;
    let of_day = s.rem_euclid(86_400);
    format!(
        "{} {:02}:{:02}:{:02} UTC",
        civil_date(s.div_euclid(86_400)),
        of_day / 3600,
        of_day % 3600 / 60,
        of_day % 60
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn law_thousands_are_set_apart_from_the_right() {
        for (digits, text) in [
            ("", ""),
            ("999", "999"),
            ("1000", "1,000"),
            ("1234567", "1,234,567"),
        ] {
            assert_eq!(grouped(digits), text);
        }
    }

    #[test]
    fn law_moments_are_dates_and_times_of_day() {
        assert_eq!(moment(0.0), "1970-01-01 00:00:00 UTC");
        assert_eq!(moment(1_796_127_533.0), "2026-12-01 12:18:53 UTC");
    }
}
