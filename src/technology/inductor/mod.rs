//! The planar spiral inductor: geometry, series impedance by filaments, substrate, interpolation table.

pub mod filaments;
pub mod substrate;
pub mod table;

use super::SpiralProcess;
use crate::numerics::root::increasing_root;
use filaments::SeriesImpedance;
use std::f64::consts::TAU;
use thiserror::Error;

/// A spiral's drawn geometry.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SpiralGeometry {
    /// Turns n.
    pub turns: u32,
    /// Trace width w, m.
    pub trace_m: f64,
    /// Outer diameter of the outermost metal D, m.
    pub diameter_m: f64,
}

/// Why a spiral cannot be drawn or solved.
#[derive(Debug, Clone, Copy, PartialEq, Error)]
pub enum NoSpiral {
    /// The innermost turn's radius would not exceed the spacing.
    #[error(
        "{turns} turns do not close: the inner radius would be {inner_radius_m:.3e} m, above the spacing \
         {spacing_m:.3e} m is needed"
    )]
    DoesNotClose {
        /// Turns asked for.
        turns: u32,
        /// D_i/2, m.
        inner_radius_m: f64,
        /// s, m.
        spacing_m: f64,
    },
    /// The inductance asked for is outside what the trace width can give.
    #[error("{wanted_h:.4e} H is out of reach: traces give {least_h:.4e} to {most_h:.4e} H here")]
    OutOfReach {
        /// L_eff wanted, H.
        wanted_h: f64,
        /// With the widest trace, H.
        least_h: f64,
        /// With the narrowest, H.
        most_h: f64,
    },
}

/// A solved spiral, at one frequency.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SolvedSpiral {
    /// Of the metal alone, H.
    pub series_inductance_h: f64,
    /// Of the metal alone, Ω.
    pub series_resistance_ohm: f64,
    /// L_eff = Im Z/ω with substrate and underpass, H.
    pub inductance_h: f64,
    /// R_eff = Re Z, Ω.
    pub resistance_ohm: f64,
    /// Im Z/Re Z.
    pub quality: f64,
    /// First frequency at which Im Z is 0, Hz, with the metal's L and R of the solved frequency; none below 1 THz.
    pub self_resonance_hz: Option<f64>,
}

impl SpiralGeometry {
    /// D_i = D − 2(nw + (n−1)s), m.
    pub fn inner_diameter_m(&self, spacing_m: f64) -> f64 {
        let n = f64::from(self.turns);
        self.diameter_m - 2.0 * (n * self.trace_m + (n - 1.0) * spacing_m)
    }

    fn check(&self, process: &SpiralProcess) -> Result<(), NoSpiral> {
        let inner_radius_m = 0.5 * self.inner_diameter_m(process.spacing_m);
        if inner_radius_m > process.spacing_m {
            Ok(())
        } else {
            Err(NoSpiral::DoesNotClose {
                turns: self.turns,
                inner_radius_m,
                spacing_m: process.spacing_m,
            })
        }
    }
}

/// D of the smallest spiral that closes: inner radius equal to the spacing, m.
pub fn smallest_diameter_m(process: &SpiralProcess, turns: u32, trace_m: f64) -> f64 {
    let n = f64::from(turns);
    2.0 * (n * trace_m + n * process.spacing_m)
}

/// Area with the keep-out, (D + 2·keep-out)², m².
pub fn footprint_m2(process: &SpiralProcess, diameter_m: f64) -> f64 {
    (diameter_m + 2.0 * process.keep_out_m).powi(2)
}

/// The spiral at `frequency_hz`.
///
/// # Errors
/// [`NoSpiral::DoesNotClose`].
pub fn solve(
    process: &SpiralProcess,
    geometry: &SpiralGeometry,
    frequency_hz: f64,
) -> Result<SolvedSpiral, NoSpiral> {
    geometry.check(process)?;
    let omega = TAU * frequency_hz;
    let metal = filaments::series_impedance(process, geometry, omega);
    Ok(with_substrate(process, geometry, omega, metal))
}

fn with_substrate(
    process: &SpiralProcess,
    geometry: &SpiralGeometry,
    omega: f64,
    metal: SeriesImpedance,
) -> SolvedSpiral {
    let at = |w: f64| {
        substrate::one_port(
            process,
            geometry.turns,
            geometry.trace_m,
            geometry.diameter_m,
            metal.inductance_h,
            metal.resistance_ohm,
            w,
        )
    };
    let z = at(omega);
    SolvedSpiral {
        series_inductance_h: metal.inductance_h,
        series_resistance_ohm: metal.resistance_ohm,
        inductance_h: z.im / omega,
        resistance_ohm: z.re,
        quality: z.im / z.re,
        self_resonance_hz: substrate::self_resonance_hz(|w| at(w).im),
    }
}

/// The trace width that gives L_eff = `wanted_h` at these turns and diameter, m. L falls as the trace widens.
///
/// # Errors
/// [`NoSpiral::OutOfReach`] with what traces from 1 µm to the widest that closes can give.
pub fn trace_for(
    process: &SpiralProcess,
    turns: u32,
    diameter_m: f64,
    wanted_h: f64,
    frequency_hz: f64,
) -> Result<f64, NoSpiral> {
    /// Narrowest trace looked at, m: below it no thick-metal process draws.
    const NARROWEST_M: f64 = 1e-6;
    let n = f64::from(turns);
    let widest = 0.5 * diameter_m / n - process.spacing_m;
    let inductance = |trace_m: f64| {
        let geometry = SpiralGeometry {
            turns,
            trace_m,
            diameter_m,
        };
        let omega = TAU * frequency_hz;
        let metal = filaments::series_impedance(process, &geometry, omega);
        with_substrate(process, &geometry, omega, metal).inductance_h
    };
    // A hair inside, so that the innermost turn exists.
    let widest = widest * (1.0 - 1e-9);
    if widest.is_nan() || widest <= NARROWEST_M {
        return Err(NoSpiral::DoesNotClose {
            turns,
            inner_radius_m: 0.5 * diameter_m - n * NARROWEST_M,
            spacing_m: process.spacing_m,
        });
    }
    let (most_h, least_h) = (inductance(NARROWEST_M), inductance(widest));
    let out_of_reach = NoSpiral::OutOfReach {
        wanted_h,
        least_h,
        most_h,
    };
    if !(least_h..=most_h).contains(&wanted_h) {
        return Err(out_of_reach);
    }
    let step = 1e-6;
    increasing_root(NARROWEST_M, widest, 0.5 * widest, |w| {
        let value = (wanted_h - inductance(w)) / wanted_h;
        let beside = (wanted_h - inductance(w * (1.0 - step))) / wanted_h;
        (value, (value - beside) / (w * step))
    })
    .ok_or(out_of_reach)
}
