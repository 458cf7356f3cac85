//! The named losses of a stage. Their sum is the total power less the output power, to rounding.

use crate::numerics::scalar::Scalar;
use serde::{Deserialize, Serialize};

/// Every loss of all legs, W.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct Losses<S> {
    /// On-resistances carrying the network current.
    pub conduction: S,
    /// The switches' whole dissipation less conduction: charging the drains. Slightly negative near soft
    /// switching, where part of the network current comes from the drain capacitance and not through the switch.
    pub drain_charge: S,
    /// Overlap current of the output devices.
    pub crowbar: S,
    /// Charging the output devices' gates.
    pub gate: S,
    /// The driver stages before them.
    pub driver_chain: S,
    /// The inductor's series resistance.
    pub inductor: S,
    /// Series and shunt capacitor.
    pub capacitor: S,
    /// Off currents.
    pub leakage: S,
    /// Power delivered to the antenna at other than the carrier.
    pub harmonics: S,
    /// Balun or filter behind the port.
    pub balun: S,
    /// Mid nodes of a stacked leg.
    pub mid_node: S,
}

/// Names of the losses, in the order of [`Losses::terms`].
pub const LOSS_NAMES: [&str; 11] = [
    "conduction",
    "drain_charge",
    "crowbar",
    "gate",
    "driver_chain",
    "inductor",
    "capacitor",
    "leakage",
    "harmonics",
    "balun",
    "mid_node",
];

impl<S: Scalar> Losses<S> {
    /// The losses in the order of [`LOSS_NAMES`].
    pub fn terms(&self) -> [S; 11] {
        [
            self.conduction,
            self.drain_charge,
            self.crowbar,
            self.gate,
            self.driver_chain,
            self.inductor,
            self.capacitor,
            self.leakage,
            self.harmonics,
            self.balun,
            self.mid_node,
        ]
    }

    /// The sum of the terms, W.
    pub fn total(&self) -> S {
        let terms = self.terms();
        terms[1..].iter().fold(terms[0], |sum, &term| sum + term)
    }
}
