//! A study file to a [`Study`]: every key typed, ranged and explained.

use super::diagnostics::{Fault, Faults, nearest, one_of};
use super::document::{self, Entry, Reader, Span, Table, span};
use super::*;
use crate::quantity::Dimension;
use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

/// A study with where its keys stand.
#[derive(Debug, Clone, PartialEq)]
pub struct StudyFile {
    /// The study.
    pub study: Study,
    /// The file as the user named it.
    pub path: PathBuf,
    /// Line of each key, by `table.key`.
    pub lines: BTreeMap<String, usize>,
}

impl StudyFile {
    /// A fault at a key of this file.
    pub fn fault(&self, table: &str, key: &str, read: String, allowed: String) -> Fault {
        Fault {
            file: self.path.display().to_string(),
            line: self
                .lines
                .get(&format!("{table}.{key}"))
                .or_else(|| self.lines.get(table))
                .copied(),
            key: format!("[{table}] {key}"),
            read,
            allowed,
            help: None,
        }
    }
}

/// One variable of `[space]` and `[design]`.
struct VariableKey {
    key: &'static str,
    dimension: Option<Dimension>,
    span: Span,
    whole: bool,
}

const fn continuous(key: &'static str, dimension: Option<Dimension>, span: Span) -> VariableKey {
    VariableKey {
        key,
        dimension,
        span,
        whole: false,
    }
}

const fn whole(key: &'static str, span: Span) -> VariableKey {
    VariableKey {
        key,
        dimension: None,
        span,
        whole: true,
    }
}

const SUPPLY: VariableKey = continuous(
    "supply",
    Some(Dimension::Voltage),
    span(0.1, 50.0, "0.1 V to 50 V"),
);
const LOADED_Q: VariableKey = continuous("loaded_q", None, span(0.2, 1e6, "0.2 to 1e6"));
const NMOS_WIDTH: VariableKey = continuous(
    "nmos_width",
    Some(Dimension::Length),
    span(1e-7, 1.0, "0.1 um to 1 m"),
);
const WIDTH_RATIO: VariableKey = continuous("width_ratio", None, span(0.05, 20.0, "0.05 to 20"));
const TURNS: VariableKey = whole("turns", span(1.0, 20.0, "1 to 20"));
const TRACE: VariableKey = continuous(
    "trace",
    Some(Dimension::Length),
    span(1e-7, 1e-3, "0.1 um to 1 mm"),
);
const DIAMETER: VariableKey = continuous(
    "diameter",
    Some(Dimension::Length),
    span(1e-6, 2e-2, "1 um to 20 mm"),
);
const RESISTANCE: VariableKey = continuous(
    "resistance",
    Some(Dimension::Resistance),
    span(1e-3, 1e6, "1 mohm to 1 Mohm"),
);
const REACTANCE: VariableKey = continuous("reactance", None, span(0.0, 20.0, "0 to 20"));
const DEAD_TIME: VariableKey =
    continuous("dead_time", None, span(0.0, 0.45, "0 to 0.45 of a period"));
const STAGES: VariableKey = whole("stages", span(1.0, 20.0, "1 to 20"));

/// Keys of `[design]`, in the order of the documentation.
const DESIGN_KEYS: [&VariableKey; 11] = [
    &SUPPLY,
    &LOADED_Q,
    &NMOS_WIDTH,
    &WIDTH_RATIO,
    &TURNS,
    &TRACE,
    &DIAMETER,
    &RESISTANCE,
    &REACTANCE,
    &DEAD_TIME,
    &STAGES,
];

