//! Progress of a search: a bar on a terminal, a plain line now and then elsewhere, nothing when quiet.

use super::tell;
use crate::run::RunError;
use crate::run::records::CellRecord;
use crate::run::session::Observer;
use crate::run::summary::Standing;
use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};
use std::io::IsTerminal;
use std::sync::Mutex;
use std::time::{Duration, Instant};

/// Time between plain lines: a twentieth of the time worked, so that a night's log stays readable, within these.
const LINES: [Duration; 2] = [Duration::from_secs(5), Duration::from_secs(300)];

/// Shows a search on standard error.
pub struct Progress {
    quiet: bool,
    bar: Option<ProgressBar>,
    state: Mutex<State>,
}

struct State {
    /// Of the evaluations: the inductors are tabulated before.
    began: Instant,
    last_line: Instant,
    /// Cells in all.
    cells: usize,
    /// What is finished, by earlier sittings too.
    finished: Standing,
    /// Of these the evaluations of this sitting.
    accounted: u64,
    /// Evaluations of this sitting, those of unfinished cells too.
    spent: u64,
}

impl Progress {
    /// Of a search that has not begun.
    pub fn new(quiet: bool) -> Self {
        let bar = (!quiet && std::io::stderr().is_terminal()).then(|| {
            let bar = ProgressBar::with_draw_target(Some(0), ProgressDrawTarget::stderr());
            if let Ok(style) = ProgressStyle::with_template("{bar:30} {pos}/{len} cells, {msg}") {
                bar.set_style(style);
            }
            bar
        });
        Self {
            quiet,
            bar,
            state: Mutex::new(State {
                began: Instant::now(),
                last_line: Instant::now(),
                cells: 0,
                finished: Standing::default(),
                accounted: 0,
                spent: 0,
            }),
        }
    }

    /// Takes the bar away.
    pub fn end(&self) {
        if let Some(bar) = &self.bar {
            bar.finish_and_clear();
        }
    }
}

impl State {
    fn described(&self, elapsed: Duration) -> String {
        if self.spent == 0 {
            return "tabulating inductors".into();
        }
        let rate = self.spent as f64 / elapsed.as_secs_f64().max(1e-9);
        let best = self
            .finished
            .best_efficiency
            .map_or("none yet".into(), |e| format!("{:.2} %", 100.0 * e));
        format!(
            "{rate:.0} evaluations/s, time left {}, best efficiency {best}",
            self.left(rate)
                .map_or("unknown until a cell is finished".into(), clock)
        )
    }

    /// Seconds left at `rate` evaluations a second if the other cells cost what the finished ones did on average.
    fn left(&self, rate: f64) -> Option<f64> {
        if self.finished.cells == 0 || rate <= 0.0 {
            return None;
        }
        let cost = self.finished.evaluations as f64 / self.finished.cells as f64;
        let cells = self.cells.saturating_sub(self.finished.cells) as f64;
        let begun = self.spent.saturating_sub(self.accounted) as f64;
        Some((cost * cells - begun).max(0.0) / rate)
    }
}

fn clock(seconds: f64) -> String {
    let s = seconds.ceil() as u64;
    if s >= 3600 {
        format!("{} h {:02} min", s / 3600, s % 3600 / 60)
    } else if s >= 60 {
        format!("{} min {:02} s", s / 60, s % 60)
    } else {
        format!("{} s", s.max(1))
    }
}

impl Observer for Progress {
    fn begins(&self, cells: usize, earlier: &Standing) {
        if let Ok(mut state) = self.state.lock() {
            state.began = Instant::now();
            state.last_line = Instant::now();
            state.cells = cells;
            state.finished = *earlier;
        }
        if earlier.cells > 0 && !self.quiet {
            tell(&format!(
                "going on: {} of {cells} cells are finished",
                earlier.cells
            ));
        }
        if let Some(bar) = &self.bar {
            bar.set_length(cells as u64);
            bar.set_position(earlier.cells as u64);
        }
    }

    fn damaged(&self, error: &RunError) {
        tell(&format!("warning: {error}; this cell is searched again"));
    }

    fn spent(&self, evaluations: u64) {
        let Ok(mut state) = self.state.lock() else {
            return;
        };
        state.spent = evaluations;
        if evaluations == 0 {
            state.began = Instant::now();
        }
        let elapsed = state.began.elapsed();
        if let Some(bar) = &self.bar {
            bar.set_message(state.described(elapsed));
            bar.set_position(state.finished.cells as u64);
        } else if !self.quiet
            && state.last_line.elapsed() >= (elapsed / 20).clamp(LINES[0], LINES[1])
        {
            state.last_line = Instant::now();
            tell(&format!(
                "{}/{} cells, {}",
                state.finished.cells,
                state.cells,
                state.described(elapsed)
            ));
        }
    }

    fn finished(&self, cell: &CellRecord) {
        if let Ok(mut state) = self.state.lock() {
            state.finished.add(cell);
            state.accounted += cell.evaluations;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn law_time_left_is_what_the_other_cells_cost_at_this_rate() {
        let progress = Progress::new(true);
        let mut state = progress.state.into_inner().unwrap();
        state.cells = 10;
        assert_eq!(state.described(Duration::ZERO), "tabulating inductors");
        state.spent = 500;
        // Nothing finished: no measure to go by.
        assert_eq!(state.left(100.0), None);
        // Four cells of 1000 each earlier, one of 2000 now: five more of 1200 each, of which 500 are done.
        state.finished = Standing {
            cells: 5,
            evaluations: 6000,
            best_efficiency: Some(0.5),
        };
        state.accounted = 2000;
        state.spent = 2500;
        assert_eq!(state.left(100.0), Some(55.0));
        let text = state.described(Duration::from_secs(25));
        assert_eq!(
            text,
            "100 evaluations/s, time left 55 s, best efficiency 50.00 %"
        );
        // A cell dearer than all before it does not make the time left negative.
        state.spent = 20_000;
        assert_eq!(state.left(100.0), Some(0.0));
        assert_eq!(clock(0.0), "1 s");
        assert_eq!(clock(61.2), "1 min 02 s");
        assert_eq!(clock(7384.0), "2 h 03 min");
    }
}
