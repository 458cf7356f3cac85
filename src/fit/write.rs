//! Into a technology file, without losing what is there.
//!
//! Every comment that a fit writes starts with `# fit:`, so that the next fit knows and replaces its own.

use super::table::Polarity;
use super::{FitError, FittedDevice, FittedPair, Given, Options, Tables};
use crate::quantity::{Dimension, Quantity};
use std::fmt::Write;
use std::path::Path;
use toml_edit::{DocumentMut, Item, Table, Value};

const MARK: &str = "# fit:";

/// The technology file as it was, or nothing.
#[derive(Debug, Clone, Default)]
pub struct Existing(Option<DocumentMut>);

impl Existing {
    /// Reads the text of the file that is to be merged into.
    pub fn parse(text: &str, path: &Path) -> Result<Self, FitError> {
        let refuse = |read: String, allowed: &str| FitError::Existing {
            path: path.display().to_string(),
            read,
            allowed: allowed.to_owned(),
        };
        let text = text.trim_start_matches('\u{feff}');
        let document: DocumentMut = text.parse().map_err(|error: toml_edit::TomlError| {
            let before = text.bytes().take(error.span().map_or(0, |span| span.start));
            let line = 1 + before.filter(|byte| *byte == b'\n').count();
            refuse(
                format!("{} (line {line})", error.message()),
                "a technology file in TOML",
            )
        })?;
        let schema = document.get("schema").and_then(Item::as_integer);
        if !document.is_empty() && schema != Some(crate::technology::SCHEMA) {
            let read = schema.map_or("no schema".to_owned(), |schema| {
                format!("schema = {schema}")
            });
            return Err(refuse(read, "a technology file with schema = 1"));
        }
        if document.contains_key("stage") {
            return Err(refuse("a study".to_owned(), "a technology file"));
        }
        if document
            .get("transistor")
            .is_some_and(|item| item.as_table().is_none())
        {
            return Err(refuse(
                "transistor without sections".to_owned(),
                "[transistor.NAME] sections",
            ));
        }
        Ok(Self(Some(document)))
    }

    fn section(&self, device: &str) -> Option<&Item> {
        self.0.as_ref()?.get("transistor")?.get(device)
    }

    /// A voltage of a pair.
    pub(super) fn voltage(&self, device: &str, key: &str) -> Option<f64> {
        let text = self.section(device)?.get(key)?.as_str()?;
        Quantity::parse(text, Dimension::Voltage).ok()
    }

    /// The gate length of a device.
    pub(super) fn length(&self, device: &str, polarity: Polarity) -> Option<f64> {
        let text = self
            .section(device)?
            .get(polarity.name())?
            .get("length")?
            .as_str()?;
        Quantity::parse(text, Dimension::Length).ok()
    }

    /// Whether the file has all these keys.
    pub(super) fn has_all<'k>(
        &self,
        device: &str,
        polarity: Polarity,
        mut keys: impl Iterator<Item = &'k str>,
    ) -> bool {
        let section = self
            .section(device)
            .and_then(|pair| pair.get(polarity.name()));
        section.is_some_and(|section| keys.all(|key| section.get(key).is_some()))
    }
}

