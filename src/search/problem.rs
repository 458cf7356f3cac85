//! One slice of the design space as a smooth constrained problem, gradients exact.
//!
//! The gate charge grows with `max(0, v_r)`, the drain voltage still to swing at turn-on, and the best designs often sit
//! right on that kink. So two more variables stand for the positive parts, held above v_r and above 0: since every figure
//! worsens with them they settle on the maximum, and the problem is smooth.

use super::constrained::{Assessment, Constrained, Linear, MOST_CONSTRAINTS};
use super::quadratic::{MOST_VARIABLES, Row};
use super::space::{Slice, Values, Variable};
use crate::evaluate::{FixedInductor, Setup, core, margins, performance};
use crate::numerics::root::increasing_root;
use crate::numerics::scalar::{Dual, Scalar};
use crate::stage::{Coil, Impossible};
use crate::study::Objective;
use crate::technology::inductor::substrate;
use crate::technology::inductor::table::SpiralTable;
use crate::technology::{Inductor, SpiralProcess};
use arrayvec::ArrayVec;

/// Room kept to every limit of the study, relative, so that rounding and interpolation never break one.
pub const LIMIT_RESERVE: f64 = 1e-6;

/// Positive parts of the residual drain voltages over the supply: at most the swing and a clamp.
const MOST_RESIDUAL: f64 = 3.0;

/// What is asked of a slice: one objective at its best, the others at least as good as the targets.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Goal {
    /// To be made best.
    pub best: Objective,
    /// Logarithm of the least output power, W.
    pub least_ln_power: Option<f64>,
    /// Logarithm of the largest area, m².
    pub most_ln_area: Option<f64>,
}

/// Where a slice gets its inductor.
#[derive(Debug, Clone, Copy)]
pub enum CoilSource<'a> {
    /// R_L = ω0L/Q.
    Fixed(FixedInductor),
    /// The metal interpolated, the substrate worked out.
    Spiral(&'a SpiralProcess, &'a SpiralTable, u32),
}

/// Logarithms of efficiency, output power and area, and the limits.
#[derive(Debug, Clone)]
pub struct Merits<S> {
    /// ln efficiency, ln W, ln m², in the order of [`Objective`].
    pub objectives: [S; 3],
    /// Each ≥ 0.
    pub limits: ArrayVec<S, MOST_CONSTRAINTS>,
    /// Drain voltages counted as still to swing when N and P turn on, fractions of the supply.
    pub residual: [S; 2],
}

/// A slice with a goal.
#[derive(Debug, Clone, Copy)]
pub struct SliceProblem<'a> {
    /// The study's setup.
    pub setup: &'a Setup,
    /// The slice.
    pub slice: &'a Slice,
    /// Its inductor.
    pub coil: CoilSource<'a>,
    /// What is asked.
    pub goal: Goal,
}

