//! Quantities as people write them, "2.45 GHz", to and from plain SI numbers.
//!
//! A unit is a product or quotient of prefixed SI symbols, read from left to right: `fF/um`, `ohm um`, `uA/V^2`,
//! `1/V`. Four units stand outside that grammar: `degC` (read as kelvin), `dBm` (read as watts), `dB` and `dBc`
//! (kept as they are). The dimension is checked, so a length is never taken for an area.
//!
//! Prefixes shift the decimal exponent of the written number before it becomes binary, so `"10 um"` is the number
//! 1e-5 and not the product 10·1e-6. `degC` and `dBm` alone are computed.

mod date;
mod dimension;
mod format;
mod unit;

pub use date::civil_date;
pub use dimension::Dimension;
pub use format::{format, format_in, micrometres};

use unit::{SYMBOLS, Unit};

/// Absolute zero of the Celsius scale, K.
const CELSIUS_ZERO_K: f64 = 273.15;
/// Longest piece of somebody's text that a message repeats, characters.
const EXCERPT_CHARACTERS: usize = 60;

/// Why a text is not the quantity it should be.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum QuantityError {
    /// The text does not start with a decimal number.
    #[error("read {read:?}, which does not start with a number; allowed {allowed}")]
    NotANumber {
        /// The text.
        read: String,
        /// What it should have been.
        allowed: Dimension,
    },
    /// A number alone.
    #[error("read {read:?}, which has no unit; allowed {allowed}")]
    MissingUnit {
        /// The text.
        read: String,
        /// What it should have been.
        allowed: Dimension,
    },
    /// A unit outside the grammar.
    #[error("read {read:?}, whose unit {unit:?} is not known; allowed {allowed}")]
    UnknownUnit {
        /// The text.
        read: String,
        /// Its unit.
        unit: String,
        /// What it should have been.
        allowed: Dimension,
    },
    /// A unit that measures something else.
    #[error("read {read:?}, which is {measures}; allowed {allowed}")]
    WrongDimension {
        /// The text.
        read: String,
        /// What its unit measures.
        measures: &'static str,
        /// What it should have been.
        allowed: Dimension,
    },
    /// A number that a 64-bit float cannot hold.
    #[error("read {read:?}, which is too large or too small to compute with; allowed {allowed}")]
    Unrepresentable {
        /// The text.
        read: String,
        /// What it should have been.
        allowed: Dimension,
    },
}

impl QuantityError {
    /// How to mend it.
    pub fn help(&self) -> Option<String> {
        match self {
            QuantityError::MissingUnit { allowed, .. } => Some(format!(
                "write the unit inside the quotes, as in \"{}\"",
                allowed.example()
            )),
            QuantityError::UnknownUnit { unit, .. } if unit.starts_with(',') => {
                Some("write a decimal point, not a comma".to_owned())
            }
            QuantityError::UnknownUnit { .. } => Some(format!(
                "units are {}, S, degC, dBm, dB, dBc, their products and quotients; capitals matter; \
                 prefixes f p n u m c k M G T",
                SYMBOLS.map(|(symbol, _)| symbol).join(", ")
            )),
            _ => None,
        }
    }
}

/// Quantities with a checked dimension.
pub struct Quantity;

