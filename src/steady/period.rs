//! Start state of the periodic steady state and all that the figures need of it.
//!
//! Each phase maps a state by `x₁ = rest + e^{Aτ}(x₀ − rest)`; the start state solves `(I − Φ)x₀ = γ` (two legs:
//! mirror matrix instead of I). Mean supply current and Fourier coefficients are linear in the states and follow
//! from the resolvent `(A − jkω)^{-1}`; squares are sums of second moments, phase by phase, each positive.

use super::circuit::{Circuit, Switches};
use super::rails::{self, DeadTimeSpan};
use crate::numerics::complex::Complex;
use crate::numerics::matrix::{
    Column, Exponential, Matrix, advanced, apply, identity, product, solve,
};
use crate::numerics::scalar::Scalar;
use std::f64::consts::TAU;

/// Highest harmonic reported.
pub const HARMONICS: usize = 5;

/// Which harmonics to work out, the carrier first.
pub type Harmonics = [bool; HARMONICS];

/// Every harmonic reported.
pub const ALL_HARMONICS: Harmonics = [true; HARMONICS];

/// Means over a period. Powers count all legs.
#[derive(Debug, Clone, Copy)]
pub struct PeriodFigures<S> {
    /// Power from the supply P_dc, W.
    pub supply_power_w: S,
    /// The switches' whole dissipation `Σ R⟨i_sw²⟩`, W.
    pub switch_dissipation_w: S,
    /// `Σ R⟨i²⟩` over the on phases with the network current i, W.
    pub conduction_w: S,
    /// `⟨i²⟩` of the loop, A².
    pub current_squared_a2: S,
    /// `⟨v_o²⟩`, V².
    pub output_squared_v2: S,
    /// Amplitudes `|V_ok|` at the antenna, k = 1..=5, V; zero for even k with two legs and where not asked for.
    pub harmonic_v: [S; HARMONICS],
    /// Drain voltage yet to swing when N and P turn on, V, signed: v_d and V_DD − v_d.
    pub residual_v: [S; 2],
    /// Extremes of the drain voltage in each dead time; empty at dead time zero.
    pub dead_times: [Option<DeadTimeSpan<S>>; 2],
}

/// One phase with its solution.
pub(super) struct Phase<S, const N: usize> {
    pub(super) switches: Switches,
    /// Duration, s.
    pub(super) duration_s: S,
    /// Start of the phase from the start of the period, s.
    pub(super) begin_s: S,
    /// State less its rest at the start.
    pub(super) from_rest: Column<S, N>,
    /// State less its rest at the end.
    pub(super) to_rest: Column<S, N>,
}

/// Exponentials of the distinct phases: pull-up, open, pull-down.
pub(super) type Maps<S, const N: usize> = [Exponential<S, N>; 3];

/// Room for the exponentials of a solve.
#[inline(always)]
pub(super) fn maps<S: Scalar, const N: usize>() -> Maps<S, N> {
    [
        Exponential::empty(),
        Exponential::empty(),
        Exponential::empty(),
    ]
}

/// Phases of a period (two legs: of its first half) in their steady state.
pub(super) struct Solved<'m, S, const N: usize> {
    pub(super) phases: arrayvec::ArrayVec<Phase<S, N>, 4>,
    maps: &'m Maps<S, N>,
}

