//! The report: one HTML file that needs no network, made from a run's records alone.

mod data;
mod words;

use crate::run::records::{DesignRecord, PeriodRecord};
use crate::run::summary::CellLine;
use maud::{DOCTYPE, Markup, PreEscaped, html};
use serde_json::Value;

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
}

/// Only what stands in the page itself runs or shows; nothing is fetched.
const POLICY: &str = "default-src 'none'; script-src 'unsafe-inline'; style-src 'unsafe-inline'; img-src data:; \
                      base-uri 'none'; form-action 'none'";

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
                style { (PreEscaped(include_str!("page.css"))) }
            }
            body {
                header {
                    h1 { (title) }
                    button type="button" id="theme" { "Light or dark" }
                }
                main { (contents(input)) }
                footer class="faint" {
                    "Made by widefront " (words::text(input.run, "/version")) " from the run's records alone."
                }
                script type="application/json" id="data" { (PreEscaped(data::embedded(input))) }
                script { (PreEscaped(include_str!("page.js"))) }
            }
        }
    }
    .into_string()
}

fn contents(input: &PageInput<'_>) -> Markup {
    html! {
        section aria-labelledby="answer" {
            h2 id="answer" { "The answer" }
            ol class="answer" {
                @for line in words::answer(input.designs) { li { (line) } }
            }
        }
        section aria-labelledby="explore" {
            h2 id="explore" { "The front" }
            div class="controls" {
                label { "Across " select id="x" {} }
                label { "Up " select id="y" {} }
                label { "Colour " select id="colour" {} }
            }
            div class="two" {
                figure {
                    canvas id="front" tabindex="0" role="img"
                        aria-label="Designs of the front; arrow keys move through them, Enter compares one" aria-describedby="told" {}
                    figcaption id="told" aria-live="polite" {}
                }
                div {
                    h3 { "Keep only" }
                    div id="brushes" {}
                    button type="button" id="clear" { "Keep all" }
                }
            }
            h3 { "Best efficiency kept, %, by loaded Q (down) and supply (across)" }
            div id="map" role="group" aria-label="Cells of loaded Q and supply; one pressed keeps its designs alone" {}
        }
        section aria-labelledby="comparison" {
            h2 id="comparison" { "Comparison" }
            p id="none" class="faint" { "Choose designs in the front or the table, six at most." }
            div id="cards" class="cards" {}
        }
        section aria-labelledby="list" {
            h2 id="list" { "Designs" }
            p id="count" class="faint" aria-live="polite" {}
            div class="scroll" tabindex="0" role="region" aria-labelledby="list" {
                table { thead { tr id="titles" {} } tbody id="rows" {} }
            }
        }
        div class="pair" {
            (listed("What was asked", &words::asked(input.run)))
            (listed("How the search ended", &words::ended(input.run)))
            (listed("Where it comes from", &words::provenance(input.run)))
        }
        div class="pair" style="margin-top:16px" {
            (told("Assumptions", &words::ASSUMPTIONS))
            (told("Cautions", &words::CAUTIONS))
        }
    }
}

fn listed(title: &str, rows: &[(&str, String)]) -> Markup {
    html! {
        section {
            h2 { (title) }
            dl { @for (name, value) in rows { dt { (name) } dd { (value) } } }
        }
    }
}

fn told(title: &str, lines: &[&str]) -> Markup {
    html! {
        section {
            h2 { (title) }
            ul { @for line in lines { li { (line) } } }
        }
    }
}
