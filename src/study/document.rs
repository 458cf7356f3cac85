//! A TOML file read key by key: every value typed and ranged, unknown keys refused, lines remembered.

use super::diagnostics::{Fault, Faults, nearest, one_of};
use crate::quantity::{self, Dimension};
use std::cell::RefCell;
use std::collections::{BTreeMap, BTreeSet};
use std::path::Path;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// Largest file read, bytes: a study or technology takes a few thousand.
pub const LARGEST_FILE: u64 = 1 << 20;

/// Allowed interval of a number, ends included.
#[derive(Debug, Clone, Copy)]
pub struct Span {
    /// Lowest, SI.
    pub low: f64,
    /// Highest, SI.
    pub high: f64,
    /// How the interval reads in a message.
    pub text: &'static str,
}

/// A span with its text.
pub const fn span(low: f64, high: f64, text: &'static str) -> Span {
    Span { low, high, text }
}

/// Reads a file's text.
///
/// # Errors
/// A fault when the file is absent, unreadable, too large or not UTF-8.
pub fn load(path: &Path) -> Result<String, Faults> {
    let fault = |read: String, allowed: &str, help: Option<String>| {
        Faults::from(Fault {
            file: path.display().to_string(),
            line: None,
            key: String::new(),
            read,
            allowed: allowed.into(),
            help,
        })
    };
    let allowed = "a readable file";
    let size = std::fs::metadata(path)
        .and_then(|m| {
            if m.is_dir() {
                Err(std::io::Error::other("is a directory"))
            } else {
                Ok(m.len())
            }
        })
        .map_err(|e| fault(format!("nothing ({e})"), allowed, None))?;
    if size > LARGEST_FILE {
        return Err(fault(
            format!("{size} bytes"),
            "up to 1048576 bytes",
            Some("a study or a technology is a small file; is this the right one?".into()),
        ));
    }
    let bytes = std::fs::read(path).map_err(|e| fault(format!("nothing ({e})"), allowed, None))?;
    String::from_utf8(bytes).map_err(|e| {
        fault(
            format!(
                "bytes that are not UTF-8 at offset {}",
                e.utf8_error().valid_up_to()
            ),
            "UTF-8 text",
            Some("save the file as UTF-8".into()),
        )
    })
}

/// Faults and lines gathered while a file is walked.
pub struct Reader<'a> {
    file: String,
    text: &'a str,
    faults: RefCell<Vec<Fault>>,
    lines: RefCell<BTreeMap<String, usize>>,
}

impl<'a> Reader<'a> {
    /// A reader of `text`, named `file` in messages.
    pub fn new(file: String, text: &'a str) -> Self {
        // A byte-order mark is no part of the text.
        let text = text.strip_prefix('\u{feff}').unwrap_or(text);
        Self {
            file,
            text,
            faults: RefCell::default(),
            lines: RefCell::default(),
        }
    }

    /// The parsed top level.
    ///
    /// # Errors
    /// The first syntax error with its line.
    pub fn parse(&self) -> Result<DeTable<'a>, Faults> {
        DeTable::parse(self.text)
            .map(Spanned::into_inner)
            .map_err(|e| {
                Faults::from(Fault {
                    file: self.file.clone(),
                    line: e.span().map(|s| self.line(s.start)),
                    key: String::new(),
                    read: format!("a syntax error ({})", e.message().replace('\n', "; ")),
                    allowed: "TOML".into(),
                    help: None,
                })
            })
    }

    /// The top-level table, to be walked.
    pub fn root<'r>(&'r self, table: &'r DeTable<'a>) -> Table<'r, 'a> {
        Table {
            reader: self,
            path: String::new(),
            line: 1,
            table,
            known: RefCell::default(),
        }
    }

    fn line(&self, offset: usize) -> usize {
        let end = offset.min(self.text.len());
        1 + self.text.as_bytes()[..end]
            .iter()
            .filter(|&&b| b == b'\n')
            .count()
    }

    /// Adds a fault.
    pub fn fault(
        &self,
        line: usize,
        key: &str,
        read: impl Into<String>,
        allowed: impl Into<String>,
        help: Option<String>,
    ) {
        self.faults.borrow_mut().push(Fault {
            file: self.file.clone(),
            line: Some(line),
            key: key.to_owned(),
            read: read.into(),
            allowed: allowed.into(),
            help,
        });
    }

    /// The lines of all keys walked, by `table.key`.
    ///
    /// # Errors
    /// All faults found, in the order of their lines.
    pub fn finish(self) -> Result<BTreeMap<String, usize>, Faults> {
        let mut faults = self.faults.into_inner();
        if faults.is_empty() {
            return Ok(self.lines.into_inner());
        }
        faults.sort_by_key(|f| f.line);
        Err(Faults(faults))
    }
}