const TEMPERATURE: Span = span(173.15, 523.15, "-100 degC to 250 degC");
const FREQUENCY: Span = span(1e6, 1e12, "1 MHz to 1 THz");
const POSITIVE_RESISTANCE: Span = span(1e-3, 1e6, "1 mohm to 1 Mohm");
const LOSS: Span = span(0.0, 60.0, "0 dB to 60 dB");
const INPUT_CAPACITANCE: Span = span(1e-18, 1e-6, "1 aF to 1 uF");
const DRIVER_RATIO: Span = span(0.05, 20.0, "0.05 to 20");
const CROWBAR: Span = span(0.0, 5.0, "0 to 5");
const SWING: Span = span(0.05, 50.0, "0.05 V to 50 V");
const FRACTION: Span = span(1e-6, 1.0, "above 0 and up to 1");
const HARMONIC: Span = span(-200.0, 0.0, "-200 dBc to 0 dBc");
const POWER: Span = span(1e-12, 1e6, "-90 dBm to 1 MW");
const AREA: Span = span(1e-15, 1.0, "1e-9 mm^2 to 1 m^2");

/// Reads and resolves a study file.
///
/// # Errors
/// Every fault found.
pub fn read(path: &Path) -> Result<StudyFile, Faults> {
    read_str(&document::load(path)?, path)
}

/// As [`read`], from text.
///
/// # Errors
/// Every fault found.
pub fn read_str(text: &str, path: &Path) -> Result<StudyFile, Faults> {
    let reader = Reader::new(path.display().to_string(), text);
    let parsed = reader.parse()?;
    let root = reader.root(&parsed);
    let study = study(&root, path);
    root.refuse_others();
    let lines = reader.finish()?;
    match study {
        Some(study) => Ok(StudyFile {
            study,
            path: path.to_owned(),
            lines,
        }),
        // Every absence is a fault, so `finish` has returned it.
        None => Err(Faults(Vec::new())),
    }
}

/// `schema = 1`.
pub(crate) fn schema(root: &Table<'_, '_>) -> Option<()> {
    root.need("schema", "1, the only schema so far")?
        .whole_exactly(1)
}

fn study(root: &Table<'_, '_>, path: &Path) -> Option<Study> {
    let schema = schema(root);
    let title = root.need("title", "text in quotes").and_then(|e| e.text());
    let technology = root
        .need(
            "technology",
            "the path of a technology file, relative to this one",
        )
        .and_then(|e| e.text());
    let temperature_k = match root.find("temperature") {
        Some(e) => e.quantity(Dimension::Temperature, TEMPERATURE),
        None => Some(300.15),
    };
    let frequency_hz = root.need_table("signal").and_then(|t| {
        let f = t
            .need("frequency", "a frequency, for example \"2.45 GHz\"")?
            .quantity(Dimension::Frequency, FREQUENCY);
        t.refuse_others();
        f
    });
    let antenna = root.need_table("antenna").and_then(|t| {
        let resistance = t
            .need("resistance", "a resistance, for example \"50 ohm\"")
            .and_then(|e| e.quantity(Dimension::Resistance, POSITIVE_RESISTANCE));
        let loss = match t.find("loss") {
            Some(e) => e.quantity(Dimension::Loss, LOSS),
            None => Some(0.0),
        };
        t.refuse_others();
        Some((resistance?, loss?))
    });
    let stage = root.need_table("stage").and_then(|t| stage(&t));
    let driver = root.need_table("driver").and_then(|t| driver(&t));
    let space = match root.table("space") {
        Some(t) => space(&t).map(Some),
        None => Some(None),
    };
    let limits = match root.table("limits") {
        Some(t) => limits(&t),
        None => Some(Limits::default()),
    };
    let search = search(root.table("search").as_ref());
    let design = match root.table("design") {
        Some(t) => design(&t).map(Some),
        None => Some(None),
    };
    schema?;
    let (antenna_resistance_ohm, antenna_loss_db) = antenna?;
    Some(Study {
        title: title?.to_owned(),
        technology: path.parent().unwrap_or(Path::new("")).join(technology?),
        temperature_k: temperature_k?,
        frequency_hz: frequency_hz?,
        antenna_resistance_ohm,
        antenna_loss_db,
        stage: stage?,
        driver: driver?,
        space: space?,
        limits: limits?,
        search: search?,
        design: design?,
    })
}