/// The text of the technology file with the pairs in it.
pub fn merge(
    existing: &Existing,
    pairs: &[FittedPair],
    tables: &Tables,
    options: &Options,
    name: &str,
) -> Result<String, FitError> {
    let new = existing
        .0
        .as_ref()
        .is_none_or(|document| document.is_empty());
    let mut document = existing.0.clone().unwrap_or_default();
    if new {
        document["schema"] = toml_edit::value(crate::technology::SCHEMA);
        document["name"] = toml_edit::value(name);
        let source = options
            .source
            .clone()
            .unwrap_or_else(|| format!("a fit to {}", names(tables)));
        document["source"] = toml_edit::value(source);
    }
    let root = document.entry("transistor").or_insert_with(|| {
        let mut table = Table::new();
        table.set_implicit(true);
        Item::Table(table)
    });
    let wrong = |read: String| FitError::Existing {
        path: name.to_owned(),
        read,
        allowed: "a section of a transistor".to_owned(),
    };
    let root = root
        .as_table_mut()
        .ok_or_else(|| wrong("transistor as a value".to_owned()))?;
    for pair in pairs {
        let item = root
            .entry(&pair.name)
            .or_insert_with(|| Item::Table(Table::new()));
        let section = item
            .as_table_mut()
            .ok_or_else(|| wrong(format!("{} as a value", pair.name)))?;
        for (key, (volts, given), said) in [
            (
                "rating",
                pair.rating_v,
                "assumed: the highest gate voltage measured",
            ),
            ("clamp", pair.clamp_v, "assumed: a silicon junction"),
        ] {
            let text = Value::from(Dimension::Voltage.show(volts));
            match given {
                Given::Kept => {}
                Given::Option => set(section, key, text, ""),
                Given::Assumed => set(section, key, text, said),
            }
        }
        for device in &pair.devices {
            let polarity = device.polarity.name();
            let item = section
                .entry(polarity)
                .or_insert_with(|| Item::Table(Table::new()));
            let table = item
                .as_table_mut()
                .ok_or_else(|| wrong(format!("{}.{polarity} as a value", pair.name)))?;
            figures(table, device, &head(device, tables, options))?;
        }
    }
    Ok(document.to_string())
}

/// File names without their folders: the same comments wherever the tables lie.
fn names(tables: &Tables) -> String {
    let name = |path: &std::path::PathBuf| {
        path.file_name()
            .map(|name| name.to_string_lossy().into_owned())
    };
    tables
        .paths
        .iter()
        .filter_map(name)
        .collect::<Vec<_>>()
        .join(", ")
}

fn head(device: &FittedDevice, tables: &Tables, options: &Options) -> Vec<String> {
    let mut lines = vec![format!("{}, from {}", options.date, names(tables))];
    lines.extend(
        options
            .source
            .iter()
            .map(|source| format!("source: {source}")),
    );
    lines.extend(device.notes.iter().cloned());
    lines.extend(
        device
            .warnings
            .iter()
            .map(|warning| format!("warning: {warning}")),
    );
    lines.push(
        "+- behind a figure: the interval that holds it 95 times in 100, if the model holds"
            .to_owned(),
    );
    lines
}

fn figures(table: &mut Table, device: &FittedDevice, head: &[String]) -> Result<(), FitError> {
    if device.figures.is_empty() {
        return Ok(());
    }
    let before = table
        .decor()
        .prefix()
        .and_then(|raw| raw.as_str())
        .unwrap_or("\n")
        .to_owned();
    let mut prefix = String::new();
    for line in before
        .split_inclusive('\n')
        .filter(|line| !line.trim_start().starts_with(MARK))
    {
        prefix.push_str(line);
    }
    for line in head {
        // a line break in a source would end the comment; writing to a String cannot fail
        let _ = writeln!(prefix, "{MARK} {}", line.replace(['\n', '\r'], " "));
    }
    table.decor_mut().set_prefix(prefix);
    for figure in &device.figures {
        let value: Value = figure.text.parse().map_err(|_| FitError::Existing {
            path: figure.key.to_owned(),
            read: figure.text.clone(),
            allowed: "a TOML value".to_owned(),
        })?;
        set(table, figure.key, value, &figure.note);
    }
    Ok(())
}

/// Sets a value in its place; a comment behind an old value spoke of that value and goes with it.
fn set(table: &mut Table, key: &str, mut value: Value, note: &str) {
    let suffix = if note.is_empty() {
        String::new()
    } else {
        format!("  {MARK} {note}")
    };
    value.decor_mut().set_prefix(" ");
    value.decor_mut().set_suffix(suffix);
    match table.get_mut(key) {
        Some(item) => *item = Item::Value(value),
        None => {
            table.insert(key, Item::Value(value));
        }
    }
}
