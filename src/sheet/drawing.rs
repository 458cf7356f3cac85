//! The stage to scale as SVG: the whole plan, and drivers and switches closer, each with its scale bar.

use super::block::{Block, Kind};
use super::floorplan::{Floorplan, PlacedSpiral, floorplan};
use super::records::Sheet;
use crate::quantity::{format, micrometres};
use std::fmt::Write;

/// Width of the picture, pixels.
const WIDTH: f64 = 1400.0;
/// Room around, pixels.
const MARGIN: f64 = 40.0;
/// Height of the whole plan at most, pixels.
const PLAN_HEIGHT: f64 = 760.0;
/// Height of the closer view at most, pixels.
const CLOSE_HEIGHT: f64 = 380.0;
/// Room for words beside the switches, pixels.
const BESIDE: f64 = 420.0;
/// Height of letters, pixels.
const TEXT: f64 = 17.0;
/// Fingers past this many are not drawn one by one.
const MOST_FINGERS: u32 = 4000;

/// Micrometres to pixels.
#[derive(Clone, Copy)]
struct View {
    scale: f64,
    left: f64,
    top: f64,
}

impl View {
    fn x(&self, um: f64) -> f64 {
        self.left + self.scale * um
    }

    fn y(&self, um: f64) -> f64 {
        self.top + self.scale * um
    }
}

/// The drawing.
pub fn drawing(sheet: &Sheet) -> String {
    let plan = floorplan(sheet);
    let mut body = String::new();
    let title = 70.0;
    let port = 130.0;
    let scale = ((WIDTH - 2.0 * MARGIN - port) / plan.width).min(PLAN_HEIGHT / plan.height);
    let view = View {
        scale,
        left: MARGIN,
        top: title + MARGIN,
    };
    text(
        &mut body,
        MARGIN,
        44.0,
        24.0,
        "start",
        &format!("{}: {}", sheet.id, sheet.title),
    );
    text(
        &mut body,
        MARGIN,
        70.0,
        TEXT,
        "start",
        "to scale; each block takes the area counted for it; where blocks stand is a proposal",
    );
    for spiral in &plan.spirals {
        draw_spiral(&mut body, view, spiral);
    }
    for block in &plan.blocks {
        draw_block(&mut body, view, block, false);
    }
    labels(&mut body, view, &plan);
    let middle = view.y(0.5 * plan.height);
    text(
        &mut body,
        view.x(plan.width) + 14.0,
        middle + 6.0,
        TEXT,
        "start",
        "to the antenna",
    );
    let bar_y = view.y(plan.height) + 46.0;
    scale_bar(&mut body, view, bar_y, plan.width);

    let close_top = bar_y + 90.0;
    let (mut low_x, mut low_y) = (f64::INFINITY, f64::INFINITY);
    let (mut high_x, mut high_y) = (0.0f64, 0.0f64);
    for block in &plan.core {
        low_x = low_x.min(block.x);
        low_y = low_y.min(block.y);
        high_x = high_x.max(block.right());
        high_y = high_y.max(block.bottom());
    }
    let close_scale =
        ((WIDTH - 2.0 * MARGIN - BESIDE) / (high_x - low_x)).min(CLOSE_HEIGHT / (high_y - low_y));
    let close = View {
        scale: close_scale,
        left: MARGIN - close_scale * low_x,
        top: close_top - close_scale * low_y,
    };
    text(
        &mut body,
        MARGIN,
        close_top - 34.0,
        TEXT,
        "start",
        &format!(
            "Drivers and switches of {}, {:.1} times larger; W = devices × fingers × finger, pitch {}",
            if sheet.legs == 1 { "the leg" } else { "leg 1" },
            close_scale / scale,
            format(sheet.rules.finger_pitch_m, "m")
        ),
    );
    for block in &plan.core {
        draw_block(&mut body, close, block, true);
    }
    for block in &plan.core {
        let middle = close.x(block.x + 0.5 * block.width);
        if block.kind == Kind::Switch {
            let (x, y) = (
                close.x(high_x) + 16.0,
                close.y(block.y + 0.5 * block.height),
            );
            text(&mut body, x, y - 4.0, TEXT, "start", &block.label);
            text(&mut body, x, y + 18.0, TEXT, "start", &block.detail);
            continue;
        }
        // Neighbours' names at two heights, so that they do not run together.
        let second = block
            .label
            .chars()
            .nth(1)
            .is_some_and(|c| "02468".contains(c));
        let away = if second { 14.0 } else { 0.0 };
        if block.label.starts_with('P') {
            text(
                &mut body,
                middle,
                close.y(block.y) - 7.0 - away,
                14.0,
                "middle",
                &block.label,
            );
        } else {
            let y = close.y(block.bottom()) + TEXT + 1.0 + away;
            text(&mut body, middle, y, 14.0, "middle", &block.label);
        }
    }
    let end = close.y(high_y) + 64.0;
    scale_bar(&mut body, close, end, high_x - low_x);
    let legend_y = end + 56.0;
    legend(&mut body, legend_y, sheet.spiral.is_some());
    let height = legend_y + 40.0;
    format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{WIDTH}\" height=\"{height:.0}\" viewBox=\"0 0 {WIDTH} {height:.0}\" \
         font-family=\"sans-serif\">\n<title>{}</title>\n<rect width=\"100%\" height=\"100%\" fill=\"#fff\"/>\n{body}</svg>\n",
        escaped(&format!("{}: {}", sheet.id, sheet.title))
    )
}

