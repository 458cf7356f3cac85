//! One transistor at its junction temperature: on-resistance, capacitances, leakage. All per metre of gate width.

use super::{Transistor, TransistorPair};
use crate::numerics::scalar::Scalar;

/// Boltzmann's constant over the elementary charge, V/K (CODATA 2018, both exact).
const BOLTZMANN_OVER_CHARGE: f64 = 1.380649e-23 / 1.602176634e-19;

/// Temperature at which a technology states its figures, K.
pub const REFERENCE_TEMPERATURE_K: f64 = 300.15;

/// Both devices of a pair at temperature.
#[derive(Debug, Clone, Copy)]
pub struct WarmPair {
    /// The n-channel device.
    pub nmos: WarmTransistor,
    /// The p-channel device.
    pub pmos: WarmTransistor,
}

impl WarmPair {
    /// The pair at junction temperature `temperature_k`.
    pub fn new(pair: &TransistorPair, temperature_k: f64) -> Self {
        Self {
            nmos: WarmTransistor::new(&pair.nmos, temperature_k),
            pmos: WarmTransistor::new(&pair.pmos, temperature_k),
        }
    }

    /// The n- and the p-channel device.
    pub fn both(&self) -> [&WarmTransistor; 2] {
        [&self.nmos, &self.pmos]
    }
}

/// A transistor with everything that depends on temperature alone worked out.
#[derive(Debug, Clone, Copy)]
pub struct WarmTransistor {
    /// Threshold V_T, V.
    pub threshold_v: f64,
    /// Slope factor n.
    pub slope: f64,
    /// Access resistance r_acc, Ω·m.
    pub access_resistance_ohm_m: f64,
    /// Gate capacitance c_gate, F/m.
    pub gate_capacitance_f_m: f64,
    /// Drain overlap c_gd, F/m.
    pub overlap_capacitance_f_m: f64,
    /// Off current, A/m, equation (3).
    pub off_current_a_m: f64,
    /// 2nφ_t, V.
    double_slope_v: f64,
    /// (k'/L)(T_j/T0)^{m_µ}, A/V² per metre of width.
    low_field_gain_a_v2_m: f64,
    degradation_per_v: f64,
    junction_capacitance_f_m: f64,
    junction_grading: f64,
    junction_potential_v: f64,
}

impl WarmTransistor {
    /// `transistor` at junction temperature `temperature_k`.
    ///
    /// The off current follows
    /// `i_off0 (φ_t/φ_t0)² (T_j/T0)^{m_µ} exp(V_T0/(nφ_t0) − V_T/(nφ_t))` (3), the subthreshold law of the same
    /// charge-sheet interpolation as the on-resistance.
    pub fn new(transistor: &Transistor, temperature_k: f64) -> Self {
        let thermal_v = BOLTZMANN_OVER_CHARGE * temperature_k;
        let thermal_reference_v = BOLTZMANN_OVER_CHARGE * REFERENCE_TEMPERATURE_K;
        let threshold_v = transistor.threshold_v
            + transistor.threshold_drift_v_k * (temperature_k - REFERENCE_TEMPERATURE_K);
        let n = transistor.slope;
        let mobility = (temperature_k / REFERENCE_TEMPERATURE_K).powf(transistor.mobility_exponent);
        let off_current_a_m = transistor.off_current_a_m
            * (thermal_v / thermal_reference_v).powi(2)
            * mobility
            * (transistor.threshold_v / (n * thermal_reference_v) - threshold_v / (n * thermal_v))
                .exp();
        Self {
            threshold_v,
            slope: n,
            access_resistance_ohm_m: transistor.access_resistance_ohm_m,
            gate_capacitance_f_m: transistor.gate_capacitance_f_m,
            overlap_capacitance_f_m: transistor.overlap_capacitance_f_m,
            off_current_a_m,
            double_slope_v: 2.0 * n * thermal_v,
            low_field_gain_a_v2_m: transistor.transconductance_a_v2 / transistor.length_m
                * mobility,
            degradation_per_v: transistor.degradation_per_v,
            junction_capacitance_f_m: transistor.junction_capacitance_f_m,
            junction_grading: transistor.junction_grading,
            junction_potential_v: transistor.junction_potential_v,
        }
    }

    /// V_ov(V) = 2nφ_t ln(1 + e^u), u = (V − V_T)/(2nφ_t), V.
    #[inline]
    pub fn overdrive_v<S: Scalar>(&self, gate_v: S) -> S {
        self.normalised(gate_v).softplus() * self.double_slope_v
    }

    /// β_w = (k'/L)(T_j/T0)^{m_µ}/(1 + θV_ov), A/V² per metre of width.
    #[inline]
    pub fn gain_a_v2_m<S: Scalar>(&self, overdrive_v: S) -> S {
        S::constant(self.low_field_gain_a_v2_m) / (overdrive_v * self.degradation_per_v + 1.0)
    }

