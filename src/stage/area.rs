//! Silicon area of a stage, equation (17).

use super::driver::Chain;
use super::leg::Leg;
use super::network::LoadNetwork;
use crate::numerics::scalar::Scalar;
use crate::technology::{Capacitor, Layout};

/// Area by part, m².
#[derive(Debug, Clone, Copy)]
pub struct Area<S> {
    /// Output switches of all legs.
    pub switches_m2: S,
    /// Driver chains of all legs.
    pub drivers_m2: S,
    /// Series and shunt capacitors.
    pub capacitors_m2: S,
    /// Supply decoupling.
    pub decoupling_m2: S,
    /// Inductors with their keep-out.
    pub inductors_m2: S,
}

/// What areas follow from besides the design.
#[derive(Debug, Clone, Copy)]
pub struct AreaRules<'a> {
    /// The capacitor's density.
    pub capacitor: &'a Capacitor,
    /// Widths and decoupling.
    pub layout: &'a Layout,
    /// PMOS/NMOS ratio of the chain β_r.
    pub driver_ratio: f64,
    /// Carrier, Hz.
    pub frequency_hz: f64,
}

impl<S: Scalar> Area<S> {
    /// `A = B s (W_n+W_p)a_w + B Σw_i(1+β_r)a_w + capacitors/density + decap + inductors` (17), the decoupling
    /// `(P_total/(V_DD f))/(ripple V_DD)` over its density. Each leg owns a series capacitor of B·C_s.
    pub fn new(
        rules: &AreaRules<'_>,
        leg: &Leg<S>,
        chain: &Chain<S>,
        network: &LoadNetwork<S>,
        coil_area_m2: S,
        total_power_w: S,
    ) -> Self {
        let (capacitor, layout) = (rules.capacitor, rules.layout);
        let legs = f64::from(leg.legs);
        let width_area = layout.width_area_m;
        let [n, p] = leg.widths_m;
        let shunt = network.shunt.map_or(S::zero(), |s| s.capacitance_f);
        let charge = total_power_w / (leg.supply_v * rules.frequency_hz);
        Self {
            switches_m2: (n + p) * (legs * f64::from(leg.stack) * width_area),
            drivers_m2: chain.nmos_width_sum_m * (legs * (1.0 + rules.driver_ratio) * width_area),
            capacitors_m2: (network.series_capacitance_f * (legs * legs) + shunt)
                / capacitor.density_f_m2,
            decoupling_m2: charge
                / (leg.supply_v * layout.supply_ripple)
                / layout.decoupling_density_f_m2,
            inductors_m2: coil_area_m2,
        }
    }

    /// The sum of the parts.
    pub fn total_m2(&self) -> S {
        self.switches_m2
            + self.drivers_m2
            + self.capacitors_m2
            + self.decoupling_m2
            + self.inductors_m2
    }
}
