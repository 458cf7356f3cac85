//! SI values as people read them.

use super::CELSIUS_ZERO_K;
use super::unit::{PREFIXES, Unit};

/// Significant digits of numbers written for people.
const SIGNIFICANT_DIGITS: usize = 4;

/// An SI value with the prefix that leaves one to three digits before the point: `format(1.2e-9, "H")` is `1.2 nH`.
/// Four significant digits; `unit` is one unprefixed symbol.
pub fn format(value: f64, unit: &str) -> String {
    let Some(decimal) = Decimal::of(value) else {
        return format!("{value} {unit}");
    };
    let ten = decimal.exponent.div_euclid(3) * 3;
    let prefix = PREFIXES
        .iter()
        .find(|&&(symbol, power)| power == ten && symbol != 'μ' && symbol != 'µ');
    match prefix {
        Some((symbol, _)) => format!("{} {symbol}{unit}", decimal.written(ten)),
        None if ten == 0 => format!("{} {unit}", decimal.written(0)),
        None => format!(
            "{}e{} {unit}",
            decimal.written(decimal.exponent),
            decimal.exponent
        ),
    }
}

/// An SI value in a given unit: `format_in(0.95e-9, "fF/um")` is `0.95 fF/um`, `format_in(0.1, "dBm")` is `20 dBm`.
/// Four significant digits; with a unit that is not known the value stays as it is.
pub fn format_in(value: f64, unit: &str) -> String {
    let (value, shift) = match Unit::parse(unit) {
        Some(Unit::Product { ten, .. }) => (value, ten),
        Some(Unit::Celsius) => (value - CELSIUS_ZERO_K, 0),
        Some(Unit::Milliwatts) => (10.0 * value.log10() + 30.0, 0),
        Some(Unit::Decibel | Unit::Carrier) | None => (value, 0),
    };
    let Some(decimal) = Decimal::of(value) else {
        return format!("{value} {unit}");
    };
    let exponent = decimal.exponent - shift;
    if (-3..6).contains(&exponent) {
        format!("{} {unit}", decimal.written(shift))
    } else {
        format!("{}e{exponent} {unit}", decimal.written(decimal.exponent))
    }
}

/// A length on a drawing grid, m, in micrometres with every digit down to 10 pm: `micrometres(3.0744e-4)` is `307.44 um`.
pub fn micrometres(length_m: f64) -> String {
    let text = format!("{:.5}", length_m * 1e6);
    let text = text.trim_end_matches('0').trim_end_matches('.');
    format!("{text} um")
}

/// A finite value rounded for people: ±d.ddd·10^exponent.
struct Decimal {
    negative: bool,
    digits: String,
    exponent: i32,
}

impl Decimal {
    fn of(value: f64) -> Option<Decimal> {
        if !value.is_finite() {
            return None;
        }
        let text = format!("{:.*e}", SIGNIFICANT_DIGITS - 1, value.abs());
        let (mantissa, exponent) = text.split_once('e')?;
        let digits = mantissa.replace('.', "");
        let digits = digits.trim_end_matches('0').to_owned();
        let zero = digits.is_empty();
        Some(Decimal {
            negative: value < 0.0,
            digits: if zero { "0".to_owned() } else { digits },
            exponent: if zero { 0 } else { exponent.parse().ok()? },
        })
    }

    /// The value over 10^`ten` in plain digits.
    fn written(&self, ten: i32) -> String {
        let exponent = if self.digits == "0" {
            0
        } else {
            self.exponent - ten
        };
        let sign = if self.negative { "-" } else { "" };
        let whole = usize::try_from(exponent + 1).unwrap_or(0);
        if whole == 0 {
            let zeros = "0".repeat((-exponent - 1).unsigned_abs() as usize);
            return format!("{sign}0.{zeros}{}", self.digits);
        }
        if whole >= self.digits.len() {
            return format!(
                "{sign}{}{}",
                self.digits,
                "0".repeat(whole - self.digits.len())
            );
        }
        let (before, after) = self.digits.split_at(whole);
        format!("{sign}{before}.{after}")
    }
}