impl<'m, S: Scalar, const N: usize> Solved<'m, S, N> {
    pub(super) fn exponential(&self, phase: &Phase<S, N>) -> &'m Exponential<S, N> {
        &self.maps[phase.switches as usize]
    }

    /// Solves the steady state in the room of `maps`; `None` when it leaves the floating-point range.
    pub(super) fn new(circuit: &Circuit<S>, maps: &'m mut Maps<S, N>) -> Option<Self> {
        let on_s = (-circuit.dead_time + 0.5) * circuit.period_s;
        let open_s = circuit.dead_time * circuit.period_s;
        let has_dead_time = !circuit.dead_time.is_identically_zero();
        let mut sequence = arrayvec::ArrayVec::<(Switches, S), 4>::new();
        sequence.push((Switches::PullUp, on_s));
        if has_dead_time {
            sequence.push((Switches::Open, open_s));
        }
        if circuit.legs == 1 {
            sequence.push((Switches::PullDown, on_s));
            if has_dead_time {
                sequence.push((Switches::Open, open_s));
            }
        }
        let distinct = sequence.len().min(3);
        for &(switches, duration) in &sequence[..distinct] {
            let a: Matrix<S, N> = circuit.matrix(switches);
            maps[switches as usize].fill(&a, duration)?;
        }
        let maps: &'m Maps<S, N> = maps;
        let mut state = start_state(circuit, &sequence, maps)?;
        let mut begin_s = S::zero();
        let mut phases = arrayvec::ArrayVec::new();
        for &(switches, duration_s) in &sequence {
            let rest: Column<S, N> = circuit.rest(switches);
            let from_rest = difference(&state, &rest);
            let to_rest = advanced(maps[switches as usize].less_identity(), &from_rest);
            state = total(&to_rest, &rest);
            phases.push(Phase {
                switches,
                duration_s,
                begin_s,
                from_rest,
                to_rest,
            });
            begin_s += duration_s;
        }
        Some(Self { phases, maps })
    }
}

fn difference<S: Scalar, const N: usize>(a: &Column<S, N>, b: &Column<S, N>) -> Column<S, N> {
    let mut c = *a;
    for i in 0..N {
        c[i] -= b[i];
    }
    c
}

fn total<S: Scalar, const N: usize>(a: &Column<S, N>, b: &Column<S, N>) -> Column<S, N> {
    let mut c = *a;
    for i in 0..N {
        c[i] += b[i];
    }
    c
}

/// Solves `(M − Φ)x₀ = γ`, M the identity or, with two legs, the mirror of half a period. Derivatives follow from the
/// same matrix: with x₀ held still the end of the (half) period moves by what has to be made up.
fn start_state<S: Scalar, const N: usize>(
    circuit: &Circuit<S>,
    sequence: &[(Switches, S)],
    maps: &Maps<S, N>,
) -> Option<Column<S, N>> {
    let mut map: Matrix<f64, N> = identity();
    let mut offset = [0.0; N];
    for &(switches, _) in sequence {
        let f = maps[switches as usize].whole();
        let rest = circuit.rest::<N>(switches).map(S::value);
        offset = total(&apply(f, &difference(&offset, &rest)), &offset);
        let mut next = product(f, &map);
        for i in 0..N {
            for j in 0..N {
                next[i][j] += map[i][j];
            }
        }
        map = next;
    }
    let mut mirror: Matrix<f64, N> = identity();
    if circuit.legs == 2 {
        mirror.swap(0, 1);
        for (i, row) in mirror.iter_mut().enumerate().skip(2) {
            row[i] = -1.0;
        }
    }
    for i in 0..N {
        for j in 0..N {
            mirror[i][j] -= map[i][j];
        }
    }
    let start = solve(mirror, offset)?;
    if !start.iter().all(|x| x.is_finite()) {
        return None;
    }
    let still = start.map(S::constant);
    if !S::MOVES {
        return Some(still);
    }
    let mut state = still;
    for &(switches, _) in sequence {
        let rest = circuit.rest(switches);
        let from_rest = difference(&state, &rest);
        let f = maps[switches as usize].less_identity();
        state = total(&advanced(f, &from_rest), &rest);
    }
    Some(total(&still, &solve(mirror, state.map(S::movement))?))
}

/// The figures of one period with the harmonics `wanted`; `None` when the steady state leaves the floating-point range.
pub fn figures<S: Scalar>(circuit: &Circuit<S>, wanted: Harmonics) -> Option<PeriodFigures<S>> {
    match circuit.size() {
        3 => figures_of::<S, 3>(circuit, wanted),
        4 => figures_of::<S, 4>(circuit, wanted),
        5 => figures_of::<S, 5>(circuit, wanted),
        _ => None,
    }
}