impl Quantity {
    /// Reads "2.45 GHz" and gives the SI value, always finite; `dB` and `dBc` stay in decibels.
    ///
    /// The space between number and unit may be left out.
    pub fn parse(text: &str, allowed: Dimension) -> Result<f64, QuantityError> {
        let read = excerpt(text);
        let Some((number, unit_text)) = split_number(text.trim()) else {
            return Err(QuantityError::NotANumber { read, allowed });
        };
        if unit_text.is_empty() {
            return Err(QuantityError::MissingUnit { read, allowed });
        }
        let Some(unit) = Unit::parse(unit_text) else {
            let unit = excerpt(unit_text);
            return Err(QuantityError::UnknownUnit {
                read,
                unit,
                allowed,
            });
        };
        if !unit.measures(allowed) {
            let measures = Dimension::ALL
                .into_iter()
                .find(|&other| unit.measures(other))
                .map_or("something else", Dimension::noun);
            return Err(QuantityError::WrongDimension {
                read,
                measures,
                allowed,
            });
        }
        let value = match unit {
            Unit::Product { ten, .. } => number.shifted(ten),
            Unit::Celsius => number.shifted(0).map(|c| c + CELSIUS_ZERO_K),
            Unit::Milliwatts => number.shifted(0).map(|dbm| 1e-3 * 10f64.powf(dbm / 10.0)),
            Unit::Decibel | Unit::Carrier => number.shifted(0),
        };
        match value {
            Some(si) if si.is_finite() && (unit != Unit::Milliwatts || si > 0.0) => Ok(si),
            _ => Err(QuantityError::Unrepresentable { read, allowed }),
        }
    }
}

/// The beginning of a text, short enough for a message.
pub(crate) fn excerpt(text: &str) -> String {
    match text.char_indices().nth(EXCERPT_CHARACTERS) {
        Some((end, _)) => format!("{}…", &text[..end]),
        None => text.to_owned(),
    }
}

/// A decimal number as written: sign and digits with at most one point, times a power of ten.
struct Written {
    mantissa: String,
    exponent: i32,
}

impl Written {
    /// The number times 10^`ten`, correctly rounded; `None` when it overflows, or when it is not zero and underflows.
    fn shifted(&self, ten: i32) -> Option<f64> {
        let exponent = self.exponent.saturating_add(ten);
        let value: f64 = format!("{}e{exponent}", self.mantissa).parse().ok()?;
        let zero = !self.mantissa.contains(|c: char| ('1'..='9').contains(&c));
        if zero {
            return Some(0.0);
        }
        value.is_normal().then_some(value)
    }
}

/// The number at the start of a text, and the rest without the space between.
fn split_number(text: &str) -> Option<(Written, &str)> {
    let (sign, rest) = match text.chars().next()? {
        '-' => ("-", &text[1..]),
        '+' => ("", &text[1..]),
        // the minus sign of typeset text, U+2212
        '−' => ("-", &text['−'.len_utf8()..]),
        _ => ("", text),
    };
    let end = rest
        .find(|c: char| !c.is_ascii_digit() && c != '.')
        .unwrap_or(rest.len());
    let (digits, mut rest) = rest.split_at(end);
    if digits.matches('.').count() > 1 || !digits.contains(|c: char| c.is_ascii_digit()) {
        return None;
    }
    let mut exponent = 0;
    if let Some(tail) = rest.strip_prefix(['e', 'E']) {
        let unsigned = tail.strip_prefix(['+', '-']).unwrap_or(tail);
        let length = unsigned
            .find(|c: char| !c.is_ascii_digit())
            .unwrap_or(unsigned.len());
        if length > 0 {
            // more digits than an i32 holds only say "far out of reach"
            let size = unsigned[..length].parse().unwrap_or(i32::MAX);
            exponent = if tail.starts_with('-') { -size } else { size };
            rest = &unsigned[length..];
        }
    }
    let mantissa = format!("{sign}{digits}");
    Some((Written { mantissa, exponent }, rest.trim_start()))
}

#[cfg(test)]
mod tests {
    use super::unit::PREFIXES;
    use super::*;
    use proptest::prelude::*;

    /// Half a unit in the last of four digits, for numbers written for people; a little more for the rounding of
    /// the comparison itself.
    const FOUR_DIGITS: f64 = 5.01e-4;

    fn parse(text: &str, dimension: Dimension) -> f64 {
        Quantity::parse(text, dimension).unwrap()
    }

