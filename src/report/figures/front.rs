//! The front: efficiency against output power, area by colour.

use super::style::{INK, axes, decimals, heading, ramp, text, widened};
use super::{Drawn, FigureInput, reason};
use crate::evaluate::Figures;
use plotters::coord::Shift;
use plotters::prelude::*;
use plotters::style::text_anchor::{HPos, Pos, VPos};

pub fn draw<B: DrawingBackend>(area: &DrawingArea<B, Shift>, input: &FigureInput<'_>) -> Drawn {
    let mut points: Vec<&Figures> = input
        .designs
        .iter()
        .filter_map(|d| d.evaluation.figures.as_ref())
        .collect();
    // Small areas last, so that they are not hidden.
    points.sort_by(|a, b| b.area_m2.total_cmp(&a.area_m2));
    let (left, right) = widened(points.iter().map(|f| f.output_power_dbm));
    let (bottom, top) = widened(points.iter().map(|f| 100.0 * f.efficiency));
    let mm2 = |f: &Figures| f.area_m2 * 1e6;
    let least = points.iter().map(|f| mm2(f)).fold(f64::INFINITY, f64::min);
    let most = points
        .iter()
        .map(|f| mm2(f))
        .fold(f64::NEG_INFINITY, f64::max);

    let (body, scale) = area.split_horizontally(1030);
    let caption = format!(
        "{}: {} designs of the overall front",
        input.title,
        points.len()
    );
    body.draw(&Text::new(caption, (24, 18), heading()))
        .map_err(reason)?;
    let mut chart = ChartBuilder::on(&body)
        .margin_top(70)
        .margin_left(30)
        .margin_right(20)
        .x_label_area_size(80)
        .y_label_area_size(100)
        .build_cartesian_2d(left..right, bottom..top)
        .map_err(reason)?;
    axes(
        &mut chart,
        [&|v| format!("{v:.*}", decimals(right - left)), &|v| {
            format!("{v:.*}", decimals(top - bottom))
        }],
        ["output power (dBm)", "efficiency (%)"],
    )?;
    let radius = if points.len() > 1500 { 4 } else { 6 };
    let share = |f: &Figures| {
        if most > least {
            (mm2(f) - least) / (most - least)
        } else {
            0.5
        }
    };
    chart
        .draw_series(points.iter().map(|f| {
            Circle::new(
                (f.output_power_dbm, 100.0 * f.efficiency),
                radius,
                ramp(share(f)).filled(),
            )
        }))
        .map_err(reason)?;

    // The colour scale, outside the data.
    let (y0, y1, x0, x1) = (110, 690, 20, 56);
    const BANDS: i32 = 116;
    for band in 0..BANDS {
        let edge = |b: i32| y1 - (y1 - y0) * b / BANDS;
        let colour = ramp((f64::from(band) + 0.5) / f64::from(BANDS));
        scale
            .draw(&Rectangle::new(
                [(x0, edge(band + 1)), (x1, edge(band))],
                colour.filled(),
            ))
            .map_err(reason)?;
    }
    scale
        .draw(&Text::new("area (mm²)", (x0 - 8, y0 - 44), text()))
        .map_err(reason)?;
    let middle = text().pos(Pos::new(HPos::Left, VPos::Center));
    for tick in 0..=4 {
        let part = f64::from(tick) / 4.0;
        let value = least + part * (most - least);
        let y = y1 - (f64::from(y1 - y0) * part) as i32;
        scale
            .draw(&PathElement::new([(x1, y), (x1 + 8, y)], INK))
            .map_err(reason)?;
        scale
            .draw(&Text::new(
                format!("{value:.*}", decimals(most - least).max(2)),
                (x1 + 14, y),
                middle.clone(),
            ))
            .map_err(reason)?;
        if most <= least {
            break;
        }
    }
    Ok(())
}
