//! What the oxide, the substrate and the underpass add to a spiral, after Yue and Wong (IEEE JSSC 33, 1998, 743;
//! IEEE TED 47, 2000, 560), seen from one end with the other at a fixed potential.

use super::SpiralProcess;
use crate::numerics::complex::Complex;
use crate::numerics::scalar::Scalar;
use std::f64::consts::{PI, TAU};

/// Permittivity of free space, F/m (CODATA 2018).
const VACUUM_PERMITTIVITY_F_M: f64 = 8.854_187_812_8e-12;

/// Impedance of the whole spiral at `omega`, equation (16):
///
/// ```text
/// l = πn(D + D_i)/2   C_ox = ½ l w ε/t_ox   C_si = ½ l w C_sub   R_si = 2/(l w G_sub)   C_u = (n−1) w² ε/t_under
/// R_p = 1/(ω²C_ox²R_si) + R_si(C_ox + C_si)²/C_ox²
/// C_pp = C_ox [1 + ω²(C_ox + C_si)C_si R_si²]/[1 + ω²(C_ox + C_si)²R_si²]
/// Z = 1/(1/(R + jωL) + 1/R_p + jω(C_pp + C_u))
/// ```
pub fn one_port<S: Scalar>(
    process: &SpiralProcess,
    turns: u32,
    trace_m: S,
    diameter_m: S,
    inductance_h: S,
    resistance_ohm: S,
    omega: f64,
) -> Complex<S> {
    let n = f64::from(turns);
    let permittivity = process.oxide_permittivity * VACUUM_PERMITTIVITY_F_M;
    // D_i = D − 2(nw + (n−1)s)
    let mean_diameter = diameter_m - (trace_m * n + (n - 1.0) * process.spacing_m);
    let half_plate_m2 = mean_diameter * trace_m * (0.5 * PI * n);
    let oxide_f = half_plate_m2 * (permittivity / process.oxide_height_m);
    let silicon_f = half_plate_m2 * process.substrate_capacitance_f_m2;
    let silicon_ohm = S::one() / (half_plate_m2 * process.substrate_conductance_s_m2);
    let underpass_f = trace_m * trace_m * ((n - 1.0) * permittivity / process.underpass_height_m);
    let both_f = oxide_f + silicon_f;
    let w2 = omega * omega;
    let parallel_s = {
        let ohm = S::one() / (oxide_f.squared() * silicon_ohm * w2)
            + silicon_ohm * both_f.squared() / oxide_f.squared();
        S::one() / ohm
    };
    let silicon_squared = silicon_ohm.squared() * w2;
    let parallel_f = oxide_f * (both_f * silicon_f * silicon_squared + 1.0)
        / (both_f.squared() * silicon_squared + 1.0);
    let metal = Complex::new(resistance_ohm, inductance_h * omega).reciprocal();
    (metal + Complex::new(parallel_s, (parallel_f + underpass_f) * omega)).reciprocal()
}

/// First zero of the reactance (a function of ω) above 1 MHz, Hz; none below 1 THz.
pub fn self_resonance_hz(reactance: impl Fn(f64) -> f64) -> Option<f64> {
    const LOWEST_HZ: f64 = 1e6;
    const HIGHEST_HZ: f64 = 1e12;
    /// Steps of the scan: 2.3 % each, far finer than the resonance is away from any other.
    const STEPS: usize = 600;
    let at = |step: usize| LOWEST_HZ * (HIGHEST_HZ / LOWEST_HZ).powf(step as f64 / STEPS as f64);
    let first = (1..=STEPS).find(|&step| reactance(TAU * at(step)) <= 0.0)?;
    let (mut low, mut high) = (at(first - 1), at(first));
    // Halving 60 times reaches the last bit.
    for _ in 0..60 {
        let middle = 0.5 * (low + high);
        if reactance(TAU * middle) > 0.0 {
            low = middle;
        } else {
            high = middle;
        }
    }
    Some(0.5 * (low + high))
}