    #[test]
    fn law_every_unit_of_the_files_is_exact() {
        use Dimension::*;
        for (text, dimension, si) in [
            ("2.45 GHz", Frequency, 2.45e9),
            ("2.45GHz", Frequency, 2.45e9),
            ("10 um", Length, 1e-5),
            ("600 um", Length, 6e-4),
            ("4 \u{b5}m", Length, 4e-6),
            ("4 \u{3bc}m", Length, 4e-6),
            ("4 mm", Length, 4e-3),
            ("3 cm", Length, 3e-2),
            ("5 m", Length, 5.0),
            ("0.6 mm^2", Area, 6e-7),
            ("0.6 mm2", Area, 6e-7),
            ("0.6 mm²", Area, 6e-7),
            ("0.6 m^2", Area, 0.6),
            ("50 ohm", Resistance, 50.0),
            ("50 Ohm", Resistance, 50.0),
            ("50 Ω", Resistance, 50.0),
            ("50 \u{2126}", Resistance, 50.0),
            ("20 mohm", Resistance, 0.02),
            ("1.2 nH", Inductance, 1.2e-9),
            ("20 fF", Capacitance, 20e-15),
            ("20 ps", Time, 20e-12),
            ("5 mA", Current, 5e-3),
            ("100 mW", Power, 0.1),
            ("300 K", Temperature, 300.0),
            ("27 degC", Temperature, 27.0 + 273.15),
            ("20 dBm", Power, 0.1),
            ("-0.5 dB", Decibel, -0.5),
            ("-30 dBc", Carrier, -30.0),
            ("\u{2212}30 dBc", Carrier, -30.0),
            ("280 uA/V^2", Transconductance, 2.8e-4),
            ("-0.8 mV/K", VoltageDrift, -0.8e-3),
            ("0.5 1/V", PerVoltage, 0.5),
            ("200 ohm um", ResistanceLength, 2e-4),
            ("200 ohm*um", ResistanceLength, 2e-4),
            ("50 ohm cm", ResistanceLength, 0.5),
            ("1.9e-8 ohm m", ResistanceLength, 1.9e-8),
            ("0.95 fF/um", CapacitancePerLength, 0.95e-9),
            ("1.6e-3 fF/um^2", CapacitancePerArea, 1.6e-6),
            ("2 fF / um^2", CapacitancePerArea, 2e-3),
            ("4e-8 S/um^2", ConductancePerArea, 4e4),
            ("20 nA/um", CurrentPerLength, 0.02),
            ("16 mA/um", CurrentPerLength, 16e3),
            ("0.03 mm^2/nH", AreaPerInductance, 30.0),
            ("-0 V", Voltage, 0.0),
            (".5 V", Voltage, 0.5),
            ("1.E+3 V", Voltage, 1e3),
        ] {
            let value = parse(text, dimension);
            assert_eq!(
                value.to_bits(),
                f64::to_bits(si),
                "{text}: {value:e}, not {si:e}"
            );
        }
    }

    #[test]
    fn law_every_dimension_reads_its_own_example() {
        for dimension in Dimension::ALL {
            let value = parse(dimension.example(), dimension);
            assert_eq!(
                parse(&dimension.show(value), dimension),
                value,
                "{dimension}"
            );
        }
    }

    #[test]
    fn law_dimensions_are_kept_apart() {
        for one in Dimension::ALL {
            for other in Dimension::ALL {
                let read = Quantity::parse(one.example(), other);
                assert_eq!(read.is_ok(), one == other, "{} as {other}", one.example());
            }
        }
    }

