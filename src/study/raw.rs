//! Walks a TOML document key by key, so that every fault names its line and all are reported at once.
//!
//! A section knows its keys from being asked for them: what is asked for is allowed, the rest is unknown. A key that
//! is at fault is recorded and a placeholder stands in its place until the walk ends; a document with faults never
//! leaves [`walk`].

use super::diagnostics::{Fault, FaultKind, Faults, Warning, WarningKind};
use super::figure::Figure;
use super::lines::Lines;
use super::spelling::nearest;
use crate::quantity::excerpt;
use std::cell::{Cell, RefCell};
use std::io::Read;
use std::ops;
use std::path::Path;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// Longest file that is read, bytes; a study by hand has a few thousand.
const LONGEST_FILE: u64 = 1 << 20;

/// Faults of one file that are told; of a file with more, most are likely one slip many times.
const MOST_FAULTS: usize = 100;

/// What a walk gives: the value, the place of every key, and warnings.
pub(crate) struct Walked<T> {
    pub value: T,
    pub lines: Lines,
    pub warnings: Vec<Warning>,
}

struct Walk<'t> {
    text: &'t str,
    faults: RefCell<Vec<Fault>>,
    /// Faults past [`MOST_FAULTS`].
    more: Cell<usize>,
    warnings: RefCell<Vec<Warning>>,
    lines: RefCell<Lines>,
}

/// Reads a text file, refusing what is no text or far too long.
pub(crate) fn load(path: &Path) -> Result<String, Faults> {
    let fault = |kind| Faults::from(Lines::new(path).fault("", kind));
    let unreadable = |error: std::io::Error| {
        let reason = reason(&error);
        fault(FaultKind::Unreadable { reason })
    };
    let file = open(path).map_err(unreadable)?;
    let mut bytes = Vec::new();
    let mut limited = file.take(LONGEST_FILE + 1);
    limited.read_to_end(&mut bytes).map_err(unreadable)?;
    if bytes.len() as u64 > LONGEST_FILE {
        let limit = LONGEST_FILE;
        return Err(fault(FaultKind::TooLong { limit }));
    }
    String::from_utf8(bytes).map_err(|error| {
        let offset = error.utf8_error().valid_up_to();
        fault(FaultKind::NotUtf8 { offset })
    })
}

/// Opens a regular file; a pipe or a device could keep a reader waiting for ever.
pub(crate) fn open(path: &Path) -> std::io::Result<std::fs::File> {
    let kind = std::fs::metadata(path)?;
    if kind.is_file() || kind.is_dir() {
        std::fs::File::open(path)
    } else {
        Err(std::io::Error::other("it is no regular file"))
    }
}

/// Why the system does not give a file, the same on every system for the usual reasons.
pub(crate) fn reason(error: &std::io::Error) -> String {
    match error.kind() {
        std::io::ErrorKind::NotFound => "no such file".to_owned(),
        std::io::ErrorKind::PermissionDenied => "permission denied".to_owned(),
        std::io::ErrorKind::IsADirectory => "it is a folder".to_owned(),
        _ => error.to_string(),
    }
}

/// Walks a document of a known schema with `build`.
pub(crate) fn walk<T>(
    text: &str,
    path: &Path,
    schema: i64,
    build: impl FnOnce(&Section<'_, '_>) -> T,
) -> Result<Walked<T>, Faults> {
    let walk = Walk {
        text,
        faults: RefCell::default(),
        more: Cell::new(0),
        warnings: RefCell::default(),
        lines: RefCell::new(Lines::new(path)),
    };
    let table = DeTable::parse(text).map_err(|error| {
        let mut lines = Lines::new(path);
        if let Some(span) = error.span() {
            lines.note("", position(text, span.start));
        }
        let message = error.message().replace('\n', " ");
        lines.fault("", FaultKind::Syntax { message })
    })?;
    let root = Section {
        walk: &walk,
        place: String::new(),
        table: Some(table.get_ref()),
        asked: RefCell::default(),
    };
    root.check_schema(schema)?;
    let value = build(&root);
    drop(root);
    match Faults::new(walk.faults.into_inner()) {
        Some(faults) => Err(match walk.more.get() {
            0 => faults,
            count => faults.then(Lines::new(path).fault("", FaultKind::More { count })),
        }),
        None => Ok(Walked {
            value,
            lines: walk.lines.into_inner(),
            warnings: walk.warnings.into_inner(),
        }),
    }
}