fn colours(kind: Kind) -> (&'static str, &'static str) {
    match kind {
        Kind::Switch => ("#d55e00", "output switches"),
        Kind::Driver => ("#0072b2", "driver stages"),
        Kind::Capacitor => ("#009e73", "capacitors, by unit"),
        Kind::Decoupling => ("#9aa3ad", "decoupling"),
        Kind::Inductor => ("#c8913a", "inductor"),
    }
}

fn escaped(text: &str) -> String {
    text.replace('&', "&amp;")
        .replace('<', "&lt;")
        .replace('>', "&gt;")
}

fn text(body: &mut String, x: f64, y: f64, size: f64, anchor: &str, words: &str) {
    let _ = writeln!(
        body,
        "<text x=\"{x:.1}\" y=\"{y:.1}\" font-size=\"{size}\" text-anchor=\"{anchor}\" fill=\"#282c34\">{}</text>",
        escaped(words)
    );
}

fn draw_block(body: &mut String, view: View, block: &Block, close: bool) {
    let (colour, _) = colours(block.kind);
    let (x, y) = (view.x(block.x), view.y(block.y));
    let (w, h) = (view.scale * block.width, view.scale * block.height);
    let dash = if block.kind == Kind::Inductor {
        " stroke-dasharray=\"8 5\""
    } else {
        ""
    };
    let _ = writeln!(
        body,
        "<rect x=\"{x:.2}\" y=\"{y:.2}\" width=\"{w:.2}\" height=\"{h:.2}\" fill=\"{colour}\" fill-opacity=\"0.22\" \
         stroke=\"{colour}\" stroke-width=\"1\"{dash}/>"
    );
    let rows = block.cells.div_ceil(block.columns);
    let (cw, ch) = (w / f64::from(block.columns), h / f64::from(rows));
    let mut path = String::new();
    if block.fingers == 0 {
        // Cells of an array, where they are large enough to be told apart.
        if block.cells > 1 && cw > 2.5 {
            for cell in 0..block.cells {
                let (column, row) = (cell % block.columns, cell / block.columns);
                let (cx, cy) = (x + cw * f64::from(column), y + ch * f64::from(row));
                let _ = write!(path, "M{cx:.2} {cy:.2}h{cw:.2}v{ch:.2}h{:.2}z", -cw);
            }
        }
    } else if close && block.fingers * block.cells <= MOST_FINGERS {
        let pitch = cw / f64::from(block.fingers);
        for cell in 0..block.cells {
            let (column, row) = (cell % block.columns, cell / block.columns);
            let (cx, cy) = (x + cw * f64::from(column), y + ch * f64::from(row));
            let top = cy + 0.5 * ch * (1.0 - block.active);
            for finger in 0..block.fingers {
                let at = cx + pitch * (f64::from(finger) + 0.5);
                let _ = write!(path, "M{at:.2} {top:.2}v{:.2}", ch * block.active);
            }
            let _ = write!(path, "M{cx:.2} {cy:.2}h{cw:.2}v{ch:.2}h{:.2}z", -cw);
        }
    }
    if !path.is_empty() {
        let _ = writeln!(
            body,
            "<path d=\"{path}\" fill=\"none\" stroke=\"{colour}\" stroke-width=\"0.6\"/>"
        );
    }
}

/// Names and measures of the large blocks: inside where both lines fit, else below.
fn labels(body: &mut String, view: View, plan: &Floorplan) {
    const DETAIL: f64 = 14.0;
    for block in &plan.blocks {
        if matches!(block.kind, Kind::Switch | Kind::Driver) {
            continue;
        }
        let (w, h) = (view.scale * block.width, view.scale * block.height);
        let length = |words: &str, size: f64| 0.58 * size * words.chars().count() as f64;
        let wide = length(&block.label, TEXT).max(length(&block.detail, DETAIL));
        let middle = view.x(block.x + 0.5 * block.width);
        let tall = TEXT + DETAIL + 8.0;
        // Below they begin with the block: the spiral's keep-out is on its other side.
        let (x, top, anchor) = if w > wide + 8.0 && h > tall + 8.0 {
            let top = view.y(block.y + 0.5 * block.height) - 0.5 * tall;
            let _ = writeln!(
                body,
                "<rect x=\"{:.1}\" y=\"{top:.1}\" width=\"{:.1}\" height=\"{tall:.1}\" fill=\"#fff\" fill-opacity=\"0.85\"/>",
                middle - 0.5 * wide - 4.0,
                wide + 8.0,
            );
            (middle, top, "middle")
        } else {
            (view.x(block.x), view.y(block.bottom()) + 3.0, "start")
        };
        text(body, x, top + TEXT, TEXT, anchor, &block.label);
        text(
            body,
            x,
            top + TEXT + DETAIL + 3.0,
            DETAIL,
            anchor,
            &block.detail,
        );
    }
}

