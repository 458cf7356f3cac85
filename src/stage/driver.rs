//! The tapered chain that drives one leg's gates.

use super::Impossible;
use crate::numerics::scalar::Scalar;
use crate::technology::transistor::{WarmPair, WarmTransistor};

/// ln 9: from 10 % to 90 % of an exponential.
const LN_9: f64 = 2.197_224_577_336_219_4;

/// What every chain of a study shares.
#[derive(Debug, Clone, Copy)]
pub struct ChainGivens {
    /// C_in, F.
    pub input_capacitance_f: f64,
    /// PMOS/NMOS ratio β_r.
    pub ratio: f64,
    /// The drivers' own crowbar fraction κ.
    pub crowbar: f64,
}

/// One leg's chain of N tapered inverters.
#[derive(Debug, Clone, Copy)]
pub struct Chain<S> {
    /// Taper u_t.
    pub taper: S,
    /// Σ w_i over the stages, NMOS widths, m.
    pub nmos_width_sum_m: S,
    /// NMOS width of the last stage w_N, m.
    pub last_nmos_width_m: S,
    /// P_gate of the leg, W: the output devices' gates.
    pub gate_power_w: S,
    /// P_chain of the leg, W: everything before them.
    pub chain_power_w: S,
    /// t_edge at the output gates, 10 % to 90 %, s.
    pub edge_time_s: S,
}

/// c_in and c_self of an inverter a metre of its NMOS, F/m.
pub fn inverter_capacitances<S: Scalar>(pair: &WarmPair, ratio: f64, swing_v: S) -> (f64, S) {
    let gate = |d: &WarmTransistor| d.gate_capacitance_f_m + 2.0 * d.overlap_capacitance_f_m;
    let drain =
        |d: &WarmTransistor| d.junction_capacitance_f_m(swing_v) + d.overlap_capacitance_f_m;
    (
        gate(&pair.nmos) + ratio * gate(&pair.pmos),
        drain(&pair.nmos) + drain(&pair.pmos) * ratio,
    )
}

impl<S: Scalar> Chain<S> {
    /// The chain of `stages` inverters in front of a gate load of `gate_capacitance_f`.
    ///
    /// `u_t = (C_g/C_in)^{1/N}`, `w_i = C_in u_t^{i−1}/c_in` (8); `P_gate = (1+κ)fV²C_g` (9);
    /// `P_chain = (1+κ)fV²[Σ w_i c_self + Σ_{i≥2} C_in u_t^{i−1}]` (10);
    /// `t_edge = ln 9·(r_edge/w_N)(C_g + w_N c_self)` (11). Tapering after Hedenstierna and Jeppson (1987).
    ///
    /// # Errors
    /// [`Impossible::DriverSwing`] when a driver's saturation voltage is outside (0.1, 0.9) of the swing.
    pub fn new(
        givens: &ChainGivens,
        pair: &WarmPair,
        stages: u32,
        swing_v: S,
        frequency_hz: f64,
        gate_capacitance_f: S,
    ) -> Result<Self, Impossible> {
        let (input, own) = inverter_capacitances(pair, givens.ratio, swing_v);
        let taper = (gate_capacitance_f / givens.input_capacitance_f).powf(1.0 / f64::from(stages));
        let first_width_m = givens.input_capacitance_f / input;
        let mut power = S::one();
        let mut sum = S::zero();
        for _ in 1..stages {
            sum += power;
            power = power * taper;
        }
        // `power` is now u_t^{N−1}, `sum` + `power` the whole geometric sum.
        let widths = sum + power;
        let last_nmos_width_m = power * first_width_m;
        let nmos_width_sum_m = widths * first_width_m;
        let between_f = (widths - 1.0) * givens.input_capacitance_f;
        let energy = swing_v * swing_v * ((1.0 + givens.crowbar) * frequency_hz);
        let edge_ohm_m = edge_resistance_ohm_m(pair, givens.ratio, swing_v)?;
        Ok(Self {
            taper,
            nmos_width_sum_m,
            last_nmos_width_m,
            gate_power_w: energy * gate_capacitance_f,
            chain_power_w: energy * (nmos_width_sum_m * own + between_f),
            edge_time_s: edge_ohm_m / last_nmos_width_m
                * (gate_capacitance_f + last_nmos_width_m * own)
                * LN_9,
        })
    }
}

/// Input and own capacitance of a drawn inverter, F: c_in and c_self with N and P as wide as drawn.
pub fn drawn_capacitances_f(pair: &WarmPair, widths_m: [f64; 2], swing_v: f64) -> [f64; 2] {
    let [n, p] = widths_m;
    let (input, own) = inverter_capacitances(pair, p / n, swing_v);
    [n * input, n * own]
}