fn stage(t: &Table<'_, '_>) -> Option<StageChoice> {
    let legs = t
        .need("legs", "1 (single-ended) or 2 (differential)")
        .and_then(|e| e.whole(1, 2));
    let stack = t
        .need("stack", "1, or 2 (switch and cascode)")
        .and_then(|e| e.whole(1, 2));
    let device = t
        .need("device", "the name of a transistor pair of the technology")
        .and_then(|e| e.text());
    let networks = [("direct", Network::Direct), ("low-pass", Network::LowPass)];
    let network = t
        .need("network", "\"direct\" or \"low-pass\"")
        .and_then(|e| e.choice(&networks));
    t.refuse_others();
    Some(StageChoice {
        legs: legs? as u32,
        stack: stack? as u32,
        device: device?.to_owned(),
        network: network?,
    })
}

fn driver(t: &Table<'_, '_>) -> Option<DriverChoice> {
    let input = t
        .need("input_capacitance", "a capacitance, for example \"20 fF\"")
        .and_then(|e| e.quantity(Dimension::Capacitance, INPUT_CAPACITANCE));
    let ratio = t
        .need("ratio", "a number, the chain's PMOS/NMOS width")
        .and_then(|e| e.number(DRIVER_RATIO));
    let crowbar = t
        .need(
            "crowbar",
            "a number, the drivers' own overlap loss as a fraction",
        )
        .and_then(|e| e.number(CROWBAR));
    let swing = t.need("swing", "\"supply\" or a voltage").and_then(|e| {
        if e.is_text("supply") {
            Some(Swing::Supply)
        } else {
            e.quantity(Dimension::Voltage, SWING).map(Swing::Voltage)
        }
    });
    t.refuse_others();
    Some(DriverChoice {
        input_capacitance_f: input?,
        ratio: ratio?,
        crowbar: crowbar?,
        swing: swing?,
    })
}

fn space(t: &Table<'_, '_>) -> Option<Space> {
    let needed = |v: &VariableKey| {
        t.need(
            v.key,
            "a value or a range { from, to } or { from, to, steps }",
        )
        .and_then(|e| range(e, v))
    };
    let optional = |v: &VariableKey| match t.find(v.key) {
        Some(e) => range(e, v).map(Some),
        None => Some(None),
    };
    let supply_v = needed(&SUPPLY);
    let loaded_q = needed(&LOADED_Q);
    let nmos_width_m = needed(&NMOS_WIDTH);
    let width_ratio = needed(&WIDTH_RATIO);
    let turns = optional(&TURNS);
    let trace_m = optional(&TRACE);
    let diameter_m = optional(&DIAMETER);
    let resistance_ohm = optional(&RESISTANCE);
    let reactance = needed(&REACTANCE);
    let dead_time = needed(&DEAD_TIME);
    let stages = needed(&STAGES);
    t.refuse_others();
    Some(Space {
        supply_v: supply_v?,
        loaded_q: loaded_q?,
        nmos_width_m: nmos_width_m?,
        width_ratio: width_ratio?,
        turns: turns?,
        trace_m: trace_m?,
        diameter_m: diameter_m?,
        resistance_ohm: resistance_ohm?,
        reactance: reactance?,
        dead_time: dead_time?,
        stages: stages?,
    })
}

fn value(entry: &Entry<'_, '_>, v: &VariableKey) -> Option<f64> {
    if v.whole {
        entry
            .whole(v.span.low as i64, v.span.high as i64)
            .map(|n| n as f64)
    } else {
        entry.measured(v.dimension, v.span)
    }
}

/// One value, `{ from, to }` or `{ from, to, steps }`.
fn range(entry: Entry<'_, '_>, v: &VariableKey) -> Option<Range> {
    /// More steps than this are no grid anybody reads.
    const MOST_STEPS: i64 = 100_000;
    if !entry.is_table() {
        return value(&entry, v).map(Range::Fixed);
    }
    let line = entry.line();
    let t = entry.table()?;
    let from = t.need("from", "the least value").and_then(|e| value(&e, v));
    let to = t
        .need("to", "the greatest value")
        .and_then(|e| value(&e, v));
    let steps = match t.find("steps") {
        Some(e) => e.whole(2, MOST_STEPS).map(Some),
        None => Some(None),
    };
    t.refuse_others();
    let (from, to, steps) = (from?, to?, steps?);
    if from >= to {
        t.refuse_order(line);
        return None;
    }
    if v.whole {
        let every = (to - from) as i64 + 1;
        let steps = steps.unwrap_or(every);
        if (every - 1) % (steps - 1) != 0 {
            t.refuse_steps(line, steps, every);
            return None;
        }
        return Some(Range::Grid(grid(from, to, steps)));
    }
    Some(match steps {
        Some(steps) => Range::Grid(grid(from, to, steps)),
        None => Range::Free { from, to },
    })
}

