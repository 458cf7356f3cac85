//! The grammar of units: prefixed SI symbols, their products and quotients.

use super::dimension::Dimension;

/// Powers of kg, m, s, A and K.
pub(super) type Exponents = [i32; 5];

/// Coherent SI symbols: a value in one of them is an SI value.
pub(super) const SYMBOLS: [(&str, Exponents); 10] = [
    ("Hz", [0, 0, -1, 0, 0]),
    ("s", [0, 0, 1, 0, 0]),
    ("m", [0, 1, 0, 0, 0]),
    ("A", [0, 0, 0, 1, 0]),
    ("K", [0, 0, 0, 0, 1]),
    ("V", [1, 2, -3, -1, 0]),
    ("W", [1, 2, -3, 0, 0]),
    ("ohm", [1, 2, -3, -2, 0]),
    ("F", [-1, -2, 4, 2, 0]),
    ("H", [1, 2, -2, -2, 0]),
];
/// Siemens, and the other ways to write the ohm: capital omega U+03A9 and the ohm sign U+2126.
const ALIASES: [(&str, Exponents); 4] = [
    ("S", [-1, -2, 3, 2, 0]),
    ("Ohm", [1, 2, -3, -2, 0]),
    ("Ω", [1, 2, -3, -2, 0]),
    ("\u{2126}", [1, 2, -3, -2, 0]),
];
/// SI prefixes; micro as `u`, U+00B5 and U+03BC.
pub(super) const PREFIXES: [(char, i32); 11] = [
    ('f', -15),
    ('p', -12),
    ('n', -9),
    ('u', -6),
    ('\u{b5}', -6),
    ('\u{3bc}', -6),
    ('m', -3),
    ('k', 3),
    ('M', 6),
    ('G', 9),
    ('T', 12),
];

#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Unit {
    Product { exponents: Exponents, ten: i32 },
    Celsius,
    Milliwatts,
    Decibel,
    Carrier,
}

impl Unit {
    pub(super) fn parse(text: &str) -> Option<Unit> {
        match text.trim() {
            "degC" | "°C" => Some(Unit::Celsius),
            "dBm" => Some(Unit::Milliwatts),
            "dB" => Some(Unit::Decibel),
            "dBc" => Some(Unit::Carrier),
            product => Unit::product(product),
        }
    }

    /// Factors joined by spaces, `*`, `·` or `/`; a slash divides by the one factor after it.
    fn product(text: &str) -> Option<Unit> {
        let (mut exponents, mut ten) = ([0; 5], 0);
        for (place, quotient) in text.split('/').enumerate() {
            let mut empty = true;
            let factors = quotient.split(|c: char| c.is_whitespace() || c == '*' || c == '·');
            for factor in factors.filter(|factor| !factor.is_empty()) {
                let sign = if place > 0 && empty { -1 } else { 1 };
                empty = false;
                if factor == "1" {
                    continue;
                }
                let (symbol, power) = split_power(factor)?;
                let (prefix, base) = split_prefix(symbol)?;
                for (sum, one) in exponents.iter_mut().zip(base) {
                    *sum += sign * power * one;
                }
                ten += sign * power * prefix;
            }
            if empty {
                return None;
            }
        }
        Some(Unit::Product { exponents, ten })
    }

    pub(super) fn measures(self, dimension: Dimension) -> bool {
        match self {
            Unit::Celsius => dimension == Dimension::Temperature,
            Unit::Milliwatts => dimension == Dimension::Power,
            Unit::Decibel => dimension == Dimension::Decibel,
            Unit::Carrier => dimension == Dimension::Carrier,
            Unit::Product { exponents, .. } => match dimension {
                Dimension::Temperature => exponents == [0, 0, 0, 0, 1],
                _ => matches!(Unit::parse(dimension.unit()),
                    Some(Unit::Product { exponents: other, .. }) if other == exponents),
            },
        }
    }
}

/// `um^2` as `um` and 2; the power is 1, 2 or 3 and the caret may be left out.
fn split_power(factor: &str) -> Option<(&str, i32)> {
    let mut symbol = factor;
    let mut power = 1;
    for (ending, value) in [("²", 2), ("³", 3), ("2", 2), ("3", 3)] {
        if let Some(rest) = factor.strip_suffix(ending) {
            symbol = rest;
            power = value;
            if ending.is_ascii() {
                symbol = rest.strip_suffix('^').unwrap_or(rest);
            }
            break;
        }
    }
    (!symbol.is_empty()).then_some((symbol, power))
}

/// A symbol with its prefix's power of ten; a whole symbol comes before a prefixed one (`m` is the metre).
fn split_prefix(text: &str) -> Option<(i32, Exponents)> {
    let known = |symbol: &str| {
        let mut all = SYMBOLS.iter().chain(&ALIASES);
        all.find(|&&(name, _)| name == symbol)
            .map(|&(_, base)| base)
    };
    if let Some(base) = known(text) {
        return Some((0, base));
    }
    if text == "cm" {
        return known("m").map(|base| (-2, base));
    }
    let first = text.chars().next()?;
    let &(_, power) = PREFIXES.iter().find(|&&(prefix, _)| prefix == first)?;
    known(&text[first.len_utf8()..]).map(|base| (power, base))
}