fn figures_of<S: Scalar, const N: usize>(
    circuit: &Circuit<S>,
    wanted: Harmonics,
) -> Option<PeriodFigures<S>> {
    let mut room = maps();
    let solved = Solved::<S, N>::new(circuit, &mut room)?;
    let order = circuit.order();
    let (c, i) = (order.capacitor, order.current);
    let reference = circuit.reference_ohm();
    let legs = circuit.legs as usize;
    // With two legs the mirrored half adds the same again.
    let halves = f64::from(circuit.legs) / circuit.period_s;

    let mut supply_charge = S::zero();
    let mut dissipation = S::zero();
    let mut conduction = S::zero();
    let mut current_squared = S::zero();
    let mut output_squared = S::zero();
    let mut dead_times = [None, None];
    let mut residual_v = [S::zero(); 2];
    // Phases of one kind share their exponential and last equally long: one moment serves them.
    for switches in [Switches::PullUp, Switches::Open, Switches::PullDown] {
        let arcs: arrayvec::ArrayVec<_, 2> = solved
            .phases
            .iter()
            .filter(|p| p.switches == switches)
            .map(|p| [&p.from_rest, &p.to_rest])
            .collect();
        let Some(phase) = solved.phases.iter().find(|p| p.switches == switches) else {
            continue;
        };
        let moment = solved.exponential(phase).second_moment(&arcs);
        let current = moment[i][i] * phase.duration_s / (reference * reference);
        current_squared += current;
        if let Some(o) = order.output {
            output_squared += moment[o][o] * phase.duration_s;
        }
        for leg in 0..legs {
            if let Some(r) = circuit.holding_ohm(switches, leg) {
                dissipation += moment[leg][leg] * phase.duration_s / r;
                conduction += r * current;
            }
        }
    }
    for (index, phase) in solved.phases.iter().enumerate() {
        match phase.switches {
            // ∫i_sw over the phase is what its capacitors took: C_d Δv_d + C_s Δv_c.
            Switches::PullUp => {
                supply_charge += circuit.drain_capacitance_f
                    * (phase.to_rest[0] - phase.from_rest[0])
                    + circuit.network.series_capacitance_f
                        * (phase.to_rest[c] - phase.from_rest[c]);
                residual_v[1] = -phase.from_rest[0];
                if legs == 2 {
                    residual_v[0] = phase.from_rest[1];
                }
            }
            Switches::PullDown => residual_v[0] = phase.from_rest[0],
            // With two legs the drain of leg 2 now moves as that of leg 1 half a period later.
            Switches::Open if legs == 2 => {
                for (leg, slot) in dead_times.iter_mut().enumerate() {
                    *slot = Some(rails::span(solved.exponential(phase), phase, leg, i)?);
                }
            }
            Switches::Open => {
                dead_times[usize::from(index > 1)] =
                    Some(rails::span(solved.exponential(phase), phase, 0, i)?);
            }
        }
    }
    if order.output.is_none() {
        let r = circuit.network.antenna_resistance_ohm;
        output_squared = current_squared * (r * r);
    }
    Some(PeriodFigures {
        supply_power_w: circuit.supply_v * supply_charge * halves,
        switch_dissipation_w: dissipation * halves,
        conduction_w: conduction * halves,
        current_squared_a2: current_squared * halves,
        output_squared_v2: output_squared * halves,
        harmonic_v: harmonics(circuit, &solved, wanted),
        residual_v,
        dead_times,
    })
}

