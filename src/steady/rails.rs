//! Extremes of the drain voltage in a dead time: a body diode would conduct outside the clamps.

use super::period::Phase;
use crate::numerics::matrix::Exponential;
use crate::numerics::scalar::Scalar;

/// Lowest and highest drain voltage in one dead time of leg 1, its ends included.
#[derive(Debug, Clone, Copy)]
pub struct DeadTimeSpan<S> {
    /// V.
    pub lowest_v: S,
    /// V.
    pub highest_v: S,
}

/// Pieces in which the loop current is looked at for a change of sign: `v̇_d = −i/C_d`, so the drain voltage turns
/// where the current does. A dead time is a fraction of a period and the loop's ringing at the floating drain a few
/// times the carrier at most, so a piece holds one turn at the most.
const PIECES: usize = 8;

/// The span of the drain voltage of `leg` over an open phase; `current` is the state's index of the loop current. `None`
/// outside the floating-point range.
pub(super) fn span<S: Scalar, const N: usize>(
    exponential: &Exponential<S, N>,
    phase: &Phase<S, N>,
    leg: usize,
    current: usize,
) -> Option<DeadTimeSpan<S>> {
    // An open phase rests at zero, so states stand for themselves.
    let mut span = DeadTimeSpan {
        lowest_v: phase.from_rest[leg],
        highest_v: phase.from_rest[leg],
    };
    span.include(phase.to_rest[leg]);
    let start = phase.from_rest.map(S::value);
    let mut currents = [0.0; PIECES + 1];
    currents[0] = start[current];
    currents[PIECES] = phase.to_rest[current].value();
    exponential.eighths(&start, |k, state| currents[k] = state[current]);
    for (piece, ends) in currents.windows(2).enumerate() {
        if ends[0] * ends[1] < 0.0 {
            let at = |k: usize| k as f64 / PIECES as f64;
            let turn = crossing((at(piece), ends[0]), (at(piece + 1), ends[1]), |f| {
                exponential.part(f, &start)[current]
            });
            // At the turn the voltage does not move with time, so its derivatives are those at a fixed fraction.
            span.include(exponential.moving_part(turn, &phase.from_rest)?[leg]);
        }
    }
    Some(span)
}

impl<S: Scalar> DeadTimeSpan<S> {
    fn include(&mut self, v: S) {
        if v.value() < self.lowest_v.value() {
            self.lowest_v = v;
        }
        if v.value() > self.highest_v.value() {
            self.highest_v = v;
        }
    }
}

/// Zero of `f` between two points of opposite sign: secants kept in the bracket (Illinois variant of false position,
/// Dowell and Jarratt 1971). The voltage is flat there, so 1e-9 of the phase leaves 1e-18 of its swing.
pub(super) fn crossing(mut a: (f64, f64), mut b: (f64, f64), f: impl Fn(f64) -> f64) -> f64 {
    const WIDTH: f64 = 1e-9;
    for _ in 0..60 {
        let x = b.0 - b.1 * (b.0 - a.0) / (b.1 - a.1);
        let y = f(x);
        if y == 0.0 || (x - b.0).abs() < WIDTH {
            return x;
        }
        if y * b.1 < 0.0 {
            a = b;
        } else {
            a.1 *= 0.5;
        }
        b = (x, y);
    }
    b.0
}
