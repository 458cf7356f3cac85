//! `widefront fit`: a technology's transistors from tables.

use super::{Failure, print, tell};
use crate::fit::residual::{GATE, JUNCTION, ON, Residual};
use crate::fit::{self, Existing, FitError, FittedPair, Options, PerDevice};
use crate::quantity::{Dimension, civil_date};
use crate::report::figures::{self, DeviceFit, MeasuredPoint, Series};
use clap::Args;
use std::io::Write;
use std::path::{Path, PathBuf};

/// What `fit` takes.
#[derive(Debug, Args)]
pub(crate) struct FitArguments {
    /// CSV tables: transfer, output, off, gate capacitance, junction capacitance; any subset, in any order.
    #[arg(required = true)]
    tables: Vec<PathBuf>,
    /// The technology file to write or to merge into.
    #[arg(long, value_name = "FILE")]
    into: PathBuf,
    /// Highest gate and drain voltage, of all pairs or one: 1.32V, io=3.63V. May be repeated, as may those below.
    #[arg(long, value_name = "[PAIR=]VOLTAGE")]
    rating: Vec<String>,
    /// Swing that the gate's capacitance is averaged over; the rating less ten percent unless given.
    #[arg(long, value_name = "[PAIR=]VOLTAGE")]
    nominal: Vec<String>,
    /// Lowest gate voltage fitted; two thirds of the nominal swing unless given.
    #[arg(long, value_name = "[PAIR=]VOLTAGE")]
    from: Vec<String>,
    /// Forward voltage of the body diodes; 0.6 V unless given.
    #[arg(long, value_name = "[PAIR=]VOLTAGE")]
    clamp: Vec<String>,
    /// Gate length to fit: 130nm, io.nmos=500nm; unless given the one measured at most temperatures, then the shortest.
    #[arg(long, value_name = "[PAIR[.POLARITY]=]LENGTH")]
    length: Vec<String>,
    /// Drain diffusion an edge of gate; 0.19 um, a drain shared by two fingers, unless given.
    #[arg(long, value_name = "[PAIR=]LENGTH")]
    drain_length: Vec<String>,
    /// Where the tables are from, for the file's comments.
    #[arg(long)]
    source: Option<String>,
    /// Date for the file's comments, such as 2026-01-31; today (UTC) unless given.
    #[arg(long)]
    date: Option<String>,
    /// Write every measured point against the model to this CSV file.
    #[arg(long, value_name = "FILE")]
    residuals: Option<PathBuf>,
    /// Draw every device, measured points against the model, into this folder.
    #[arg(long, value_name = "DIR")]
    figures: Option<PathBuf>,
}

impl From<FitError> for Failure {
    fn from(error: FitError) -> Self {
        match error {
            FitError::NoMinimum { .. } => Failure::Run(error.to_string()),
            _ => Failure::Input(error.to_string()),
        }
    }
}

/// Reads the tables, fits, writes the file, reports.
pub(crate) fn run(arguments: &FitArguments) -> Result<(), Failure> {
    let options = options(arguments)?;
    let into = &arguments.into;
    let existing = match into.try_exists() {
        Ok(false) => Existing::default(),
        _ => Existing::parse(&crate::study::raw::load(into)?, into)?,
    };
    let tables = fit::read(&arguments.tables)?;
    let pairs = fit::fit(&tables, &options, &existing)?;
    let name = into
        .file_stem()
        .map_or_else(String::new, |stem| stem.to_string_lossy().into_owned());
    let text = fit::merge(&existing, &pairs, &tables, &options, &name)?;
    write(into, &text)?;
    if let Some(path) = &arguments.residuals {
        write(path, &fit::residuals_csv(&pairs, &tables))?;
    }
    if let Some(folder) = &arguments.figures {
        draw(folder, &pairs)?;
    }
    for pair in &pairs {
        for device in &pair.devices {
            for warning in &device.warnings {
                tell(&format!(
                    "warning: {} {}: {warning}",
                    pair.name,
                    device.polarity.name()
                ));
            }
        }
    }
    let missing: Vec<&str> = ["inductor", "capacitor", "layout"]
        .into_iter()
        .filter(|section| {
            !text
                .lines()
                .any(|line| line.trim_start().starts_with(&format!("[{section}]")))
        })
        .collect();
    if !missing.is_empty() {
        let sections: Vec<String> = missing
            .iter()
            .map(|section| format!("[{section}]"))
            .collect();
        tell(&format!(
            "warning: {}: the transistors are complete; a study needs {} too",
            into.display(),
            sections.join(", ")
        ));
    }
    print(&fit::report(&pairs))
}

