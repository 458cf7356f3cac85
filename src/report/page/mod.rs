//! The report: one HTML file that needs no network, made from a run's records alone.

mod asked;
mod data;
mod variants;
mod words;

use crate::run::records::{DesignRecord, PeriodRecord, WidthSweep};
use crate::run::summary::CellLine;
use maud::{DOCTYPE, Markup, PreEscaped, html};
use serde_json::Value;
use variants::Variants;

/// The records that a page shows.
#[derive(Debug, Clone, Copy)]
pub struct PageInput<'a> {
    /// `run.json`.
    pub run: &'a Value,
    /// The overall front.
    pub designs: &'a [DesignRecord],
    /// Every cell.
    pub cells: &'a [CellLine],
    /// Recorded waveforms.
    pub periods: &'a [PeriodRecord],
    /// Losses against width around one design.
    pub sweep: Option<&'a WidthSweep>,
    /// Sheets that are made already, by the design's id.
    pub sheets: &'a [(String, Value)],
}

/// Only what stands in the page itself runs or shows; nothing is fetched.
const POLICY: &str = "default-src 'none'; script-src 'unsafe-inline'; style-src 'unsafe-inline'; img-src data:; \
                      base-uri 'none'; form-action 'none'";

/// One script: its parts share their names.
const SCRIPT: &str = concat!(
    include_str!("script/data.js"),
    include_str!("script/front.js"),
    include_str!("script/filters.js"),
    include_str!("script/tables.js"),
    include_str!("script/charts.js"),
    include_str!("script/compare.js"),
    include_str!("script/start.js"),
);

/// The page; all text from files is escaped.
pub fn page(input: &PageInput<'_>) -> String {
    let title = words::text(input.run, "/study/title");
    html! {
        (DOCTYPE)
        html lang="en" {
            head {
                meta charset="utf-8";
                meta http-equiv="Content-Security-Policy" content=(POLICY);
                meta name="viewport" content="width=device-width, initial-scale=1";
                meta name="color-scheme" content="light dark";
                title { (title) " – widefront" }
                style { (PreEscaped(include_str!("style.css"))) }
            }
            body {
                header {
                    h1 { (title) }
                    button type="button" id="theme" { "Dark colours" }
                }
                main { (contents(input)) }
                footer class="faint" {
                    "Made by widefront " (words::text(input.run, "/version")) " from the run's records alone."
                }
                script type="application/json" id="data" { (PreEscaped(data::embedded(input))) }
                script { (PreEscaped(SCRIPT)) }
            }
        }
    }
    .into_string()
}

/// Where the page's links go, in the order of its sections.
const PLACES: [(&str, &str); 8] = [
    ("answer", "Asked and answered"),
    ("explore", "Front"),
    ("comparison", "Comparison"),
    ("list", "Designs"),
    ("cells-title", "Cells"),
    ("ended", "How the search ended"),
    ("assumptions", "Assumptions"),
    ("cautions", "Cautions"),
];

fn contents(input: &PageInput<'_>) -> Markup {
    let some = !input.designs.is_empty();
    let variants = Variants::of(input.cells);
    html! {
        nav aria-label="Sections" {
            @for (id, words) in PLACES {
                @if some || !["explore", "comparison", "list"].contains(&id) { a href={ "#" (id) } { (words) } " " }
            }
        }
        noscript { p { "The front and its tables need this page's own script; without it the words and " code { "front.csv" } " remain." } }
        section aria-labelledby="answer" {
            h2 id="answer" { "Asked and answered" }
            p { (asked::question(input.run)) }
            ol class="answer" {
                @for line in words::answer(input.designs, &variants) {
                    li {
                        b { (line.what) }
                        @if let Some(id) = line.id { ", " button type="button" data-design=(id) { (id) } }
                        (line.figures)
                    }
                }
            }
            div class="asked" {
                @for (title, rows) in asked::asked(input.run) { div { h3 { (title) } (definitions(&rows)) } }
            }
        }
        div hidden[!some] { (explore(input)) }
        @if !variants.is_empty() {
            section aria-labelledby="variants-title" {
                h2 id="variants-title" { "Variants" }
                p class="faint" { "Best of each variant's own cells, and how many of its designs are on the overall front." }
                div class="scroll list" tabindex="0" role="region" aria-labelledby="variants-title" { table id="variants" {} }
                p id="variants-listed" class="faint" {}
            }
        }
        section aria-labelledby="cells-title" {
            h2 id="cells-title" { "Cells" }
            p class="faint" { "Each cell's own front, before the overall one is taken. Hypervolume in efficiency × W × mm²." }
            div class="scroll list" tabindex="0" role="region" aria-labelledby="cells-title" { table id="cells" {} }
            p id="cells-listed" class="faint" {}
        }
        div class="pair" {
            section aria-labelledby="ended" {
                h2 id="ended" { "How the search ended" }
                (definitions(&words::ended(input.run, input.designs)))
                div id="residuals" {}
            }
            section aria-labelledby="provenance" {
                h2 id="provenance" { "Where it comes from" }
                (definitions(&words::provenance(input.run)))
            }
        }
        div class="pair" {
            (told("assumptions", "Assumptions", &words::assumptions(input.run)))
            (told("cautions", "Cautions", &words::CAUTIONS))
        }
        p id="said" role="status" {}
    }
}

