//! Values of more than one part: ranges, bounds, names out of a list.

use super::diagnostics::FaultKind;
use super::figure::{Figure, whole};
use super::raw::Section;
use super::resolved::{Bounds, Range};
use super::spelling::nearest;
use toml::Spanned;
use toml::de::DeValue;

/// Most values of one grid.
const MOST_STEPS: u32 = 1000;

impl<'t> Section<'_, 't> {
    /// A value of a range, a grid or one value, that may be left out.
    pub fn optional_range(&self, key: &str, figure: Figure) -> Option<Range> {
        let table = self.table?.get(key).map(Spanned::get_ref);
        let Some(DeValue::Table(table)) = table else {
            return self.optional(key, figure).map(Range::Fixed);
        };
        self.entry(key);
        let inner = self.inner(self.key(key), table);
        let before = self.fault_count();
        let from = inner.required("from", figure);
        let to = inner.required("to", figure);
        let steps = inner.optional("steps", whole(2, MOST_STEPS));
        if self.fault_count() > before {
            return None;
        }
        if from >= to {
            self.fault(
                key,
                FaultKind::NotRising {
                    low: "from",
                    high: "to",
                    from: inner.written("from"),
                    to: inner.written("to"),
                },
            );
            return None;
        }
        let steps = match steps {
            Some(steps) => steps,
            None if figure.is_whole() => to - from + 1.0,
            None => return Some(Range::Free { from, to }),
        };
        if figure.is_whole() && (to - from) % (steps - 1.0) != 0.0 {
            let (from, to, steps) = (from as i64, to as i64, steps as i64);
            self.fault(key, FaultKind::UnevenSteps { from, to, steps });
            return None;
        }
        Some(Range::Grid(evenly(from, to, steps as u32)))
    }

    /// A range that must be there.
    pub fn required_range(&self, key: &str, figure: Figure) -> Range {
        if !self.has(key) {
            self.ask(key);
            self.missing(key, figure.describe(), figure.example());
        }
        self.optional_range(key, figure)
            .unwrap_or(Range::Fixed(figure.placeholder()))
    }

    /// `{ at_least = …, at_most = … }`, either or both.
    pub fn bounds(&self, key: &str, figure: Figure) -> Bounds {
        let Some(value) = self.entry(key) else {
            return Bounds::default();
        };
        let allowed = "a table { at_least = …, at_most = … } with either or both".to_owned();
        let DeValue::Table(table) = value.get_ref() else {
            let read = self.read(value);
            self.fault(key, FaultKind::WrongType { read, allowed });
            return Bounds::default();
        };
        let inner = self.inner(self.key(key), table);
        let at_least = inner.optional("at_least", figure);
        let at_most = inner.optional("at_most", figure);
        if table.is_empty() {
            let read = "an empty table".to_owned();
            self.fault(key, FaultKind::WrongType { read, allowed });
        }
        if let (Some(low), Some(high)) = (at_least, at_most)
            && low > high
        {
            self.fault(
                key,
                FaultKind::NotRising {
                    low: "at_least",
                    high: "at_most",
                    from: inner.written("at_least"),
                    to: inner.written("at_most"),
                },
            );
        }
        Bounds { at_least, at_most }
    }

    /// One value or a list of different ones; at least one, a placeholder after a fault.
    pub fn figures(&self, key: &str, figure: Figure) -> Vec<f64> {
        if self.list(key).is_none() {
            return vec![self.required(key, figure)];
        }
        let read = |value: &Spanned<DeValue<'t>>| {
            let read = figure.read(value.get_ref(), &self.read(value));
            read.map_err(|kind| self.fault(key, kind)).ok()
        };
        self.different(key, read, figure.placeholder())
    }

    /// One line of text or a list of different ones.
    pub fn texts(&self, key: &str) -> Vec<String> {
        if self.list(key).is_none() {
            return vec![self.text(key)];
        }
        self.different(key, |value| self.line_of(key, value), String::new())
    }

    fn list(&self, key: &str) -> Option<&toml::de::DeArray<'t>> {
        self.table?.get(key)?.get_ref().as_array()
    }

    fn different<T: PartialEq>(
        &self,
        key: &str,
        read: impl Fn(&Spanned<DeValue<'t>>) -> Option<T>,
        placeholder: T,
    ) -> Vec<T> {
        self.entry(key);
        let mut values = Vec::new();
        for item in self.list(key).into_iter().flat_map(|list| list.iter()) {
            let Some(value) = read(item) else { continue };
            if values.contains(&value) {
                let read = self.read(item);
                self.fault(key, FaultKind::Repeated { read });
            }
            values.push(value);
        }
        if self.list(key).is_some_and(|list| list.is_empty()) {
            let read = "an empty list".to_owned();
            let allowed = "one value or a list of them".to_owned();
            self.fault(key, FaultKind::WrongType { read, allowed });
        }
        if values.is_empty() {
            values.push(placeholder);
        }
        values
    }

    /// A line of text that is not empty.
    pub fn text(&self, key: &str) -> String {
        let allowed = "a line of text".to_owned();
        let Some(value) = self.entry(key) else {
            self.missing(key, allowed, Some("\"…\"".to_owned()));
            return String::new();
        };
        self.line_of(key, value).unwrap_or_default()
    }

    fn line_of(&self, key: &str, value: &Spanned<DeValue<'t>>) -> Option<String> {
        match value.get_ref().as_str() {
            Some(text) if !text.trim().is_empty() && !text.contains(char::is_control) => {
                Some(text.to_owned())
            }
            _ => {
                let read = self.read(value);
                let allowed = "a line of text".to_owned();
                self.fault(key, FaultKind::WrongType { read, allowed });
                None
            }
        }
    }

    /// One of several names; the first is the placeholder.
    pub fn choice<T: Copy>(&self, key: &str, names: &[(&str, T)]) -> Option<T> {
        let allowed = quoted(names);
        let Some(value) = self.entry(key) else {
            self.missing(key, allowed.join(" or "), None);
            return None;
        };
        self.name_of(key, value, names)
    }

    fn name_of<T: Copy>(
        &self,
        key: &str,
        value: &Spanned<DeValue<'t>>,
        names: &[(&str, T)],
    ) -> Option<T> {
        let text = value.get_ref().as_str();
        let found = names.iter().find(|(name, _)| text == Some(name));
        if found.is_none() {
            let near = nearest(
                text.unwrap_or_default(),
                names.iter().map(|&(name, _)| name),
            );
            self.fault(
                key,
                FaultKind::UnknownName {
                    read: self.read(value),
                    allowed: quoted(names),
                    nearest: near.map(|name| format!("\"{name}\"")),
                },
            );
        }
        found.map(|&(_, choice)| choice)
    }

    /// A list of different names, at least one; `None` when the key is absent.
    pub fn choices<T: Copy + PartialEq>(&self, key: &str, names: &[(&str, T)]) -> Option<Vec<T>> {
        let value = self.entry(key)?;
        let items = value.get_ref().as_array().filter(|items| !items.is_empty());
        let Some(items) = items else {
            let read = match value.get_ref() {
                DeValue::Array(_) => "an empty list".to_owned(),
                _ => self.read(value),
            };
            let allowed = format!("a list of {}", quoted(names).join(", "));
            self.fault(key, FaultKind::WrongType { read, allowed });
            return None;
        };
        let mut chosen = Vec::new();
        for item in items.iter() {
            let Some(choice) = self.name_of(key, item, names) else {
                continue;
            };
            if chosen.contains(&choice) {
                let read = self.read(item);
                self.fault(key, FaultKind::Repeated { read });
            }
            chosen.push(choice);
        }
        Some(chosen)
    }

    /// The words `word`, or a value.
    pub fn word_or<T>(&self, key: &str, word: (&str, T), figure: Figure, make: fn(f64) -> T) -> T {
        let (word, meaning) = word;
        let Some(value) = self.entry(key) else {
            let allowed = format!("\"{word}\" or {}", figure.describe());
            self.missing(key, allowed, Some(format!("\"{word}\"")));
            return meaning;
        };
        let text = value.get_ref().as_str();
        if text == Some(word) {
            return meaning;
        }
        match figure.read(value.get_ref(), &self.read(value)) {
            Ok(si) => make(si),
            Err(FaultKind::OutOfRange { read, allowed }) => {
                self.fault(key, FaultKind::OutOfRange { read, allowed });
                meaning
            }
            Err(_) => {
                let near = nearest(text.unwrap_or_default(), [word]);
                self.fault(
                    key,
                    FaultKind::UnknownName {
                        read: self.read(value),
                        allowed: vec![format!("\"{word}\" or {}", figure.describe())],
                        nearest: near.map(|name| format!("\"{name}\"")),
                    },
                );
                meaning
            }
        }
    }
}

fn quoted<T>(names: &[(&str, T)]) -> Vec<String> {
    names
        .iter()
        .map(|(name, _)| format!("\"{name}\""))
        .collect()
}

/// Evenly spaced values, both ends exact; those between lose what lies past twelve digits, so that a tenth of a volt
/// from 0.8 V is the 0.9 V that a person would write.
fn evenly(from: f64, to: f64, steps: u32) -> Vec<f64> {
    let last = steps - 1;
    let between = |i: u32| {
        let value = from + (to - from) * f64::from(i) / f64::from(last);
        format!("{value:.11e}").parse().unwrap_or(value)
    };
    let inner = (1..last).map(between);
    std::iter::once(from).chain(inner).chain([to]).collect()
}
