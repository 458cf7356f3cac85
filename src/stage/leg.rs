//! The output leg: switches, their on-resistance at the current that flows, their charge, leakage and overlap.

use crate::numerics::complex::Complex;
use crate::numerics::root::increasing_root;
use crate::numerics::scalar::{Dual, Scalar};
use crate::technology::transistor::{WarmPair, WarmTransistor};
use std::f64::consts::{FRAC_2_PI, PI};

/// ⟨|I|³⟩/⟨I²⟩ of a half sine over its peak.
const CURRENT_WEIGHT: f64 = 8.0 / (3.0 * PI);

/// What the leg's switches are, apart from the current they carry.
#[derive(Debug, Clone, Copy)]
pub struct Leg<S> {
    /// Legs B.
    pub legs: u32,
    /// Devices a side s.
    pub stack: u32,
    /// V_DD, V.
    pub supply_v: S,
    /// The driver's swing V, V.
    pub swing_v: S,
    /// W_n and W_p, m.
    pub widths_m: [S; 2],
    /// R_route, Ω.
    pub routing_resistance_ohm: f64,
}

/// The switches at the current they carry.
#[derive(Debug, Clone, Copy)]
pub struct OnState<S> {
    /// R_n and R_p, Ω, equation (4).
    pub resistance_ohm: [S; 2],
}

impl<S: Scalar> Leg<S> {
    /// The same leg with its values as constants of another scalar.
    fn lifted<T: Scalar>(&self) -> Leg<T> {
        Leg {
            legs: self.legs,
            stack: self.stack,
            supply_v: T::constant(self.supply_v.value()),
            swing_v: T::constant(self.swing_v.value()),
            widths_m: self.widths_m.map(|w| T::constant(w.value())),
            routing_resistance_ohm: self.routing_resistance_ohm,
        }
    }

    /// R_n and R_p at the peak current that flows into the loop impedance `z` at the carrier:
    ///
    /// `Î = (2/π)V_DD B/|B(R_n+R_p)/2 + Z(ω0)|` with (4). One root, since the right side falls as Î grows.
    /// Returns `None` when the numbers leave the floating-point range.
    pub fn on_state(&self, pair: &WarmPair, z: Complex<S>) -> Option<OnState<S>> {
        let plain: Leg<Dual<1>> = self.lifted();
        let z_plain = Complex::new(Dual::constant(z.re.value()), Dual::constant(z.im.value()));
        let channels = self.nominal_channels(pair);
        let channels_plain = channels.map(|c| Dual::constant(c.value()));
        let f = |current: f64| {
            let r =
                plain.current_residual(pair, &channels_plain, z_plain, Dual::variable(current, 0));
            (r.value, r.partials[0])
        };
        let drive = FRAC_2_PI * self.supply_v.value() * f64::from(self.legs);
        let highest = -f(0.0).0 / z.norm().value().max(f64::MIN_POSITIVE);
        let highest = highest.max(drive / z.norm().value());
        // With no current the switches are at their least resistance, so this is never below the root.
        let start = drive
            / plain
                .loop_norm(pair, &channels_plain, z_plain, Dual::zero())
                .value();
        let root = increasing_root(0.0, highest, start, f)?;
        let slope = f(root).1;
        // One Newton step in S carries the derivatives across the implicit equation.
        let at_root = S::constant(root);
        let current = at_root - self.current_residual(pair, &channels, z, at_root) / slope;
        let resistance_ohm = self.resistances(pair, &channels, current);
        resistance_ohm
            .iter()
            .all(|r| r.value().is_finite())
            .then_some(OnState { resistance_ohm })
    }

    /// Channel resistance of a metre at the nominal swing, Ω·m.
    fn nominal_channels(&self, pair: &WarmPair) -> [S; 2] {
        pair.both()
            .map(|device| device.channel_resistance_ohm_m(self.swing_v))
    }

    fn resistances(&self, pair: &WarmPair, channels: &[S; 2], current: S) -> [S; 2] {
        let devices = pair.both();
        [0, 1].map(|i| {
            self.side_resistance(devices[i], self.widths_m[i], channels[i], current)
                + self.routing_resistance_ohm
        })
    }

    /// Devices of one side in series, Ω, equation (4) without the route.
    fn side_resistance(&self, device: &WarmTransistor, width_m: S, channel: S, current: S) -> S {
        let switch = stretched(device, self.swing_v, channel, width_m, current);
        if self.stack == 1 {
            return switch / width_m;
        }
        let drop = current * switch / width_m * CURRENT_WEIGHT;
        let cascode_v = self.swing_v - drop;
        let cascode = stretched(
            device,
            cascode_v,
            device.channel_resistance_ohm_m(cascode_v),
            width_m,
            current,
        );
        (switch + cascode) / width_m
    }

    fn loop_norm(&self, pair: &WarmPair, channels: &[S; 2], z: Complex<S>, current: S) -> S {
        let [n, p] = self.resistances(pair, channels, current);
        Complex::new((n + p) * (0.5 * f64::from(self.legs)) + z.re, z.im).norm()
    }

