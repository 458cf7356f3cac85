//! Tables of measured or simulated curves, from CSV to SI rows.

use super::header::{self, Column, Field};
use super::source;
use crate::quantity::excerpt;
use crate::study::{Fault, FaultKind, Faults, Origin};
use std::fs::File;
use std::path::{Path, PathBuf};

/// Faults of one table that are told; the rest is likely the same again.
const MOST_FAULTS: usize = 8;
/// Rows of all tables together; a curve tracer gives some thousands.
const MOST_ROWS: usize = 5_000_000;

/// Transistor pairs of all tables together.
const MOST_DEVICES: usize = 100;

/// What a table holds.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Kind {
    /// Drain current over gate and drain voltage: transfer and output curves.
    Current,
    /// Drain current at V_GS = 0.
    Off,
    /// Gate capacitance over gate voltage.
    Gate,
    /// Junction capacitance over reverse voltage.
    Junction,
}

impl Kind {
    /// For messages.
    pub fn noun(self) -> &'static str {
        match self {
            Kind::Current => "transfer or output curves",
            Kind::Off => "off currents",
            Kind::Gate => "gate capacitances",
            Kind::Junction => "junction capacitances",
        }
    }
}

/// n or p.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Polarity {
    /// n-channel.
    Nmos,
    /// p-channel, magnitudes.
    Pmos,
}

impl Polarity {
    /// Both.
    pub const BOTH: [Polarity; 2] = [Polarity::Nmos, Polarity::Pmos];

    /// Name in tables and technologies.
    pub fn name(self) -> &'static str {
        match self {
            Polarity::Nmos => "nmos",
            Polarity::Pmos => "pmos",
        }
    }
}

/// One row; fields that its kind of table does not have are 0.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Row {
    /// Index in [`Tables::paths`].
    pub table: usize,
    /// Line in that file, from 1.
    pub line: usize,
    /// Index in [`Tables::devices`].
    pub device: usize,
    /// n or p.
    pub polarity: Polarity,
    /// Source and drain alone against the gate, not the body too.
    pub source_drain: bool,
    /// m.
    pub width_m: f64,
    /// m.
    pub length_m: f64,
    /// K.
    pub temperature_k: f64,
    /// Gate to source, or body to drain of a junction, V.
    pub voltage_v: f64,
    /// Drain to source, V.
    pub drain_v: f64,
    /// A, or F.
    pub value: f64,
    /// m².
    pub area_m2: f64,
    /// m.
    pub perimeter_m: f64,
}

/// All rows of all tables.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Tables {
    /// The files, as named.
    pub paths: Vec<PathBuf>,
    /// Names of the transistor pairs, in the order they were met.
    pub devices: Vec<String>,
    /// Kind and rows a file.
    pub tables: Vec<(Kind, Vec<Row>)>,
}

impl Tables {
    /// Rows of a kind for a device and polarity.
    pub fn rows(
        &self,
        kind: Kind,
        device: usize,
        polarity: Polarity,
    ) -> impl Iterator<Item = &Row> {
        let tables = self.tables.iter().filter(move |(of, _)| *of == kind);
        tables
            .flat_map(|(_, rows)| rows)
            .filter(move |row| row.device == device && row.polarity == polarity)
    }

    /// A fault at a row.
    pub fn fault(&self, row: &Row, column: &str, kind: FaultKind) -> Fault {
        fault(&self.paths[row.table], Some(row.line), column, kind)
    }
}

fn fault(path: &Path, line: Option<usize>, key: &str, kind: FaultKind) -> Fault {
    Fault {
        origin: Origin::File {
            path: path.to_owned(),
            position: line.map(|line| (line, 1)),
        },
        key: key.to_owned(),
        kind,
    }
}

