//! What a drawing is made of: text, blocks with their cells and fingers, spirals, scale bars.

use super::block::{Block, Kind};
use super::floorplan::PlacedSpiral;
use crate::quantity::{format, micrometres};
use std::fmt::Write;

/// Height of letters, pixels.
pub const TEXT: f64 = 17.0;
/// Height of smaller letters, pixels.
pub const DETAIL: f64 = 14.0;
/// Nearest that fingers are drawn one by one, pixels; closer ones are filled.
const NEAREST: f64 = 2.4;

/// Micrometres to pixels.
#[derive(Debug, Clone, Copy)]
pub struct View {
    /// Pixels a micrometre.
    pub scale: f64,
    /// Pixels.
    pub left: f64,
    /// Pixels.
    pub top: f64,
}

impl View {
    /// Pixels from the left.
    pub fn x(&self, um: f64) -> f64 {
        self.left + self.scale * um
    }

    /// Pixels from the top.
    pub fn y(&self, um: f64) -> f64 {
        self.top + self.scale * um
    }
}

/// Colour and words of a kind; told apart by colour-blind readers.
pub fn colours(kind: Kind) -> (&'static str, &'static str) {
    match kind {
        Kind::Switch => ("#d55e00", "output switches"),
        Kind::Driver => ("#0072b2", "driver stages"),
        Kind::Capacitor => ("#009e73", "capacitors, by unit"),
        Kind::Decoupling => ("#9aa3ad", "decoupling"),
        Kind::Inductor => ("#c8913a", "inductor"),
    }
}

/// Text as XML holds it.
pub fn escaped(text: &str) -> String {
    text.replace('&', "&amp;")
        .replace('<', "&lt;")
        .replace('>', "&gt;")
}

/// A line of text at (x, y), `anchor` start, middle or end.
pub fn text(body: &mut String, x: f64, y: f64, size: f64, anchor: &str, words: &str) {
    let _ = writeln!(
        body,
        "<text x=\"{x:.1}\" y=\"{y:.1}\" font-size=\"{size}\" text-anchor=\"{anchor}\" fill=\"#282c34\">{}</text>",
        escaped(words)
    );
}

/// A block with its cells; `close` shows fingers too.
pub fn draw_block(body: &mut String, view: View, block: &Block, close: bool) {
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
    } else if close {
        let pitch = cw / f64::from(block.fingers);
        let high = ch * block.active;
        for cell in 0..block.cells {
            let (column, row) = (cell % block.columns, cell / block.columns);
            let (cx, cy) = (x + cw * f64::from(column), y + ch * f64::from(row));
            let top = cy + 0.5 * ch * (1.0 - block.active);
            if pitch < NEAREST {
                let _ = writeln!(
                    body,
                    "<rect x=\"{cx:.2}\" y=\"{top:.2}\" width=\"{cw:.2}\" height=\"{high:.2}\" fill=\"{colour}\" \
                     fill-opacity=\"0.35\"/>"
                );
            } else {
                for finger in 0..block.fingers {
                    let at = cx + pitch * (f64::from(finger) + 0.5);
                    let _ = write!(path, "M{at:.2} {top:.2}v{high:.2}");
                }
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

/// Turns as the rings that were solved, opened at the top: each ring's end steps inwards to the next one's start, the
/// inner end leaves by the underpass, so that both ends come out at the top.
pub fn draw_spiral(body: &mut String, view: View, placed: &PlacedSpiral) {
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
    let trace = micrometres(s.trace_m);
    let note = match s.turns {
        1 => format!("1 turn of {trace}"),
        n => format!("{n} turns of {trace}, {} apart", micrometres(s.spacing_m)),
    };
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
pub fn scale_bar(body: &mut String, scale: f64, (left, y): (f64, f64), shown_um: f64) {
    let most = 0.2 * shown_um;
    let ten = 10f64.powf(most.log10().floor());
    let length = [5.0, 2.0, 1.0]
        .into_iter()
        .map(|k| k * ten)
        .find(|l| *l <= most)
        .unwrap_or(ten);
    let px = scale * length;
    let _ = writeln!(
        body,
        "<path d=\"M{left:.1} {:.1}v12m0 -6h{px:.2}m0 -6v12\" fill=\"none\" stroke=\"#282c34\" stroke-width=\"2\"/>",
        y - 6.0
    );
    text(
        body,
        left + px + 12.0,
        y + 6.0,
        TEXT,
        "start",
        &format(length * 1e-6, "m"),
    );
}