impl<'a> SliceProblem<'a> {
    /// The inductor's source for a slice; `None` when its turns have no table (no such spiral closes).
    pub fn coil_source(
        inductor: &'a Inductor,
        table: Option<&'a SpiralTable>,
        turns: Option<u32>,
    ) -> Option<CoilSource<'a>> {
        match inductor {
            &Inductor::Fixed {
                quality,
                area_base_m2,
                area_slope_m2_h,
            } => Some(CoilSource::Fixed(FixedInductor {
                quality,
                area_base_m2,
                area_slope_m2_h,
            })),
            Inductor::Spiral(process) => Some(CoilSource::Spiral(process, table?, turns?)),
        }
    }

    /// Number of free axes, the residual voltages not counted.
    pub fn axes(&self) -> usize {
        self.slice.axes.len()
    }

    /// Objectives and limits of the design at `places` of the axes, without gradients.
    ///
    /// # Errors
    /// Why the design cannot exist.
    pub fn merits(&self, places: &[f64]) -> Result<Merits<f64>, Impossible> {
        self.merits_at(&self.slice.values(|i| places[i]), None)
    }

    /// The same with gradients.
    fn merits_with_gradients<const N: usize>(
        &self,
        point: &Row,
    ) -> Result<Merits<Dual<N>>, Impossible> {
        let axes = self.axes();
        let values = self.slice.values(|i| Dual::<N>::variable(point[i], i));
        let residual = [0, 1].map(|k| Dual::variable(point[axes + k], axes + k));
        self.merits_at(&values, Some(residual))
    }

    /// For any scalar; the residuals are those of the steady state or bounds on them, fractions of the supply.
    fn merits_at<S: Scalar>(
        &self,
        values: &Values<S>,
        residual: Option<[S; 2]>,
    ) -> Result<Merits<S>, Impossible> {
        let mut limits = ArrayVec::new();
        let mut push = |margin: S, reserve: f64| limits.push(margin - reserve);
        let sizing = values.sizing(self.slice.stages);
        let coil = coil(self.setup, &self.coil, values)?;
        let core = core(self.setup, &sizing, &coil, self.setup.limited_harmonics())?;
        let found = core.period.residual_v.map(|v| v / sizing.supply_v);
        let residual = residual.unwrap_or(found.map(S::positive_part));
        let residual_v = residual.map(|r| r * sizing.supply_v);
        let p = performance(self.setup, &sizing, &coil, &core, residual_v)?;
        for m in margins(self.setup, &sizing, &core, &p) {
            push(m.margin, LIMIT_RESERVE);
        }
        for k in 0..2 {
            push(residual[k] - found[k], 0.0);
        }
        let network = &core.circuit.network;
        let series_reactance =
            S::one() / (network.series_capacitance_f * self.setup.network.angular_frequency);
        push(
            series_reactance / network.optimum_resistance_ohm - 0.02,
            LIMIT_RESERVE,
        );
        if network.shunt.is_some() {
            push(
                -network.optimum_resistance_ohm / network.antenna_resistance_ohm + 1.0,
                LIMIT_RESERVE,
            );
        }
        if let CoilSource::Spiral(_, table, _) = &self.coil
            && !self.setup.is_direct()
        {
            let diameter = values.get(Variable::Diameter);
            let trace = values.get(Variable::Trace);
            push(
                (diameter - table.least_diameter_m(trace)) / diameter,
                LIMIT_RESERVE,
            );
            let widest = table.traces_m()[1];
            push(-trace / widest + 1.0, 0.0);
        }
        Ok(Merits {
            objectives: [p.efficiency, p.output_power_w, p.area.total_m2()].map(S::ln),
            limits,
            residual,
        })
    }
}

fn linear<const N: usize>(dual: Dual<N>) -> Linear {
    let mut gradient = [0.0; MOST_VARIABLES];
    gradient[..N].copy_from_slice(&dual.partials);
    Linear {
        value: dual.value,
        gradient,
    }
}

/// The loop's inductor at one point.
fn coil<S: Scalar>(
    setup: &Setup,
    source: &CoilSource<'_>,
    values: &Values<S>,
) -> Result<Coil<S>, Impossible> {
    let loaded_q = values.get(Variable::LoadedQ);
    let antenna = setup.network.antenna_resistance_ohm;
    match source {
        CoilSource::Fixed(fixed) => {
            let optimum = if setup.is_direct() {
                S::constant(antenna)
            } else {
                values.get(Variable::Resistance)
            };
            Ok(setup.fixed_coil(fixed, loaded_q, optimum))
        }
        &CoilSource::Spiral(process, table, turns) => {
            let legs = f64::from(setup.legs);
            let omega = setup.network.angular_frequency;
            let diameter_m = values.get(Variable::Diameter);
            let trace_m = if setup.is_direct() {
                let wanted = loaded_q * (antenna / omega / legs);
                trace_for(process, table, turns, diameter_m, wanted, omega)?
            } else {
                values.get(Variable::Trace)
            };
            let metal = table.at(trace_m, diameter_m);
            let z = substrate::one_port(
                process,
                turns,
                trace_m,
                diameter_m,
                metal.inductance_h,
                metal.resistance_ohm,
                omega,
            );
            let positive = |x: f64| x.is_finite() && x > 0.0;
            if !positive(z.im.value()) || !positive(z.re.value()) {
                return Err(Impossible::PastResonance);
            }
            let side = diameter_m + 2.0 * process.keep_out_m;
            Ok(Coil {
                inductance_h: z.im * (legs / omega),
                resistance_ohm: z.re * legs,
                area_m2: side.squared() * legs,
            })
        }
    }
}