/// Reads every table; the faults of all are told at once.
pub fn read(paths: &[PathBuf]) -> Result<Tables, Faults> {
    let mut tables = Tables::default();
    let mut faults = Vec::new();
    let mut room = MOST_ROWS;
    for path in paths {
        if tables.paths.contains(path) {
            let read = "the table".to_owned();
            faults.push(fault(path, None, "", FaultKind::Repeated { read }));
            continue;
        }
        tables.paths.push(path.clone());
        match crate::study::raw::open(path) {
            Err(error) => {
                let reason = crate::study::raw::reason(&error);
                faults.push(fault(path, None, "", FaultKind::Unreadable { reason }));
            }
            Ok(file) => {
                let table = table(&mut tables, path, file, room, &mut faults);
                if let Some((kind, rows)) = table {
                    room -= rows.len();
                    tables.tables.push((kind, rows));
                }
            }
        }
    }
    match Faults::new(faults) {
        Some(faults) => Err(faults),
        None => Ok(tables),
    }
}

fn table(
    tables: &mut Tables,
    path: &Path,
    file: File,
    room: usize,
    faults: &mut Vec<Fault>,
) -> Option<(Kind, Vec<Row>)> {
    let before = faults.len();
    let (reader, ration) = match source::rationed(file) {
        Ok(source) => source,
        Err(error) => {
            let reason = crate::study::raw::reason(&error);
            faults.push(fault(path, None, "", FaultKind::Unreadable { reason }));
            return None;
        }
    };
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .trim(csv::Trim::All)
        .from_reader(reader);
    let header: Vec<String> = match reader.headers() {
        Ok(header) => header.iter().map(str::to_owned).collect(),
        Err(error) => {
            faults.push(unreadable(path, &error));
            return None;
        }
    };
    if header.iter().all(String::is_empty) {
        faults.push(fault(path, None, "", FaultKind::Empty));
        return None;
    }
    let line = reader.position().line().saturating_sub(1).max(1) as usize;
    let (kind, fields) = match header::read(&header) {
        Ok(read) => read,
        Err((key, kind)) => {
            faults.push(fault(path, Some(line), &key, kind));
            return None;
        }
    };
    let index = tables.paths.len() - 1;
    let mut rows = Vec::new();
    let mut record = csv::StringRecord::new();
    loop {
        ration.set(source::LONGEST_ROW);
        match reader.read_record(&mut record) {
            Ok(false) => break,
            Ok(true) => {}
            Err(error) => {
                faults.push(unreadable(path, &error));
                break;
            }
        }
        let line = record.position().map_or(0, |position| position.line()) as usize;
        match row(&mut tables.devices, kind, &fields, &record) {
            Ok(row) => rows.push(Row {
                table: index,
                line,
                ..row
            }),
            Err((column, kind)) => {
                faults.push(fault(path, Some(line), column.name(), kind));
                if faults.len() - before >= MOST_FAULTS {
                    break;
                }
            }
        }
        if rows.len() > room {
            let read = format!("more than {MOST_ROWS} rows");
            let allowed = format!("{MOST_ROWS} rows in all tables together");
            faults.push(fault(
                path,
                Some(line),
                "",
                FaultKind::OutOfRange { read, allowed },
            ));
            return None;
        }
    }
    if rows.is_empty() && faults.len() == before {
        let kind = FaultKind::WrongType {
            read: "a header and no rows".to_owned(),
            allowed: format!("rows of {}", kind.noun()),
        };
        faults.push(fault(path, None, "", kind));
    }
    Some((kind, rows))
}

fn unreadable(path: &Path, error: &csv::Error) -> Fault {
    let line = error.position().map(|position| position.line() as usize);
    let kind = match error.kind() {
        csv::ErrorKind::UnequalLengths {
            expected_len, len, ..
        } => FaultKind::WrongType {
            read: format!("{len} fields"),
            allowed: format!("{expected_len}, as in the header"),
        },
        csv::ErrorKind::Utf8 { .. } => FaultKind::WrongType {
            read: "bytes that are not UTF-8".to_owned(),
            allowed: "UTF-8 text".to_owned(),
        },
        csv::ErrorKind::Io(error) => FaultKind::Unreadable {
            reason: crate::study::raw::reason(error),
        },
        _ => FaultKind::Unreadable {
            reason: error.to_string(),
        },
    };
    fault(path, line, "", kind)
}

