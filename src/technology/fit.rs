//! Whether a study and a technology go together.

use super::read::{TechnologyFile, read};
use super::types::*;
use crate::study::raw::reason;
use crate::study::{
    Fault, FaultKind, Faults, Network, Range, StudyFile, Swing, Warning, WarningKind, nearest,
};

/// Reads the technology that a study names and checks that the two go together.
pub fn read_for(file: &StudyFile) -> Result<TechnologyFile, Faults> {
    let path = &file.study.technology;
    if let Err(error) = crate::study::raw::open(path) {
        let kind = FaultKind::NoTechnology {
            read: file.technology_as_written.clone(),
            path: path.clone(),
            reason: reason(&error),
            nearest: neighbour(path),
        };
        return Err(file.lines.fault("technology", kind).into());
    }
    let mut technology = read(path)?;
    let warnings = fit(file, &technology.technology)?;
    technology.warnings.extend(warnings);
    Ok(technology)
}

/// The file in the same folder whose name is nearest in spelling.
fn neighbour(path: &std::path::Path) -> Option<String> {
    let entries = path.parent()?.read_dir().ok()?.flatten();
    let mut names: Vec<String> = entries
        .filter_map(|entry| entry.file_name().into_string().ok())
        .collect();
    names.sort();
    nearest(
        path.file_name()?.to_str()?,
        names.iter().map(String::as_str),
    )
}

/// Refuses what a study asks and a technology does not give; warns of supplies its devices do not stand.
pub fn fit(file: &StudyFile, technology: &Technology) -> Result<Vec<Warning>, Faults> {
    let mut faults = inductor_faults(file, technology);
    let mut warnings = Vec::new();
    let stage = &file.study.stage;
    match technology.transistors.get(&stage.device) {
        Some(pair) => {
            if let Swing::Voltage(swing) = file.study.driver.swing
                && stage.stack == 1
                && swing > pair.rating_v
            {
                let kind = FaultKind::AboveRating {
                    read: volts(swing),
                    rating: volts(pair.rating_v),
                    device: stage.device.clone(),
                };
                faults.push(file.lines.fault("[driver] swing", kind));
            }
            warnings = supply_warnings(file, pair.rating_v);
        }
        None => {
            let names = || technology.transistors.keys().map(String::as_str);
            let quoted = |name: &str| format!("\"{name}\"");
            let kind = FaultKind::UnknownName {
                read: quoted(&stage.device),
                allowed: names().map(quoted).collect(),
                nearest: nearest(&stage.device, names()).map(|name| quoted(&name)),
            };
            faults.push(file.lines.fault("[stage] device", kind));
        }
    }
    match Faults::new(faults) {
        Some(faults) => Err(faults),
        None => Ok(warnings),
    }
}

fn volts(value: f64) -> String {
    crate::quantity::format(value, "V")
}

fn supply_warnings(file: &StudyFile, rating_v: f64) -> Vec<Warning> {
    let stack = file.study.stage.stack;
    let limit_v = rating_v * f64::from(stack);
    let highest = |range: &Range| match range {
        Range::Fixed(value) => *value,
        Range::Free { to, .. } => *to,
        Range::Grid(values) => values.iter().copied().fold(0.0, f64::max),
    };
    let space = file.study.space.as_ref();
    let supplies = [
        (
            "[space] supply",
            space.map(|space| highest(&space.supply_v)),
        ),
        (
            "[design] supply",
            file.study.design.as_ref().map(|design| design.supply_v),
        ),
    ];
    let above = supplies
        .iter()
        .filter(|(_, supply)| supply.is_some_and(|v| v > limit_v));
    above
        .map(|(key, _)| {
            let kind = WarningKind::AboveSupplyRating {
                limit: volts(limit_v),
                device: file.study.stage.device.clone(),
                stack,
            };
            file.lines.warning(key, kind)
        })
        .collect()
}

/// Whether a variable must be given or must not.
enum Rule {
    Needed(FaultKind),
    NotHere(FaultKind),
}

/// Which variables of the inductor a study must give, and which it must not.
fn inductor_faults(file: &StudyFile, technology: &Technology) -> Vec<Fault> {
    let rules = rules(&technology.inductor, file.study.stage.network);
    let space = file.study.space.as_ref().map(|space| {
        let ranges = [
            &space.turns,
            &space.trace_m,
            &space.diameter_m,
            &space.resistance_ohm,
        ];
        ("[space]", ranges.map(|range| range.is_some()))
    });
    let design = file.study.design.as_ref().map(|design| {
        let given = [
            design.turns.is_some(),
            design.trace_m.is_some(),
            design.diameter_m.is_some(),
            design.resistance_ohm.is_some(),
        ];
        ("[design]", given)
    });
    let mut faults = Vec::new();
    for (section, given) in [space, design].into_iter().flatten() {
        for ((key, rule), given) in rules.iter().zip(given) {
            let kind = match (rule, given) {
                (Rule::Needed(kind), false) | (Rule::NotHere(kind), true) => kind.clone(),
                _ => continue,
            };
            faults.push(file.lines.fault(&format!("{section} {key}"), kind));
        }
    }
    faults
}

fn rules(inductor: &Inductor, network: Network) -> [(&'static str, Rule); 4] {
    let needed = |why, example| Rule::Needed(FaultKind::Needed { why, example });
    let not_here = |why, instead| Rule::NotHere(FaultKind::NotHere { why, instead });
    let geometry = |example| needed("the spirals of this technology need it", example);
    let fixed = || {
        not_here(
            "the inductor of this technology is fixed and has no geometry",
            (network == Network::LowPass).then_some("resistance"),
        )
    };
    match (inductor, network) {
        (Inductor::Spiral(_), network) => [
            ("turns", geometry("turns = 2")),
            (
                "trace",
                match network {
                    Network::LowPass => geometry("trace = \"15 um\""),
                    Network::Direct => not_here(
                        "with network = \"direct\" it is a result: the width that gives the \
                         inductance of loaded_q at these turns and diameter",
                        None,
                    ),
                },
            ),
            ("diameter", geometry("diameter = \"250 um\"")),
            (
                "resistance",
                not_here(
                    "with a spiral it is a result of geometry and loaded_q",
                    None,
                ),
            ),
        ],
        (Inductor::Fixed { .. }, network) => [
            ("turns", fixed()),
            ("trace", fixed()),
            ("diameter", fixed()),
            (
                "resistance",
                match network {
                    Network::LowPass => needed(
                        "the low-pass network with a fixed inductor needs it",
                        "resistance = \"5 ohm\"",
                    ),
                    Network::Direct => not_here(
                        "with network = \"direct\" the load is the antenna itself",
                        None,
                    ),
                },
            ),
        ],
    }
}