/// One table of the file.
pub struct Table<'r, 'a> {
    reader: &'r Reader<'a>,
    path: String,
    line: usize,
    table: &'r DeTable<'a>,
    known: RefCell<BTreeSet<String>>,
}

/// One value with its place.
pub struct Entry<'r, 'a> {
    reader: &'r Reader<'a>,
    label: String,
    path: String,
    line: usize,
    value: &'r DeValue<'a>,
}

impl<'r, 'a> Table<'r, 'a> {
    /// Where a key of this table stands, as messages say it.
    pub fn label(&self, key: &str) -> String {
        if self.path.is_empty() {
            key.to_owned()
        } else if key.is_empty() {
            format!("[{}]", self.path)
        } else {
            format!("[{}] {key}", self.path)
        }
    }

    fn joined(&self, key: &str) -> String {
        if self.path.is_empty() {
            key.to_owned()
        } else {
            format!("{}.{key}", self.path)
        }
    }

    /// The line its header stands on.
    pub fn line(&self) -> usize {
        self.line
    }

    /// An optional value.
    pub fn find(&self, key: &str) -> Option<Entry<'r, 'a>> {
        self.known.borrow_mut().insert(key.to_owned());
        let value = self.table.get(key)?;
        let line = self.reader.line(value.span().start);
        self.reader
            .lines
            .borrow_mut()
            .insert(self.joined(key), line);
        Some(Entry {
            reader: self.reader,
            label: self.label(key),
            path: self.joined(key),
            line,
            value: value.get_ref(),
        })
    }

    /// A value that must be there; a fault says so when it is not.
    pub fn need(&self, key: &str, allowed: &str) -> Option<Entry<'r, 'a>> {
        let entry = self.find(key);
        if entry.is_none() {
            let near = self
                .table
                .keys()
                .map(|k| k.get_ref().as_ref())
                .collect::<Vec<&str>>();
            let help = near
                .into_iter()
                .filter(|k| nearest(k, [key]).is_some())
                .min()
                .map(|k| format!("\"{k}\" stands there; is it meant to be \"{key}\"?"));
            self.reader
                .fault(self.line, &self.label(key), "nothing", allowed, help);
        }
        entry
    }

    /// A table that may be absent.
    pub fn table(&self, key: &str) -> Option<Table<'r, 'a>> {
        self.find(key)?.table()
    }

    /// A table that must be there.
    pub fn need_table(&self, key: &str) -> Option<Table<'r, 'a>> {
        self.need(key, "a table")?.table()
    }

    /// A fault: the table holds nothing.
    pub fn refuse_empty(&self, allowed: &str) {
        self.reader
            .fault(self.line, &self.label(""), "nothing", allowed, None);
    }

    /// A fault: the ends of an interval are out of order.
    pub fn refuse_order(&self, line: usize) {
        let label = self.place();
        self.reader.fault(
            line,
            &label,
            "ends that do not rise",
            "a first end below the second",
            None,
        );
    }

    /// A fault: steps that do not fall on whole numbers.
    pub fn refuse_steps(&self, line: usize, steps: i64, every: i64) {
        self.reader.fault(
            line,
            &self.place(),
            format!("{steps} steps over {every} whole numbers"),
            "steps that fall on whole numbers",
            Some("leave steps out to take every whole number".into()),
        );
    }

    /// The table itself as messages say it: `[space] supply`.
    fn place(&self) -> String {
        match self.path.rsplit_once('.') {
            Some((outer, key)) => format!("[{outer}] {key}"),
            None => format!("[{}]", self.path),
        }
    }

    /// Every key of the table, in the file's order of names.
    pub fn keys(&self) -> Vec<String> {
        self.table.keys().map(|k| k.get_ref().to_string()).collect()
    }

    /// Refuses every key that nobody asked for.
    pub fn refuse_others(&self) {
        let known = self.known.borrow();
        for key in self.table.keys() {
            let name = key.get_ref().as_ref();
            if !known.contains(name) {
                let help = nearest(name, known.iter().map(String::as_str));
                let line = self.reader.line(key.span().start);
                let place = if self.path.is_empty() {
                    "top level".to_owned()
                } else {
                    self.label("")
                };
                self.reader.fault(
                    line,
                    &place,
                    format!("the unknown key {}", quantity::quoted(name)),
                    one_of(known.iter().map(String::as_str)),
                    help,
                );
            }
        }
    }
}

/// What kind of value was read, for messages.
fn kind(value: &DeValue<'_>) -> String {
    match value {
        DeValue::String(s) => quantity::quoted(s),
        DeValue::Integer(i) => i.to_string(),
        DeValue::Float(x) => x.to_string(),
        DeValue::Boolean(b) => b.to_string(),
        DeValue::Datetime(d) => d.to_string(),
        DeValue::Array(_) => "an array".into(),
        DeValue::Table(_) => "a table".into(),
    }
}

