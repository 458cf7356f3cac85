//! The design space of a study: cells of loaded Q and supply, slices of whole numbers and grids, free axes.

use crate::numerics::scalar::Scalar;
use crate::stage::{Impossible, Sizing};
use crate::study::{Design, Range, Space};
use serde::{Deserialize, Serialize};

/// A variable that may be free.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Variable {
    /// V_DD.
    Supply,
    /// Q_L.
    LoadedQ,
    /// W_n.
    NmosWidth,
    /// W_p/W_n.
    WidthRatio,
    /// Spiral trace.
    Trace,
    /// Spiral diameter.
    Diameter,
    /// R_opt with a fixed inductor.
    Resistance,
    /// Load angle.
    Reactance,
    /// Dead time.
    DeadTime,
}

/// Every variable, in the order of [`Variable`].
const VARIABLES: [Variable; 9] = [
    Variable::Supply,
    Variable::LoadedQ,
    Variable::NmosWidth,
    Variable::WidthRatio,
    Variable::Trace,
    Variable::Diameter,
    Variable::Resistance,
    Variable::Reactance,
    Variable::DeadTime,
];

/// One combination of loaded Q and supply. A value is absent where the study leaves it free.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct Cell {
    /// Place in the order of cells, from 0: loaded Q outermost.
    pub index: usize,
    /// Q_L.
    pub loaded_q: Option<f64>,
    /// V_DD, V.
    pub supply_v: Option<f64>,
}

/// A free variable and its span.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Axis {
    /// Which.
    pub variable: Variable,
    from: f64,
    to: f64,
    logarithmic: bool,
}

impl Axis {
    /// A span of more than this ratio is walked by its logarithm.
    const LOGARITHMIC_FROM: f64 = 3.0;

    fn new(variable: Variable, from: f64, to: f64) -> Self {
        Self {
            variable,
            from,
            to,
            logarithmic: from > 0.0 && to / from > Self::LOGARITHMIC_FROM,
        }
    }

    /// The variable's value at `place` 0..1 of the axis.
    pub fn value<S: Scalar>(&self, place: S) -> S {
        if self.logarithmic {
            (place * (self.to / self.from).ln()).exp() * self.from
        } else {
            place * (self.to - self.from) + self.from
        }
    }

    /// The place of a value, the inverse of [`Axis::value`].
    pub fn place(&self, value: f64) -> f64 {
        if self.logarithmic {
            (value / self.from).ln() / (self.to / self.from).ln()
        } else {
            (value - self.from) / (self.to - self.from)
        }
    }
}

/// Part of a cell in which all whole numbers and grid values are fixed.
#[derive(Debug, Clone, PartialEq)]
pub struct Slice {
    fixed: [Option<f64>; VARIABLES.len()],
    /// The free axes.
    pub axes: Vec<Axis>,
    /// Spiral turns.
    pub turns: Option<u32>,
    /// Driver stages.
    pub stages: u32,
}

/// The continuous values of one point of a slice.
#[derive(Debug, Clone, Copy)]
pub struct Values<S>([Option<S>; VARIABLES.len()]);

impl<S: Scalar> Values<S> {
    /// A variable's value; 0 for one that this kind of stage does not have.
    pub fn get(&self, variable: Variable) -> S {
        self.0[variable as usize].unwrap_or(S::zero())
    }

    /// The sizing without its inductor.
    pub fn sizing(&self, stages: u32) -> Sizing<S> {
        Sizing {
            supply_v: self.get(Variable::Supply),
            loaded_q: self.get(Variable::LoadedQ),
            nmos_width_m: self.get(Variable::NmosWidth),
            width_ratio: self.get(Variable::WidthRatio),
            reactance: self.get(Variable::Reactance),
            dead_time: self.get(Variable::DeadTime),
            stages,
        }
    }
}

impl Slice {
    /// Values at `places` (0..1 an axis, in the order of the axes).
    pub fn values<S: Scalar>(&self, places: impl Fn(usize) -> S) -> Values<S> {
        let mut values = self.fixed.map(|v| v.map(S::constant));
        for (i, axis) in self.axes.iter().enumerate() {
            values[axis.variable as usize] = Some(axis.value(places(i)));
        }
        Values(values)
    }

