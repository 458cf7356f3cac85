//! Quantities as users write them, `"2.45 GHz"`, to SI numbers and back, dimension checked.
//!
//! Units and prefixes after the SI brochure (BIPM, 9th edition). The decimal exponent of the prefixes is spliced
//! into the number's text before it becomes an `f64`, so `"10 um"` is the double nearest 1e-5, not a product.

use std::fmt;

/// What a quantity must measure.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Dimension {
    /// Hz.
    Frequency,
    /// V.
    Voltage,
    /// Ω.
    Resistance,
    /// m.
    Length,
    /// m².
    Area,
    /// W; dBm is accepted.
    Power,
    /// F.
    Capacitance,
    /// H.
    Inductance,
    /// A.
    Current,
    /// s.
    Time,
    /// S.
    Conductance,
    /// K; degC is accepted.
    Temperature,
    /// dB.
    Loss,
    /// dBc, relative to the carrier.
    Carrier,
    /// A/V².
    Transconductance,
    /// V/K.
    VoltageDrift,
    /// 1/V.
    PerVoltage,
    /// Ω·m: a resistivity, or a resistance times a width.
    ResistanceLength,
    /// F/m.
    CapacitancePerLength,
    /// F/m².
    CapacitancePerArea,
    /// S/m².
    ConductancePerArea,
    /// A/m.
    CurrentPerLength,
    /// m²/H.
    AreaPerInductance,
}

/// Exponents of metre, kilogram, second, ampere, kelvin; then decibel and decibel to the carrier.
type Exponents = [i32; 7];

impl Dimension {
    /// Name with its article, an example, exponents.
    const fn facts(self) -> (&'static str, &'static str, Exponents) {
        match self {
            Self::Frequency => ("a frequency", "2.45 GHz", [0, 0, -1, 0, 0, 0, 0]),
            Self::Voltage => ("a voltage", "1.2 V", VOLT),
            Self::Resistance => ("a resistance", "50 ohm", OHM),
            Self::Length => ("a length", "600 um", [1, 0, 0, 0, 0, 0, 0]),
            Self::Area => ("an area", "0.4 mm^2", [2, 0, 0, 0, 0, 0, 0]),
            Self::Power => ("a power", "20 dBm", WATT),
            Self::Capacitance => ("a capacitance", "20 fF", FARAD),
            Self::Inductance => ("an inductance", "1.5 nH", HENRY),
            Self::Current => ("a current", "15 mA", [0, 0, 0, 1, 0, 0, 0]),
            Self::Time => ("a time", "40 ps", [0, 0, 1, 0, 0, 0, 0]),
            Self::Conductance => ("a conductance", "20 mS", SIEMENS),
            Self::Temperature => ("a temperature", "27 degC", [0, 0, 0, 0, 1, 0, 0]),
            Self::Loss => ("a loss", "0.5 dB", [0, 0, 0, 0, 0, 1, 0]),
            Self::Carrier => ("a level to the carrier", "-30 dBc", [0, 0, 0, 0, 0, 0, 1]),
            Self::Transconductance => (
                "a transconductance parameter",
                "280 uA/V^2",
                [-4, -2, 6, 3, 0, 0, 0],
            ),
            Self::VoltageDrift => ("a voltage drift", "-0.8 mV/K", [2, 1, -3, -1, -1, 0, 0]),
            Self::PerVoltage => ("an inverse voltage", "0.5 1/V", [-2, -1, 3, 1, 0, 0, 0]),
            Self::ResistanceLength => (
                "a resistance times a length",
                "200 ohm um",
                [3, 1, -3, -2, 0, 0, 0],
            ),
            Self::CapacitancePerLength => (
                "a capacitance a length",
                "0.95 fF/um",
                [-3, -1, 4, 2, 0, 0, 0],
            ),
            Self::CapacitancePerArea => (
                "a capacitance an area",
                "2 fF/um^2",
                [-4, -1, 4, 2, 0, 0, 0],
            ),
            Self::ConductancePerArea => (
                "a conductance an area",
                "4e-8 S/um^2",
                [-4, -1, 3, 2, 0, 0, 0],
            ),
            Self::CurrentPerLength => ("a current a length", "20 nA/um", [-1, 0, 0, 1, 0, 0, 0]),
            Self::AreaPerInductance => (
                "an area an inductance",
                "0.03 mm^2/nH",
                [0, -1, 2, 2, 0, 0, 0],
            ),
        }
    }

