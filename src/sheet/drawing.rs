//! The stage to scale as SVG: the whole plan, and drivers and switches closer, each with its scale bar.

use super::block::{Block, Kind};
use super::floorplan::{Floorplan, GAP, floorplan};
use super::records::Sheet;
use super::shapes::{DETAIL, TEXT, View, colours, draw_block, draw_spiral, escaped};
use super::shapes::{scale_bar, text};
use crate::quantity::{format, format_in, micrometres};
use std::fmt::Write;

/// Width of the picture, pixels.
const WIDTH: f64 = 1400.0;
/// Room around, pixels.
const MARGIN: f64 = 40.0;
/// Height of the whole plan at most, pixels: one leg, two legs.
const PLAN_HEIGHT: [f64; 2] = [760.0, 1100.0];
/// Height of the closer view at most, pixels.
const CLOSE_HEIGHT: f64 = 460.0;
/// Room for words beside the switches, pixels.
const BESIDE: f64 = 420.0;
/// Room for words at the antenna's side, pixels.
const PORT: f64 = 150.0;

/// The drawing.
pub fn drawing(sheet: &Sheet) -> String {
    let plan = floorplan(sheet);
    let mut body = String::new();
    let top = heading(&mut body, sheet);
    let most = PLAN_HEIGHT[usize::from(sheet.legs > 1)];
    let scale = ((WIDTH - 2.0 * MARGIN - PORT) / plan.width).min(most / plan.height);
    let view = View {
        scale,
        left: MARGIN,
        top,
    };
    for spiral in &plan.spirals {
        draw_spiral(&mut body, view, spiral);
    }
    for block in &plan.blocks {
        draw_block(&mut body, view, block, false);
    }
    labels(&mut body, view, &plan);
    text(
        &mut body,
        view.x(plan.width) + 14.0,
        view.y(0.5 * plan.height) + 6.0,
        TEXT,
        "start",
        "to the antenna",
    );
    let bar = view.y(plan.height) + 46.0;
    scale_bar(&mut body, scale, (MARGIN, bar), plan.width);
    let bottom = closer(&mut body, sheet, &plan, scale, bar + 50.0);
    let legend_y = bottom + 50.0;
    legend(&mut body, legend_y, sheet);
    let height = legend_y + 36.0;
    format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{WIDTH}\" height=\"{height:.0}\" viewBox=\"0 0 {WIDTH} {height:.0}\" \
         font-family=\"sans-serif\">\n<title>{}</title>\n<rect width=\"100%\" height=\"100%\" fill=\"#fff\"/>\n{body}</svg>\n",
        escaped(&format!("{}: {}", sheet.id, sheet.title))
    )
}

/// What is drawn; returns where the plan begins.
fn heading(body: &mut String, sheet: &Sheet) -> f64 {
    let area_m2 = sheet.evaluation.figures.as_ref().map_or(0.0, |f| f.area_m2);
    let title = format!("{}: {}", sheet.id, sheet.title);
    let facts = format!(
        "{}, pair {}, {} at {}, {} leg{} of {} device{} a side",
        sheet.technology,
        sheet.device,
        format(sheet.frequency_hz, "Hz"),
        format_in(sheet.evaluation.design.supply_v, "V"),
        sheet.legs,
        plural(sheet.legs),
        sheet.stack,
        plural(sheet.stack),
    );
    let scale = format!(
        "To scale: each block takes the area counted for it, {} in all; gaps of {GAP} um are not counted. Where blocks \
         stand is a proposal.",
        format_in(area_m2, "mm^2")
    );
    text(body, MARGIN, 44.0, 24.0, "start", &title);
    text(body, MARGIN, 72.0, TEXT, "start", &facts);
    text(body, MARGIN, 96.0, TEXT, "start", &scale);
    124.0
}

fn plural(count: u32) -> &'static str {
    if count == 1 { "" } else { "s" }
}

