//! Currents of the drawn stage over one period, and the metal each needs.

use super::snap::Fingers;
use crate::evaluate::{DrawnEvaluation, Figures, Setup};
use crate::technology::DrawingRules;
use serde::{Deserialize, Serialize};

/// One current of a leg (or of the antenna's side), and the metal for it.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct Current {
    /// A.
    pub rms_a: f64,
    /// A.
    pub mean_a: f64,
    /// Largest magnitude, A.
    pub peak_a: f64,
    /// Width of top metal that the larger of |mean| and RMS needs, m.
    pub top_metal_m: f64,
}

/// Every current that sets a width of metal.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct Currents {
    /// From the supply through P of a leg.
    pub supply: Current,
    /// Through N of a leg to ground.
    pub ground: Current,
    /// From both drains of a leg to its output node, `i_P − i_N`.
    pub drain: Current,
    /// Through the spiral of a leg, the loop current.
    pub inductor: Current,
    /// Through the series capacitor, the loop current as well.
    pub series_capacitor: Current,
    /// Through the shunt capacitor; none with the direct network.
    pub shunt_capacitor: Option<Current>,
    /// Through the antenna.
    pub antenna: Current,
    /// Mean of the drivers of a leg, A: `(P_gate + P_chain)/(B V)`; how it runs over a period is not modelled.
    pub driver_mean_a: f64,
}

/// The metal along the fingers of one device.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct Strip {
    /// RMS that leaves one strip between two fingers, A.
    pub rms_a: f64,
    /// Width it needs, m.
    pub needed_m: f64,
    /// Width it has, m.
    pub drawn_m: f64,
    /// Resistance of all strips in series with the side, Ω.
    pub resistance_ohm: f64,
}

/// Samples of a time function over part of a period.
struct Moments {
    mean: f64,
    square: f64,
    peak: f64,
}

/// Mean, mean square and peak over one period of what is `value(k)` from sample `from` for `duration` samples and 0
/// elsewhere, by trapezoids; the last piece of a sample keeps its value.
fn moments(samples: usize, from: usize, duration: f64, value: impl Fn(usize) -> f64) -> Moments {
    let whole = duration.floor() as usize;
    let mut sum = Moments {
        mean: 0.0,
        square: 0.0,
        peak: 0.0,
    };
    let mut add = |v: f64, weight: f64| {
        sum.mean += weight * v;
        sum.square += weight * v * v;
        sum.peak = sum.peak.max(v.abs());
    };
    for k in 0..whole {
        add(value((from + k) % samples), 0.5);
        // A whole period is closed by its first sample.
        add(value((from + k + 1) % samples), 0.5);
    }
    add(value((from + whole) % samples), duration - whole as f64);
    let n = samples as f64;
    Moments {
        mean: sum.mean / n,
        square: sum.square / n,
        peak: sum.peak,
    }
}

fn current(rules: &DrawingRules, m: &Moments) -> Current {
    let rms_a = m.square.sqrt();
    Current {
        rms_a,
        mean_a: m.mean,
        peak_a: m.peak,
        top_metal_m: rms_a.max(m.mean.abs()) / rules.top_current_a_m,
    }
}

/// The currents, from samples of one exact period that starts when P turns on:
/// `i_P = (V_DD − v_d)/R_p` for T(½ − δ) from there, `i_N = v_d/R_n` for as long from T/2, the loop current i,
/// `i_a = v_o/R_a`, `i_Cp = i − v_o(1/R_a + ω0 C_p/Q_c)`. Crowbar and leakage are left out.
pub fn currents(
    setup: &Setup,
    rules: &DrawingRules,
    drawn: &DrawnEvaluation,
    figures: &Figures,
) -> Currents {
    let wave = &drawn.waveform;
    let design = &drawn.evaluation.design;
    let n = wave.drain_v.len();
    let all = n as f64;
    let on = (0.5 - design.dead_time) * all;
    let (supply_v, r_n, r_p) = (
        design.supply_v,
        figures.on_resistance_n_ohm,
        figures.on_resistance_p_ohm,
    );
    let supply = moments(n, 0, on, |k| (supply_v - wave.drain_v[k]) / r_p);
    let ground = moments(n, n / 2, on, |k| wave.drain_v[k] / r_n);
    // P and N are never on together.
    let drain = Moments {
        mean: supply.mean - ground.mean,
        square: supply.square + ground.square,
        peak: supply.peak.max(ground.peak),
    };
    let inductor = current(rules, &moments(n, 0, all, |k| wave.current_a[k]));
    let antenna_s = 1.0 / setup.network.antenna_resistance_ohm;
    let shunt_capacitor = figures.shunt_capacitance_f.map(|c| {
        let loss_s = setup.network.angular_frequency * c / setup.network.capacitor_quality;
        let i = |k: usize| wave.current_a[k] - wave.output_v[k] * (antenna_s + loss_s);
        current(rules, &moments(n, 0, all, i))
    });
    let driver_w = figures.losses_w.gate + figures.losses_w.driver_chain;
    let swing_v = setup.swing_v(supply_v);
    Currents {
        supply: current(rules, &supply),
        ground: current(rules, &ground),
        drain: current(rules, &drain),
        inductor,
        series_capacitor: inductor,
        shunt_capacitor,
        antenna: current(rules, &moments(n, 0, all, |k| wave.output_v[k] * antenna_s)),
        driver_mean_a: driver_w / (f64::from(setup.legs) * swing_v),
    }
}

/// Share of the routing resistance that fingers may take; the rest is for the wires to them.
const FINGERS_SHARE: f64 = 0.5;