    /// Its name with an article, `a frequency`.
    pub const fn name(self) -> &'static str {
        self.facts().0
    }

    /// How one may be written, `2.45 GHz`.
    pub const fn example(self) -> &'static str {
        self.facts().1
    }
}

const VOLT: Exponents = [2, 1, -3, -1, 0, 0, 0];
const OHM: Exponents = [2, 1, -3, -2, 0, 0, 0];
const SIEMENS: Exponents = [-2, -1, 3, 2, 0, 0, 0];
const WATT: Exponents = [2, 1, -3, 0, 0, 0, 0];
const FARAD: Exponents = [-2, -1, 4, 2, 0, 0, 0];
const HENRY: Exponents = [2, 1, -2, -2, 0, 0, 0];

/// Units that take prefixes and powers.
const UNITS: [(&str, Exponents); 14] = [
    ("Hz", [0, 0, -1, 0, 0, 0, 0]),
    ("ohm", OHM),
    ("Ohm", OHM),
    ("\u{3a9}", OHM),
    ("\u{2126}", OHM),
    ("V", VOLT),
    ("m", [1, 0, 0, 0, 0, 0, 0]),
    ("W", WATT),
    ("F", FARAD),
    ("H", HENRY),
    ("A", [0, 0, 0, 1, 0, 0, 0]),
    ("s", [0, 0, 1, 0, 0, 0, 0]),
    ("S", SIEMENS),
    ("K", [0, 0, 0, 0, 1, 0, 0]),
];

const PREFIXES: [(char, i32); 12] = [
    ('f', -15),
    ('p', -12),
    ('n', -9),
    ('u', -6),
    ('\u{b5}', -6),
    ('\u{3bc}', -6),
    ('m', -3),
    ('c', -2),
    ('k', 3),
    ('M', 6),
    ('G', 9),
    ('T', 12),
];

/// Largest power of a unit that is read.
const LARGEST_POWER: i32 = 9;

/// Why a text is no quantity of the wanted dimension.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error("read {}; allowed: {}", self.what_was_read(), self.allowed())]
pub struct QuantityError {
    /// The text.
    pub text: String,
    /// What is wrong with it.
    pub problem: QuantityProblem,
    /// What was wanted.
    pub dimension: Dimension,
}

/// What is wrong with a text that should be a quantity.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum QuantityProblem {
    /// It does not start with a decimal number.
    NoNumber,
    /// A number stands alone.
    NoUnit,
    /// A part of the unit is not known.
    UnknownUnit(String),
    /// It measures something else.
    WrongDimension,
    /// The SI value does not fit a double.
    OutOfDoubles,
}

impl QuantityError {
    /// The text and what is wrong with it.
    pub fn what_was_read(&self) -> String {
        format!("{} {}", quoted(&self.text), self.problem)
    }

    /// The wanted dimension and an example.
    pub fn allowed(&self) -> String {
        format!(
            "{}, for example \"{}\"",
            self.dimension.name(),
            self.dimension.example()
        )
    }
}

impl fmt::Display for QuantityProblem {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::NoNumber => write!(f, "(no number at its start)"),
            Self::NoUnit => write!(f, "(no unit)"),
            Self::UnknownUnit(unit) => write!(f, "(unknown unit {})", quoted(unit)),
            Self::WrongDimension => write!(f, "(another dimension)"),
            Self::OutOfDoubles => write!(f, "(beyond what a number can hold)"),
        }
    }
}

/// `text` in quotes, controls escaped, cut when it is long.
pub(crate) fn quoted(text: &str) -> String {
    const LONGEST: usize = 60;
    if text.chars().count() > LONGEST {
        let head: String = text.chars().take(LONGEST).collect();
        format!("{head:?}...")
    } else {
        format!("{text:?}")
    }
}

/// `text` as an SI number of `dimension`.
///
/// A decimal number, then a unit: prefixed units with powers (`mm^2`, `mm2`), joined by a space or `*` for products
/// and `/` for a quotient with the next unit. The space after the number may be left out.
///
/// # Errors
/// [`QuantityError`] when the number or the unit is missing or unknown, or the dimension is another.
pub fn parse(text: &str, dimension: Dimension) -> Result<f64, QuantityError> {
    read(text.trim(), dimension.facts().2).map_err(|problem| QuantityError {
        text: text.to_owned(),
        problem,
        dimension,
    })
}

