//! The map: best efficiency over loaded Q and supply.

use super::style::{FAINT, INK, heading, ramp, text};
use super::{CellBest, Drawn, FigureInput, reason};
use crate::quantity::format_in;
use plotters::coord::Shift;
use plotters::prelude::*;
use plotters::style::text_anchor::{HPos, Pos, VPos};

/// Whether the cells have both coordinates, so that a map can be drawn.
pub fn is_grid(cells: &[CellBest]) -> bool {
    !cells.is_empty()
        && cells
            .iter()
            .all(|c| c.loaded_q.is_some() && c.supply_v.is_some())
}

fn distinct(values: impl Iterator<Item = f64>) -> Vec<f64> {
    let mut sorted: Vec<f64> = values.collect();
    sorted.sort_by(f64::total_cmp);
    sorted.dedup();
    sorted
}

/// Label every so many entries, so that labels keep apart.
fn stride(count: usize, room: usize) -> usize {
    count.div_ceil(room).max(1)
}

pub fn draw<B: DrawingBackend>(area: &DrawingArea<B, Shift>, input: &FigureInput<'_>) -> Drawn {
    let supplies = distinct(input.cells.iter().filter_map(|c| c.supply_v));
    let loaded = distinct(input.cells.iter().filter_map(|c| c.loaded_q));
    let best = |q: f64, v: f64| {
        input
            .cells
            .iter()
            .find(|c| c.loaded_q == Some(q) && c.supply_v == Some(v))
            .and_then(|c| c.efficiency)
    };
    let known: Vec<f64> = input.cells.iter().filter_map(|c| c.efficiency).collect();
    let least = known.iter().copied().fold(f64::INFINITY, f64::min);
    let most = known.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    let from = input.map_power_w.map_or(String::new(), |w| {
        format!(" from {} on", format_in(w, "dBm"))
    });
    let caption = format!("{}: best efficiency of each cell{from} (%)", input.title);
    area.draw(&Text::new(caption, (24, 18), heading()))
        .map_err(reason)?;

    let (x0, y0, x1, y1) = (130, 80, 1170, 690);
    let x = |i: usize| x0 + ((x1 - x0) as usize * i / supplies.len()) as i32;
    let y = |i: usize| y1 - ((y1 - y0) as usize * i / loaded.len()) as i32;
    let centred = text().pos(Pos::new(HPos::Center, VPos::Center));
    let room = x(1) - x(0) > 80 && y(0) - y(1) > 34;
    for (row, &q) in loaded.iter().enumerate() {
        for (column, &v) in supplies.iter().enumerate() {
            let corners = [(x(column), y(row + 1)), (x(column + 1), y(row))];
            let found = best(q, v);
            let share = |e: f64| {
                if most > least {
                    (e - least) / (most - least)
                } else {
                    0.5
                }
            };
            let fill = found.map_or(FAINT, |e| ramp(share(e)));
            area.draw(&Rectangle::new(corners, fill.filled()))
                .map_err(reason)?;
            area.draw(&Rectangle::new(corners, WHITE.stroke_width(2)))
                .map_err(reason)?;
            if room {
                let middle = (
                    (corners[0].0 + corners[1].0) / 2,
                    (corners[0].1 + corners[1].1) / 2,
                );
                let (label, colour) = match found {
                    Some(e) if share(e) < 0.55 => (format!("{:.1}", 100.0 * e), WHITE),
                    Some(e) => (format!("{:.1}", 100.0 * e), BLACK),
                    None => ("none".into(), BLACK),
                };
                area.draw(&Text::new(label, middle, centred.color(&colour)))
                    .map_err(reason)?;
            }
        }
    }
    for column in (0..supplies.len()).step_by(stride(supplies.len(), 12)) {
        let at = ((x(column) + x(column + 1)) / 2, y1 + 24);
        area.draw(&Text::new(
            format!("{:.3}", supplies[column]),
            at,
            centred.clone(),
        ))
        .map_err(reason)?;
    }
    let right = text().pos(Pos::new(HPos::Right, VPos::Center));
    for row in (0..loaded.len()).step_by(stride(loaded.len(), 16)) {
        let at = (x0 - 14, (y(row) + y(row + 1)) / 2);
        area.draw(&Text::new(format!("{:.2}", loaded[row]), at, right.clone()))
            .map_err(reason)?;
    }
    area.draw(&Text::new(
        "supply (V)",
        ((x0 + x1) / 2, y1 + 68),
        centred.clone(),
    ))
    .map_err(reason)?;
    let turned = centred.transform(FontTransform::Rotate270);
    area.draw(&Text::new("loaded Q", (32, (y0 + y1) / 2), turned))
        .map_err(reason)?;
    area.draw(&Rectangle::new([(x0, y0), (x1, y1)], INK))
        .map_err(reason)?;
    Ok(())
}