impl Chain<f64> {
    /// The chain as drawn, N and P of each stage with widths of their own, first stage first (not empty):
    /// (9) as it is, `P_chain = (1+κ)fV²[Σ C_self,i + Σ_{i≥2} C_in,i]`,
    /// `t_edge = ln 9·½(r_e,n/w_n + r_e,p/w_p)(C_g + C_self,N)`; with exact taper and ratio these are (10) and (11).
    /// The taper is the mean one, `nmos_width_sum_m` the NMOS widths at the ratio β_r that take the drawn area.
    ///
    /// # Errors
    /// As [`Chain::new`].
    pub fn drawn(
        givens: &ChainGivens,
        pair: &WarmPair,
        widths_m: &[[f64; 2]],
        swing_v: f64,
        frequency_hz: f64,
        gate_capacitance_f: f64,
    ) -> Result<Self, Impossible> {
        let last = widths_m.last().ok_or(Impossible::Numbers)?;
        let stages: Vec<[f64; 2]> = widths_m
            .iter()
            .map(|w| drawn_capacitances_f(pair, *w, swing_v))
            .collect();
        let own_f: f64 = stages.iter().map(|s| s[1]).sum();
        let between_f: f64 = stages[1..].iter().map(|s| s[0]).sum();
        let energy = swing_v * swing_v * ((1.0 + givens.crowbar) * frequency_hz);
        let edge_ohm = 0.5
            * (device_edge_resistance_ohm_m(&pair.nmos, swing_v)? / last[0]
                + device_edge_resistance_ohm_m(&pair.pmos, swing_v)? / last[1]);
        Ok(Self {
            taper: (gate_capacitance_f / stages[0][0]).powf(1.0 / stages.len() as f64),
            nmos_width_sum_m: widths_m.iter().map(|[n, p]| n + p).sum::<f64>()
                / (1.0 + givens.ratio),
            last_nmos_width_m: last[0],
            gate_power_w: energy * gate_capacitance_f,
            chain_power_w: energy * (own_f + between_f),
            edge_time_s: edge_ohm * (gate_capacitance_f + stages[stages.len() - 1][1]) * LN_9,
        })
    }
}

/// r_edge = ½(r_e,n + r_e,p/β_r), Ω·m.
fn edge_resistance_ohm_m<S: Scalar>(
    pair: &WarmPair,
    ratio: f64,
    swing_v: S,
) -> Result<S, Impossible> {
    let n = device_edge_resistance_ohm_m(&pair.nmos, swing_v)?;
    let p = device_edge_resistance_ohm_m(&pair.pmos, swing_v)?;
    Ok((n + p / ratio) * 0.5)
}

/// r_e of one polarity, Ω·m: C dv/dt = −I from 0.9 V to 0.1 V of the swing through saturation (half the access
/// resistance degenerates the source) and triode,
/// `r_e = [(0.9V − V_s)(2n/V_ov²)(1 + β_w V_ov r_acc/(2n)) + (1/V_ov) ln((2/n)(V_ov − 0.05nV)/(0.1V))]/(β_w ln 9) + r_acc`,
/// `V_s = V_ov/n`.
fn device_edge_resistance_ohm_m<S: Scalar>(
    device: &WarmTransistor,
    swing_v: S,
) -> Result<S, Impossible> {
    let n = device.slope;
    let overdrive = device.overdrive_v(swing_v);
    let saturation = overdrive / n;
    let fraction = (saturation / swing_v).value();
    if fraction.is_nan() || fraction <= 0.1 || fraction >= 0.9 {
        return Err(Impossible::DriverSwing { fraction });
    }
    let gain = device.gain_a_v2_m(overdrive);
    let access = device.access_resistance_ohm_m;
    let saturated = (swing_v * 0.9 - saturation) * (2.0 * n) / overdrive.squared()
        * (gain * overdrive * (access / (2.0 * n)) + 1.0);
    let triode =
        ((overdrive - swing_v * (0.05 * n)) * (2.0 / n) / (swing_v * 0.1)).ln() / overdrive;
    Ok((saturated + triode) / (gain * LN_9) + access)
}

/// The taper of least delay: solves `u(ln u − 1) = c_self/c_in` (Hedenstierna and Jeppson 1987).
pub fn fastest_taper(own_over_input: f64) -> f64 {
    let mut u = std::f64::consts::E * (1.0 + own_over_input);
    // Newton on a convex rising function from above: monotone.
    for _ in 0..60 {
        u -= (u * (u.ln() - 1.0) - own_over_input) / u.ln();
    }
    u
}
