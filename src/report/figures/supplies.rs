//! Efficiency against output power, a front a supply, the overall one beneath.

use super::style::{axes, decimals, heading, ramp, text, widened};
use super::{Drawn, reason};
use crate::run::records::{SupplyFront, SupplyPoint};
use plotters::coord::Shift;
use plotters::prelude::*;
use plotters::style::text_anchor::{HPos, Pos, VPos};

/// Supplies drawn at most, evenly chosen; more lines are no longer told apart.
const MOST: usize = 9;
/// Colour of the overall front, wide and pale beneath the others.
const OVERALL: RGBColor = RGBColor(206, 209, 214);

pub fn draw<B: DrawingBackend>(
    area: &DrawingArea<B, Shift>,
    title: &str,
    supplies: &[SupplyFront],
) -> Drawn {
    let all = || supplies.iter().flat_map(|s| &s.points);
    let (left, right) = widened(all().map(|p| p.output_power_dbm));
    let (bottom, top) = widened(all().map(|p| 100.0 * p.efficiency));
    let (body, legend) = area.split_horizontally(980);
    body.draw(&Text::new(
        format!("{title}: fronts by supply, any area"),
        (24, 18),
        heading(),
    ))
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
    let at = |p: &SupplyPoint| (p.output_power_dbm, 100.0 * p.efficiency);
    let middle = text().pos(Pos::new(HPos::Left, VPos::Center));
    let mut line =
        |points: Vec<(f64, f64)>, colour: RGBColor, width: u32, name: &str, slot: i32| {
            chart
                .draw_series(LineSeries::new(points, colour.stroke_width(width)))
                .map_err(reason)?;
            let y = 110 + 52 * slot;
            legend
                .draw(&PathElement::new(
                    [(10, y), (58, y)],
                    colour.stroke_width(width),
                ))
                .map_err(reason)?;
            legend
                .draw(&Text::new(name.to_owned(), (72, y), middle.clone()))
                .map_err(reason)
        };
    line(
        overall(supplies).map(at).collect(),
        OVERALL,
        14,
        "overall",
        0,
    )?;
    let shown = evenly(supplies.len(), MOST);
    for (slot, &index) in shown.iter().rev().enumerate() {
        let front = &supplies[index];
        let share = index as f64 / (supplies.len() - 1).max(1) as f64;
        // The palest end of the ramp would be lost on white.
        let colour = ramp(0.85 * share);
        let none = if front.points.is_empty() {
            ": none"
        } else {
            ""
        };
        let name = format!("{:.3} V{none}", front.supply_v);
        let points = front.points.iter().map(at).collect();
        line(points, colour, 4, &name, slot as i32 + 1)?;
    }
    Ok(())
}

/// The points that no supply's point beats in both, output power rising.
fn overall(supplies: &[SupplyFront]) -> impl Iterator<Item = &SupplyPoint> {
    let mut points: Vec<&SupplyPoint> = supplies.iter().flat_map(|s| &s.points).collect();
    points.sort_by(|a, b| {
        (b.output_power_dbm.total_cmp(&a.output_power_dbm))
            .then(b.efficiency.total_cmp(&a.efficiency))
    });
    let mut best = f64::NEG_INFINITY;
    points.retain(|p| {
        let better = p.efficiency > best;
        best = best.max(p.efficiency);
        better
    });
    points.into_iter().rev()
}

/// At most `most` of `count` indices, the first and the last among them.
fn evenly(count: usize, most: usize) -> Vec<usize> {
    let shown = count.min(most);
    (0..shown)
        .map(|i| i * (count - 1) / (shown - 1).max(1))
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn law_the_overall_front_is_what_nothing_beats() {
        let point = |output_power_dbm, efficiency| SupplyPoint {
            id: String::new(),
            output_power_dbm,
            efficiency,
        };
        let supplies = [
            SupplyFront {
                supply_v: 1.0,
                points: vec![point(5.0, 0.6), point(10.0, 0.5)],
            },
            SupplyFront {
                supply_v: 1.2,
                points: vec![point(9.0, 0.5), point(12.0, 0.4)],
            },
        ];
        let kept: Vec<f64> = overall(&supplies).map(|p| p.output_power_dbm).collect();
        assert_eq!(kept, [5.0, 10.0, 12.0]);
    }

    #[test]
    fn law_supplies_are_chosen_evenly_with_both_ends() {
        assert_eq!(evenly(1, 9), [0]);
        assert_eq!(evenly(3, 9), [0, 1, 2]);
        let many = evenly(33, 9);
        assert_eq!((many.len(), many[0], many[8]), (9, 0, 32));
    }
}