/// Amplitudes at the antenna. Only the switch current is integrated phase by phase; the rest of the circuit is
/// linear and time-invariant, so `I_k = I_sw,k/(1 + jkωC_d Z_k/B)` and `V_ok = I_k Z_out,k`.
fn harmonics<S: Scalar, const N: usize>(
    circuit: &Circuit<S>,
    solved: &Solved<'_, S, N>,
    wanted: Harmonics,
) -> [S; HARMONICS] {
    let omega = TAU / circuit.period_s;
    // e^{−jωt} at the phase boundaries; higher harmonics are its powers.
    let turn = |at_s: S| {
        let (sin, cos) = (at_s * omega).sin_cos();
        Complex::new(cos, -sin)
    };
    let boundaries: arrayvec::ArrayVec<[Complex<S>; 2], 4> = solved
        .phases
        .iter()
        .map(|p| [turn(p.begin_s), turn(p.begin_s + p.duration_s)])
        .collect();
    let mut powers = boundaries.clone();
    let mut amplitudes = [S::zero(); HARMONICS];
    for (slot, amplitude) in amplitudes.iter_mut().enumerate() {
        let k = slot + 1;
        if slot > 0 {
            for (power, once) in powers.iter_mut().zip(&boundaries) {
                *power = [power[0] * once[0], power[1] * once[1]];
            }
        }
        if !wanted[slot] || (circuit.legs == 2 && k.is_multiple_of(2)) {
            continue;
        }
        let frequency = k as f64 * omega;
        let loop_z = circuit.network.loop_impedance(frequency);
        let mut switch_current = Complex::real(S::zero());
        for (phase, power) in solved.phases.iter().zip(&powers) {
            if phase.switches != Switches::Open {
                switch_current =
                    switch_current + phase_spectrum(circuit, phase, *power, frequency, loop_z);
            }
        }
        let shunted = Complex::new(
            S::zero(),
            circuit.drain_capacitance_f * (frequency / f64::from(circuit.legs)),
        ) * loop_z
            + Complex::real(S::one());
        let current = switch_current / shunted;
        let voltage = current * circuit.network.output_impedance(frequency);
        *amplitude = voltage.norm() * (2.0 / circuit.period_s);
    }
    amplitudes
}

/// `∫i_sw e^{−jkωt}dt` of leg 1 over one on phase, from `(A − jkω)Y = [y e^{−jkωt}]`, `i_sw = −Y_d/R`, solved by
/// eliminating the chain of capacitors. With two legs leg 2's part, which is leg 1's half a period later, is
/// added with the sign that odd harmonics have there.
fn phase_spectrum<S: Scalar, const N: usize>(
    circuit: &Circuit<S>,
    phase: &Phase<S, N>,
    turns: [Complex<S>; 2],
    frequency: f64,
    loop_z: Complex<S>,
) -> Complex<S> {
    let order = circuit.order();
    let network = &circuit.network;
    let reference = circuit.reference_ohm();
    let step = |j: usize| turns[1].scaled(phase.to_rest[j]) - turns[0].scaled(phase.from_rest[j]);
    let legs = circuit.legs as usize;
    let mut z = loop_z;
    let mut right = -step(order.current).scaled(network.inductance_h / reference);
    // r_c/s
    let capacitor = step(order.capacitor);
    right = right + Complex::new(capacitor.im / frequency, capacitor.re / -frequency);
    if let (Some(o), Some(shunt)) = (order.output, &network.shunt) {
        right = right + step(o).scaled(shunt.capacitance_f) * network.output_impedance(frequency);
    }
    let mut drains = [None; 2];
    for (leg, drain) in drains.iter_mut().enumerate().take(legs) {
        if let Some(r) = circuit.holding_ohm(phase.switches, leg) {
            let held =
                Complex::new(S::one() / r, circuit.drain_capacitance_f * frequency).reciprocal();
            let charge = step(leg).scaled(circuit.drain_capacitance_f);
            z = z + held;
            let pushed = held * charge;
            right = if leg == 0 {
                right - pushed
            } else {
                right + pushed
            };
            *drain = Some((held, charge, r));
        }
    }
    let current = right / z;
    let mut sum = Complex::real(S::zero());
    for (leg, drain) in drains.into_iter().enumerate() {
        if let Some((held, charge, r)) = drain {
            // Y_d1 = −held(charge + Y_i); Y_d2 = held(Y_i − charge).
            let switch = if leg == 0 {
                held * (charge + current)
            } else {
                // e^{−jkπ} = −1 for odd k, and i_sw2 = −Y_d2/R.
                held * (current - charge)
            };
            sum = sum + switch.scaled(S::one() / r);
        }
    }
    sum
}