/// Drivers and switches of the first leg, larger, from `top` down; returns where it ends.
fn closer(body: &mut String, sheet: &Sheet, plan: &Floorplan, scale: f64, top: f64) -> f64 {
    let least = |edge: fn(&Block) -> f64| plan.core.iter().map(edge).fold(f64::INFINITY, f64::min);
    let most = |edge: fn(&Block) -> f64| plan.core.iter().map(edge).fold(0.0, f64::max);
    let (left, right) = (least(|b| b.x), most(Block::right));
    let (upper, lower) = (least(|b| b.y), most(Block::bottom));
    let close_scale =
        ((WIDTH - 2.0 * MARGIN - BESIDE) / (right - left)).min(CLOSE_HEIGHT / (lower - upper));
    let close = View {
        scale: close_scale,
        left: MARGIN - close_scale * left,
        top: top + 56.0 - close_scale * upper,
    };
    let words = format!(
        "{}, {:.1} times larger: drivers by stage, P above N, and switches; W = devices × fingers × finger at a pitch \
         of {}; fingers too close to tell apart are filled",
        if sheet.legs == 1 { "Leg" } else { "One leg" },
        close_scale / scale,
        format(sheet.rules.finger_pitch_m, "m")
    );
    text(body, MARGIN, top, TEXT, "start", &words);
    let mut before = f64::NEG_INFINITY;
    let mut raised = false;
    for block in &plan.core {
        draw_block(body, close, block, true);
        let middle = close.x(block.x + 0.5 * block.width);
        if block.kind == Kind::Switch {
            let (x, y) = (close.x(right) + 16.0, close.y(block.y + 0.5 * block.height));
            text(body, x, y - 4.0, TEXT, "start", &block.label);
            text(body, x, y + 16.0, TEXT, "start", &block.detail[0]);
        } else if let Some(stage) = block.label.strip_prefix('P') {
            // Numbers of narrow neighbours at two heights, so that they do not run together.
            raised = middle - before < DETAIL && !raised;
            before = middle;
            let y = close.y(block.y) - if raised { 7.0 + DETAIL } else { 7.0 };
            text(body, middle, y, DETAIL, "middle", stage);
        }
    }
    let bar = close.y(lower) + 40.0;
    scale_bar(body, close_scale, (MARGIN, bar), right - left);
    bar
}

/// Names and measures of the large blocks: inside, smaller where they must be, else below.
fn labels(body: &mut String, view: View, plan: &Floorplan) {
    const SIZES: [f64; 3] = [1.0, 0.85, 0.75];
    for block in &plan.blocks {
        if matches!(block.kind, Kind::Switch | Kind::Driver) {
            continue;
        }
        let (w, h) = (view.scale * block.width, view.scale * block.height);
        let details = block.detail.iter().map(|line| (line.as_str(), DETAIL));
        let lines: Vec<(&str, f64)> = std::iter::once((block.label.as_str(), TEXT))
            .chain(details)
            .collect();
        let wide = lines
            .iter()
            .map(|(line, size)| 0.58 * size * line.chars().count() as f64)
            .fold(0.0, f64::max);
        let tall: f64 = lines.iter().map(|(_, size)| 1.25 * size).sum();
        let fits = |s: &&f64| *s * wide + 12.0 < w && *s * tall + 12.0 < h;
        let (size, x, mut y, anchor) = match SIZES.iter().find(fits) {
            Some(&size) => {
                let x = view.x(block.x + 0.5 * block.width);
                let y = view.y(block.y + 0.5 * block.height) - 0.5 * size * tall;
                let _ = writeln!(
                    body,
                    "<rect x=\"{:.1}\" y=\"{y:.1}\" width=\"{:.1}\" height=\"{:.1}\" fill=\"#fff\" fill-opacity=\"0.85\"/>",
                    x - 0.5 * size * wide - 4.0,
                    size * wide + 8.0,
                    size * tall + 3.0
                );
                (size, x, y, "middle")
            }
            None => (1.0, view.x(block.x), view.y(block.bottom()) + 3.0, "start"),
        };
        for (line, letters) in lines {
            y += 1.2 * size * letters;
            text(body, x, y, size * letters, anchor, line);
        }
    }
}

fn legend(body: &mut String, y: f64, sheet: &Sheet) {
    let mut x = MARGIN;
    let kinds = [
        Kind::Switch,
        Kind::Driver,
        Kind::Capacitor,
        Kind::Decoupling,
        Kind::Inductor,
    ];
    for kind in kinds {
        let (colour, words) = colours(kind);
        let words = match sheet.spiral {
            Some(spiral) if kind == Kind::Inductor => format!(
                "spiral, its underpass darker; dashed: {} kept clear",
                micrometres(spiral.keep_out_m)
            ),
            _ => words.to_owned(),
        };
        let _ = writeln!(
            body,
            "<rect x=\"{x:.1}\" y=\"{:.1}\" width=\"22\" height=\"14\" fill=\"{colour}\" fill-opacity=\"0.4\" \
             stroke=\"{colour}\"/>",
            y - 12.0
        );
        text(body, x + 30.0, y, TEXT, "start", &words);
        x += 60.0 + 0.54 * TEXT * words.chars().count() as f64;
    }
}
