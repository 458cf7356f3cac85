//! The search: the design space cut into cells, each cell's Pareto front traced by constrained optimisation.

pub mod cell;
pub mod constrained;
pub mod curvature;
pub mod front;
pub mod problem;
pub mod quadratic;
mod reach;
pub mod solver;
pub mod space;
mod tracer;

use crate::evaluate::Setup;
use crate::study::{Objective, Range, Space};
use crate::technology::Inductor;
use crate::technology::inductor::table::{SpiralTable, TableSpan};
use problem::{CoilSource, SliceProblem};
use quadratic::Row;
use space::Cell;
use std::collections::BTreeMap;
use std::sync::Arc;
use std::sync::atomic::{AtomicU64, Ordering};

/// How hard a cell is searched.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Effort {
    /// Levels of the targets along output power and along area.
    pub levels: usize,
    /// Points drawn to choose a slice's starts from.
    pub samples: usize,
    /// Starts of a slice in the primary objective; its other extremes have one, and those of its neighbours.
    pub starts: usize,
}

impl Default for Effort {
    fn default() -> Self {
        Self {
            levels: 26,
            samples: 32,
            starts: 3,
        }
    }
}

/// What all cells of a run share.
#[derive(Debug)]
pub struct Context<'a> {
    /// The study on its technology.
    pub setup: &'a Setup,
    /// The design space.
    pub space: &'a Space,
    /// What the front trades.
    pub objectives: &'a [Objective],
    /// Seed of the restarts.
    pub seed: u64,
    /// How hard each cell is searched.
    pub effort: Effort,
    spirals: Arc<Spirals>,
    /// Assessments of all cells, the unfinished too; for progress alone.
    spent: Arc<AtomicU64>,
}

/// The spirals of a design space, tabulated by their turns. They depend on the technology, the carrier and the space, so
/// studies that differ in nothing of these share them.
#[derive(Debug)]
pub struct Spirals(BTreeMap<u32, SpiralTable>);

/// Narrowest trace tabulated for the direct network, whose trace is a result, m.
const NARROWEST_TRACE_M: f64 = 1e-6;

impl Spirals {
    /// Tabulates every number of turns; none with a fixed inductor.
    pub fn new(setup: &Setup, space: &Space) -> Self {
        let mut tables = BTreeMap::new();
        if let (Inductor::Spiral(process), Some(diameter)) = (&setup.inductor, &space.diameter_m) {
            let span_of = |range: &Range| [space::smallest(range), space::largest(range)];
            let diameter_m = span_of(diameter);
            let trace_m = match &space.trace_m {
                Some(range) => span_of(range),
                None => [NARROWEST_TRACE_M, 0.5 * diameter_m[1]],
            };
            let span = TableSpan {
                trace_m,
                diameter_m,
            };
            for turns in space::turns(space).into_iter().flatten() {
                let table = SpiralTable::new(process, turns, &span, setup.frequency_hz);
                tables.extend(table.map(|t| (turns, t)));
            }
        }
        Self(tables)
    }
}

impl<'a> Context<'a> {
    /// With spirals of its own.
    pub fn new(setup: &'a Setup, space: &'a Space, objectives: &'a [Objective], seed: u64) -> Self {
        let spirals = Arc::new(Spirals::new(setup, space));
        Self::sharing(setup, space, objectives, seed, spirals, Arc::default())
    }

    /// With spirals that others use too, counting assessments in `spent`.
    pub fn sharing(
        setup: &'a Setup,
        space: &'a Space,
        objectives: &'a [Objective],
        seed: u64,
        spirals: Arc<Spirals>,
        spent: Arc<AtomicU64>,
    ) -> Self {
        Self {
            setup,
            space,
            objectives,
            seed,
            effort: Effort::default(),
            spirals,
            spent,
        }
    }

    /// Assessments so far, those of unfinished cells too.
    pub fn spent(&self) -> u64 {
        self.spent.load(Ordering::Relaxed)
    }

    fn count(&self, assessments: u64) {
        self.spent.fetch_add(assessments, Ordering::Relaxed);
    }

    /// The inductor of a slice with these turns; `None` when no such spiral closes.
    pub fn coil_source(&self, turns: Option<u32>) -> Option<CoilSource<'_>> {
        let table = turns.and_then(|n| self.spirals.0.get(&n));
        SliceProblem::coil_source(&self.setup.inductor, table, turns)
    }

    /// Start `number` of a slice: the middle, then points drawn by seed, cell, slice and number alone.
    fn start(&self, cell: &Cell, slice: usize, number: usize, axes: usize) -> Row {
        if number == 0 {
            return tracer::start_point(axes, || 0.5);
        }
        let mut state = self.seed;
        for part in [cell.index, slice, number] {
            state = mixed(state ^ part as u64);
        }
        tracer::start_point(axes, || {
            state = mixed(state);
            // Away from the walls: 0.1 to 0.9.
            0.1 + 0.8 * (state >> 11) as f64 / (1u64 << 53) as f64
        })
    }
}

/// SplitMix64 (Steele, Lea and Flood 2014): one step.
fn mixed(state: u64) -> u64 {
    let mut z = state.wrapping_add(0x9e37_79b9_7f4a_7c15);
    z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
    z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
    z ^ (z >> 31)
}
