//! Complete elliptic integrals and the mutual inductance of coaxial circles, all by one mean.
//!
//! The arithmetic-geometric mean of Gauss (Abramowitz and Stegun 1964, 17.6) starts at `a0 = 1`, `b0 = k'` and runs
//! `a ← (a+b)/2`, `b ← √(ab)`, `c ← (a−b)/2`:
//!
//! ```text
//! K = π/(2 a∞)        1 − E/K = Σ_{n≥0} 2^{n−1} c_n²,   c0² = k²
//! ```

use std::f64::consts::{FRAC_PI_2, FRAC_PI_4};

/// Permeability of free space `µ0 = 4π·1e-7`, H/m.
pub const VACUUM_PERMEABILITY_H_M: f64 = 4.0e-7 * std::f64::consts::PI;

/// Steps of the mean from any ratio `b0/a0` of normal floating-point numbers down to rounding.
const STEPS_ANY: usize = 14;

/// Steps that leave less than 1e-15 of a mutual inductance for `b0/a0` above about 1e-4.
const STEPS_CLOSE: usize = 6;

/// Complete elliptic integrals `(K, E)` of the first and second kind.
///
/// `complement` is the complementary parameter `k'² = 1 − k²`, in (0, 1]; it is asked for instead of the modulus because
/// nothing is lost in it when `k` nears 1. At 0 the values are the limits (infinity, 1); outside [0, 1] they are NaN.
///
/// Source: Abramowitz and Stegun (1964), 17.6.3 and 17.6.4.
pub fn complete(complement: f64) -> (f64, f64) {
    if complement == 0.0 {
        return (f64::INFINITY, 1.0);
    }
    if !(complement > 0.0 && complement <= 1.0) {
        return (f64::NAN, f64::NAN);
    }
    let (mut a, mut b) = (1.0_f64, complement.sqrt());
    // E/K = 1 − ½k² − Σ_{n≥1} 2^{n−1} c_n² = ½(1 + k'²) − Σ…
    let (mut ratio, mut weight) = (0.5 * (1.0 + complement), 1.0);
    for _ in 0..STEPS_ANY {
        let c = 0.5 * (a - b);
        let mean = 0.5 * (a + b);
        b = (a * b).sqrt();
        a = mean;
        ratio -= weight * c * c;
        weight *= 2.0;
    }
    let first = FRAC_PI_2 / a;
    (first, first * ratio)
}

/// Mutual inductance of two coaxial circular filaments of radii `a` and `b` (m), `z` apart along the axis (m); H.
///
/// ```text
/// M(a,b,z) = µ0 √(ab) [(2/κ − κ) K(κ) − (2/κ) E(κ)],   κ² = 4ab/((a+b)² + z²)
/// ```
///
/// Maxwell, *Treatise* (1873), art. 701. With `E` written by the sum of the mean, the terms that cancel (for filaments
/// far apart, κ → 0) cancel on paper: started at the longest and shortest distances `r1`, `r2` between the circles,
///
/// ```text
/// M = (µ0 π/4)/a∞ · Σ_{n≥1} 2^n c_n²,   c_1 = 2ab/(r1 + r2),   c_{n+1} = c_n²/(4 a_{n+1})
/// ```
///
/// a sum of positive terms, so the relative error stays at rounding near and far. Infinite only where the filaments meet.
pub fn mutual_inductance(a: f64, b: f64, z: f64) -> f64 {
    if a == b && z == 0.0 {
        return f64::INFINITY;
    }
    mutual_by_mean::<STEPS_ANY>(a, b, z * z)
}

/// [`mutual_inductance`] of one filament (radius `a`) with many (radii `b`, squares of the axial distances `z2`) into `out`.
///
/// A fixed, smaller number of steps, right to rounding while the filaments are no closer than 1e-4 of their diameter and
/// smooth everywhere; finite (and meaningless) where they meet. Written so that the compiler takes several at once.
pub fn mutual_row(a: f64, b: &[f64], z2: &[f64], out: &mut [f64]) {
    for ((out, &b), &z2) in out.iter_mut().zip(b).zip(z2) {
        *out = mutual_by_mean::<STEPS_CLOSE>(a, b, z2);
    }
}

#[inline(always)]
fn mutual_by_mean<const STEPS: usize>(a: f64, b: f64, z2: f64) -> f64 {
    let longest = ((a + b) * (a + b) + z2).sqrt();
    let shortest = ((a - b) * (a - b) + z2).sqrt();
    let (mut mean, mut geometric) = (longest, shortest);
    let mut c = 2.0 * a * b / (longest + shortest);
    let (mut sum, mut weight) = (0.0, 2.0);
    for step in 0..STEPS {
        sum += weight * c * c;
        weight *= 2.0;
        let next = 0.5 * (mean + geometric);
        if step + 1 < STEPS {
            geometric = (mean * geometric).sqrt();
            c = 0.25 * c * c / (0.5 * (next + geometric));
        }
        mean = next;
    }
    VACUUM_PERMEABILITY_H_M * FRAC_PI_4 * sum / mean
}