/// The parts that the script fills, in the order they are read.
fn explore(input: &PageInput<'_>) -> Markup {
    html! {
        section aria-labelledby="explore" {
            h2 id="explore" { "The front" }
            @if let Some(fronts) = asked::fronts(input.run) { p class="faint" { "Fronts: " (fronts) "." } }
            div class="controls" {
                label { "Across " select id="x" {} }
                label { "Up " select id="y" {} }
                label { "Colour " select id="colour" {} }
            }
            div class="two" {
                figure {
                    canvas id="front" tabindex="0" role="img" aria-describedby="told"
                        aria-label="Designs of the front; arrow keys move through them, Enter compares one" {}
                    div id="legend" class="key" {}
                    figcaption id="told" aria-live="polite" {}
                }
                div {
                    h3 style="margin-top:0" { "Keep only" }
                    div id="choices" {}
                    div id="brushes" {}
                    div class="row" { select id="more" aria-label="Another figure to keep a range of" {} button type="button" id="add" { "Add" } }
                    div class="row" { label { input type="checkbox" id="waves"; " Only with a waveform" } }
                    div class="row" { label { input type="checkbox" id="certified"; " Only certified optimal" } }
                    div class="row" { button type="button" id="clear" { "Keep all" } span id="kept" class="faint" aria-live="polite" {} }
                }
            }
            h3 id="map-title" { "Best efficiency kept, %, by loaded Q (down) and supply (across)" }
            p class="faint" { "Press a place to keep its designs alone. Dashed: no design of the front is kept there; shown is the cell's own best." }
            div id="map" role="group" aria-labelledby="map-title" {}
        }
        section aria-labelledby="comparison" {
            h2 id="comparison" tabindex="-1" { "Comparison" }
            p class="faint" { "Designs chosen in the front, the table or the answer, six at most. Save record gives a design whole, as " code { "front.json" } " holds it." }
            p id="none" { "No design is chosen." }
            div id="compared" {
                div id="cards" class="cards" {}
                p { label { input type="checkbox" id="shares"; " Bars as shares of each design's own total" } }
                div class="half" {
                    div id="charts" {}
                    div id="periods" {}
                }
                    div id="side" class="scroll" tabindex="0" role="region" aria-label="Figures of the designs compared" {}
            }
        }
        section aria-labelledby="list" {
            h2 id="list" { "Designs" }
            p id="count" class="faint" {}
            div class="scroll list" tabindex="0" role="region" aria-labelledby="list" { table id="designs" {} }
            p id="listed" class="faint" {}
        }
        @if let Some(sweep) = input.sweep {
            section aria-labelledby="sweep-title" {
                h2 id="sweep-title" { "Losses of " (sweep.id) " as its NMOS width alone changes" }
                div id="sweep" {}
            }
        }
    }
}

fn definitions(rows: &[(&str, String)]) -> Markup {
    html! { dl { @for (name, value) in rows { dt { (name) } dd { (value) } } } }
}

fn told(id: &str, title: &str, lines: &[&str]) -> Markup {
    html! {
        section aria-labelledby=(id) {
            h2 id=(id) { (title) }
            ul { @for line in lines { li { (line) } } }
        }
    }
}