fn read(text: &str, wanted: Exponents) -> Result<f64, QuantityProblem> {
    let (number, unit) = split_number(text).ok_or(QuantityProblem::NoNumber)?;
    let unit = unit.trim();
    if unit.is_empty() {
        return Err(QuantityProblem::NoUnit);
    }
    // Units with an offset or a logarithm stand alone, without prefix or power.
    let alone = |exponents: Exponents, convert: fn(f64) -> f64| {
        if exponents == wanted {
            in_doubles(convert(decimal(number, 0)?))
        } else {
            Err(QuantityProblem::WrongDimension)
        }
    };
    match unit {
        "dBm" => alone(WATT, |v| 10f64.powf((v - 30.0) / 10.0)),
        "degC" => alone(Dimension::Temperature.facts().2, |v| v + 273.15),
        "dB" => alone(Dimension::Loss.facts().2, |v| v),
        "dBc" => alone(Dimension::Carrier.facts().2, |v| v),
        _ => {
            let (exponents, exponent) = read_unit(unit)?;
            if exponents != wanted {
                return Err(QuantityProblem::WrongDimension);
            }
            decimal(number, exponent)
        }
    }
}

/// The leading decimal number and the rest.
fn split_number(text: &str) -> Option<(&str, &str)> {
    let bytes = text.as_bytes();
    let digits = |from: usize| {
        bytes[from..]
            .iter()
            .take_while(|b| b.is_ascii_digit())
            .count()
    };
    let mut at = usize::from(matches!(bytes.first(), Some(b'+' | b'-')));
    let whole = digits(at);
    at += whole;
    let mut fraction = 0;
    if bytes.get(at) == Some(&b'.') {
        fraction = digits(at + 1);
        at += 1 + fraction;
    }
    if whole + fraction == 0 {
        return None;
    }
    if matches!(bytes.get(at), Some(b'e' | b'E')) {
        let sign = usize::from(matches!(bytes.get(at + 1), Some(b'+' | b'-')));
        let exponent = digits((at + 1 + sign).min(bytes.len()));
        if exponent > 0 {
            at += 1 + sign + exponent;
        }
    }
    Some(text.split_at(at))
}

/// `number`·10^`exponent`, correctly rounded.
fn decimal(number: &str, exponent: i32) -> Result<f64, QuantityProblem> {
    let (mantissa, own) = number.split_once(['e', 'E']).unwrap_or((number, "0"));
    let own: i64 = own.parse().map_err(|_| QuantityProblem::OutOfDoubles)?;
    let total = own
        .checked_add(i64::from(exponent))
        .ok_or(QuantityProblem::OutOfDoubles)?;
    let value: f64 = format!("{mantissa}e{total}")
        .parse()
        .map_err(|_| QuantityProblem::NoNumber)?;
    let is_zero = mantissa.bytes().all(|b| !matches!(b, b'1'..=b'9'));
    if value == 0.0 && !is_zero {
        return Err(QuantityProblem::OutOfDoubles);
    }
    in_doubles(value)
}

fn in_doubles(value: f64) -> Result<f64, QuantityProblem> {
    if value.is_finite() {
        Ok(value)
    } else {
        Err(QuantityProblem::OutOfDoubles)
    }
}

/// Exponents and power of ten of a unit with products and quotients.
fn read_unit(text: &str) -> Result<(Exponents, i32), QuantityProblem> {
    let unknown = |part: &str| QuantityProblem::UnknownUnit(part.to_owned());
    let mut exponents = [0; 7];
    let mut exponent = 0;
    for (i, factor) in text.split('/').enumerate() {
        let (sign, parts) = if i == 0 {
            (
                1,
                factor
                    .split([' ', '*', '\u{b7}'])
                    .filter(|p| !p.is_empty())
                    .collect(),
            )
        } else {
            // A product after a slash could mean two things; only one unit is read there.
            (-1, vec![factor.trim()])
        };
        for part in parts {
            if i == 0 && part == "1" {
                continue;
            }
            let (unit, power) = read_power(part).ok_or_else(|| unknown(part))?;
            let (unit, prefix) = read_prefixed(unit).ok_or_else(|| unknown(part))?;
            for (sum, one) in exponents.iter_mut().zip(unit) {
                *sum += sign * power * one;
            }
            exponent += sign * power * prefix;
        }
    }
    Ok((exponents, exponent))
}

