//! Rows of stacked bars, side by side: what designs lose, what they take up.

use super::style::{FAINT, INK, decimals, heading, text};
use super::{Drawn, reason};
use plotters::coord::Shift;
use plotters::prelude::*;
use plotters::style::text_anchor::{HPos, Pos, VPos};

/// A row: two lines of name, what stands after the bar, a value a band.
#[derive(Debug, Clone)]
pub struct Row {
    /// Its name.
    pub name: [String; 2],
    /// After the bar.
    pub total: String,
    /// Lengths of the bands, none negative.
    pub values: Vec<f64>,
}

/// A band's name and colour.
pub type Band = (String, RGBColor);

/// What is drawn around the rows.
#[derive(Debug, Clone, Copy)]
pub struct Frame<'a> {
    /// The figure's heading.
    pub heading: &'a str,
    /// Name of the axis, with its unit.
    pub axis: &'a str,
    /// Where the axis ends; the longest bar with room for its total where none.
    pub end: Option<f64>,
}

const LEFT: i32 = 286;
const RIGHT: i32 = 860;
const TOP: i32 = 80;
const BOTTOM: i32 = 690;
/// Room after the longest bar for its total, a share of the axis.
const ROOM: f64 = 0.2;

pub fn draw<B: DrawingBackend>(
    area: &DrawingArea<B, Shift>,
    frame: Frame<'_>,
    bands: &[Band],
    rows: &[Row],
) -> Drawn {
    area.draw(&Text::new(frame.heading, (24, 18), heading()))
        .map_err(reason)?;
    let longest = rows
        .iter()
        .map(|r| r.values.iter().sum::<f64>())
        .fold(0.0, f64::max);
    if longest <= 0.0 {
        return Err("every bar is empty".into());
    }
    let end = frame.end.unwrap_or((1.0 + ROOM) * longest);
    let x = |value: f64| LEFT + (f64::from(RIGHT - LEFT) * value / end).round() as i32;
    let step = tick(end);
    let below = text().pos(Pos::new(HPos::Center, VPos::Top));
    for count in 0..=(end / step + 1e-9).floor() as i32 {
        let value = step * f64::from(count);
        area.draw(&PathElement::new(
            [(x(value), TOP), (x(value), BOTTOM)],
            FAINT,
        ))
        .map_err(reason)?;
        area.draw(&Text::new(
            format!("{value:.*}", decimals(5.0 * step)),
            (x(value), BOTTOM + 12),
            below.clone(),
        ))
        .map_err(reason)?;
    }
    area.draw(&Text::new(
        frame.axis,
        ((LEFT + RIGHT) / 2, BOTTOM + 56),
        below,
    ))
    .map_err(reason)?;

    let height = (BOTTOM - TOP) / rows.len().max(3) as i32;
    let beside = text().pos(Pos::new(HPos::Right, VPos::Center));
    let after = text().pos(Pos::new(HPos::Left, VPos::Center));
    for (place, row) in rows.iter().enumerate() {
        let middle = TOP + height * place as i32 + height / 2;
        for (line, away) in row.name.iter().zip([-16, 16]) {
            area.draw(&Text::new(
                line.as_str(),
                (LEFT - 14, middle + away),
                beside.clone(),
            ))
            .map_err(reason)?;
        }
        let mut from = 0.0;
        for ((_, colour), value) in bands.iter().zip(&row.values) {
            let corners = [
                (x(from), middle - height * 3 / 10),
                (x(from + value), middle + height * 3 / 10),
            ];
            area.draw(&Rectangle::new(corners, colour.filled()))
                .map_err(reason)?;
            from += value;
        }
        area.draw(&Text::new(
            row.total.as_str(),
            (x(from) + 10, middle),
            after.clone(),
        ))
        .map_err(reason)?;
    }
    area.draw(&PathElement::new(
        [(LEFT, TOP), (LEFT, BOTTOM), (RIGHT, BOTTOM)],
        INK.stroke_width(2),
    ))
    .map_err(reason)?;
    for (slot, (name, colour)) in bands.iter().enumerate() {
        let y = 110 + 48 * slot as i32;
        area.draw(&Rectangle::new(
            [(970, y - 14), (1004, y + 14)],
            colour.filled(),
        ))
        .map_err(reason)?;
        area.draw(&Text::new(name.as_str(), (1016, y), after.clone()))
            .map_err(reason)?;
    }
    Ok(())
}

/// A step of 1, 2 or 5 times a power of ten, five to twelve of them in `end`.
fn tick(end: f64) -> f64 {
    let ten = 10f64.powf((end / 5.0).log10().floor());
    [5.0, 2.0]
        .into_iter()
        .map(|k| k * ten)
        .find(|s| *s <= end / 5.0)
        .unwrap_or(ten)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn law_ticks_are_few_and_round() {
        for exponent in -30..30 {
            let end = 1.37f64.powi(exponent);
            let count = end / tick(end);
            assert!((5.0 - 1e-9..=12.6).contains(&count), "{end}: {count}");
        }
        assert_eq!(tick(100.0), 20.0);
    }
}