    /// The design at `places`.
    pub fn design(&self, places: &[f64]) -> Design {
        let values = self.values(|i| places[i]);
        let get = |variable: Variable| values.0[variable as usize];
        Design {
            supply_v: values.get(Variable::Supply),
            loaded_q: values.get(Variable::LoadedQ),
            nmos_width_m: values.get(Variable::NmosWidth),
            width_ratio: values.get(Variable::WidthRatio),
            turns: self.turns,
            trace_m: get(Variable::Trace),
            diameter_m: get(Variable::Diameter),
            resistance_ohm: get(Variable::Resistance),
            reactance: values.get(Variable::Reactance),
            dead_time: values.get(Variable::DeadTime),
            stages: self.stages,
        }
    }
}

fn range(space: &Space, variable: Variable) -> Option<&Range> {
    match variable {
        Variable::Supply => Some(&space.supply_v),
        Variable::LoadedQ => Some(&space.loaded_q),
        Variable::NmosWidth => Some(&space.nmos_width_m),
        Variable::WidthRatio => Some(&space.width_ratio),
        Variable::Trace => space.trace_m.as_ref(),
        Variable::Diameter => space.diameter_m.as_ref(),
        Variable::Resistance => space.resistance_ohm.as_ref(),
        Variable::Reactance => Some(&space.reactance),
        Variable::DeadTime => Some(&space.dead_time),
    }
}

/// Grid values; `[None]` where the variable is free.
fn grid(range: &Range) -> Vec<Option<f64>> {
    match range {
        Range::Fixed(v) => vec![Some(*v)],
        Range::Free { .. } => vec![None],
        Range::Grid(values) => values.iter().copied().map(Some).collect(),
    }
}

fn whole_numbers(range: &Range) -> Vec<u32> {
    grid(range)
        .into_iter()
        .flatten()
        .map(|v| v as u32)
        .collect()
}

/// Every cell of a space, loaded Q outermost, both rising.
pub fn cells(space: &Space) -> Vec<Cell> {
    let mut cells = Vec::new();
    for &loaded_q in &grid(&space.loaded_q) {
        for &supply_v in &grid(&space.supply_v) {
            cells.push(Cell {
                index: cells.len(),
                loaded_q,
                supply_v,
            });
        }
    }
    cells
}

/// Turns a space may use, rising; `[None]` without a spiral.
pub fn turns(space: &Space) -> Vec<Option<u32>> {
    match &space.turns {
        None => vec![None],
        Some(range) => whole_numbers(range).into_iter().map(Some).collect(),
    }
}

/// Every slice of a cell: turns outermost, then stages, then other grids.
pub fn slices(space: &Space, cell: &Cell) -> Vec<Slice> {
    let mut partial = vec![([None; VARIABLES.len()], Vec::new())];
    for variable in VARIABLES {
        let Some(range) = range(space, variable) else {
            continue;
        };
        let own = match variable {
            Variable::LoadedQ => vec![cell.loaded_q],
            Variable::Supply => vec![cell.supply_v],
            _ => grid(range),
        };
        partial = partial
            .into_iter()
            .flat_map(|(fixed, axes)| {
                own.iter().map(move |&value| {
                    let (mut fixed, mut axes) = (fixed, axes.clone());
                    fixed[variable as usize] = value;
                    if let (None, &Range::Free { from, to }) = (value, range) {
                        axes.push(Axis::new(variable, from, to));
                    }
                    (fixed, axes)
                })
            })
            .collect();
    }
    let mut slices = Vec::new();
    for turns in turns(space) {
        for stages in whole_numbers(&space.stages) {
            for (fixed, axes) in &partial {
                slices.push(Slice {
                    fixed: *fixed,
                    axes: axes.clone(),
                    turns,
                    stages,
                });
            }
        }
    }
    slices
}

/// The largest value of a range.
pub fn largest(range: &Range) -> f64 {
    match range {
        Range::Fixed(v) => *v,
        Range::Free { to, .. } => *to,
        Range::Grid(values) => values.iter().copied().fold(f64::NEG_INFINITY, f64::max),
    }
}

/// The smallest value of a range.
pub fn smallest(range: &Range) -> f64 {
    match range {
        Range::Fixed(v) => *v,
        Range::Free { from, .. } => *from,
        Range::Grid(values) => values.iter().copied().fold(f64::INFINITY, f64::min),
    }
}

/// A point that cannot be assessed, with the reason.
pub type Assessed<T> = Result<T, Impossible>;