impl<'r, 'a> Entry<'r, 'a> {
    /// A fault of this value.
    pub fn refuse(&self, allowed: impl Into<String>, help: Option<String>) {
        self.reader
            .fault(self.line, &self.label, kind(self.value), allowed, help);
    }

    /// Its line.
    pub fn line(&self) -> usize {
        self.line
    }

    /// A table.
    pub fn table(self) -> Option<Table<'r, 'a>> {
        if let DeValue::Table(table) = self.value {
            return Some(Table {
                reader: self.reader,
                path: self.path,
                line: self.line,
                table,
                known: RefCell::default(),
            });
        }
        self.refuse("a table", None);
        None
    }

    /// Whether this is a table.
    pub fn is_table(&self) -> bool {
        matches!(self.value, DeValue::Table(_))
    }

    /// Text.
    pub fn text(&self) -> Option<&'r str> {
        if let DeValue::String(s) = self.value {
            return Some(s.as_ref());
        }
        self.refuse("text in quotes", None);
        None
    }

    /// One of several names.
    pub fn choice<T: Copy>(&self, choices: &[(&str, T)]) -> Option<T> {
        let names = || choices.iter().map(|c| c.0);
        let DeValue::String(s) = self.value else {
            self.refuse(one_of(names()), None);
            return None;
        };
        let found = choices.iter().find(|c| c.0 == s.as_ref()).map(|c| c.1);
        if found.is_none() {
            self.refuse(one_of(names()), nearest(s, names()));
        }
        found
    }

    /// A whole number in a span.
    pub fn whole(&self, low: i64, high: i64) -> Option<i64> {
        if let DeValue::Integer(i) = self.value
            && let Ok(v) = i64::from_str_radix(i.as_str(), i.radix())
            && (low..=high).contains(&v)
        {
            return Some(v);
        }
        let allowed = if high - low == 1 {
            format!("{low} or {high}")
        } else {
            format!("a whole number from {low} to {high}")
        };
        self.refuse(allowed, None);
        None
    }

    /// Elements of an array; a single value counts as an array of one.
    pub fn list(&self) -> Vec<Entry<'r, 'a>> {
        let one = |value: &'r DeValue<'a>, line: usize| Entry {
            reader: self.reader,
            label: self.label.clone(),
            path: self.path.clone(),
            line,
            value,
        };
        match self.value {
            DeValue::Array(items) => items
                .iter()
                .map(|item| one(item.get_ref(), self.reader.line(item.span().start)))
                .collect(),
            value => vec![one(value, self.line)],
        }
    }

    /// Exactly this whole number.
    pub fn whole_exactly(&self, wanted: i64) -> Option<()> {
        if let DeValue::Integer(i) = self.value
            && i64::from_str_radix(i.as_str(), i.radix()) == Ok(wanted)
        {
            return Some(());
        }
        self.refuse(format!("{wanted}"), None);
        None
    }

    /// Whether this is the given text.
    pub fn is_text(&self, wanted: &str) -> bool {
        matches!(self.value, DeValue::String(s) if s.as_ref() == wanted)
    }

    /// A bare number in a span.
    pub fn number(&self, span: Span) -> Option<f64> {
        let value = match self.value {
            DeValue::Float(x) => x.as_str().parse::<f64>().ok(),
            DeValue::Integer(i) => i64::from_str_radix(i.as_str(), i.radix())
                .ok()
                .map(|v| v as f64),
            _ => None,
        };
        if let Some(v) = value
            && v >= span.low
            && v <= span.high
        {
            return Some(v);
        }
        let help = matches!(self.value, DeValue::String(_))
            .then(|| "a pure number stands without quotes and unit".to_owned());
        self.refuse(format!("a number, {}", span.text), help);
        None
    }

    /// A quantity with its unit, in a span, SI.
    pub fn quantity(&self, dimension: Dimension, span: Span) -> Option<f64> {
        let allowed = || {
            format!(
                "{}, {}, for example \"{}\"",
                dimension.name(),
                span.text,
                dimension.example()
            )
        };
        let DeValue::String(text) = self.value else {
            let bare = matches!(self.value, DeValue::Integer(_) | DeValue::Float(_));
            self.refuse(
                allowed(),
                bare.then(|| "write the number with its unit, in quotes".to_owned()),
            );
            return None;
        };
        match quantity::parse(text, dimension) {
            Ok(v) if v >= span.low && v <= span.high => Some(v),
            Ok(_) => {
                self.refuse(allowed(), None);
                None
            }
            Err(e) => {
                self.reader
                    .fault(self.line, &self.label, e.what_was_read(), allowed(), None);
                None
            }
        }
    }

    /// A bare number or, with a dimension, a quantity.
    pub fn measured(&self, dimension: Option<Dimension>, span: Span) -> Option<f64> {
        match dimension {
            Some(dimension) => self.quantity(dimension, span),
            None => self.number(span),
        }
    }
}
