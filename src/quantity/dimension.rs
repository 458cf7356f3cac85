//! What a figure measures.

use super::format::{format, format_in};
use super::unit::SYMBOLS;
use std::fmt;

/// What a figure measures, and so which units it takes.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Dimension {
    /// Hz.
    Frequency,
    /// s.
    Time,
    /// V.
    Voltage,
    /// A.
    Current,
    /// W, or dBm.
    Power,
    /// Ω.
    Resistance,
    /// F.
    Capacitance,
    /// H.
    Inductance,
    /// m.
    Length,
    /// m².
    Area,
    /// K, or degC.
    Temperature,
    /// dB.
    Decibel,
    /// dBc.
    Carrier,
    /// A/V².
    Transconductance,
    /// V/K.
    VoltageDrift,
    /// 1/V.
    PerVoltage,
    /// Ω·m.
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

impl Dimension {
    /// Every dimension, for naming the one that was read by mistake.
    pub const ALL: [Dimension; 22] = {
        use Dimension::*;
        [
            Frequency,
            Time,
            Voltage,
            Current,
            Power,
            Resistance,
            Capacitance,
            Inductance,
            Length,
            Area,
            Temperature,
            Decibel,
            Carrier,
            Transconductance,
            VoltageDrift,
            PerVoltage,
            ResistanceLength,
            CapacitancePerLength,
            CapacitancePerArea,
            ConductancePerArea,
            CurrentPerLength,
            AreaPerInductance,
        ]
    };

    /// Name with its article, an example, and the unit that messages use.
    const fn entry(self) -> (&'static str, &'static str, &'static str) {
        match self {
            Dimension::Frequency => ("a frequency", "2.45 GHz", "Hz"),
            Dimension::Time => ("a time", "20 ps", "s"),
            Dimension::Voltage => ("a voltage", "1.2 V", "V"),
            Dimension::Current => ("a current", "5 mA", "A"),
            Dimension::Power => ("a power", "20 dBm", "W"),
            Dimension::Resistance => ("a resistance", "50 ohm", "ohm"),
            Dimension::Capacitance => ("a capacitance", "20 fF", "F"),
            Dimension::Inductance => ("an inductance", "1.2 nH", "H"),
            Dimension::Length => ("a length", "600 um", "m"),
            Dimension::Area => ("an area", "0.4 mm^2", "mm^2"),
            Dimension::Temperature => ("a temperature", "27 degC", "degC"),
            Dimension::Decibel => ("a ratio in decibels", "0.5 dB", "dB"),
            Dimension::Carrier => ("a level against the carrier", "-30 dBc", "dBc"),
            Dimension::Transconductance => ("a transconductance", "280 uA/V^2", "uA/V^2"),
            Dimension::VoltageDrift => ("a voltage drift", "-0.8 mV/K", "mV/K"),
            Dimension::PerVoltage => ("an inverse voltage", "0.5 1/V", "1/V"),
            Dimension::ResistanceLength => ("a resistance times length", "200 ohm um", "ohm um"),
            Dimension::CapacitancePerLength => ("a capacitance per length", "0.95 fF/um", "fF/um"),
            Dimension::CapacitancePerArea => ("a capacitance per area", "2 fF/um^2", "fF/um^2"),
            Dimension::ConductancePerArea => ("a conductance per area", "4e-8 S/um^2", "S/um^2"),
            Dimension::CurrentPerLength => ("a current per length", "20 nA/um", "nA/um"),
            Dimension::AreaPerInductance => ("an area per inductance", "0.03 mm^2/nH", "mm^2/nH"),
        }
    }

    /// Name with its article, such as `a frequency`.
    pub const fn noun(self) -> &'static str {
        self.entry().0
    }

    /// A value as a file may hold it, such as `2.45 GHz`.
    pub const fn example(self) -> &'static str {
        self.entry().1
    }

    /// The unit that messages use.
    pub(super) const fn unit(self) -> &'static str {
        self.entry().2
    }

    /// An SI value of this dimension for people: `2.45 GHz`, `0.95 fF/um`, `27 degC`.
    pub fn show(self, si: f64) -> String {
        let unit = self.unit();
        let plain = SYMBOLS.iter().any(|&(symbol, _)| symbol == unit);
        if plain {
            format(si, unit)
        } else {
            format_in(si, unit)
        }
    }
}

impl fmt::Display for Dimension {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} such as \"{}\"", self.noun(), self.example())
    }
}