/// Line and column of a byte, from 1.
fn position(text: &str, byte: usize) -> (usize, usize) {
    let before = text.get(..byte).unwrap_or(text);
    let start = before.rfind('\n').map_or(0, |newline| newline + 1);
    let line = before.matches('\n').count() + 1;
    (line, before[start..].chars().count() + 1)
}

/// A section, or the table of a range; reports its unknown keys when it goes.
pub(crate) struct Section<'w, 't> {
    walk: &'w Walk<'t>,
    /// `[stage]`, `[space] supply`, or nothing for the document.
    place: String,
    /// Absent where a missing section was reported: its keys then stay quiet.
    pub(super) table: Option<&'w DeTable<'t>>,
    asked: RefCell<Vec<String>>,
}

impl Drop for Section<'_, '_> {
    fn drop(&mut self) {
        let asked = self.asked.borrow();
        for key in self.table.into_iter().flat_map(|table| table.keys()) {
            if !asked.iter().any(|known| known == key.get_ref()) {
                if self.is_full() {
                    self.walk.more.set(self.walk.more.get() + 1);
                    continue;
                }
                self.note(key.get_ref(), &key.span());
                let near = nearest(key.get_ref(), asked.iter().map(String::as_str));
                if let Some(meant) = &near {
                    // a misspelt key is one fault, not an unknown key and a missing one
                    let meant = self.key(meant);
                    self.walk.faults.borrow_mut().retain(|fault| {
                        fault.key != meant || !matches!(fault.kind, FaultKind::MissingKey { .. })
                    });
                }
                self.fault(
                    key.get_ref(),
                    FaultKind::UnknownKey {
                        allowed: asked.clone(),
                        nearest: near,
                    },
                );
            }
        }
    }
}

impl<'w, 't> Section<'w, 't> {
    fn check_schema(&self, allowed: i64) -> Result<(), Faults> {
        if self.table.is_some_and(DeTable::is_empty) {
            return Err(self.walk.lines.borrow().fault("", FaultKind::Empty).into());
        }
        let kind = match self.entry("schema") {
            Some(value) => {
                let read = self.read(value);
                let same = value.get_ref().as_integer().is_some_and(|digits| {
                    i64::from_str_radix(digits.as_str(), digits.radix()) == Ok(allowed)
                });
                if same {
                    return Ok(());
                }
                FaultKind::Schema { read, allowed }
            }
            None => FaultKind::MissingKey {
                allowed: allowed.to_string(),
                example: Some(format!("schema = {allowed}")),
            },
        };
        Err(self.walk.lines.borrow().fault("schema", kind).into())
    }

    /// A key's full name, such as `[stage] legs`.
    pub(super) fn key(&self, key: &str) -> String {
        let key = excerpt(key).escape_debug().to_string();
        match self.place.as_str() {
            "" => key,
            place if place.ends_with(']') => format!("{place} {key}"),
            place => format!("{place}.{key}"),
        }
    }

    fn note(&self, key: &str, span: &ops::Range<usize>) {
        let place = position(self.walk.text, span.start);
        self.walk.lines.borrow_mut().note(&self.key(key), place);
    }

    pub fn fault(&self, key: &str, kind: FaultKind) {
        self.push(&self.key(key), kind);
    }

    /// A fault of the section as a whole.
    pub fn fault_here(&self, kind: FaultKind) {
        self.push(&self.place, kind);
    }

    fn push(&self, key: &str, kind: FaultKind) {
        if self.is_full() {
            self.walk.more.set(self.walk.more.get() + 1);
        } else {
            let fault = self.walk.lines.borrow().fault(key, kind);
            self.walk.faults.borrow_mut().push(fault);
        }
    }

    fn is_full(&self) -> bool {
        self.walk.faults.borrow().len() >= MOST_FAULTS
    }

    pub fn warning(&self, key: &str, kind: WarningKind) {
        let warning = self.walk.lines.borrow().warning(&self.key(key), kind);
        self.walk.warnings.borrow_mut().push(warning);
    }

    /// A value as it stands in the file, on one line.
    pub(super) fn read(&self, value: &Spanned<DeValue<'t>>) -> String {
        match value.get_ref() {
            DeValue::Table(_) => "a table".to_owned(),
            DeValue::Array(_) => "a list".to_owned(),
            _ => {
                let text = self.walk.text.get(value.span()).unwrap_or_default();
                let line: String = excerpt(text)
                    .chars()
                    .map(|c| if c.is_control() { ' ' } else { c })
                    .collect();
                line
            }
        }
    }