    /// On-resistance of a metre of width without the access resistance, Ω·m:
    /// `1/(β_w V_ov /(1+e^{−u}))`, the drain conductance at V_DS = 0 of the charge-sheet interpolation of
    /// Enz, Krummenacher and Vittoz (1995); equation (1) less r_acc.
    #[inline]
    pub fn channel_resistance_ohm_m<S: Scalar>(&self, gate_v: S) -> S {
        let u = self.normalised(gate_v);
        let overdrive_v = u.softplus() * self.double_slope_v;
        S::one() / (self.gain_a_v2_m(overdrive_v) * overdrive_v * u.logistic())
    }

    /// On-resistance of a metre of width, Ω·m, equation (1).
    pub fn on_resistance_ohm_m<S: Scalar>(&self, gate_v: S) -> S {
        self.channel_resistance_ohm_m(gate_v) + self.access_resistance_ohm_m
    }

    /// Drain junction, charge-equivalent over 0..`swing_v`, F/m:
    /// `(c_j0 φ_b/((1−m_j)V)) [(1 + V/φ_b)^{1−m_j} − 1]` (2), the integral of the graded junction's
    /// `c_j0/(1 + V/φ_b)^{m_j}` over the swing.
    #[inline]
    pub fn junction_capacitance_f_m<S: Scalar>(&self, swing_v: S) -> S {
        let rest = 1.0 - self.junction_grading;
        let stretch = (swing_v / self.junction_potential_v + 1.0).powf(rest) - 1.0;
        stretch * (self.junction_capacitance_f_m * self.junction_potential_v / rest) / swing_v
    }

    #[inline]
    fn normalised<S: Scalar>(&self, gate_v: S) -> S {
        (gate_v - self.threshold_v) / self.double_slope_v
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn demo() -> Transistor {
        Transistor {
            transconductance_a_v2: 280e-6,
            length_m: 60e-9,
            threshold_v: 0.35,
            threshold_drift_v_k: -0.8e-3,
            slope: 1.35,
            degradation_per_v: 0.5,
            mobility_exponent: -1.3,
            access_resistance_ohm_m: 200e-6,
            gate_capacitance_f_m: 0.95e-9,
            overlap_capacitance_f_m: 0.28e-9,
            junction_capacitance_f_m: 0.65e-9,
            junction_grading: 0.4,
            junction_potential_v: 0.8,
            off_current_a_m: 20e-3,
        }
    }

    /// Simpson's rule with 2,000 intervals on a smooth integrand.
    const QUADRATURE_TOLERANCE: f64 = 1e-10;

    #[test]
    fn law_strong_inversion_tends_to_the_triode_law() {
        let mut device = demo();
        device.degradation_per_v = 0.0;
        let warm = WarmTransistor::new(&device, REFERENCE_TEMPERATURE_K);
        // Far above threshold V_ov → V − V_T and r_on → L/(k'(V − V_T)) + r_acc; the distance falls as e^{−u}.
        let expected = 60e-9 / (280e-6 * (3.0 - 0.35)) + 200e-6;
        assert!((warm.on_resistance_ohm_m(3.0) / expected - 1.0).abs() < 1e-12);
    }

    #[test]
    fn law_junction_is_the_mean_over_the_swing() {
        let warm = WarmTransistor::new(&demo(), REFERENCE_TEMPERATURE_K);
        let (swing, intervals) = (1.2, 2000);
        let c = |v: f64| 0.65e-9 / (1.0 + v / 0.8f64).powf(0.4);
        let h = swing / intervals as f64;
        let sum: f64 = (0..intervals)
            .map(|i| {
                let v = i as f64 * h;
                h / 6.0 * (c(v) + 4.0 * c(v + h / 2.0) + c(v + h))
            })
            .sum();
        let mean = sum / swing;
        assert!((warm.junction_capacitance_f_m(swing) / mean - 1.0).abs() < QUADRATURE_TOLERANCE);
    }

    #[test]
    fn law_resistance_falls_with_gate_voltage_and_leakage_grows_with_temperature() {
        let warm = WarmTransistor::new(&demo(), 330.0);
        let mut last = f64::INFINITY;
        for i in 0..=30 {
            let r = warm.on_resistance_ohm_m(-0.5 + 0.1 * i as f64);
            assert!(r < last && r.is_finite());
            last = r;
        }
        let cold = WarmTransistor::new(&demo(), 250.0);
        assert!(cold.off_current_a_m < warm.off_current_a_m);
        let reference = WarmTransistor::new(&demo(), REFERENCE_TEMPERATURE_K);
        assert!((reference.off_current_a_m / 20e-3 - 1.0).abs() < 1e-14);
    }
}