/// `mm^2`, `mm2` and `mm²` to (`mm`, 2).
fn read_power(part: &str) -> Option<(&str, i32)> {
    if let Some(unit) = part.strip_suffix('\u{b2}') {
        return Some((unit, 2));
    }
    let (unit, power) = match part.split_once('^') {
        Some(split) => split,
        None => part.split_at(
            part.find(|c: char| c.is_ascii_digit())
                .unwrap_or(part.len()),
        ),
    };
    if power.is_empty() {
        return (!part.contains('^')).then_some((unit, 1));
    }
    let power: i32 = power.parse().ok()?;
    (1..=LARGEST_POWER)
        .contains(&power)
        .then_some((unit, power))
}

/// A unit with or without a prefix: its exponents and the prefix's power of ten.
fn read_prefixed(text: &str) -> Option<(Exponents, i32)> {
    let plain = |name: &str| {
        UNITS
            .iter()
            .find(|(unit, _)| *unit == name)
            .map(|(_, e)| *e)
    };
    if let Some(exponents) = plain(text) {
        return Some((exponents, 0));
    }
    let mut rest = text.chars();
    let first = rest.next()?;
    let (_, power) = PREFIXES.iter().find(|(prefix, _)| *prefix == first)?;
    Some((plain(rest.as_str())?, *power))
}

/// `value` with `unit` to four significant digits and the fitting prefix, `1.23 nH`; zeros at the end are left off.
///
/// A unit that ends in `^2` takes a prefix every six decades (`0.4 mm^2` is 4e-7 m^2).
pub fn engineering(value: f64, unit: &str) -> String {
    const PREFIX: [&str; 10] = ["f", "p", "n", "u", "m", "", "k", "M", "G", "T"];
    const PLAIN: i32 = 5;
    if value == 0.0 || !value.is_finite() {
        return format!("{value} {unit}");
    }
    let step = if unit.ends_with("^2") { 6 } else { 3 };
    let text = format!("{:.3e}", value.abs());
    let (mantissa, exponent) = text.split_once('e').unwrap_or((&text, "0"));
    let exponent: i32 = exponent.parse().unwrap_or(0);
    let digits: String = mantissa.chars().filter(char::is_ascii_digit).collect();
    let group = exponent
        .div_euclid(step)
        .clamp(-PLAIN, PREFIX.len() as i32 - 1 - PLAIN);
    // Digits before the point; beyond the prefixes there may be none or many.
    let before = exponent - group * step + 1;
    let number = if before <= 0 {
        format!("0.{}{digits}", "0".repeat(before.unsigned_abs() as usize))
    } else {
        let padded = format!("{digits:0<width$}", width = before as usize);
        let (whole, fraction) = padded.split_at(before as usize);
        format!("{whole}.{fraction}")
    };
    let number = number.trim_end_matches('0').trim_end_matches('.');
    let sign = if value < 0.0 { "-" } else { "" };
    format!("{sign}{number} {}{unit}", PREFIX[(group + PLAIN) as usize])
}

#[cfg(test)]
mod tests {
    use super::*;
    use Dimension as D;
    use proptest::prelude::*;

    #[test]
    fn law_prefixes_are_exact() {
        for (text, dimension, value) in [
            ("2.45 GHz", D::Frequency, 2.45e9),
            ("10um", D::Length, 1e-5),
            ("10 \u{b5}m", D::Length, 1e-5),
            ("10 \u{3bc}m", D::Length, 1e-5),
            ("280 uA/V^2", D::Transconductance, 280e-6),
            ("-0.8 mV/K", D::VoltageDrift, -0.8e-3),
            ("0.5 1/V", D::PerVoltage, 0.5),
            ("0.5/V", D::PerVoltage, 0.5),
            ("200 ohm um", D::ResistanceLength, 200e-6),
            ("0.95 fF/um", D::CapacitancePerLength, 0.95e-9),
            ("1.9e-8 ohm m", D::ResistanceLength, 1.9e-8),
            ("1.6e-3 fF/um^2", D::CapacitancePerArea, 1.6e-6),
            ("4e-8 S/um^2", D::ConductancePerArea, 4e4),
            ("0.02 mm^2", D::Area, 0.02e-6),
            ("0.4mm2", D::Area, 0.4e-6),
            ("0.03 mm^2/nH", D::AreaPerInductance, 30.0),
            ("20 mohm", D::Resistance, 0.02),
            ("20 m\u{3a9}", D::Resistance, 0.02),
            ("1 mA/um", D::CurrentPerLength, 1e3),
            ("1 cm", D::Length, 0.01),
            ("0 dB", D::Loss, 0.0),
            ("-30 dBc", D::Carrier, -30.0),
            ("20 dBm", D::Power, 0.1),
            ("27 degC", D::Temperature, 300.15),
            ("300 K", D::Temperature, 300.0),
            ("4 S", D::Conductance, 4.0),
            ("40 ps", D::Time, 40e-12),
            ("1.5 nH", D::Inductance, 1.5e-9),
            ("3 A", D::Current, 3.0),
        ] {
            assert_eq!(parse(text, dimension), Ok(value), "{text}");
        }
    }

