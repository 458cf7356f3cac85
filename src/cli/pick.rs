//! `widefront pick`: the designs of a run that meet a specification.

use super::{Failure, print};
use crate::pick::{Catalogue, Condition, Figure, PickError, binding};
use crate::run::folder::{read_all_fronts, read_front, read_run};
use crate::run::records::{DesignList, DesignRecord};
use crate::study::{Listed, Sweep};
use serde_json::Value;
use std::fmt::Write;
use std::path::PathBuf;

#[derive(Debug, clap::Args)]
pub struct PickArguments {
    /// The run folder.
    run: PathBuf,
    /// Keep designs with at least this: output_power=20dBm, efficiency=0.4. May be repeated.
    #[arg(long, value_name = "KEY=VALUE")]
    at_least: Vec<String>,
    /// Keep designs with at most this: area=0.4mm2, third_harmonic=-35dBc. May be repeated.
    #[arg(long, value_name = "KEY=VALUE")]
    at_most: Vec<String>,
    /// Order by this figure, the better first; further keys order what is equal [default: efficiency].
    #[arg(long, value_name = "KEY")]
    best: Vec<String>,
    /// Look at the fronts of all cells, not at the overall front alone.
    #[arg(long)]
    all: bool,
    /// Print one JSON object and nothing else.
    #[arg(long)]
    json: bool,
}

impl From<PickError> for Failure {
    fn from(error: PickError) -> Self {
        match error {
            PickError::NoDesigns => Self::Run(error.to_string()),
            _ => Self::Input(error.to_string()),
        }
    }
}

/// Picks and prints.
pub fn run(arguments: &PickArguments) -> Result<(), Failure> {
    let run = read_run(&arguments.run)?;
    let table = Table::new(&run["study"]);
    let list = if arguments.all {
        read_all_fronts(&arguments.run)?
    } else {
        read_front(&arguments.run)?
    };
    let catalogue = Catalogue::new(list.designs)?;
    let at_least = arguments
        .at_least
        .iter()
        .map(|t| catalogue.condition(t, true));
    let at_most = arguments
        .at_most
        .iter()
        .map(|t| catalogue.condition(t, false));
    let conditions: Vec<Condition> = at_least.chain(at_most).collect::<Result<_, _>>()?;
    let efficiency = ["efficiency".to_owned()];
    let keys = if arguments.best.is_empty() {
        &efficiency[..]
    } else {
        &arguments.best
    };
    let best: Vec<Figure> = keys
        .iter()
        .map(|key| catalogue.figure(key).cloned())
        .collect::<Result<_, _>>()?;
    let found = catalogue.pick(&conditions, &best);
    if found.is_empty() {
        return Err(Failure::Run(nothing(&catalogue, &conditions, &table)));
    }
    if arguments.json {
        let list = DesignList {
            designs: found.into_iter().cloned().collect(),
        };
        let text = serde_json::to_string_pretty(&list)
            .map_err(|e| Failure::Run(format!("writing JSON: {e}")))?;
        return print(&format!("{text}\n"));
    }
    let mut text = table.header();
    for design in found {
        table.row(&mut text, design);
    }
    print(&text)
}

/// How designs are printed: in a sweep with what tells their variants apart.
struct Table<'a> {
    study: &'a Value,
    listed: Vec<Listed>,
}

impl<'a> Table<'a> {
    fn new(study: &'a Value) -> Self {
        // A record without lists, or with none that can be read, has nothing to tell apart.
        let sweep: Option<Sweep> = serde_json::from_value(study["sweep"].clone()).ok();
        Self {
            study,
            listed: sweep.map_or(Vec::new(), |s| s.listed()),
        }
    }

    fn header(&self) -> String {
        let end = if self.listed.is_empty() {
            "limits that bind"
        } else {
            "variant; limits that bind"
        };
        format!(
            "{:<10} {:>7} {:>6} {:>7} {:>7} {:>7} {:>6} {:>6} {:>7}  {end}\n",
            "design", "supply", "Q_L", "W_n", "W_p", "R_opt", "eff", "power", "area",
        ) + &format!(
            "{:<10} {:>7} {:>6} {:>7} {:>7} {:>7} {:>6} {:>6} {:>7}\n",
            "", "V", "", "um", "um", "ohm", "%", "dBm", "mm^2"
        )
    }

    fn row(&self, text: &mut String, design: &DesignRecord) {
        let Some(f) = &design.evaluation.figures else {
            return;
        };
        let d = &design.evaluation.design;
        let limits = binding(self.study, design).join(" ");
        let end = match &design.variant {
            Some(label) if !self.listed.is_empty() => {
                format!("{}; {limits}", label.told(&self.listed))
            }
            _ => limits,
        };
        let line = format!(
            "{:<10} {:>7.3} {:>6.3} {:>7.1} {:>7.1} {:>7.3} {:>6.2} {:>6.2} {:>7.4}  {end}",
            design.id,
            d.supply_v,
            d.loaded_q,
            d.nmos_width_m * 1e6,
            d.nmos_width_m * d.width_ratio * 1e6,
            f.optimum_resistance_ohm,
            100.0 * f.efficiency,
            f.output_power_dbm,
            f.area_m2 * 1e6,
        );
        // Writing to a String cannot fail.
        let _ = writeln!(text, "{}", line.trim_end());
    }
}

/// Why nothing fits, and what comes nearest.
fn nothing(catalogue: &Catalogue, conditions: &[Condition], table: &Table<'_>) -> String {
    const NEAREST: usize = 3;
    let mut text = "no design looked at meets all conditions\n".to_owned();
    let percent = |x: f64| format!("{:.2} %", 100.0 * x);
    let alone = catalogue.least_shortfalls(conditions);
    for (condition, lack) in conditions.iter().zip(alone) {
        let side = if condition.at_least {
            "at least"
        } else {
            "at most"
        };
        let verdict = if lack > 0.0 {
            format!("the best design misses it by {}", percent(lack))
        } else {
            "met by some design, not together with the others".into()
        };
        let bound = match condition.figure.dimension {
            Some(dimension) => dimension.show(condition.bound),
            None => condition.bound.to_string(),
        };
        let _ = writeln!(text, "  {} {side} {bound}: {verdict}", condition.figure.key);
    }
    let _ = writeln!(text, "  nearest designs:");
    for line in table.header().lines() {
        let _ = writeln!(text, "  {line}");
    }
    for (design, lacks) in catalogue.nearest_designs(conditions, NEAREST) {
        let mut line = String::new();
        table.row(&mut line, design);
        let lacks: Vec<String> = conditions
            .iter()
            .zip(lacks)
            .filter(|(_, lack)| *lack > 0.0)
            .map(|(c, lack)| format!("{} by {}", c.figure.key, percent(lack)))
            .collect();
        let _ = writeln!(text, "  {} misses {}", line.trim_end(), lacks.join(", "));
    }
    text
}
