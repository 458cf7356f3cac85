//! Where the power of chosen designs goes, side by side, and where their area goes.

use super::bars::{self, Band, Frame, Row};
use super::chosen::chosen;
use super::style::{CATEGORIES, OTHER, loss_colours};
use super::{Drawn, FigureInput};
use crate::budget::LOSS_NAMES;
use plotters::coord::Shift;
use plotters::prelude::*;

/// Per cent of the total power below which a band cannot be seen.
const SEEN: f64 = 0.3;

/// Losses as shares of the total power; efficiency is what is left. A slightly negative loss (the drain's, near soft
/// switching) is drawn as 0.
pub fn draw_losses<B: DrawingBackend>(
    area: &DrawingArea<B, Shift>,
    input: &FigureInput<'_>,
) -> Drawn {
    let designs = chosen(input.designs);
    let shares: Vec<[f64; 11]> = designs
        .iter()
        .map(|c| {
            let terms = c.figures.losses_w.terms();
            terms.map(|w| 100.0 * w.max(0.0) / c.figures.total_power_w)
        })
        .collect();
    let largest = |i: usize| shares.iter().map(|t| t[i]).fold(0.0, f64::max);
    let mut order: Vec<usize> = (0..LOSS_NAMES.len()).collect();
    order.sort_by(|&a, &b| largest(b).total_cmp(&largest(a)).then(a.cmp(&b)));
    let seen = order.iter().filter(|&&i| largest(i) > SEEN).count();
    let (shown, rest) = order.split_at(seen.min(OTHER));
    let mut bands: Vec<Band> = shown
        .iter()
        .zip(loss_colours(shown))
        .map(|(&i, colour)| (LOSS_NAMES[i].replace('_', " "), colour))
        .collect();
    let other = |t: &[f64; 11]| rest.iter().map(|&i| t[i]).sum::<f64>();
    if shares.iter().any(|t| other(t) > SEEN) {
        bands.push(("other".into(), CATEGORIES[OTHER]));
    }
    let rows: Vec<Row> = designs
        .iter()
        .zip(&shares)
        .map(|(c, t)| Row {
            name: c.lines(),
            total: format!("η = {:.1} %", 100.0 * c.figures.efficiency),
            values: shown.iter().map(|&i| t[i]).chain([other(t)]).collect(),
        })
        .collect();
    let frame = Frame {
        heading: "Losses of designs along the overall front, and efficiency η",
        axis: "loss (% of the total power)",
        end: Some(100.0),
    };
    bars::draw(area, frame, &bands, &rows)
}

/// Area by part.
pub fn draw_areas<B: DrawingBackend>(
    area: &DrawingArea<B, Shift>,
    input: &FigureInput<'_>,
) -> Drawn {
    let names = [
        "inductors",
        "decoupling",
        "capacitors",
        "switches",
        "drivers",
    ];
    let colours = [
        CATEGORIES[1],
        CATEGORIES[7],
        CATEGORIES[2],
        CATEGORIES[5],
        CATEGORIES[0],
    ];
    let bands: Vec<Band> = names.map(str::to_owned).into_iter().zip(colours).collect();
    let rows: Vec<Row> = chosen(input.designs)
        .iter()
        .map(|c| {
            let parts = &c.figures.area_parts_m2;
            Row {
                name: c.lines(),
                total: format!("{:.3} mm²", 1e6 * c.figures.area_m2),
                values: [
                    parts.inductors,
                    parts.decoupling,
                    parts.capacitors,
                    parts.switches,
                    parts.drivers,
                ]
                .map(|m2| 1e6 * m2)
                .to_vec(),
            }
        })
        .collect();
    let frame = Frame {
        heading: "Area of designs along the overall front, by part",
        axis: "area (mm²)",
        end: None,
    };
    bars::draw(area, frame, &bands, &rows)
}