    #[test]
    fn law_what_is_no_quantity_is_refused_with_its_reason() {
        let reason = |text: &str| Quantity::parse(text, Dimension::Voltage).unwrap_err();
        for text in [
            "", "V", "nan V", "inf V", "--1 V", "1.2.3 V", "1,2 V", ". V", "abc",
        ] {
            let error = reason(text);
            let expected = match text {
                "1,2 V" => matches!(error, QuantityError::UnknownUnit { .. }),
                _ => matches!(error, QuantityError::NotANumber { .. }),
            };
            assert!(expected, "{text}: {error}");
        }
        assert!(matches!(reason("1.2"), QuantityError::MissingUnit { .. }));
        for text in [
            "1.2 v", "1.2 Volt", "1.2 V/", "1.2 /V", "1.2 kkV", "1 V^4", "1 dBmV",
        ] {
            assert!(
                matches!(reason(text), QuantityError::UnknownUnit { .. }),
                "{text}"
            );
        }
        assert!(matches!(
            reason("1.2 V/m"),
            QuantityError::WrongDimension { .. }
        ));
        for text in [
            "1e400 V",
            "1e-400 V",
            "1e99999999999999999999 V",
            "1e308 kV",
        ] {
            assert!(
                matches!(reason(text), QuantityError::Unrepresentable { .. }),
                "{text}"
            );
        }
        let cold = Quantity::parse("-1e9 dBm", Dimension::Power);
        assert!(matches!(cold, Err(QuantityError::Unrepresentable { .. })));
    }

    #[test]
    fn law_messages_name_what_was_read_and_what_is_allowed() {
        let error = Quantity::parse("2.45 s", Dimension::Frequency).unwrap_err();
        let message = r#"read "2.45 s", which is a time; allowed a frequency such as "2.45 GHz""#;
        assert_eq!(error.to_string(), message);
    }

    #[test]
    fn law_people_see_engineering_notation() {
        for (value, unit, text) in [
            (1.2e-9, "H", "1.2 nH"),
            (2.45e9, "Hz", "2.45 GHz"),
            (0.0, "V", "0 V"),
            (1.0, "V", "1 V"),
            (-0.05, "V", "-50 mV"),
            (999.96, "Hz", "1 kHz"),
            (123.456e-15, "F", "123.5 fF"),
            (1e-18, "F", "1e-18 F"),
            (f64::NAN, "V", "NaN V"),
        ] {
            assert_eq!(format(value, unit), text);
        }
        for (value, unit, text) in [
            (0.95e-9, "fF/um", "0.95 fF/um"),
            (4e-7, "mm^2", "0.4 mm^2"),
            (5.6e-4, "ohm um", "560 ohm um"),
            (300.15, "degC", "27 degC"),
            (0.1, "dBm", "20 dBm"),
            (4e4, "S/um^2", "4e-8 S/um^2"),
        ] {
            assert_eq!(format_in(value, unit), text);
        }
    }

    proptest! {
        #[test]
        fn law_no_text_breaks_the_reader(text in ".*") {
            for dimension in Dimension::ALL {
                if let Ok(value) = Quantity::parse(&text, dimension) {
                    prop_assert!(value.is_finite());
                }
            }
        }

        #[test]
        fn law_near_misses_do_not_break_the_reader(text in "[-+−0-9.eE]{0,6} ?[fpnuµmkMG1]?(V|m|ohm|Ω|dBm|Hz|²|\\^|/| |2){0,4}") {
            for dimension in Dimension::ALL {
                if let Ok(value) = Quantity::parse(&text, dimension) {
                    prop_assert!(value.is_finite());
                }
            }
        }

        #[test]
        fn law_prefixes_are_exact(number in 1u32..10_000_000, prefix in 0..PREFIXES.len()) {
            let (symbol, ten) = PREFIXES[prefix];
            let expected: f64 = format!("{number}e{ten}").parse().unwrap();
            prop_assert_eq!(parse(&format!("{number} {symbol}V"), Dimension::Voltage), expected);
        }

        #[test]
        fn law_what_people_see_reads_back(mantissa in -9.9999f64..9.9999, ten in -14i32..14) {
            let value = mantissa * 10f64.powi(ten);
            let back = parse(&format(value, "V"), Dimension::Voltage);
            prop_assert!((back - value).abs() <= FOUR_DIGITS * value.abs());
            let back = parse(&format_in(value, "fF/um"), Dimension::CapacitancePerLength);
            prop_assert!((back - value).abs() <= FOUR_DIGITS * value.abs());
        }
    }
}
