//! One period: drain voltage and loop current, the phases shaded.

use super::style::{CATEGORIES, INK, axes, decimals, heading, text, widened};
use super::{Drawn, reason};
use crate::run::records::PeriodRecord;
use plotters::coord::Shift;
use plotters::prelude::*;
use plotters::style::text_anchor::{HPos, Pos, VPos};

pub fn draw<B: DrawingBackend>(area: &DrawingArea<B, Shift>, record: &PeriodRecord) -> Drawn {
    let wave = &record.waveform;
    let samples = wave.drain_v.len();
    let period_ps = 1e12 / record.frequency_hz;
    let at = |i: usize| period_ps * i as f64 / samples as f64;
    let (v_low, v_high) = widened(wave.drain_v.iter().copied());
    let (i_low, i_high) = widened(wave.current_a.iter().map(|i| 1e3 * i));
    area.draw(&Text::new(
        format!("Design {} over one period", record.id),
        (24, 18),
        heading(),
    ))
    .map_err(reason)?;
    let mut chart = ChartBuilder::on(area)
        .margin_top(130)
        .margin_left(30)
        .margin_right(34)
        .x_label_area_size(80)
        .y_label_area_size(110)
        .right_y_label_area_size(110)
        .build_cartesian_2d(0.0..period_ps, v_low..v_high)
        .map_err(reason)?
        .set_secondary_coord(0.0..period_ps, i_low..i_high);
    let dead = record.dead_time * period_ps;
    let half = 0.5 * period_ps;
    let phases = [
        (0.0, half - dead, "P on", RGBColor(228, 238, 247)),
        (half - dead, half, "off", RGBColor(243, 243, 243)),
        (half, period_ps - dead, "N on", RGBColor(250, 240, 222)),
        (period_ps - dead, period_ps, "off", RGBColor(243, 243, 243)),
    ];
    for (begin, end, name, colour) in phases {
        if end <= begin {
            continue;
        }
        chart
            .draw_series([Rectangle::new(
                [(begin, v_low), (end, v_high)],
                colour.filled(),
            )])
            .map_err(reason)?;
        let (x, y) = chart.backend_coord(&(0.5 * (begin + end), v_high));
        let (x0, _) = chart.backend_coord(&(begin, v_high));
        let (x1, _) = chart.backend_coord(&(end, v_high));
        // A short phase has no room for its name; its shade says enough.
        if x1 - x0 > 44 {
            let above = text().pos(Pos::new(HPos::Center, VPos::Bottom));
            area.draw(&Text::new(name, (x, y - 8), above))
                .map_err(reason)?;
        }
    }
    axes(
        &mut chart,
        [&|v| format!("{v:.0}"), &|v| {
            format!("{v:.*}", decimals(v_high - v_low))
        }],
        ["time (ps)", "drain voltage (V)"],
    )?;
    chart
        .configure_secondary_axes()
        .axis_style(INK)
        .label_style(text())
        .axis_desc_style(text())
        .y_labels(8)
        .y_label_formatter(&|v| format!("{v:.*}", decimals(i_high - i_low)))
        .y_desc("loop current (mA)")
        .draw()
        .map_err(reason)?;
    let closed = |values: &[f64], scale: f64| -> Vec<(f64, f64)> {
        let back = values.first().map(|v| (period_ps, scale * v));
        values
            .iter()
            .enumerate()
            .map(|(i, v)| (at(i), scale * v))
            .chain(back)
            .collect()
    };
    chart
        .draw_series(LineSeries::new(
            closed(&wave.drain_v, 1.0),
            CATEGORIES[0].stroke_width(4),
        ))
        .map_err(reason)?;
    chart
        .draw_secondary_series(LineSeries::new(
            closed(&wave.current_a, 1e3),
            CATEGORIES[5].stroke_width(4),
        ))
        .map_err(reason)?;
    let middle = text().pos(Pos::new(HPos::Left, VPos::Center));
    for (x, colour, name) in [
        (620, CATEGORIES[0], "drain voltage"),
        (890, CATEGORIES[5], "loop current"),
    ] {
        area.draw(&PathElement::new(
            [(x, 34), (x + 50, 34)],
            colour.stroke_width(4),
        ))
        .map_err(reason)?;
        area.draw(&Text::new(name, (x + 62, 34), middle.clone()))
            .map_err(reason)?;
    }
    Ok(())
}
