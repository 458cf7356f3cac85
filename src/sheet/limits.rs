//! The limits of the study against the drawn stage.

use super::records::Kept;
use crate::evaluate::{Evaluation, Figures, Limit};
use crate::study::{Bounds, Limits};

/// Every limit that the study sets, as `evaluate` judged it.
pub fn limits(limits: &Limits, drawn: &Evaluation, figures: &Figures) -> Vec<Kept> {
    let at_most = |at_most: Option<f64>| Bounds {
        at_least: None,
        at_most,
    };
    let overdrive = figures.overdrive_use_n.max(figures.overdrive_use_p);
    [
        (
            Limit::EdgeTime,
            "edge_time_fraction",
            at_most(limits.edge_time),
            Some(figures.edge_time_fraction),
        ),
        (
            Limit::SecondHarmonic,
            "second_harmonic_dbc",
            at_most(limits.second_harmonic_dbc),
            figures.second_harmonic_dbc,
        ),
        (
            Limit::ThirdHarmonic,
            "third_harmonic_dbc",
            at_most(limits.third_harmonic_dbc),
            figures.third_harmonic_dbc,
        ),
        (
            Limit::OverdriveUse,
            "overdrive_use",
            at_most(limits.overdrive_use),
            Some(overdrive),
        ),
        (
            Limit::OutputPower,
            "output_power_w",
            limits.output_power_w,
            Some(figures.output_power_w),
        ),
        (
            Limit::Area,
            "area_m2",
            limits.area_m2,
            Some(figures.area_m2),
        ),
        (
            Limit::Efficiency,
            "efficiency",
            limits.efficiency,
            Some(figures.efficiency),
        ),
    ]
    .into_iter()
    .filter(|(_, _, bounds, _)| bounds.at_least.is_some() || bounds.at_most.is_some())
    .map(|(limit, figure, bounds, drawn_value)| Kept {
        figure: figure.into(),
        at_least: bounds.at_least,
        at_most: bounds.at_most,
        drawn: drawn_value,
        kept: !drawn.broken_limits.contains(&limit),
    })
    .collect()
}