/// Evenly spaced values, both ends exact.
fn grid(from: f64, to: f64, steps: i64) -> Vec<f64> {
    (0..steps)
        .map(|i| {
            let last = (steps - 1) as f64;
            (from * (last - i as f64) + to * i as f64) / last
        })
        .collect()
}

fn bounds(t: &Table<'_, '_>, key: &str, dimension: Option<Dimension>, s: Span) -> Option<Bounds> {
    let Some(entry) = t.find(key) else {
        return Some(Bounds::default());
    };
    if !entry.is_table() {
        entry.refuse("{ at_least = … }, { at_most = … } or both", None);
        return None;
    }
    let line = entry.line();
    let t = entry.table()?;
    let side = |key: &str| match t.find(key) {
        Some(e) => e.measured(dimension, s).map(Some),
        None => Some(None),
    };
    let (at_least, at_most) = (side("at_least"), side("at_most"));
    t.refuse_others();
    let bounds = Bounds {
        at_least: at_least?,
        at_most: at_most?,
    };
    if let (Some(low), Some(high)) = (bounds.at_least, bounds.at_most)
        && low >= high
    {
        t.refuse_order(line);
        return None;
    }
    Some(bounds)
}

fn limits(t: &Table<'_, '_>) -> Option<Limits> {
    let plain = |key: &str, dimension: Option<Dimension>, s: Span| match t.find(key) {
        Some(e) => e.measured(dimension, s).map(Some),
        None => Some(None),
    };
    let edge_time = plain("edge_time", None, FRACTION);
    let second = plain("second_harmonic", Some(Dimension::Carrier), HARMONIC);
    let third = plain("third_harmonic", Some(Dimension::Carrier), HARMONIC);
    let overdrive_use = plain("overdrive_use", None, FRACTION);
    let output_power_w = bounds(t, "output_power", Some(Dimension::Power), POWER);
    let area_m2 = bounds(t, "area", Some(Dimension::Area), AREA);
    let efficiency = bounds(t, "efficiency", None, FRACTION);
    t.refuse_others();
    Some(Limits {
        edge_time: edge_time?,
        second_harmonic_dbc: second?,
        third_harmonic_dbc: third?,
        overdrive_use: overdrive_use?,
        output_power_w: output_power_w?,
        area_m2: area_m2?,
        efficiency: efficiency?,
    })
}

fn search(t: Option<&Table<'_, '_>>) -> Option<SearchSettings> {
    let all = [
        ("efficiency", Objective::Efficiency),
        ("output_power", Objective::OutputPower),
        ("area", Objective::Area),
    ];
    let mut settings = SearchSettings {
        objectives: all.iter().map(|c| c.1).collect(),
        seed: 1,
    };
    let Some(t) = t else {
        return Some(settings);
    };
    let mut sound = true;
    if let Some(entry) = t.find("objectives") {
        let mut objectives = Vec::new();
        for item in entry.list() {
            match item.choice(&all) {
                Some(o) if objectives.contains(&o) => {
                    item.refuse("each objective once", None);
                    sound = false;
                }
                Some(o) => objectives.push(o),
                None => sound = false,
            }
        }
        if objectives.is_empty() && sound {
            entry.refuse("one to three objectives", None);
            sound = false;
        }
        settings.objectives = objectives;
    }
    if let Some(entry) = t.find("seed") {
        match entry.whole(0, i64::MAX) {
            Some(seed) => settings.seed = seed as u64,
            None => sound = false,
        }
    }
    t.refuse_others();
    sound.then_some(settings)
}

