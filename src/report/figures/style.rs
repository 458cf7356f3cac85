//! Look that all figures share: size, font, colours that colour-blind readers tell apart, ticks.

use super::{Drawn, reason};
use plotters::backend::DrawingBackend;
use plotters::chart::ChartContext;
use plotters::coord::cartesian::Cartesian2d;
use plotters::coord::ranged1d::{Ranged, ValueFormatter};
use plotters::style::TRANSPARENT;
use plotters::style::{FontStyle, IntoFont, RGBColor, TextStyle, register_font as register};

/// Pixels; at half a page's width letters are still of reading size.
pub const SIZE: (u32, u32) = (1200, 800);
/// Height of ordinary letters, pixels.
pub const TEXT: u32 = 26;
/// Height of a figure's heading, pixels.
pub const HEADING: u32 = 30;
/// Colour of text and axes.
pub const INK: RGBColor = RGBColor(40, 44, 52);
/// Colour of grid lines.
pub const FAINT: RGBColor = RGBColor(224, 226, 230);

/// Eight colours for categories, told apart by colour-blind readers (Okabe and Ito 2008), their yellow darkened for
/// white paper and grey in place of black.
pub const CATEGORIES: [RGBColor; 8] = [
    RGBColor(0, 114, 178),
    RGBColor(230, 159, 0),
    RGBColor(0, 158, 115),
    RGBColor(204, 121, 167),
    RGBColor(86, 180, 233),
    RGBColor(213, 94, 0),
    RGBColor(200, 186, 40),
    RGBColor(140, 140, 140),
];

/// Losses that have the same colour in every figure, by their place in the budget, in the order of [`CATEGORIES`]:
/// conduction, gate, inductor, drain charge, driver chain, capacitor, harmonics.
const COLOURED_LOSSES: [usize; OTHER] = [0, 3, 5, 1, 4, 6, 8];
/// Place in [`CATEGORIES`] of what is put together.
pub const OTHER: usize = 7;

/// Colours of at most [`OTHER`] losses: rare ones take what the usual ones leave free.
pub fn loss_colours(shown: &[usize]) -> Vec<RGBColor> {
    let usual = |loss: &usize| COLOURED_LOSSES.iter().position(|l| l == loss);
    let mut free = (0..OTHER).filter(|&slot| !shown.contains(&COLOURED_LOSSES[slot]));
    let slots = shown
        .iter()
        .map(|loss| usual(loss).or_else(|| free.next()).unwrap_or(OTHER));
    slots.map(|slot| CATEGORIES[slot]).collect()
}

/// A ramp from dark blue over grey to ochre, rising in lightness throughout, so that it reads in grey and to
/// colour-blind eyes.
const RAMP: [(u8, u8, u8); 5] = [
    (18, 40, 92),
    (62, 82, 128),
    (122, 126, 132),
    (186, 168, 98),
    (250, 226, 110),
];

/// The ramp's colour at `share` 0..1.
pub fn ramp(share: f64) -> RGBColor {
    let last = RAMP.len() - 1;
    let at = share.clamp(0.0, 1.0) * last as f64;
    let low = (at.floor() as usize).min(last - 1);
    let part = at - low as f64;
    let mix = |a: u8, b: u8| (f64::from(a) + part * (f64::from(b) - f64::from(a))).round() as u8;
    let (a, b) = (RAMP[low], RAMP[low + 1]);
    RGBColor(mix(a.0, b.0), mix(a.1, b.1), mix(a.2, b.2))
}

/// Makes the font known; once is enough, more does no harm.
pub fn register_font() {
    for style in [FontStyle::Normal, FontStyle::Bold] {
        // Refused only for a font that cannot be read; drawing text then fails and says so.
        let _ = register("sans-serif", style, notosans::REGULAR_TTF);
    }
}

/// Ordinary text.
pub fn text() -> TextStyle<'static> {
    TextStyle::from(("sans-serif", TEXT).into_font()).color(&INK)
}

/// A figure's heading.
pub fn heading() -> TextStyle<'static> {
    TextStyle::from(("sans-serif", HEADING).into_font()).color(&INK)
}

/// Smallest and largest, widened by a twentieth, or by a tenth of the value where all are equal.
pub fn widened(values: impl Iterator<Item = f64>) -> (f64, f64) {
    let (low, high) = values.fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), v| {
        (l.min(v), h.max(v))
    });
    if !(low.is_finite() && high.is_finite()) {
        return (0.0, 1.0);
    }
    let room = if high > low {
        0.05 * (high - low)
    } else {
        0.1 * high.abs().max(1e-9)
    };
    (low - room, high + room)
}

/// Decimals that tell steps of a fifth of `span` apart.
pub fn decimals(span: f64) -> usize {
    (1.0 - (span / 5.0).log10()).floor().clamp(0.0, 6.0) as usize
}

/// Axes with faint grid lines; labels by the formatters (horizontal, vertical), names with their units.
pub fn axes<B, X, Y>(
    chart: &mut ChartContext<'_, B, Cartesian2d<X, Y>>,
    labels: [&dyn Fn(&f64) -> String; 2],
    names: [&str; 2],
) -> Drawn
where
    B: DrawingBackend,
    X: Ranged<ValueType = f64> + ValueFormatter<f64>,
    Y: Ranged<ValueType = f64> + ValueFormatter<f64>,
{
    chart
        .configure_mesh()
        .light_line_style(TRANSPARENT)
        .bold_line_style(FAINT)
        .axis_style(INK)
        .label_style(text())
        .axis_desc_style(text())
        .x_labels(7)
        .y_labels(8)
        .x_label_formatter(labels[0])
        .y_label_formatter(labels[1])
        .x_desc(names[0])
        .y_desc(names[1])
        .draw()
        .map_err(reason)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn law_losses_keep_their_colours_and_share_none() {
        let all = loss_colours(&COLOURED_LOSSES);
        assert_eq!(all, CATEGORIES[..OTHER]);
        let some = loss_colours(&[9, 5, 2, 3, 10, 0, 7]);
        assert_eq!([some[1], some[3], some[5]], [all[2], all[1], all[0]]);
        for (i, colour) in some.iter().enumerate() {
            assert!(!some[..i].contains(colour) && *colour != CATEGORIES[OTHER]);
        }
    }
}
