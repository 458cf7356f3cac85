//! A spiral's metal tabulated once over trace and diameter, so that a search need not solve filaments again.
//!
//! ln L and ln R are interpolated by Chebyshev polynomials in the trace's logarithm and the inner
//! diameter's, the latter between the least and the largest: smooth even where the inner turn is tiny, since the filament mesh scales
//! with the geometry.

use super::{SpiralGeometry, SpiralProcess, filaments, smallest_diameter_m};
use crate::numerics::chebyshev::{Chebyshev2, nodes};
use crate::numerics::scalar::Scalar;
use ndarray::Array2;
use rayon::prelude::*;
use std::f64::consts::TAU;

/// Nodes along the trace and along the diameter: interpolated values agree with solved ones to the tolerance that the
/// tests hold.
const TRACE_NODES: usize = 20;
const DIAMETER_NODES: usize = 14;

/// The span of traces and diameters a table covers, m.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct TableSpan {
    /// Narrowest and widest trace.
    pub trace_m: [f64; 2],
    /// Least and largest diameter.
    pub diameter_m: [f64; 2],
}

/// L and R of one number of turns at one frequency.
#[derive(Debug, Clone)]
pub struct SpiralTable {
    trace_m: [f64; 2],
    largest_m: f64,
    /// Least diameter covered = `base_m + per_trace·w`.
    base_m: f64,
    per_trace: f64,
    metal_base_m: f64,
    metal_per_trace: f64,
    ln_inductance: Chebyshev2,
    ln_resistance: Chebyshev2,
}

/// Interpolated L and R of the metal with their derivatives carried.
#[derive(Debug, Clone, Copy)]
pub struct Interpolated<S> {
    /// H.
    pub inductance_h: S,
    /// Ω.
    pub resistance_ohm: S,
}

impl SpiralTable {
    /// Solves the nodes on all cores. `None` when no spiral of these turns closes within the span.
    pub fn new(
        process: &SpiralProcess,
        turns: u32,
        span: &TableSpan,
        frequency_hz: f64,
    ) -> Option<Self> {
        /// Least room left for the diameter, a fraction: a span narrower than this holds no table.
        const LEAST_ROOM: f64 = 1e-6;
        let [least_m, largest_m] = span.diameter_m;
        let [narrow, mut wide] = span.trace_m;
        let closes = |w: f64| smallest_diameter_m(process, turns, w);
        let n = f64::from(turns);
        let per_trace_closing = 2.0 * n;
        // The widest trace that closes inside the largest diameter.
        let widest = (largest_m * (1.0 - LEAST_ROOM) - closes(0.0)) / per_trace_closing;
        wide = wide.min(widest);
        if wide.is_nan() || wide < narrow {
            return None;
        }
        let (base_m, per_trace) = if closes(wide) < least_m {
            (least_m, 0.0)
        } else {
            (closes(0.0), per_trace_closing)
        };
        let table = Self {
            trace_m: [narrow, wide],
            largest_m,
            base_m,
            per_trace,
            metal_base_m: 2.0 * (n - 1.0) * process.spacing_m,
            metal_per_trace: 2.0 * n,
            ln_inductance: Chebyshev2::through(&Array2::zeros((1, 1))),
            ln_resistance: Chebyshev2::through(&Array2::zeros((1, 1))),
        };
        let rows = if wide > narrow { TRACE_NODES } else { 1 };
        let columns = if largest_m > table.least_diameter_m(wide) {
            DIAMETER_NODES
        } else {
            1
        };
        let (xs, ys) = (nodes(rows), nodes(columns));
        let solved: Vec<filaments::SeriesImpedance> = (0..rows * columns)
            .into_par_iter()
            .map(|index| {
                let trace_m = narrow * (wide / narrow).powf(0.5 * (xs[index / columns] + 1.0));
                let [least, largest] = table.inner_span_m(trace_m);
                let inner_m = least * (largest / least).powf(0.5 * (ys[index % columns] + 1.0));
                let diameter_m = inner_m + table.metal_m(trace_m);
                let geometry = SpiralGeometry {
                    turns,
                    trace_m,
                    diameter_m,
                };
                filaments::series_impedance(process, &geometry, TAU * frequency_hz)
            })
            .collect();
        let surface = |pick: fn(&filaments::SeriesImpedance) -> f64| {
            Chebyshev2::through(&Array2::from_shape_fn((rows, columns), |(i, k)| {
                pick(&solved[i * columns + k]).ln()
            }))
        };
        Some(Self {
            ln_inductance: surface(|z| z.inductance_h),
            ln_resistance: surface(|z| z.resistance_ohm),
            ..table
        })
    }

    /// Traces covered, m.
    pub fn traces_m(&self) -> [f64; 2] {
        self.trace_m
    }

    /// Least diameter covered at a trace, m: the span's, or where the spiral still closes.
    pub fn least_diameter_m<S: Scalar>(&self, trace_m: S) -> S {
        trace_m * self.per_trace + self.base_m
    }

    /// D − D_i = 2(nw + (n−1)s), m.
    fn metal_m<S: Scalar>(&self, trace_m: S) -> S {
        trace_m * self.metal_per_trace + self.metal_base_m
    }

    /// Least and largest inner diameter at a trace, m.
    fn inner_span_m<S: Scalar>(&self, trace_m: S) -> [S; 2] {
        let metal = self.metal_m(trace_m);
        [
            self.least_diameter_m(trace_m) - metal,
            -metal + self.largest_m,
        ]
    }

    /// L and R, derivatives included. Outside the span the polynomials are not to be trusted.
    pub fn at<S: Scalar>(&self, trace_m: S, diameter_m: S) -> Interpolated<S> {
        let [narrow, wide] = self.trace_m;
        let x = if wide > narrow {
            (trace_m / narrow).ln() * (2.0 / (wide / narrow).ln()) - 1.0
        } else {
            S::zero()
        };
        let [least, largest] = self.inner_span_m(trace_m);
        let y = if largest.value() > least.value() {
            let inner_m = diameter_m - self.metal_m(trace_m);
            (inner_m / least).ln() / (largest / least).ln() * 2.0 - 1.0
        } else {
            S::zero()
        };
        let carried = |surface: &Chebyshev2| {
            let s = surface.at(x.value(), y.value());
            // value + ∂x·(x − x₀) + ∂y·(y − y₀) carries the derivatives exactly.
            let ln = (x - x.value()) * s.by_x + (y - y.value()) * s.by_y + s.value;
            ln.exp()
        };
        Interpolated {
            inductance_h: carried(&self.ln_inductance),
            resistance_ohm: carried(&self.ln_resistance),
        }
    }
}
