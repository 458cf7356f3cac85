//! From tables of measured or simulated curves to the transistors of a technology file.
//!
//! [`read`] the tables, [`fit`] them, [`merge`] the result into a technology file; [`report`] tells what came of it.

mod capacitance;
mod device;
mod header;
mod leakage;
mod least_squares;
mod merit;
mod notes;
mod options;
mod points;
mod report;
pub mod residual;
mod resistance;
mod section;
mod source;
mod table;
mod write;

pub use capacitance::{Gate, Junction, NoCapacitance};
pub use device::FittedDevice;
pub use leakage::Off;
pub use merit::{Merit, is_technology, merit, merits};
pub use options::{Options, PerDevice};
pub use points::{Curves, Point};
pub use report::{report, residuals_csv};
pub use residual::Residual;
pub use section::Figure;
pub use table::{Kind, Polarity, Row, Tables, read};
pub use write::{Existing, merge};

use crate::study::Faults;

/// A miss above this is warned of.
pub const LARGEST_MISS: f64 = 0.05;

/// A pair after its fit.
#[derive(Debug, Clone, PartialEq)]
pub struct FittedPair {
    /// Name of the pair.
    pub name: String,
    /// Highest gate and drain voltage, V, and where it is from.
    pub rating_v: (f64, Given),
    /// Body diodes' forward voltage, V, and where it is from.
    pub clamp_v: (f64, Given),
    /// Swing over which the gate's capacitance is averaged, V.
    pub nominal_v: f64,
    /// Lowest V_GS fitted, V.
    pub from_v: f64,
    /// n and p.
    pub devices: Vec<FittedDevice>,
}

/// Where a pair's figure is from.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Given {
    /// An option.
    Option,
    /// The technology file as it was.
    Kept,
    /// Nothing better is known.
    Assumed,
}

/// Why there is no fit.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum FitError {
    /// Rows or files at fault.
    #[error(transparent)]
    Faults(#[from] Faults),
    /// No table of a polarity and no figures of it in the file.
    #[error(
        "{device} {polarity}: read no on-resistance (0 < V_DS <= 0.1 V, V_GS from {from} V up{length}), allowed transfer or output curves of both polarities\n  help: add a table with them, or change --length and --from; a polarity without any current table keeps what the file has"
    )]
    NoCurves {
        /// The pair.
        device: String,
        /// nmos or pmos.
        polarity: &'static str,
        /// Lowest gate voltage, V.
        from: f64,
        /// The length asked for.
        length: String,
    },
    /// Fewer points than unknowns.
    #[error(
        "{device} {polarity}: read {read} points at {temperatures} temperature(s) from V_GS = {from} V up, allowed at least {least}: {unknown} figures are to be found\n  help: measure more gate voltages, or fit lower ones with --from"
    )]
    TooFew {
        /// The pair.
        device: String,
        /// nmos or pmos.
        polarity: &'static str,
        /// Points found.
        read: usize,
        /// Temperatures found.
        temperatures: usize,
        /// Lowest gate voltage, V.
        from: f64,
        /// Points needed.
        least: usize,
        /// Figures to be found.
        unknown: usize,
    },
    /// A capacitance table that gives no capacitance.
    #[error("{device} {polarity}: {reason}")]
    Capacitance {
        /// The pair.
        device: String,
        /// nmos or pmos.
        polarity: &'static str,
        /// What is wrong.
        reason: NoCapacitance,
    },
    /// An option for a device that no table has.
    #[error("{option} {read}: read no such device, allowed {}", allowed.join(", "))]
    UnknownDevice {
        /// The option.
        option: &'static str,
        /// The name.
        read: String,
        /// The devices of the tables.
        allowed: Vec<String>,
    },
    /// A rating below the gate voltages that are to be fitted, and the like.
    #[error("{device}: read {what} = {read} V, allowed {allowed}")]
    Option {
        /// The pair.
        device: String,
        /// The option.
        what: &'static str,
        /// Its value, V.
        read: f64,
        /// What makes sense.
        allowed: String,
    },
    /// The least squares did not come to an end: not the input's fault.
    #[error("{device} {polarity}: the least squares found no minimum from any start")]
    NoMinimum {
        /// The pair.
        device: String,
        /// nmos or pmos.
        polarity: &'static str,
    },
    /// The technology file cannot take the result.
    #[error("{path}: read {read}, allowed {allowed}")]
    Existing {
        /// The file.
        path: String,
        /// What stands there.
        read: String,
        /// What should.
        allowed: String,
    },
}

/// Fits every pair that the tables have.
pub fn fit(
    tables: &Tables,
    options: &Options,
    existing: &Existing,
) -> Result<Vec<FittedPair>, FitError> {
    options.known(&tables.devices)?;
    let mut pairs = Vec::new();
    for (device, name) in tables.devices.iter().enumerate() {
        pairs.push(pair(tables, device, name, options, existing)?);
    }
    pairs.sort_by(|a, b| a.name.cmp(&b.name));
    Ok(pairs)
}

fn pair(
    tables: &Tables,
    device: usize,
    name: &str,
    options: &Options,
    existing: &Existing,
) -> Result<FittedPair, FitError> {
    let kept = |key: &str| existing.voltage(name, key).map(|v| (v, Given::Kept));
    let given = |option: &PerDevice| option.of(name, None).map(|v| (v, Given::Option));
    let measured = Polarity::BOTH
        .iter()
        .flat_map(|polarity| tables.rows(Kind::Current, device, *polarity))
        .map(|row| row.voltage_v)
        .fold(0.0, f64::max);
    let assumed = if measured > 0.0 { measured } else { 1.0 };
    let rating_v = given(&options.rating_v)
        .or_else(|| kept("rating"))
        .unwrap_or((assumed, Given::Assumed));
    let clamp_v = given(&options.clamp_v)
        .or_else(|| kept("clamp"))
        .unwrap_or((0.6, Given::Assumed));
    // a rating is the nominal supply and ten percent, where nothing else is said
    let nominal_v = options.nominal_v.of(name, None).unwrap_or(rating_v.0 / 1.1);
    if nominal_v > rating_v.0 * (1.0 + 1e-9) {
        let allowed = format!("at most the rating, {} V", rating_v.0);
        let device = name.to_owned();
        return Err(FitError::Option {
            device,
            what: "nominal",
            read: nominal_v,
            allowed,
        });
    }
    // to the millivolt, so that a point at two thirds of the nominal swing is in
    let from_v = options
        .from_v
        .of(name, None)
        .unwrap_or((2000.0 / 3.0 * nominal_v).round() / 1e3);
    let context = device::Context {
        tables,
        device,
        name,
        options,
        existing,
        rating_v: rating_v.0,
        nominal_v,
        from_v,
    };
    let devices = Polarity::BOTH
        .into_iter()
        .map(|polarity| device::fit(&context, polarity));
    Ok(FittedPair {
        name: name.to_owned(),
        rating_v,
        clamp_v,
        nominal_v,
        from_v,
        devices: devices.collect::<Result<_, _>>()?,
    })
}
