//! The losses against NMOS width: stacked, the width of best efficiency marked.

use super::style::{CATEGORIES, INK, OTHER, axes, decimals, heading, loss_colours, text};
use super::{Drawn, reason};
use crate::budget::LOSS_NAMES;
use crate::evaluate::Figures;
use crate::run::records::WidthSweep;
use plotters::coord::Shift;
use plotters::prelude::*;
use plotters::style::text_anchor::{HPos, Pos, VPos};

/// A loss that is slightly negative near soft switching (the drain's) is stacked as 0.
pub fn draw<B: DrawingBackend>(area: &DrawingArea<B, Shift>, sweep: &WidthSweep) -> Drawn {
    let rows: Vec<(f64, &Figures)> = sweep
        .nmos_width_m
        .iter()
        .zip(&sweep.evaluations)
        .filter_map(|(w, e)| Some((w * 1e6, e.figures.as_ref()?)))
        .collect();
    let (Some(first), Some(last)) = (rows.first(), rows.last()) else {
        return Err("no width of the sweep can exist".into());
    };
    let terms: Vec<[f64; 11]> = rows
        .iter()
        .map(|(_, f)| f.losses_w.terms().map(|w| 1e3 * w.max(0.0)))
        .collect();
    let mut order: Vec<usize> = (0..LOSS_NAMES.len()).collect();
    let largest = |i: usize| terms.iter().map(|t| t[i]).fold(0.0, f64::max);
    order.sort_by(|&a, &b| largest(b).total_cmp(&largest(a)).then(a.cmp(&b)));
    let (shown, rest) = order.split_at(OTHER);
    let height = |t: &[f64; 11]| t.iter().sum::<f64>();
    let top = 1.05 * terms.iter().map(height).fold(0.0, f64::max);

    let (body, legend) = area.split_horizontally(920);
    area.draw(&Text::new(
        format!(
            "Losses of design {} as its NMOS width alone changes",
            sweep.id
        ),
        (24, 18),
        heading(),
    ))
    .map_err(reason)?;
    let mut chart = ChartBuilder::on(&body)
        .margin_top(90)
        .margin_left(30)
        .margin_right(30)
        .x_label_area_size(80)
        .y_label_area_size(100)
        .build_cartesian_2d((first.0..last.0.max(first.0 * 1.01)).log_scale(), 0.0..top)
        .map_err(reason)?;
    axes(
        &mut chart,
        [&|_| String::new(), &|v| format!("{v:.*}", decimals(top))],
        ["NMOS width (µm)", "loss (mW)"],
    )?;
    // The logarithmic axis of the library names decades only.
    let below = text().pos(Pos::new(HPos::Center, VPos::Top));
    for decade in -1..7 {
        for digit in [1.0, 2.0, 5.0] {
            let width = digit * 10f64.powi(decade);
            if (first.0..=last.0).contains(&width) {
                let (x, y) = chart.backend_coord(&(width, 0.0));
                body.draw(&PathElement::new([(x, y), (x, y + 8)], INK))
                    .map_err(reason)?;
                body.draw(&Text::new(format!("{width}"), (x, y + 12), below.clone()))
                    .map_err(reason)?;
            }
        }
    }
    let mut floor = vec![0.0; rows.len()];
    let mut bands: Vec<(String, RGBColor, Vec<f64>)> = shown
        .iter()
        .zip(loss_colours(shown))
        .map(|(&i, colour)| {
            let name = LOSS_NAMES[i].replace('_', " ");
            (name, colour, terms.iter().map(|t| t[i]).collect())
        })
        .collect();
    let others = terms
        .iter()
        .map(|t| rest.iter().map(|&i| t[i]).sum())
        .collect();
    bands.push(("other".into(), CATEGORIES[OTHER], others));
    for (_, colour, values) in &bands {
        let ceiling: Vec<f64> = floor.iter().zip(values).map(|(f, v)| f + v).collect();
        let up = rows.iter().zip(&ceiling).map(|((w, _), y)| (*w, *y));
        let back = rows.iter().zip(&floor).map(|((w, _), y)| (*w, *y)).rev();
        chart
            .draw_series([Polygon::new(
                up.chain(back).collect::<Vec<_>>(),
                colour.filled(),
            )])
            .map_err(reason)?;
        floor = ceiling;
    }
    let best = rows
        .iter()
        .max_by(|a, b| a.1.efficiency.total_cmp(&b.1.efficiency))
        .unwrap_or(first);
    chart
        .draw_series([PathElement::new(
            [(best.0, 0.0), (best.0, top)],
            INK.stroke_width(3),
        )])
        .map_err(reason)?;
    let (x, _) = chart.backend_coord(&(best.0, top));
    let label = format!(
        "best efficiency {:.1} % at {:.0} µm",
        100.0 * best.1.efficiency,
        best.0
    );
    let anchored = text().pos(Pos::new(HPos::Center, VPos::Bottom));
    area.draw(&Text::new(label, (x.clamp(260, 700), 86), anchored))
        .map_err(reason)?;
    let middle = text().pos(Pos::new(HPos::Left, VPos::Center));
    for (slot, (name, colour, _)) in bands.iter().rev().enumerate() {
        let y = 130 + 48 * slot as i32;
        legend
            .draw(&Rectangle::new(
                [(10, y - 14), (44, y + 14)],
                colour.filled(),
            ))
            .map_err(reason)?;
        legend
            .draw(&Text::new(name.clone(), (56, y), middle.clone()))
            .map_err(reason)?;
    }
    Ok(())
}
