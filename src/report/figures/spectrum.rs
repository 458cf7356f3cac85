//! Harmonics at the antenna below the carrier, chosen designs side by side, against the study's limits.

use super::chosen::{Chosen, chosen};
use super::style::{CATEGORIES, FAINT, INK, heading, text};
use super::{Drawn, FigureInput, reason};
use plotters::coord::Shift;
use plotters::prelude::*;
use plotters::style::text_anchor::{HPos, Pos, VPos};

/// Harmonics that a record holds.
const HARMONICS: [u32; 4] = [2, 3, 4, 5];

const LEFT: i32 = 130;
const RIGHT: i32 = 850;
const TOP: i32 = 80;
const BOTTOM: i32 = 660;

pub fn draw<B: DrawingBackend>(area: &DrawingArea<B, Shift>, input: &FigureInput<'_>) -> Drawn {
    let designs = chosen(input.designs);
    // Designs of a sweep may have several carriers; then none is named.
    let own = |c: &Chosen<'_>| c.carrier_hz.unwrap_or(input.frequency_hz);
    let carrier_hz = designs
        .first()
        .map(own)
        .filter(|hz| designs.iter().all(|c| own(c) == *hz));
    let levels: Vec<[Option<f64>; 4]> = designs
        .iter()
        .map(|c| {
            let f = c.figures;
            [
                f.second_harmonic_dbc,
                f.third_harmonic_dbc,
                f.fourth_harmonic_dbc,
                f.fifth_harmonic_dbc,
            ]
        })
        .collect();
    let limits = [
        input.second_harmonic_limit_dbc,
        input.third_harmonic_limit_dbc,
        None,
        None,
    ];
    let lowest = levels.iter().flatten().chain(&limits).flatten();
    let floor = 10.0 * ((lowest.fold(-20.0, |a: f64, b| a.min(*b)) - 3.0) / 10.0).floor();
    let highest = levels.iter().flatten().chain(&limits).flatten();
    let ceiling = 10.0 * ((highest.fold(floor + 20.0, |a: f64, b| a.max(*b)) + 3.0) / 10.0).ceil();
    let y = |dbc: f64| {
        BOTTOM - (f64::from(BOTTOM - TOP) * (dbc - floor) / (ceiling - floor)).round() as i32
    };
    area.draw(&Text::new(
        "Harmonics at the antenna of designs along the overall front",
        (24, 18),
        heading(),
    ))
    .map_err(reason)?;
    let beside = text().pos(Pos::new(HPos::Right, VPos::Center));
    let step = if ceiling - floor > 80.0 { 20.0 } else { 10.0 };
    let first = (floor / step).ceil() as i32;
    for count in first..=(ceiling / step).floor() as i32 {
        let dbc = step * f64::from(count);
        area.draw(&PathElement::new([(LEFT, y(dbc)), (RIGHT, y(dbc))], FAINT))
            .map_err(reason)?;
        area.draw(&Text::new(
            format!("{dbc:.0}"),
            (LEFT - 12, y(dbc)),
            beside.clone(),
        ))
        .map_err(reason)?;
    }
    let centred = text().pos(Pos::new(HPos::Center, VPos::Center));
    let turned = centred.transform(FontTransform::Rotate270);
    area.draw(&Text::new(
        "level below the carrier (dBc)",
        (40, (TOP + BOTTOM) / 2),
        turned,
    ))
    .map_err(reason)?;

    let wide = (RIGHT - LEFT) / HARMONICS.len() as i32;
    let bar = (wide - 36) / designs.len().max(3) as i32;
    let below = text().pos(Pos::new(HPos::Center, VPos::Top));
    for (group, harmonic) in HARMONICS.into_iter().enumerate() {
        let middle = LEFT + wide * group as i32 + wide / 2;
        let start = middle - bar * designs.len() as i32 / 2;
        let mut any = false;
        for (place, level) in levels.iter().enumerate() {
            let Some(dbc) = level[group] else {
                continue;
            };
            any = true;
            let x = start + bar * place as i32;
            area.draw(&Rectangle::new(
                [(x + 1, y(dbc.max(floor))), (x + bar - 1, BOTTOM)],
                CATEGORIES[place].filled(),
            ))
            .map_err(reason)?;
        }
        if !any {
            area.draw(&Text::new("none", (middle, BOTTOM - 24), centred.clone()))
                .map_err(reason)?;
        }
        if let Some(limit) = limits[group] {
            area.draw(&PathElement::new(
                [
                    (middle - wide / 2 + 8, y(limit)),
                    (middle + wide / 2 - 8, y(limit)),
                ],
                INK.stroke_width(4),
            ))
            .map_err(reason)?;
        }
        let at = carrier_hz.map_or(String::new(), |hz| {
            format!("{:.2} GHz", f64::from(harmonic) * hz * 1e-9)
        });
        for (line, away) in [(format!("{harmonic} f"), 12), (at, 44)] {
            area.draw(&Text::new(line, (middle, BOTTOM + away), below.clone()))
                .map_err(reason)?;
        }
    }
    area.draw(&PathElement::new(
        [(LEFT, TOP), (LEFT, BOTTOM), (RIGHT, BOTTOM)],
        INK.stroke_width(2),
    ))
    .map_err(reason)?;
    let after = text().pos(Pos::new(HPos::Left, VPos::Center));
    for (place, design) in designs.iter().enumerate() {
        let at = 110 + 84 * place as i32;
        area.draw(&Rectangle::new(
            [(886, at - 14), (918, at + 14)],
            CATEGORIES[place].filled(),
        ))
        .map_err(reason)?;
        for (line, away) in design.lines().into_iter().zip([0, 32]) {
            area.draw(&Text::new(line, (930, at + away), after.clone()))
                .map_err(reason)?;
        }
    }
    if limits.iter().any(Option::is_some) {
        let at = 110 + 84 * designs.len() as i32;
        area.draw(&PathElement::new(
            [(886, at), (918, at)],
            INK.stroke_width(4),
        ))
        .map_err(reason)?;
        area.draw(&Text::new("limit of the study", (930, at), after))
            .map_err(reason)?;
    }
    Ok(())
}
