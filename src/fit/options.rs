//! What a user may say of a fit.

use super::FitError;
use crate::quantity::{Dimension, Quantity};

/// A value for all devices, or for some: `1.32V`, `io=3.63V`, `io.nmos=500nm`; a later and narrower one wins.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct PerDevice(Vec<(String, f64)>);

impl PerDevice {
    /// Reads the values of an option that may be repeated.
    pub fn parse(texts: &[String], dimension: Dimension) -> Result<Self, String> {
        let entry = |text: &String| {
            let (name, value) = text.split_once('=').unwrap_or(("", text));
            let value = Quantity::parse(value.trim(), dimension).map_err(|error| {
                let help = error.help().map(|help| format!("\n  help: {help}"));
                format!("{text}: {error}{}", help.unwrap_or_default())
            })?;
            if value > 0.0 {
                Ok((name.trim().to_owned(), value))
            } else {
                Err(format!("{text}: read {value}, allowed a value above 0"))
            }
        };
        texts.iter().map(entry).collect::<Result<_, _>>().map(Self)
    }

    /// The value for a device and polarity.
    pub fn of(&self, device: &str, polarity: Option<&str>) -> Option<f64> {
        let narrow = polarity.map(|polarity| format!("{device}.{polarity}"));
        let last = |name: &str| {
            self.0
                .iter()
                .rev()
                .find(|(n, _)| n == name)
                .map(|(_, v)| *v)
        };
        narrow
            .and_then(|name| last(&name))
            .or_else(|| last(device))
            .or_else(|| last(""))
    }
}

/// Everything that may be said.
#[derive(Debug, Clone, PartialEq)]
pub struct Options {
    /// Highest gate and drain voltage, V.
    pub rating_v: PerDevice,
    /// Nominal swing, V.
    pub nominal_v: PerDevice,
    /// Lowest gate voltage fitted, V.
    pub from_v: PerDevice,
    /// Forward voltage of the body diodes, V.
    pub clamp_v: PerDevice,
    /// Gate length to fit, m.
    pub length_m: PerDevice,
    /// Length of drain diffusion that an edge of gate has, m.
    pub drain_length_m: PerDevice,
    /// Where the tables are from.
    pub source: Option<String>,
    /// Date of the fit, as it is to be written.
    pub date: String,
}

/// Drain diffusion an edge of gate when two fingers share it, m; a common figure of a 130 nm process.
pub const SHARED_DRAIN_M: f64 = 0.19e-6;

impl Options {
    /// No options, but for the date.
    pub fn new(date: &str) -> Self {
        Self {
            rating_v: PerDevice::default(),
            nominal_v: PerDevice::default(),
            from_v: PerDevice::default(),
            clamp_v: PerDevice::default(),
            length_m: PerDevice::default(),
            drain_length_m: PerDevice::default(),
            source: None,
            date: date.to_owned(),
        }
    }

    /// Refuses options for devices that no table has.
    pub(super) fn known(&self, devices: &[String]) -> Result<(), FitError> {
        let options = [
            ("--rating", &self.rating_v),
            ("--nominal", &self.nominal_v),
            ("--from", &self.from_v),
            ("--clamp", &self.clamp_v),
            ("--length", &self.length_m),
            ("--drain-length", &self.drain_length_m),
        ];
        for (option, values) in options {
            for (name, _) in &values.0 {
                let device = match option {
                    "--length" => name.trim_end_matches(".nmos").trim_end_matches(".pmos"),
                    _ => name,
                };
                if !device.is_empty() && !devices.iter().any(|known| known == device) {
                    let (read, allowed) = (name.clone(), devices.to_vec());
                    return Err(FitError::UnknownDevice {
                        option,
                        read,
                        allowed,
                    });
                }
            }
        }
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn law_the_narrower_value_wins() {
        let texts = ["130nm", "io=330 nm", "io.nmos=500 nm"].map(str::to_owned);
        let values = PerDevice::parse(&texts, Dimension::Length).unwrap_or_default();
        let of = |device, polarity| values.of(device, polarity).map(|m| (m * 1e9).round());
        assert_eq!(of("io", Some("nmos")), Some(500.0));
        assert_eq!(of("io", Some("pmos")), Some(330.0));
        assert_eq!(of("core", None), Some(130.0));
        assert!(PerDevice::parse(&["io=3 V".to_owned()], Dimension::Length).is_err());
    }
}