/// Turns as the rings that were solved, opened at the top: each ring's end steps inwards to the next one's start, the
/// inner end leaves by the underpass, so that both ends come out at the top.
fn draw_spiral(body: &mut String, view: View, placed: &PlacedSpiral) {
    let s = &placed.spiral;
    let (cx, cy) = (view.x(placed.x), view.y(placed.y));
    let px = |m: f64| view.scale * m * 1e6;
    let half = 0.5 * px(s.diameter_m) + px(s.keep_out_m);
    let (colour, _) = colours(Kind::Inductor);
    let _ = writeln!(
        body,
        "<rect x=\"{:.2}\" y=\"{:.2}\" width=\"{:.2}\" height=\"{:.2}\" fill=\"none\" stroke=\"{colour}\" \
         stroke-dasharray=\"8 5\"/>",
        cx - half,
        cy - half,
        2.0 * half,
        2.0 * half
    );
    let (w, step) = (px(s.trace_m), px(s.trace_m + s.spacing_m));
    let outer = 0.5 * px(s.diameter_m) - 0.5 * w;
    // A step this long leans little enough to keep its distance from the turn outside it.
    let open = 1.4 * step;
    let inner = outer - step * f64::from(s.turns - 1);
    let reach = open.min(0.7 * inner);
    let at = |radius: f64, side: f64| {
        let x = side * reach;
        (cx + x, cy - (radius * radius - x * x).sqrt())
    };
    let mut path = String::new();
    let (x, y) = at(outer, -1.0);
    let _ = write!(path, "M{x:.2} {:.2}L{x:.2} {y:.2}", cy - half);
    for turn in 0..s.turns {
        let radius = outer - step * f64::from(turn);
        let (x0, y0) = at(radius, -1.0);
        let (x1, y1) = at(radius, 1.0);
        let _ = write!(
            path,
            "L{x0:.2} {y0:.2}A{radius:.2} {radius:.2} 0 1 0 {x1:.2} {y1:.2}"
        );
    }
    let _ = writeln!(
        body,
        "<path d=\"{path}\" fill=\"none\" stroke=\"{colour}\" stroke-opacity=\"0.75\" stroke-width=\"{w:.2}\" \
         stroke-linejoin=\"bevel\"/>"
    );
    let (x, y) = at(inner, 1.0);
    let _ = writeln!(
        body,
        "<path d=\"M{x:.2} {:.2}V{:.2}\" fill=\"none\" stroke=\"#6b4a12\" stroke-width=\"{w:.2}\" stroke-opacity=\"0.45\"/>",
        y + 0.5 * w,
        cy - half
    );
    // As large as fits in the hole, and still to be read.
    let hole = px(s.inner_diameter_m);
    let small = (0.062 * hole).clamp(9.0, 15.0);
    let note = format!("outer diameter {}", micrometres(s.diameter_m));
    text(body, cx, cy - 4.0, small, "middle", &note);
    let note = format!(
        "{} turns of {}, {} apart",
        s.turns,
        micrometres(s.trace_m),
        micrometres(s.spacing_m)
    );
    text(body, cx, cy + small, small, "middle", &note);
    text(
        body,
        cx - reach - 0.5 * w - 6.0,
        cy - half + 18.0,
        small,
        "end",
        "from C_s",
    );
    text(
        body,
        cx + reach + 0.5 * w + 6.0,
        cy - half + 18.0,
        small,
        "start",
        "to the antenna",
    );
}

/// A bar of 1, 2 or 5 times a power of ten, at most a fifth of what is shown.
fn scale_bar(body: &mut String, view: View, y: f64, shown_um: f64) {
    let most = 0.2 * shown_um;
    let ten = 10f64.powf(most.log10().floor());
    let length = [5.0, 2.0, 1.0]
        .into_iter()
        .map(|k| k * ten)
        .find(|l| *l <= most)
        .unwrap_or(ten);
    let px = view.scale * length;
    let _ = writeln!(
        body,
        "<path d=\"M{MARGIN} {:.1}v12m0 -6h{px:.2}m0 -6v12\" fill=\"none\" stroke=\"#282c34\" stroke-width=\"2\"/>",
        y - 6.0
    );
    text(
        body,
        MARGIN + px + 12.0,
        y + 6.0,
        TEXT,
        "start",
        &format(length * 1e-6, "m"),
    );
}

fn legend(body: &mut String, y: f64, spiral: bool) {
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
        let words = if kind == Kind::Inductor && spiral {
            "spiral, its underpass darker; dashed: keep-out"
        } else {
            words
        };
        let _ = writeln!(
            body,
            "<rect x=\"{x:.1}\" y=\"{:.1}\" width=\"22\" height=\"14\" fill=\"{colour}\" fill-opacity=\"0.4\" \
             stroke=\"{colour}\"/>",
            y - 12.0
        );
        text(body, x + 30.0, y, TEXT, "start", words);
        x += 60.0 + 0.56 * TEXT * words.chars().count() as f64;
    }
}
