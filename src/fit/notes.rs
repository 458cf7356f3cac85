//! What a fit of the on-resistance says of itself.

use super::device::FittedDevice;
use super::least_squares::{Minimum, student_95};
use super::points::{self, Curves};
use super::resistance::{self, VARIABLES};
use crate::quantity::Dimension;

/// Pairs of figures with a correlation above this are said not to be told apart.
const STRONG_CORRELATION: f64 = 0.95;

/// Half widths of the intervals that hold a variable 95 times in 100.
pub(super) fn deviations<const N: usize>(minimum: &Minimum<N>) -> Option<[f64; N]> {
    let covariance = minimum.covariance?;
    let t = student_95(minimum.freedom);
    Some(std::array::from_fn(|k| {
        t * covariance[k][k].max(0.0).sqrt()
    }))
}

/// Says what was fitted, what lies at a bound and what the points do not tell apart.
pub(super) fn notes(
    out: &mut FittedDevice,
    curves: &Curves,
    minimum: &Minimum<VARIABLES>,
    single: bool,
) {
    let (low, high) = curves.range_v();
    let kelvins: Vec<String> = curves
        .temperatures_k
        .iter()
        .map(|k| format!("{k:.2}"))
        .collect();
    out.notes.push(format!(
        "fitted: gate length {}, V_GS {low:.3} V to {high:.3} V, {} K, {} points; {} of 8 starts agreed",
        Dimension::Length.show(curves.length_m),
        kelvins.join(", "),
        curves.points.len(),
        minimum.starts_agreed
    ));
    if !curves.other_lengths_m.is_empty() {
        let others: Vec<String> = curves
            .other_lengths_m
            .iter()
            .map(|l| Dimension::Length.show(*l))
            .collect();
        out.notes.push(format!(
            "other lengths in the tables, not used: {}",
            others.join(", ")
        ));
    }
    if single {
        let at = curves.temperatures_k.first().copied().unwrap_or(0.0);
        out.warnings.push(format!(
            "measured at {at:.2} K alone: threshold_drift and mobility_exponent are assumed, {} and {}",
            Dimension::VoltageDrift.show(resistance::ASSUMED_DRIFT_V_K),
            resistance::ASSUMED_EXPONENT
        ));
    } else if !curves
        .temperatures_k
        .iter()
        .any(|k| points::is_reference(*k))
    {
        out.notes
            .push("no measurement at 300.15 K: the figures there lie between others".to_owned());
    }
    let bounds: Vec<&str> = (0..VARIABLES)
        .filter(|&k| minimum.at_bound[k])
        .map(|k| resistance::KEYS[k])
        .collect();
    if !bounds.is_empty() {
        out.notes.push(format!(
            "at a bound of what is physical: {}",
            bounds.join(", ")
        ));
    }
    match &minimum.covariance {
        None => out
            .warnings
            .push("the points do not tell the figures apart: no errors can be given".to_owned()),
        Some(covariance) => {
            for a in 0..VARIABLES {
                for b in 0..a {
                    let rho = covariance[a][b] / (covariance[a][a] * covariance[b][b]).sqrt();
                    if rho.abs() > STRONG_CORRELATION {
                        out.notes.push(format!(
                            "not told apart: {} and {} (correlation {rho:+.3})",
                            resistance::KEYS[b],
                            resistance::KEYS[a]
                        ));
                    }
                }
            }
        }
    }
}