    /// Makes a key a known one.
    pub(super) fn ask(&self, key: &str) {
        let mut asked = self.asked.borrow_mut();
        if !asked.iter().any(|known| known == key) {
            asked.push(key.to_owned());
        }
    }

    /// Faults found so far in the document.
    pub(super) fn fault_count(&self) -> usize {
        self.walk.faults.borrow().len() + self.walk.more.get()
    }

    /// Asks for a key and notes where it stands.
    pub(super) fn entry(&self, key: &str) -> Option<&'w Spanned<DeValue<'t>>> {
        self.ask(key);
        let (written, value) = self.table?.get_key_value(key)?;
        self.note(key, &written.span());
        Some(value)
    }

    /// A key's value as it stands in the file; empty when it is absent.
    pub(super) fn written(&self, key: &str) -> String {
        let value = self.table.and_then(|table| table.get(key));
        value.map_or_else(String::new, |value| self.read(value))
    }

    /// Records that a key that must be there is not.
    pub(super) fn missing(&self, key: &str, allowed: String, example: Option<String>) {
        if self.table.is_some() {
            let example = example.map(|value| format!("{key} = {value}"));
            self.fault(key, FaultKind::MissingKey { allowed, example });
        }
    }

    /// A value that may be left out.
    pub fn optional(&self, key: &str, figure: Figure) -> Option<f64> {
        let value = self.entry(key)?;
        match figure.read(value.get_ref(), &self.read(value)) {
            Ok(si) => Some(si),
            Err(kind) => {
                self.fault(key, kind);
                None
            }
        }
    }

    /// A value that must be there.
    pub fn required(&self, key: &str, figure: Figure) -> f64 {
        if !self.has(key) {
            self.ask(key);
            self.missing(key, figure.describe(), figure.example());
        }
        self.optional(key, figure).unwrap_or(figure.placeholder())
    }

    pub(super) fn has(&self, key: &str) -> bool {
        self.table.is_some_and(|table| table.contains_key(key))
    }

    /// A section that may be left out.
    pub fn optional_section(&self, name: &str) -> Option<Section<'w, 't>> {
        let value = self.entry(name)?;
        let place = self.section_place(name);
        match value.get_ref() {
            DeValue::Table(table) => {
                let (key, _) = self.table?.get_key_value(name)?;
                let start = position(self.walk.text, key.span().start);
                self.walk.lines.borrow_mut().note(&place, start);
                Some(self.inner(place, table))
            }
            _ => {
                let read = self.read(value);
                let allowed = format!("a section {place}");
                self.fault(name, FaultKind::WrongType { read, allowed });
                None
            }
        }
    }

    /// A section that must be there.
    pub fn section(&self, name: &str) -> Section<'w, 't> {
        let there = self.has(name);
        let section = self.optional_section(name);
        let place = self.section_place(name);
        if !there {
            self.missing(name, format!("a section {place}"), None);
        }
        section.unwrap_or(Section {
            walk: self.walk,
            place,
            table: None,
            asked: RefCell::default(),
        })
    }

    /// Every section inside this one, by name.
    pub fn sections(&self) -> Vec<(String, Section<'w, 't>)> {
        let keys = self.table.into_iter().flat_map(|table| table.keys());
        let names: Vec<String> = keys.map(|key| key.get_ref().to_string()).collect();
        let sections = names.into_iter();
        sections
            .map(|name| (name.clone(), self.section(&name)))
            .collect()
    }

    /// How many keys it has.
    pub fn len(&self) -> usize {
        self.table.map_or(0, DeTable::len)
    }

    /// True when a section of this name was given as one.
    pub fn has_section(&self, name: &str) -> bool {
        let value = self.table.and_then(|table| table.get(name));
        value.is_some_and(|value| value.get_ref().is_table())
    }

    /// Takes every key as known, when a fault elsewhere leaves open which are.
    pub fn accept_all(&self) {
        let keys = self.table.into_iter().flat_map(|table| table.keys());
        let keys = keys.map(|key| key.get_ref().to_string());
        self.asked.borrow_mut().extend(keys);
    }

    fn section_place(&self, name: &str) -> String {
        let name = excerpt(name).escape_debug().to_string();
        match self.place.strip_suffix(']') {
            Some(outer) => format!("{outer}.{name}]"),
            None => format!("[{name}]"),
        }
    }

    pub(super) fn inner(&self, place: String, table: &'w DeTable<'t>) -> Section<'w, 't> {
        Section {
            walk: self.walk,
            place,
            table: Some(table),
            asked: RefCell::default(),
        }
    }
}