fn row(
    devices: &mut Vec<String>,
    kind: Kind,
    fields: &[Field],
    record: &csv::StringRecord,
) -> Result<Row, (Column, FaultKind)> {
    let mut row = Row {
        table: 0,
        line: 0,
        device: 0,
        polarity: Polarity::Nmos,
        source_drain: false,
        width_m: 0.0,
        length_m: 0.0,
        temperature_k: 0.0,
        voltage_v: 0.0,
        drain_v: 0.0,
        value: 0.0,
        area_m2: 0.0,
        perimeter_m: 0.0,
    };
    for (field, text) in fields.iter().zip(record) {
        let number = |low: f64, high: f64| number(field, text, low, high);
        let fault = |allowed: &str| {
            let (read, allowed) = (format!("{:?}", excerpt(text)), allowed.to_owned());
            (field.column, FaultKind::WrongType { read, allowed })
        };
        match field.column {
            Column::Device => {
                row.device = device(devices, text).ok_or_else(|| {
                    fault("a name of at most 40 letters, digits, - and _, as in [transistor.NAME]")
                })?;
                if row.device >= MOST_DEVICES {
                    let (read, allowed) = (
                        format!("{text}, one more device"),
                        format!("at most {MOST_DEVICES} in all tables"),
                    );
                    return Err((field.column, FaultKind::OutOfRange { read, allowed }));
                }
            }
            Column::Polarity => {
                row.polarity = match text {
                    "nmos" => Polarity::Nmos,
                    "pmos" => Polarity::Pmos,
                    _ => return Err(fault("nmos, pmos")),
                }
            }
            Column::Terminals => {
                row.source_drain = match text {
                    "gate_to_source_drain" => true,
                    "gate_to_all" => false,
                    _ => return Err(fault("gate_to_source_drain, gate_to_all")),
                }
            }
            Column::Structure => {}
            // capacitance structures are metres wide; nothing is a metre long
            Column::Width => row.width_m = number(1e-8, 10.0)?,
            Column::Length => row.length_m = number(1e-9, 1e-5)?,
            Column::Temperature => row.temperature_k = number(150.0, 500.0)?,
            Column::GateVoltage | Column::ReverseVoltage => row.voltage_v = number(-50.0, 50.0)?,
            Column::DrainVoltage => row.drain_v = number(-50.0, 50.0)?,
            Column::Current => row.value = number(-100.0, 100.0)?,
            Column::Capacitance => row.value = number(1e-18, 1e-6)?,
            Column::Area => row.area_m2 = number(0.0, 1e-4)?,
            Column::Perimeter => row.perimeter_m = number(0.0, 1e3)?,
        }
    }
    if kind == Kind::Junction && row.area_m2 <= 0.0 && row.perimeter_m <= 0.0 {
        let (read, allowed) = (
            "neither area nor perimeter".to_owned(),
            "one above 0".to_owned(),
        );
        return Err((Column::Area, FaultKind::OutOfRange { read, allowed }));
    }
    Ok(row)
}

fn device(devices: &mut Vec<String>, text: &str) -> Option<usize> {
    let plain = |c: char| c.is_ascii_alphanumeric() || c == '-' || c == '_';
    if text.is_empty() || text.len() > 40 || !text.chars().all(plain) {
        return None;
    }
    let known = devices.iter().position(|name| name == text);
    Some(known.unwrap_or_else(|| {
        devices.push(text.to_owned());
        devices.len() - 1
    }))
}

fn number(field: &Field, text: &str, low: f64, high: f64) -> Result<f64, (Column, FaultKind)> {
    let read = text.parse::<f64>().ok().filter(|value| value.is_finite());
    let Some(read) = read else {
        let kind = FaultKind::WrongType {
            read: format!("{:?}", excerpt(text)),
            allowed: "a finite number with a decimal point; leave out rows without one".to_owned(),
        };
        return Err((field.column, kind));
    };
    let value = read * field.factor + field.offset;
    if value < low || value > high {
        let kind = FaultKind::OutOfRange {
            read: format!("{text}, {value:e} in SI units"),
            allowed: format!("{low:e} to {high:e}; the unit is the end of the column's name"),
        };
        return Err((field.column, kind));
    }
    Ok(value)
}
