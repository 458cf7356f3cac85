//! Records beside the fronts for those who look: what figures and report show.

use super::RunError;
use super::folder::RunFolder;
use super::records::{DesignRecord, PeriodRecord, WidthSweep};
use super::session::Job;
use super::summary::Summary;
use crate::evaluate::{evaluate, loop_waveform};
use crate::search::space;
use crate::study::Design;
use rayon::prelude::*;

/// What figures and report show beside the fronts: each supply's front, losses against width around the most efficient
/// design, one period of it and of other designs that stand for the front.
pub(super) fn illustrations(
    job: &Job<'_>,
    folder: &RunFolder,
    summary: &Summary,
) -> Result<(), RunError> {
    /// Widths of the sweep, from a fifth to five times the design's.
    const WIDTHS: usize = 61;
    const SAMPLES: usize = 720;
    /// A page of the report stays small.
    const MOST_WAVEFORMS: usize = 100;
    const REPORT_SAMPLES: usize = 120;
    let Some(best) = summary.front.first() else {
        return Ok(());
    };
    folder.write_json("figures/supplies.json", &summary.supplies)?;
    let a_variant = (job.study.space.as_ref()).map_or(1, |s| space::cells(s).len());
    let setup_of = |record: &DesignRecord| &job.variants[record.cell / a_variant].setup;
    let design = &best.evaluation.design;
    let widths: Vec<f64> = (0..WIDTHS)
        .map(|i| design.nmos_width_m * 5f64.powf(2.0 * i as f64 / (WIDTHS - 1) as f64 - 1.0))
        .collect();
    let evaluations = widths
        .par_iter()
        .map(|&nmos_width_m| {
            let varied = Design {
                nmos_width_m,
                ..design.clone()
            };
            evaluate(setup_of(best), &varied)
        })
        .collect();
    let sweep = WidthSweep {
        id: best.id.clone(),
        nmos_width_m: widths,
        evaluations,
    };
    folder.write_json("figures/width_sweep.json", &sweep)?;
    let period = |record: &DesignRecord, samples: usize| {
        let design = &record.evaluation.design;
        let setup = setup_of(record);
        let waveform = loop_waveform(setup, design, samples)?;
        Some(PeriodRecord {
            id: record.id.clone(),
            frequency_hz: setup.frequency_hz,
            supply_v: design.supply_v,
            dead_time: design.dead_time,
            waveform,
        })
    };
    if let Some(period) = period(best, SAMPLES) {
        folder.write_json("figures/period.json", &period)?;
    }
    let waveforms: Vec<PeriodRecord> = summary
        .exemplary(MOST_WAVEFORMS)
        .par_iter()
        .filter_map(|d| period(d, REPORT_SAMPLES))
        .collect();
    folder.write_json("waveforms.json", &waveforms)
}
