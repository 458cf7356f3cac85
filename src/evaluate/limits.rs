//! Limits a design must keep, as margins that are positive while it does.

use super::{Core, Performance, Setup};
use crate::numerics::scalar::Scalar;
use crate::stage::Sizing;
use arrayvec::ArrayVec;
use serde::{Deserialize, Serialize};

/// A limit's name, as it stands in `broken_limits`.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Limit {
    /// V_DD ≤ s·V_max. (A driver rail of its own is held to V_max when the study is read.)
    SupplyRating,
    /// The drain stays within the body diodes' clamps during dead times.
    DrainVoltage,
    /// 10 to 90 % edge at the output gates.
    EdgeTime,
    /// Second harmonic at the antenna.
    SecondHarmonic,
    /// Third harmonic at the antenna.
    ThirdHarmonic,
    /// Overdrive use of either device.
    OverdriveUse,
    /// Output power, from below or above.
    OutputPower,
    /// Area.
    Area,
    /// Efficiency.
    Efficiency,
}

impl Limit {
    /// The name written to JSON.
    pub fn name(self) -> &'static str {
        match self {
            Self::SupplyRating => "supply_rating",
            Self::DrainVoltage => "drain_voltage",
            Self::EdgeTime => "edge_time",
            Self::SecondHarmonic => "second_harmonic",
            Self::ThirdHarmonic => "third_harmonic",
            Self::OverdriveUse => "overdrive_use",
            Self::OutputPower => "output_power",
            Self::Area => "area",
            Self::Efficiency => "efficiency",
        }
    }
}

/// How far a design is inside one limit: relative to the limit, 0 on it, negative when broken.
#[derive(Debug, Clone, Copy)]
pub struct Margin<S> {
    /// Which.
    pub limit: Limit,
    /// Dimensionless.
    pub margin: S,
}

/// Most margins there can be.
pub const MOST_MARGINS: usize = 18;

/// Every limit that holds for this setup, in a fixed order.
pub fn margins<S: Scalar>(
    setup: &Setup,
    sizing: &Sizing<S>,
    core: &Core<S>,
    performance: &Performance<S>,
) -> ArrayVec<Margin<S>, MOST_MARGINS> {
    let mut list = ArrayVec::new();
    let mut push = |limit, margin| list.push(Margin { limit, margin });
    let at_most = |value: S, bound: f64| (-value + bound) / bound.abs();
    let at_least = |value: S, bound: f64| (value - bound) / bound.abs();
    let limits = &setup.limits;

    push(
        Limit::SupplyRating,
        at_most(sizing.supply_v, f64::from(setup.stack) * setup.rating_v),
    );
    for span in core.period.dead_times.iter().flatten() {
        let clamp = setup.clamp_v;
        push(
            Limit::DrainVoltage,
            (sizing.supply_v + clamp - span.highest_v) / sizing.supply_v,
        );
        push(
            Limit::DrainVoltage,
            (span.lowest_v + clamp) / sizing.supply_v,
        );
    }
    if let Some(bound) = limits.edge_time {
        push(
            Limit::EdgeTime,
            at_most(performance.chain.edge_time_s * setup.frequency_hz, bound),
        );
    }
    let harmonics = &core.period.harmonic_v;
    let ratio_margin =
        |k: usize, dbc: f64| at_most(harmonics[k - 1] / harmonics[0], 10f64.powf(dbc / 20.0));
    if let Some(bound) = limits.second_harmonic_dbc {
        push(Limit::SecondHarmonic, ratio_margin(2, bound));
    }
    if let Some(bound) = limits.third_harmonic_dbc {
        push(Limit::ThirdHarmonic, ratio_margin(3, bound));
    }
    if let Some(bound) = limits.overdrive_use {
        let rms = core.period.current_squared_a2.sqrt();
        for used in core.leg.overdrive_use(&setup.pair, rms) {
            push(Limit::OverdriveUse, at_most(used, bound));
        }
    }
    for (limit, bounds, value) in [
        (
            Limit::OutputPower,
            limits.output_power_w,
            performance.output_power_w,
        ),
        (Limit::Area, limits.area_m2, performance.area.total_m2()),
        (Limit::Efficiency, limits.efficiency, performance.efficiency),
    ] {
        if let Some(bound) = bounds.at_least {
            push(limit, at_least(value, bound));
        }
        if let Some(bound) = bounds.at_most {
            push(limit, at_most(value, bound));
        }
    }
    list
}