/// A figure a device.
fn draw(folder: &Path, pairs: &[FittedPair]) -> Result<(), Failure> {
    std::fs::create_dir_all(folder)
        .map_err(|error| Failure::Run(format!("{}: {error}", folder.display())))?;
    for pair in pairs {
        for device in &pair.devices {
            let polarity = device.polarity.name();
            let figure = DeviceFit {
                title: format!("{} {polarity}: points measured, lines the model", pair.name),
                on_resistance: series(&device.residuals, ON, |r| {
                    format!("{:.0} °C", r.temperature_k - 273.15)
                }),
                capacitance: [(GATE, "gate"), (JUNCTION, "junction")]
                    .into_iter()
                    .flat_map(|(quantity, name)| {
                        series(&device.residuals, quantity, |_| name.into())
                    })
                    .map(relative)
                    .enumerate()
                    .map(|(slot, series)| Series {
                        // Structures of several shapes follow each other.
                        name: format!("{} {}", series.name, slot + 1),
                        ..series
                    })
                    .collect(),
            };
            let nothing = figure.on_resistance.is_empty() && figure.capacitance.is_empty();
            if !nothing {
                figures::write_fit(folder, &format!("{}-{polarity}", pair.name), &figure)
                    .map_err(|error| Failure::Run(error.to_string()))?;
            }
        }
    }
    Ok(())
}

/// Residuals of one quantity cut where the voltage falls back: a series a temperature or structure. Resistances in Ω·µm.
fn series(
    residuals: &[Residual],
    quantity: &str,
    name: impl Fn(&Residual) -> String,
) -> Vec<Series> {
    let unit = if quantity == ON { 1e6 } else { 1.0 };
    let mut list: Vec<Series> = Vec::new();
    for r in residuals.iter().filter(|r| r.quantity == quantity) {
        let point = MeasuredPoint {
            voltage_v: r.voltage_v,
            measured: unit * r.measured,
            model: unit * r.model,
        };
        let name = name(r);
        match list.last_mut() {
            Some(last)
                if last.name == name
                    && last
                        .points
                        .last()
                        .is_some_and(|p| p.voltage_v < r.voltage_v) =>
            {
                last.points.push(point);
            }
            _ => list.push(Series {
                name,
                points: vec![point],
            }),
        }
    }
    list
}

/// A series over its first measured value.
fn relative(mut series: Series) -> Series {
    let first = series.points.first().map_or(1.0, |p| p.measured);
    for p in &mut series.points {
        p.measured /= first;
        p.model /= first;
    }
    series
}

fn options(arguments: &FitArguments) -> Result<Options, Failure> {
    let parse = |option: &str, texts: &[String], dimension| {
        PerDevice::parse(texts, dimension)
            .map_err(|message| Failure::Input(format!("--{option} {message}")))
    };
    let date = match &arguments.date {
        Some(date) => dated(date)?,
        None => today()?,
    };
    Ok(Options {
        rating_v: parse("rating", &arguments.rating, Dimension::Voltage)?,
        nominal_v: parse("nominal", &arguments.nominal, Dimension::Voltage)?,
        from_v: parse("from", &arguments.from, Dimension::Voltage)?,
        clamp_v: parse("clamp", &arguments.clamp, Dimension::Voltage)?,
        length_m: parse("length", &arguments.length, Dimension::Length)?,
        drain_length_m: parse("drain-length", &arguments.drain_length, Dimension::Length)?,
        source: arguments.source.clone(),
        date,
    })
}

fn dated(text: &str) -> Result<String, Failure> {
    let parts: Vec<&str> = text.split('-').collect();
    let digits =
        |part: &str, count| part.len() == count && part.bytes().all(|b| b.is_ascii_digit());
    let in_range = |part: &str, most: u32| part.parse().is_ok_and(|n: u32| (1..=most).contains(&n));
    match parts[..] {
        [year, month, day]
            if digits(year, 4)
                && digits(month, 2)
                && digits(day, 2)
                && in_range(month, 12)
                && in_range(day, 31) =>
        {
            Ok(text.to_owned())
        }
        _ => Err(Failure::Input(format!(
            "--date: read {text:?}, allowed a date such as 2026-01-31"
        ))),
    }
}

fn today() -> Result<String, Failure> {
    let since = std::time::SystemTime::now().duration_since(std::time::UNIX_EPOCH);
    let since =
        since.map_err(|error| Failure::Run(format!("the clock: {error}\n  help: give --date")))?;
    Ok(civil_date((since.as_secs() / 86_400) as i64))
}

/// Writes a file whole or not at all.
fn write(path: &Path, text: &str) -> Result<(), Failure> {
    let attempt = || -> std::io::Result<()> {
        let mut file = atomic_write_file::AtomicWriteFile::open(path)?;
        file.write_all(text.as_bytes())?;
        file.commit()
    };
    attempt()
        .map_err(|error| Failure::Run(format!("{}: cannot be written: {error}", path.display())))
}

/// Figures of merit of a technology file.
pub(crate) fn merits(
    path: &Path,
    text: &str,
    current: &str,
    frequency: &str,
) -> Result<(), Failure> {
    let parse = |option: &str, text: &str, dimension| {
        let value = crate::quantity::Quantity::parse(text, dimension);
        let value = value.map_err(|error| Failure::Input(format!("--{option} {text}: {error}")))?;
        if value > 0.0 {
            Ok(value)
        } else {
            Err(Failure::Input(format!(
                "--{option}: read {text}, allowed above 0"
            )))
        }
    };
    let current_a = parse("current", current, Dimension::Current)?;
    let frequency_hz = parse("frequency", frequency, Dimension::Frequency)?;
    let file = crate::technology::read_str(text, path)?;
    for warning in &file.warnings {
        tell(&warning.to_string());
    }
    print(&fit::merits(&file.technology, current_a, frequency_hz))
}