    /// `Î·|loop| − (2/π)V_DD B`, rising in Î.
    fn current_residual(&self, pair: &WarmPair, channels: &[S; 2], z: Complex<S>, current: S) -> S {
        current * self.loop_norm(pair, channels, z, current)
            - self.supply_v * (FRAC_2_PI * f64::from(self.legs))
    }

    /// C_d of a leg without the capacitor's plate, F: `Σ W [c_j(V_DD) + c_gd]` (5).
    pub fn drain_capacitance_f(&self, pair: &WarmPair) -> S {
        self.sum(pair, |device, width| {
            width
                * (device.junction_capacitance_f_m(self.supply_v) + device.overlap_capacitance_f_m)
        })
    }

    /// C_g of a leg, F: `Σ W [c_gate + c_gd(1 + v_r/(sV))]` (6), `residual_v` the drain voltages still to swing
    /// when N and P turn on.
    pub fn gate_capacitance_f(&self, pair: &WarmPair, residual_v: [S; 2]) -> S {
        let stacked_v = self.swing_v * f64::from(self.stack);
        let devices = pair.both();
        let mut total = S::zero();
        for i in 0..2 {
            total += self.widths_m[i]
                * ((residual_v[i] / stacked_v + 1.0) * devices[i].overlap_capacitance_f_m
                    + devices[i].gate_capacitance_f_m);
        }
        total
    }

    /// P_mid of a leg, W, stacked only: `fV Σ W [c_j(V) + c_gate + 2c_gd](V − V_T/2)`.
    pub fn mid_node_power_w(&self, pair: &WarmPair, frequency_hz: f64) -> S {
        if self.stack == 1 {
            return S::zero();
        }
        self.sum(pair, |device, width| {
            let charge = (device.junction_capacitance_f_m(self.swing_v)
                + (device.gate_capacitance_f_m + 2.0 * device.overlap_capacitance_f_m))
                * (self.swing_v - 0.5 * device.threshold_v);
            width * charge
        }) * self.swing_v
            * frequency_hz
    }

    /// P_leak of all legs, W: `B V_DD ½ Σ i_off W`, halved when stacked.
    pub fn leakage_power_w(&self, pair: &WarmPair) -> S {
        let current = self.sum(pair, |device, width| width * device.off_current_a_m);
        current * self.supply_v * (0.5 * f64::from(self.legs) / f64::from(self.stack))
    }

    /// P_x of all legs, W, after Veendrick (JSSC 1984), widened for a dead time `δT` and a full-swing ramp
    /// `τ = t_edge/0.8`:
    /// `B f (β_eff/12) max(0, V(1 − δT/τ) − V_Tn − |V_Tp|)³ τ (V_DD/V)`, `β_eff = √(β_n W_n β_p W_p)/s` (7).
    pub fn crowbar_power_w(
        &self,
        pair: &WarmPair,
        frequency_hz: f64,
        dead_time_s: S,
        edge_time_s: S,
    ) -> S {
        let ramp_s = edge_time_s / 0.8;
        let overlap_v = ((S::one() - dead_time_s / ramp_s) * self.swing_v
            - pair.nmos.threshold_v
            - pair.pmos.threshold_v)
            .positive_part();
        let devices = pair.both();
        let [n, p] = [0, 1].map(|i| {
            devices[i].gain_a_v2_m(devices[i].overdrive_v(self.swing_v)) * self.widths_m[i]
        });
        let gain = (n * p).sqrt() / f64::from(self.stack);
        gain * overlap_v * overlap_v * overlap_v * ramp_s * self.supply_v / self.swing_v
            * (f64::from(self.legs) * frequency_hz / 12.0)
    }

    /// Overdrive use of both devices: `√2 I_rms r_on(V)/W/V_ov(V)`, I_rms that of the network current.
    pub fn overdrive_use(&self, pair: &WarmPair, network_current_rms_a: S) -> [S; 2] {
        let devices = pair.both();
        [0, 1].map(|i| {
            network_current_rms_a
                * std::f64::consts::SQRT_2
                * devices[i].on_resistance_ohm_m(self.swing_v)
                / self.widths_m[i]
                / devices[i].overdrive_v(self.swing_v)
        })
    }

    fn sum(&self, pair: &WarmPair, term: impl Fn(&WarmTransistor, S) -> S) -> S {
        term(&pair.nmos, self.widths_m[0]) + term(&pair.pmos, self.widths_m[1])
    }
}

/// r̂ of one device, Ω·m: the triode law I = β(V_ov V − nV²/2) solved for V to second order and averaged over a half
/// sine with the dissipation as weight,
/// `r̂ = (r_on − r_acc)(1 + (8/3π)y + 1.5y²) + r_acc`, `y = nÎ(r_on − r_acc)/(2V_ov W)` (4).
fn stretched<S: Scalar>(
    device: &WarmTransistor,
    gate_v: S,
    channel: S,
    width_m: S,
    current: S,
) -> S {
    let y = current * channel * (0.5 * device.slope) / (device.overdrive_v(gate_v) * width_m);
    channel * (y * CURRENT_WEIGHT + y * y * 1.5 + 1.0) + device.access_resistance_ohm_m
}