    #[test]
    fn law_every_example_is_of_its_own_dimension() {
        for d in [
            D::Frequency,
            D::Voltage,
            D::Resistance,
            D::Length,
            D::Area,
            D::Power,
            D::Capacitance,
            D::Inductance,
            D::Current,
            D::Time,
            D::Conductance,
            D::Temperature,
            D::Loss,
            D::Carrier,
            D::Transconductance,
            D::VoltageDrift,
            D::PerVoltage,
            D::ResistanceLength,
            D::CapacitancePerLength,
            D::CapacitancePerArea,
            D::ConductancePerArea,
            D::CurrentPerLength,
            D::AreaPerInductance,
        ] {
            assert!(parse(d.example(), d).is_ok(), "{d:?}");
        }
    }

    #[test]
    fn law_faults_are_told_apart() {
        use QuantityProblem as P;
        for (text, problem) in [
            ("", P::NoNumber),
            ("NaN V", P::NoNumber),
            ("inf V", P::NoNumber),
            ("1.2", P::NoUnit),
            ("1.2 volts", P::UnknownUnit("volts".into())),
            ("1.2 V^0", P::UnknownUnit("V^0".into())),
            ("1.2 V/A s", P::UnknownUnit("A s".into())),
            ("1.2 A", P::WrongDimension),
            ("1.2 dBm", P::WrongDimension),
            ("1e400 V", P::OutOfDoubles),
            ("1e-400 V", P::OutOfDoubles),
            ("1e99999999999999999999 V", P::OutOfDoubles),
        ] {
            let error = parse(text, D::Voltage).map_err(|e| e.problem);
            assert_eq!(error, Err(problem), "{text}");
        }
        assert_eq!(
            parse("1e9 dBm", D::Power).map_err(|e| e.problem),
            Err(P::OutOfDoubles)
        );
        assert_eq!(
            parse("1.2", D::Voltage).map_err(|e| e.to_string()),
            Err("read \"1.2\" (no unit); allowed: a voltage, for example \"1.2 V\"".into())
        );
    }

    #[test]
    fn law_engineering_keeps_four_digits() {
        for (value, unit, text) in [
            (1.23e-9, "H", "1.23 nH"),
            (1.23456e-9, "H", "1.235 nH"),
            (999.96, "ohm", "1 kohm"),
            (-0.8e-3, "V", "-800 uV"),
            (2.45e9, "Hz", "2.45 GHz"),
            (4e-7, "m^2", "400000 um^2"),
            (4e-6, "m^2", "4 mm^2"),
            (0.0, "V", "0 V"),
            (1.5e-18, "F", "0.0015 fF"),
            (1.5e16, "Hz", "15000 THz"),
        ] {
            assert_eq!(engineering(value, unit), text);
        }
    }

    /// Four significant digits: half a unit of the fourth.
    const FOUR_DIGITS: f64 = 5.0001e-4;

    proptest! {
        #[test]
        fn law_no_text_panics(text in ".*") {
            let read = parse(&text, D::Voltage);
            prop_assert!(read.is_err() || read.is_ok_and(f64::is_finite));
        }

        #[test]
        fn law_no_near_quantity_panics(text in "[-+]?[0-9]{0,4}[.]?[0-9]{0,3}(e[-+]?[0-9]{0,4})? ?[a-zA-Zµ0-9^/ *]{0,8}") {
            let read = parse(&text, D::Voltage);
            prop_assert!(read.is_err() || read.is_ok_and(f64::is_finite));
        }

        #[test]
        fn law_round_trip_through_engineering(mantissa in 1.0f64..10.0, decade in -15i32..13) {
            let value = mantissa * 10f64.powi(decade);
            let back = parse(&engineering(value, "V"), D::Voltage);
            prop_assert!(back.is_ok_and(|b| (b / value - 1.0).abs() < FOUR_DIGITS));
        }

        #[test]
        fn law_round_trip_of_the_plain_unit_is_exact(bits in any::<u64>()) {
            let value = f64::from_bits(bits);
            prop_assume!(value.is_finite());
            prop_assert_eq!(parse(&format!("{value:e} V"), D::Voltage), Ok(value));
        }
    }
}
