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

/// Steps that leave less than 1e-12 of a mutual inductance for `b0/a0` of 1e-4, 1e-10 for 1e-5.
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
/// M = (µ0 π/4)/a∞ · Σ_{n≥1} 2^n c_n²,   c_1 = 2ab/(r1 + r2),   c_{n+1} = (a_n − b_n)/2
/// ```
///
/// a sum of positive terms, so the relative error stays at rounding near and far. Infinite only where the filaments meet.
pub fn mutual_inductance(a: f64, b: f64, z: f64) -> f64 {
    if a == b && z == 0.0 {
        return f64::INFINITY;
    }
    mutual_by_mean::<STEPS_ANY>(a, b, z * z)
}

/// [`mutual_inductance`] of one filament (radius `a`) with many (radii `b`), all `z` apart along the axis, into `out`.
///
/// A fixed, smaller number of steps, right to 1e-12 while the filaments are no closer than 1e-4 of their diameter (1e-10
/// at 1e-5) and smooth everywhere; finite (and meaningless) where they meet. Written so that the compiler takes several at once.
pub fn mutual_row(a: f64, b: &[f64], z: f64, out: &mut [f64]) {
    for (out, &b) in out.iter_mut().zip(b) {
        *out = mutual_by_mean::<STEPS_CLOSE>(a, b, z * z);
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
            // The first term was found without a difference; rounding in the later, smaller ones does not show.
            c = 0.5 * (next - geometric);
        }
        mean = next;
    }
    VACUUM_PERMEABILITY_H_M * FRAC_PI_4 * sum / mean
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::f64::consts::PI;

    /// The accuracy asked of K, E and M: a few roundings.
    const ROUNDING: f64 = 1e-14;

    fn close(a: f64, b: f64, tolerance: f64) {
        assert!((a / b - 1.0).abs() < tolerance, "{a:e} {b:e}");
    }

    #[test]
    fn published_complete_integrals() {
        // Abramowitz and Stegun (1964), table 17.1, m = 0.5, 0.9, 0.99 (15 digits, from memory).
        for (m1, k, e) in [
            (0.5, 1.854_074_677_301_372, 1.350_643_881_047_675),
            (0.1, 2.578_092_113_348_173, 1.104_774_732_704_073),
            (0.01, 3.695_637_362_989_874, 1.015_993_545_025_224),
        ] {
            let (first, second) = complete(m1);
            close(first, k, ROUNDING);
            close(second, e, ROUNDING);
        }
    }

    #[test]
    fn law_limits_of_the_complete_integrals() {
        assert_eq!(complete(1.0), (FRAC_PI_2, FRAC_PI_2));
        assert_eq!(complete(0.0), (f64::INFINITY, 1.0));
        assert!(complete(-0.1).0.is_nan() && complete(1.1).0.is_nan());
        // K → ln(4/k'), the next term being of order k'² ln k'.
        let (k, e) = complete(1e-30);
        close(k, (4.0 / 1e-15_f64).ln(), ROUNDING);
        close(e, 1.0, ROUNDING);
    }

    #[test]
    fn law_legendre_relation() {
        for m in [1e-6, 0.01, 0.3, 0.5, 0.77, 0.999] {
            let (k, e) = complete(1.0 - m);
            let (kc, ec) = complete(m);
            assert!((e * kc + ec * k - k * kc - FRAC_PI_2).abs() < 1e-13, "{m}");
        }
    }

    #[test]
    fn published_coaxial_circles() {
        // Grover, Inductance Calculations (1946), chapter 11: radii 25 and 20 cm, 10 cm apart, 0.24879 µH (from memory).
        let m = mutual_inductance(0.25, 0.20, 0.10);
        assert!((m - 0.24879e-6).abs() < 0.000005e-6, "{m:e}");
    }

    #[test]
    fn law_mutual_inductance_is_maxwells_formula() {
        for (a, b, z) in [(1.0, 0.9, 0.1), (2.0, 1.0, 0.0), (1.0, 1.0, 1.0)] {
            let k2: f64 = 4.0 * a * b / ((a + b) * (a + b) + z * z);
            let k = k2.sqrt();
            let (first, second) =
                complete(((a - b) * (a - b) + z * z) / ((a + b) * (a + b) + z * z));
            let m = VACUUM_PERMEABILITY_H_M
                * (a * b).sqrt()
                * ((2.0 / k - k) * first - 2.0 / k * second);
            close(mutual_inductance(a, b, z), m, 1e-13);
            close(mutual_inductance(b, a, -z), m, 1e-13);
        }
    }

    #[test]
    fn law_mutual_inductance_is_neumanns_integral() {
        // The integrand is periodic and analytic: equal steps converge geometrically.
        for (a, b, z) in [(3e-4, 1e-4, 2e-4), (1e-4, 1e-4, 1e-4)] {
            let steps = 400;
            let sum: f64 = (0..steps)
                .map(|i| (2.0 * PI * f64::from(i) / f64::from(steps)).cos())
                .map(|c| c / (a * a + b * b + z * z - 2.0 * a * b * c).sqrt())
                .sum();
            let m = VACUUM_PERMEABILITY_H_M * a * b * PI * sum / f64::from(steps);
            close(mutual_inductance(a, b, z), m, 1e-13);
        }
    }

    #[test]
    fn law_far_circles_are_dipoles() {
        // µ0 π a² b²/(2 z³), the next term being 3(a² + b²)/(2z²) smaller.
        let (a, b, z) = (1e-6, 2e-6, 10.0);
        let m = VACUUM_PERMEABILITY_H_M * PI * a * a * b * b / (2.0 * z * z * z);
        close(mutual_inductance(a, b, z), m, 1e-12);
    }

    #[test]
    fn law_near_circles_are_a_ring() {
        // µ0 a (ln(8a/d) − 2), the next terms being of order d/a · ln.
        let a = 1.0;
        for d in [1e-6, 1e-9, 1e-12] {
            let ring = VACUUM_PERMEABILITY_H_M * a * ((8.0 * a / d).ln() - 2.0);
            close(mutual_inductance(a, a, d), ring, 1e-11);
        }
        assert_eq!(mutual_inductance(1.0, 1.0, 0.0), f64::INFINITY);
    }

    #[test]
    fn law_a_row_is_its_elements() {
        let b = [1e-4, 1.0001e-4, 3e-4, 2e-6];
        for z in [1e-7, 1e-6, 4e-5, 1e-3] {
            let mut row = [0.0; 4];
            mutual_row(1e-4, &b, z, &mut row);
            for (b, m) in b.iter().zip(row) {
                // The closest pair is 5e-4 of the diameter apart.
                close(m, mutual_inductance(1e-4, *b, z), 1e-11);
            }
        }
        // Level circles, 5e-5 of the diameter apart and more.
        let mut row = [0.0; 3];
        mutual_row(1e-4, &b[1..], 0.0, &mut row);
        for (b, m) in b[1..].iter().zip(row) {
            close(m, mutual_inductance(1e-4, *b, 0.0), 1e-11);
        }
    }
}