fn design(t: &Table<'_, '_>) -> Option<Design> {
    let needed = |v: &VariableKey| t.need(v.key, v.span.text).and_then(|e| value(&e, v));
    let optional = |v: &VariableKey| match t.find(v.key) {
        Some(e) => value(&e, v).map(Some),
        None => Some(None),
    };
    let supply_v = needed(&SUPPLY);
    let loaded_q = needed(&LOADED_Q);
    let nmos_width_m = needed(&NMOS_WIDTH);
    let width_ratio = needed(&WIDTH_RATIO);
    let turns = optional(&TURNS);
    let trace_m = optional(&TRACE);
    let diameter_m = optional(&DIAMETER);
    let resistance_ohm = optional(&RESISTANCE);
    let reactance = needed(&REACTANCE);
    let dead_time = needed(&DEAD_TIME);
    let stages = needed(&STAGES);
    t.refuse_others();
    Some(Design {
        supply_v: supply_v?,
        loaded_q: loaded_q?,
        nmos_width_m: nmos_width_m?,
        width_ratio: width_ratio?,
        turns: turns?.map(|v| v as u32),
        trace_m: trace_m?,
        diameter_m: diameter_m?,
        resistance_ohm: resistance_ohm?,
        reactance: reactance?,
        dead_time: dead_time?,
        stages: stages? as u32,
    })
}

/// Changes one value of `[design]` by `KEY=VALUE`, the value as the file would hold it, quotes not needed.
///
/// # Errors
/// A fault that names the key or the value.
pub fn set_design(file: &mut StudyFile, assignment: &str) -> Result<(), Faults> {
    let fault = |key: &str, read: String, allowed: String, help| {
        Faults::from(Fault {
            file: "--set".into(),
            line: None,
            key: key.into(),
            read,
            allowed,
            help,
        })
    };
    let keys = || DESIGN_KEYS.iter().map(|v| v.key);
    let Some((key, text)) = assignment.split_once('=') else {
        return Err(fault(
            "",
            format!("{assignment:?}"),
            "KEY=VALUE, for example supply=1.0V".into(),
            None,
        ));
    };
    let (key, text) = (key.trim(), text.trim().trim_matches('"'));
    let Some(variable) = DESIGN_KEYS.iter().find(|v| v.key == key) else {
        return Err(fault(
            "",
            format!("the unknown key {key:?}"),
            one_of(keys()),
            nearest(key, keys()),
        ));
    };
    let Some(design) = &mut file.study.design else {
        return Err(fault(
            key,
            "a study without [design]".into(),
            "a study with [design]".into(),
            Some(format!("add [design] to {}", file.path.display())),
        ));
    };
    let literal = match variable.dimension {
        Some(_) => format!("{text:?}"),
        None => text.to_owned(),
    };
    let toml = format!("{key} = {literal}\n");
    let reader = Reader::new("--set".into(), &toml);
    let parsed = reader
        .parse()
        .map_err(|_| fault(key, format!("{text:?}"), variable.span.text.into(), None))?;
    let found = reader
        .root(&parsed)
        .find(key)
        .and_then(|e| value(&e, variable));
    reader.finish().map_err(|mut faults| {
        faults.0.iter_mut().for_each(|f| f.line = None);
        faults
    })?;
    let Some(v) = found else {
        return Err(fault(
            key,
            format!("{text:?}"),
            variable.span.text.into(),
            None,
        ));
    };
    match key {
        "supply" => design.supply_v = v,
        "loaded_q" => design.loaded_q = v,
        "nmos_width" => design.nmos_width_m = v,
        "width_ratio" => design.width_ratio = v,
        "turns" => design.turns = Some(v as u32),
        "trace" => design.trace_m = Some(v),
        "diameter" => design.diameter_m = Some(v),
        "resistance" => design.resistance_ohm = Some(v),
        "reactance" => design.reactance = v,
        "dead_time" => design.dead_time = v,
        _ => design.stages = v as u32,
    }
    Ok(())
}
