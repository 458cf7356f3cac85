//! The steady state of a one-leg low-pass stage by a general-purpose exponential (nalgebra's: Padé and squaring, Higham
//! 2005) and what else a general library has: squares by the exponential of the system of products, Fourier coefficients
//! by complex solutions. Written apart from the crate's own, as the measure of it.

use nalgebra::{Complex, Matrix4, SMatrix, SVector, Vector4};
use std::f64::consts::TAU;
use widefront::steady::circuit::Circuit;
use widefront::steady::period::HARMONICS;

/// Samples of a dead time at which the drain is looked at.
const SAMPLES: usize = 8;

pub struct Period {
    pub supply_power_w: f64,
    pub switch_dissipation_w: f64,
    pub current_squared_a2: f64,
    pub output_squared_v2: f64,
    pub harmonic_v: [f64; HARMONICS],
    /// Least and greatest drain voltage of both dead times, V.
    pub drain_v: [f64; 2],
}

struct Phase {
    a: Matrix4<f64>,
    rest: Vector4<f64>,
    duration_s: f64,
    /// What holds the drain, Ω.
    held_by: Option<f64>,
    pulls_up: bool,
}

/// States: drain voltage, series-capacitor voltage, loop current times √(L/C_d), output voltage.
fn phases(c: &Circuit<f64>) -> [Phase; 4] {
    let n = &c.network;
    let shunt = n.shunt.as_ref().expect("a low-pass network");
    let z = (n.inductance_h / c.drain_capacitance_f).sqrt();
    let (l, cd) = (n.inductance_h, c.drain_capacitance_f);
    let series = n.inductor_resistance_ohm + n.capacitor_resistance_ohm;
    let load = shunt.loss_s + 1.0 / n.antenna_resistance_ohm;
    let (on_s, open_s) = ((0.5 - c.dead_time) * c.period_s, c.dead_time * c.period_s);
    let phase = |held_by: Option<f64>, pulls_up: bool| {
        let drain = held_by.map_or(0.0, |r| -1.0 / (r * cd));
        let a = Matrix4::new(
            drain,
            0.0,
            -1.0 / (cd * z),
            0.0, //
            0.0,
            0.0,
            1.0 / (n.series_capacitance_f * z),
            0.0, //
            z / l,
            -z / l,
            -series / l,
            -z / l, //
            0.0,
            0.0,
            1.0 / (shunt.capacitance_f * z),
            -load / shunt.capacitance_f,
        );
        let v = if pulls_up { c.supply_v } else { 0.0 };
        Phase {
            a,
            rest: Vector4::new(v, v, 0.0, 0.0),
            duration_s: if held_by.is_some() { on_s } else { open_s },
            held_by,
            pulls_up,
        }
    };
    let [n, p] = c.on_resistance_ohm;
    [
        phase(Some(p), true),
        phase(None, false),
        phase(Some(n), false),
        phase(None, false),
    ]
}

/// Products of the states two by two, as `y yᵀ` has them above its diagonal.
const PRODUCTS: usize = 10;
/// The states whose squares are integrated: drain, current, output.
const SQUARED: [usize; 3] = [0, 2, 3];

fn product_index(p: usize, q: usize) -> usize {
    let (p, q) = (p.min(q), p.max(q));
    p * 4 - p * (p + 1) / 2 + q
}

/// Exponential of the system of all products of states and of the integrals of three squares: stable, unlike the block
/// matrix of Van Loan (1978), which holds e^{−At} and fails where a phase is stiff.
fn moments(a: &Matrix4<f64>, t: f64) -> SMatrix<f64, 13, 13> {
    let mut system = SMatrix::<f64, 13, 13>::zeros();
    for p in 0..4 {
        for q in p..4 {
            for k in 0..4 {
                system[(product_index(p, q), product_index(k, q))] += a[(p, k)];
                system[(product_index(p, q), product_index(p, k))] += a[(q, k)];
            }
        }
    }
    for (row, state) in SQUARED.into_iter().enumerate() {
        system[(PRODUCTS + row, product_index(state, state))] = 1.0 / t;
    }
    (system * t).exp()
}

/// `∫ y²` of drain, current and output over a phase from `y`.
fn squares(moments: &SMatrix<f64, 13, 13>, y: &Vector4<f64>, t: f64) -> [f64; 3] {
    let mut products = SVector::<f64, 13>::zeros();
    for p in 0..4 {
        for q in p..4 {
            products[product_index(p, q)] = y[p] * y[q];
        }
    }
    let end = moments * products;
    [0, 1, 2].map(|row| end[PRODUCTS + row] * t)
}

pub fn period(c: &Circuit<f64>) -> Period {
    let phases = phases(c);
    let [up, open, down] = [0, 1, 2].map(|k| (phases[k].a * phases[k].duration_s).exp());
    let maps = [up, open, down, open];
    let [up, open, down] = [0, 1, 2].map(|k| moments(&phases[k].a, phases[k].duration_s));
    let all_moments = [up, open, down, open];
    let (mut map, mut offset) = (Matrix4::identity(), Vector4::zeros());
    for (phase, f) in phases.iter().zip(&maps) {
        map = f * map;
        offset = f * (offset - phase.rest) + phase.rest;
    }
    let start = (Matrix4::identity() - map)
        .lu()
        .solve(&offset)
        .expect("a steady state");
    let z = (c.network.inductance_h / c.drain_capacitance_f).sqrt();
    let eighth = (phases[1].a * (phases[1].duration_s / SAMPLES as f64)).exp();
    let mut state = start;
    let mut begin_s = 0.0;
    let mut spectrum = [Complex::new(0.0, 0.0); HARMONICS];
    let (mut charge, mut dissipation, mut squared, mut output) = (0.0, 0.0, 0.0, 0.0);
    let mut drain_v = [f64::INFINITY, f64::NEG_INFINITY];
    for ((phase, f), moments) in phases.iter().zip(&maps).zip(&all_moments) {
        let from = state - phase.rest;
        let to = f * from;
        let [drain, current, voltage] = squares(moments, &from, phase.duration_s);
        squared += current / (z * z);
        output += voltage;
        if let Some(r) = phase.held_by {
            dissipation += drain / r;
        } else {
            let mut y = from;
            for sample in 0..=SAMPLES {
                drain_v = [drain_v[0].min(y[0]), drain_v[1].max(y[0])];
                if sample < SAMPLES {
                    y = eighth * y;
                }
            }
        }
        if phase.pulls_up {
            charge += c.drain_capacitance_f * (to[0] - from[0])
                + c.network.series_capacitance_f * (to[1] - from[1]);
        }
        for (slot, sum) in spectrum.iter_mut().enumerate() {
            let w = (slot + 1) as f64 * TAU / c.period_s;
            let turn = |t: f64| Complex::new(0.0, -w * t).exp();
            let right =
                to.map(|x| turn(begin_s + phase.duration_s) * x) - from.map(|x| turn(begin_s) * x);
            let matrix = phase.a.map(|x| Complex::new(x, 0.0))
                - Matrix4::from_diagonal_element(Complex::new(0.0, w));
            *sum += matrix
                .lu()
                .solve(&right)
                .expect("no eigenvalue on the axis")[3];
        }
        state = to + phase.rest;
        begin_s += phase.duration_s;
    }
    Period {
        supply_power_w: c.supply_v * charge / c.period_s,
        switch_dissipation_w: dissipation / c.period_s,
        current_squared_a2: squared / c.period_s,
        output_squared_v2: output / c.period_s,
        harmonic_v: spectrum.map(|v| v.norm() * 2.0 / c.period_s),
        drain_v,
    }
}
