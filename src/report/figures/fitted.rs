//! A fitted device: measured points against the model, on-resistance over gate voltage and capacitance over voltage.

use super::style::{CATEGORIES, axes, decimals, heading, text, widened};
use super::{Drawn, reason};
use plotters::coord::Shift;
use plotters::prelude::*;
use plotters::style::text_anchor::{HPos, Pos, VPos};

/// A measured value and the model's at the same voltage.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct MeasuredPoint {
    /// V.
    pub voltage_v: f64,
    /// As measured.
    pub measured: f64,
    /// As modelled, in the same unit.
    pub model: f64,
}

/// Points of one temperature or one structure, by rising voltage.
#[derive(Debug, Clone, PartialEq)]
pub struct Series {
    /// For the legend.
    pub name: String,
    /// The points.
    pub points: Vec<MeasuredPoint>,
}

/// What one device's figure shows.
#[derive(Debug, Clone, PartialEq)]
pub struct DeviceFit {
    /// Heading.
    pub title: String,
    /// On-resistance of a micrometre, Ω·µm, a series a temperature, over gate voltage.
    pub on_resistance: Vec<Series>,
    /// Capacitances over voltage, each relative to its first measured value.
    pub capacitance: Vec<Series>,
}

pub fn draw<B: DrawingBackend>(area: &DrawingArea<B, Shift>, fit: &DeviceFit) -> Drawn {
    area.draw(&Text::new(fit.title.clone(), (24, 18), heading()))
        .map_err(reason)?;
    let (_, body) = area.split_vertically(60);
    let panels = [
        (&fit.on_resistance, "V_GS (V)", "on-resistance (Ω µm)"),
        (
            &fit.capacitance,
            "voltage (V)",
            "capacitance over its first value",
        ),
    ];
    let shown: Vec<_> = panels.iter().filter(|p| !p.0.is_empty()).collect();
    if shown.is_empty() {
        return Err("nothing was measured".into());
    }
    for (panel, part) in shown.iter().zip(body.split_evenly((1, shown.len()))) {
        draw_panel(&part, panel.0, panel.1, panel.2)?;
    }
    Ok(())
}

fn draw_panel<B: DrawingBackend>(
    area: &DrawingArea<B, Shift>,
    series: &[Series],
    across: &str,
    up: &str,
) -> Drawn {
    let points = || series.iter().flat_map(|s| &s.points);
    let (left, right) = widened(points().map(|p| p.voltage_v));
    let (bottom, top) = widened(points().flat_map(|p| [p.measured, p.model]));
    // The legend stands above the data, two entries a row.
    let rows = series.len().div_ceil(2) as u32;
    let mut chart = ChartBuilder::on(area)
        .margin_top(20 + 40 * rows)
        .margin_left(24)
        .margin_right(24)
        .x_label_area_size(80)
        .y_label_area_size(100)
        .build_cartesian_2d(left..right, bottom..top)
        .map_err(reason)?;
    axes(
        &mut chart,
        [&|v| format!("{v:.*}", decimals(right - left)), &|v| {
            format!("{v:.*}", decimals(top - bottom))
        }],
        [across, up],
    )?;
    let middle = text().pos(Pos::new(HPos::Left, VPos::Center));
    for (slot, s) in series.iter().enumerate() {
        let colour = CATEGORIES[slot % CATEGORIES.len()];
        chart
            .draw_series(LineSeries::new(
                s.points.iter().map(|p| (p.voltage_v, p.model)),
                colour.stroke_width(3),
            ))
            .map_err(reason)?;
        chart
            .draw_series(
                s.points
                    .iter()
                    .map(|p| Circle::new((p.voltage_v, p.measured), 6, colour.filled())),
            )
            .map_err(reason)?;
        let (x, y) = (40 + 270 * (slot % 2) as i32, 24 + 40 * (slot / 2) as i32);
        area.draw(&PathElement::new(
            [(x, y), (x + 44, y)],
            colour.stroke_width(3),
        ))
        .map_err(reason)?;
        area.draw(&Circle::new((x + 22, y), 6, colour.filled()))
            .map_err(reason)?;
        area.draw(&Text::new(s.name.clone(), (x + 54, y), middle.clone()))
            .map_err(reason)?;
    }
    Ok(())
}