/// Widest finger whose metal carries its share and leaves room in the budget `route_ohm` (0: no budget), m. A strip
/// between two fingers takes both their currents, `2 (finger/W) I ≤ J w`; all strips of many fingers have
/// `(4/3) R_sq finger²/(w W)` a device, at most half of the budget.
pub fn most_finger_m(
    rules: &DrawingRules,
    width_m: f64,
    stack: u32,
    rms_a: f64,
    route_ohm: f64,
) -> f64 {
    let metal_m = rules.finger_metal_width_m;
    let by_current = rules.finger_current_a_m * metal_m * width_m / (2.0 * rms_a);
    let strips = 4.0 / 3.0 * rules.finger_sheet_resistance_ohm * f64::from(stack);
    let by_resistance = (FINGERS_SHARE * route_ohm * metal_m * width_m / strips).sqrt();
    if route_ohm > 0.0 && strips > 0.0 {
        by_current.min(by_resistance)
    } else {
        by_current
    }
}

/// The strips of a device of n fingers, M of them side by side, `stack` in series, carrying `rms_a`.
///
/// Current gathers evenly along a strip of length l, `∫(Ix/l)² dR = I²R/3`. n/2 drains carry 2I/n each; of the
/// sources n/2 − 1 carry 2I/n, two at the ends I/n. The dissipations add to `I² R (4n − 2)/(3n²)`, R that of one strip.
pub fn strip(rules: &DrawingRules, fingers: &Fingers, stack: u32, rms_a: f64) -> Strip {
    let (n, m) = (f64::from(fingers.fingers), f64::from(fingers.devices));
    let strip_a = 2.0 * rms_a / (n * m);
    let squares = fingers.finger_m / rules.finger_metal_width_m;
    Strip {
        rms_a: strip_a,
        needed_m: strip_a / rules.finger_current_a_m,
        drawn_m: rules.finger_metal_width_m,
        resistance_ohm: rules.finger_sheet_resistance_ohm * squares * (4.0 * n - 2.0)
            / (3.0 * n * n * m)
            * f64::from(stack),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// 4096 trapezoids of a half sine are within 1e-6 of its integrals.
    const TRAPEZOIDS: f64 = 1e-6;

    /// A half sine of 1: mean 1/π, mean square ¼, peak 1 (textbook).
    #[test]
    fn published_moments_of_a_half_sine() {
        let n = 4096;
        let m = moments(n, 0, 0.5 * n as f64, |k| {
            (std::f64::consts::TAU * k as f64 / n as f64).sin()
        });
        assert!((m.mean - std::f64::consts::FRAC_1_PI).abs() < TRAPEZOIDS);
        assert!((m.square - 0.25).abs() < TRAPEZOIDS && (m.peak - 1.0).abs() < TRAPEZOIDS);
    }

    const RULES: DrawingRules = DrawingRules {
        grid_m: 5e-9,
        least_finger_m: 0.5e-6,
        most_finger_m: 10e-6,
        most_fingers: 100,
        finger_pitch_m: 0.5e-6,
        finger_metal_width_m: 0.2e-6,
        finger_sheet_resistance_ohm: 0.03,
        finger_current_a_m: 5e3,
        top_current_a_m: 16e3,
        current_temperature_k: 378.15,
        capacitor_unit_f: 75e-15,
    };

    /// The dissipation of every strip of two devices of six fingers added up piece by piece, a piece carrying what has
    /// gathered by its middle, is I² times the resistance stated.
    #[test]
    fn law_strips_dissipate_what_their_resistance_says() {
        /// The midpoint rule on a square in a thousand pieces is off by 1/(4·1000²).
        const PIECES: u32 = 1000;
        const MIDPOINTS: f64 = 1e-6;
        let cut = Fingers {
            wanted_width_m: 48e-6,
            width_m: 48e-6,
            finger_m: 4e-6,
            fingers: 6,
            devices: 2,
        };
        let total_a = 0.03;
        let each_a = total_a / 12.0;
        let piece_ohm = 0.03 * 20.0 / f64::from(PIECES);
        // Source, drain, source, drain, source, drain, source; the ends serve one finger.
        let served = [1.0, 2.0, 2.0, 2.0, 2.0, 2.0, 1.0];
        let mut power_w = 0.0;
        for strip_a in served.map(|fingers| fingers * each_a) {
            for piece in 0..PIECES {
                let gathered = strip_a * (f64::from(piece) + 0.5) / f64::from(PIECES);
                power_w += 2.0 * gathered * gathered * piece_ohm;
            }
        }
        let strip = strip(&RULES, &cut, 1, total_a);
        let stated_w = total_a * total_a * strip.resistance_ohm;
        assert!((stated_w / power_w - 1.0).abs() < MIDPOINTS);
        assert!((strip.rms_a / (2.0 * each_a) - 1.0).abs() < 1e-12);
    }

    /// At the widest finger the strip is full, or its resistance takes half of the budget.
    #[test]
    fn law_the_widest_finger_uses_up_current_or_budget() {
        /// (4/3)/n stands for (4n − 2)/(3n²).
        const MANY_FINGERS: f64 = 0.02;
        let width_m = 800e-6;
        let at = |rms_a, route_ohm| {
            let finger_m = most_finger_m(&RULES, width_m, 1, rms_a, route_ohm);
            let fingers = (width_m / finger_m / 2.0).round() as u32;
            let cut = Fingers {
                wanted_width_m: width_m,
                width_m,
                finger_m,
                fingers,
                devices: 2,
            };
            strip(&RULES, &cut, 1, rms_a)
        };
        let full = at(0.2, 0.0);
        assert!((full.needed_m / full.drawn_m - 1.0).abs() < MANY_FINGERS);
        let half = at(1e-3, 0.02);
        assert!((half.resistance_ohm / 0.01 - 1.0).abs() < MANY_FINGERS);
    }
}