/// The trace whose interpolated L_eff is `wanted`, derivatives carried across the implicit equation.
fn trace_for<S: Scalar>(
    process: &SpiralProcess,
    table: &SpiralTable,
    turns: u32,
    diameter_m: S,
    wanted: S,
    omega: f64,
) -> Result<S, Impossible> {
    fn excess<T: Scalar>(
        process: &SpiralProcess,
        table: &SpiralTable,
        turns: u32,
        omega: f64,
        trace: T,
        diameter: T,
        wanted: T,
    ) -> T {
        let metal = table.at(trace, diameter);
        let z = substrate::one_port(
            process,
            turns,
            trace,
            diameter,
            metal.inductance_h,
            metal.resistance_ohm,
            omega,
        );
        T::one() - z.im / omega / wanted
    }
    let [narrow, widest_drawn] = table.traces_m();
    let room = diameter_m.value() - table.least_diameter_m(0.0);
    let per_trace = table.least_diameter_m(1.0) - table.least_diameter_m(0.0);
    let wide = if per_trace > 0.0 {
        widest_drawn.min(room / per_trace)
    } else {
        widest_drawn
    };
    let out_of_reach = Impossible::Trace {
        inductance_h: wanted.value(),
    };
    let plain = |w: f64| {
        let d = excess(
            process,
            table,
            turns,
            omega,
            Dual::<1>::variable(w, 0),
            Dual::constant(diameter_m.value()),
            Dual::constant(wanted.value()),
        );
        (d.value, d.partials[0])
    };
    let reachable = wide > narrow && plain(narrow).0 <= 0.0 && plain(wide).0 >= 0.0;
    if !reachable {
        return Err(out_of_reach);
    }
    let root = increasing_root(narrow, wide, 0.5 * (narrow + wide), plain).ok_or(out_of_reach)?;
    let slope = plain(root).1;
    let at_root = S::constant(root);
    Ok(at_root - excess(process, table, turns, omega, at_root, diameter_m, wanted) / slope)
}

impl Constrained for SliceProblem<'_> {
    fn size(&self) -> usize {
        self.axes() + 2
    }

    fn bounds(&self, variable: usize) -> (f64, f64) {
        if variable < self.axes() {
            (0.0, 1.0)
        } else {
            (0.0, MOST_RESIDUAL)
        }
    }

    fn assess(&self, point: &Row) -> Option<Assessment> {
        match self.size() {
            0..=4 => self.assess_in::<4>(point),
            5..=8 => self.assess_in::<8>(point),
            _ => self.assess_in::<MOST_VARIABLES>(point),
        }
    }
}

impl SliceProblem<'_> {
    fn assess_in<const N: usize>(&self, point: &Row) -> Option<Assessment> {
        let Merits {
            objectives, limits, ..
        } = self.merits_with_gradients::<N>(point).ok()?;
        let [efficiency, power, area] = objectives;
        let cost = match self.goal.best {
            Objective::Efficiency => -efficiency,
            Objective::OutputPower => -power,
            Objective::Area => area,
        };
        let targets = [
            self.goal.least_ln_power.map(|least| power - least),
            self.goal.most_ln_area.map(|most| -area + most),
        ];
        let mut assessment = Assessment {
            cost: linear(cost),
            constraints: ArrayVec::new(),
            merits: objectives.map(Scalar::value),
        };
        for constraint in limits.iter().chain(targets.iter().flatten()) {
            assessment.constraints.push(linear(*constraint));
        }
        let finite = assessment.cost.value.is_finite()
            && assessment.constraints.iter().all(|c| c.value.is_finite())
            && assessment.cost.gradient.iter().all(|g| g.is_finite());
        finite.then_some(assessment)
    }
}
