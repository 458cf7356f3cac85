//! One value of a file: what it measures, and the interval it must lie in.

use super::diagnostics::FaultKind;
use crate::quantity::{Dimension, Quantity, QuantityError, excerpt};
use toml::de::DeValue;

/// How a value is written.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Measure {
    /// A string with a unit.
    Quantity(Dimension),
    /// A bare number.
    Number,
    /// A bare whole number.
    Whole,
}

/// The values that make sense, SI; wide enough for any real design, narrow enough to catch a slipped prefix.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Interval {
    low: f64,
    high: f64,
    low_open: bool,
    high_open: bool,
}

/// `low <= value <= high`.
pub const fn within(low: f64, high: f64) -> Interval {
    Interval {
        low,
        high,
        low_open: false,
        high_open: false,
    }
}

/// `low < value <= high`.
pub const fn above(low: f64, high: f64) -> Interval {
    Interval {
        low_open: true,
        ..within(low, high)
    }
}

/// `low <= value < high`.
pub const fn below(low: f64, high: f64) -> Interval {
    Interval {
        high_open: true,
        ..within(low, high)
    }
}

/// `low < value < high`.
pub const fn between(low: f64, high: f64) -> Interval {
    Interval {
        low_open: true,
        ..below(low, high)
    }
}

impl Interval {
    fn contains(&self, value: f64) -> bool {
        let low = value > self.low || (value == self.low && !self.low_open);
        let high = value < self.high || (value == self.high && !self.high_open);
        low && high
    }
}

/// What a value measures and where it must lie.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Figure {
    measure: Measure,
    allowed: Interval,
}

/// A string with a unit.
pub const fn quantity(dimension: Dimension, allowed: Interval) -> Figure {
    Figure {
        measure: Measure::Quantity(dimension),
        allowed,
    }
}

/// A bare number.
pub const fn number(allowed: Interval) -> Figure {
    Figure {
        measure: Measure::Number,
        allowed,
    }
}

/// A bare whole number.
pub const fn whole(low: u32, high: u32) -> Figure {
    Figure {
        measure: Measure::Whole,
        allowed: within(low as f64, high as f64),
    }
}

impl Figure {
    /// True for whole numbers.
    pub fn is_whole(&self) -> bool {
        self.measure == Measure::Whole
    }

    /// A value that stands where a fault was recorded; what is built with it is never used.
    pub(crate) fn placeholder(&self) -> f64 {
        self.allowed.low
    }

    /// A value for people, with its unit.
    pub fn show(&self, value: f64) -> String {
        match self.measure {
            Measure::Quantity(dimension) => dimension.show(value),
            Measure::Number | Measure::Whole => format!("{value}"),
        }
    }

    /// The interval for people, such as `1 MHz to 300 GHz`.
    pub fn allowed(&self) -> String {
        let Interval {
            low,
            high,
            low_open,
            high_open,
        } = self.allowed;
        let (from, to) = (self.show(low), self.show(high));
        match (low_open, high_open) {
            (false, false) if self.is_whole() && high == low + 1.0 => format!("{from} or {to}"),
            (false, false) => format!("{from} to {to}"),
            (true, false) => format!("more than {from}, at most {to}"),
            (false, true) => format!("at least {from}, less than {to}"),
            (true, true) => format!("more than {from}, less than {to}"),
        }
    }

    /// Kind and interval for people, such as `a frequency such as "2.45 GHz", 1 MHz to 300 GHz`.
    pub fn describe(&self) -> String {
        let kind = match self.measure {
            Measure::Quantity(dimension) => dimension.to_string(),
            Measure::Number => "a number".to_owned(),
            Measure::Whole => "a whole number".to_owned(),
        };
        format!("{kind}, {}", self.allowed())
    }

    /// A value as a file may hold it, where the kind gives one.
    pub fn example(&self) -> Option<String> {
        match self.measure {
            Measure::Quantity(dimension) => Some(format!("\"{}\"", dimension.example())),
            Measure::Number | Measure::Whole => None,
        }
    }

    /// Reads a TOML value; `read` is its text in the file.
    pub(crate) fn read(&self, value: &DeValue<'_>, read: &str) -> Result<f64, FaultKind> {
        let wrong_type = |allowed: String| FaultKind::WrongType {
            read: read.to_owned(),
            allowed,
        };
        let si = match (self.measure, value) {
            (Measure::Quantity(dimension), DeValue::String(text)) => {
                Quantity::parse(text, dimension)?
            }
            (Measure::Quantity(allowed), DeValue::Integer(_) | DeValue::Float(_)) => {
                let read = read.to_owned();
                return Err(QuantityError::MissingUnit { read, allowed }.into());
            }
            (Measure::Number, DeValue::Float(text)) => {
                text.as_str().parse().unwrap_or(f64::INFINITY)
            }
            (Measure::Number | Measure::Whole, DeValue::Integer(digits)) => {
                // an integer beyond 64 bits is out of every interval
                i64::from_str_radix(digits.as_str(), digits.radix())
                    .map_or(f64::INFINITY, |integer| integer as f64)
            }
            (Measure::Number | Measure::Whole, DeValue::String(_)) => {
                return Err(wrong_type(format!("{}, without quotes", self.describe())));
            }
            _ => return Err(wrong_type(self.describe())),
        };
        if !self.allowed.contains(si) {
            return Err(FaultKind::OutOfRange {
                read: read.to_owned(),
                allowed: self.allowed(),
            });
        }
        // -0.0 becomes 0.0
        Ok(si + 0.0)
    }

    /// Reads a value as a file would hold it; strings may stand without their quotes.
    pub(crate) fn read_text(&self, text: &str) -> Result<f64, FaultKind> {
        let text = text.trim();
        let read = excerpt(text);
        if let Ok(value) = DeValue::parse(text) {
            return self.read(value.get_ref(), &read);
        }
        match self.measure {
            Measure::Quantity(_) => self.read(&DeValue::String(text.into()), &read),
            Measure::Number | Measure::Whole => Err(FaultKind::WrongType {
                read,
                allowed: self.describe(),
            }),
        }
    }
}
