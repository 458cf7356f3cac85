//! The switched linear circuit of equation (13) and its phases.
//!
//! States, in this order: drain voltage of leg 1, (two legs) drain voltage of leg 2, series-capacitor voltage, loop
//! current times a reference resistance, (low-pass) output voltage. The reference resistance √(L/C_d) makes the
//! matrix entries comparable, so its exponential takes the fewest halvings.
//!
//! Two legs run half a period apart, so the second half period is the first one mirrored
//! (v_d1 ↔ v_d2, v_c → −v_c, i → −i, v_o → −v_o): only half a period is worked out.

use crate::numerics::matrix::{Column, Matrix};
use crate::numerics::scalar::Scalar;
use crate::stage::network::LoadNetwork;

/// Everything the steady state depends on.
#[derive(Debug, Clone, Copy)]
pub struct Circuit<S> {
    /// 1/f, s.
    pub period_s: f64,
    /// Legs B, 1 or 2.
    pub legs: u32,
    /// V_DD, V.
    pub supply_v: S,
    /// Dead time δ, a fraction of the period.
    pub dead_time: S,
    /// C_d of a leg, F, plates included.
    pub drain_capacitance_f: S,
    /// R_n and R_p, Ω.
    pub on_resistance_ohm: [S; 2],
    /// What the legs drive.
    pub network: LoadNetwork<S>,
}

/// Where each state stands in the column.
#[derive(Debug, Clone, Copy)]
pub(super) struct Order {
    pub capacitor: usize,
    pub current: usize,
    pub output: Option<usize>,
}

/// One of the two kinds of phase.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Switches {
    /// One leg: P on. Two legs: P of leg 1 and N of leg 2 on.
    PullUp,
    /// All off.
    Open,
    /// One leg: N on. Two legs: does not occur in the first half period.
    PullDown,
}

impl<S: Scalar> Circuit<S> {
    /// Number of states, 3 to 5.
    pub fn size(&self) -> usize {
        2 + self.legs as usize + usize::from(self.network.shunt.is_some())
    }

    pub(super) fn order(&self) -> Order {
        let legs = self.legs as usize;
        Order {
            capacitor: legs,
            current: legs + 1,
            output: self.network.shunt.map(|_| legs + 2),
        }
    }

    /// √(L/C_d) without derivatives: any constant scaling gives the same answer.
    pub(super) fn reference_ohm(&self) -> f64 {
        (self.network.inductance_h.value() / self.drain_capacitance_f.value()).sqrt()
    }

    /// Resistance that holds the drain of `leg` in a phase; `None` when it floats.
    pub(super) fn holding_ohm(&self, switches: Switches, leg: usize) -> Option<S> {
        let [n, p] = self.on_resistance_ohm;
        match (switches, leg) {
            (Switches::Open, _) => None,
            (Switches::PullUp, 0) | (Switches::PullDown, 1) => Some(p),
            _ => Some(n),
        }
    }

    /// A of equation (13) for one phase, in the scaled states, 1/s.
    pub(super) fn matrix<const N: usize>(&self, switches: Switches) -> Matrix<S, N> {
        let order = self.order();
        let z = self.reference_ohm();
        let mut a = [[S::zero(); N]; N];
        let by_drain = S::one() / self.drain_capacitance_f;
        let by_inductor = S::one() / self.network.inductance_h;
        let i = order.current;
        for leg in 0..self.legs as usize {
            let sign = if leg == 0 { 1.0 } else { -1.0 };
            if let Some(r) = self.holding_ohm(switches, leg) {
                a[leg][leg] = -by_drain / r;
            }
            a[leg][i] = by_drain * (-sign / z);
            a[i][leg] = by_inductor * (sign * z);
        }
        a[order.capacitor][i] = S::one() / (self.network.series_capacitance_f * z);
        a[i][order.capacitor] = by_inductor * -z;
        let mut series = self.network.series_resistance_ohm();
        match (order.output, &self.network.shunt) {
            (Some(o), Some(shunt)) => {
                a[i][o] = by_inductor * -z;
                a[o][i] = S::one() / (shunt.capacitance_f * z);
                a[o][o] = -self.load_conductance() / shunt.capacitance_f;
            }
            _ => series = series + self.network.antenna_resistance_ohm,
        }
        a[i][i] = -by_inductor * series;
        a
    }

    /// 1/R_a + G_p, S.
    pub(super) fn load_conductance(&self) -> S {
        let loss = self.network.shunt.map_or(S::zero(), |s| s.loss_s);
        loss + 1.0 / self.network.antenna_resistance_ohm
    }

    /// The state in which a phase would come to rest: with it `ẋ = A(x − rest)` in every phase.
    pub(super) fn rest<const N: usize>(&self, switches: Switches) -> Column<S, N> {
        let mut rest = [S::zero(); N];
        if switches == Switches::PullUp {
            rest[0] = self.supply_v;
            rest[self.order().capacitor] = self.supply_v;
        }
        rest
    }
}
