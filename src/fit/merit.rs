//! What a technology's transistors are worth as switches.

use crate::quantity::format as engineering;
use crate::technology::transistor::WarmTransistor;
use crate::technology::{Technology, TransistorPair};
use std::fmt::Write;

/// Temperatures that figures of merit are given at, K: −40, 27 and 125 °C.
pub const TEMPERATURES_K: [f64; 3] = [233.15, 300.15, 398.15];

/// One device as a switch at full swing.
#[derive(Debug, Clone, PartialEq)]
pub struct Merit {
    /// K.
    pub temperature_k: f64,
    /// r_on·W, Ω·m.
    pub resistance_ohm_m: f64,
    /// Charge the gate takes a cycle, `(c_gate + 2 c_gd) V`: the overlap swings twice. C/m.
    pub gate_charge_c_m: f64,
    /// Charge the drain takes a cycle, `(c_j(V) + c_gd) V`. C/m.
    pub drain_charge_c_m: f64,
    /// r_on·(c_gate + 2 c_gd), s.
    pub gate_time_s: f64,
    /// r_on·(c_j(V) + c_gd), s.
    pub drain_time_s: f64,
    /// Width that loses least, m: `I² r_on/W = f V (q_gate + q_drain) W`.
    pub best_width_m: f64,
    /// What it loses there, W.
    pub least_loss_w: f64,
}

/// A switch that carries `current_a` (RMS) and is driven `frequency_hz` times a second over a swing of `swing_v`; its
/// drain swings as far. Loss `I² r_on/W + f V (q_gate + q_drain) W`, least where both parts are the same.
pub fn merit(
    device: &WarmTransistor,
    temperature_k: f64,
    swing_v: f64,
    current_a: f64,
    frequency_hz: f64,
) -> Merit {
    let resistance_ohm_m = device.on_resistance_ohm_m(swing_v);
    let gate_f_m = device.gate_capacitance_f_m + 2.0 * device.overlap_capacitance_f_m;
    let drain_f_m = device.junction_capacitance_f_m(swing_v) + device.overlap_capacitance_f_m;
    let dynamic_w_m = frequency_hz * swing_v * swing_v * (gate_f_m + drain_f_m);
    let static_w_m = current_a * current_a * resistance_ohm_m;
    Merit {
        temperature_k,
        resistance_ohm_m,
        gate_charge_c_m: gate_f_m * swing_v,
        drain_charge_c_m: drain_f_m * swing_v,
        gate_time_s: resistance_ohm_m * gate_f_m,
        drain_time_s: resistance_ohm_m * drain_f_m,
        best_width_m: (static_w_m / dynamic_w_m).sqrt(),
        least_loss_w: 2.0 * (static_w_m * dynamic_w_m).sqrt(),
    }
}

/// True for the text of a technology file, false for a study or anything else.
pub fn is_technology(text: &str) -> bool {
    let table = text.trim_start_matches('\u{feff}').parse::<toml::Table>();
    table.is_ok_and(|table| table.contains_key("transistor") && !table.contains_key("stage"))
}

/// The figures of merit of every pair, for people.
pub fn merits(technology: &Technology, current_a: f64, frequency_hz: f64) -> String {
    let mut out = String::new();
    // Writing to a String cannot fail.
    let _ = writeln!(
        out,
        "{:<28} {} ({})",
        "technology", technology.name, technology.source
    );
    let _ = writeln!(
        out,
        "{:<28} {} RMS at {}; loss I^2 r_on/W + f V (q_gate + q_drain) W",
        "width of least loss for",
        engineering(current_a, "A"),
        engineering(frequency_hz, "Hz")
    );
    for (name, pair) in &technology.transistors {
        pair_lines(&mut out, name, pair, current_a, frequency_hz);
    }
    out
}

fn pair_lines(
    out: &mut String,
    name: &str,
    pair: &TransistorPair,
    current_a: f64,
    frequency_hz: f64,
) {
    // as in a fit: a rating is the nominal swing and ten percent
    let swing_v = pair.rating_v / 1.1;
    let _ = writeln!(
        out,
        "\n{name}: rating {}, nominal swing {}",
        engineering(pair.rating_v, "V"),
        engineering(swing_v, "V")
    );
    let _ = writeln!(
        out,
        "  {:<5} {:>8} {:>14} {:>14} {:>14} {:>10} {:>10} {:>10} {:>10}",
        "", "T", "r_on W", "q_gate/W", "q_drain/W", "r_on C_g", "r_on C_d", "best W", "loss"
    );
    for (polarity, device) in [("nmos", &pair.nmos), ("pmos", &pair.pmos)] {
        for temperature_k in TEMPERATURES_K {
            let warm = WarmTransistor::new(device, temperature_k);
            let m = merit(&warm, temperature_k, swing_v, current_a, frequency_hz);
            let _ = writeln!(
                out,
                "  {polarity:<5} {:>5.0} degC {:>9.1} ohm um {:>8.3} fC/um {:>8.3} fC/um {:>10} {:>10} {:>10} {:>10}",
                temperature_k - 273.15,
                m.resistance_ohm_m * 1e6,
                m.gate_charge_c_m * 1e9,
                m.drain_charge_c_m * 1e9,
                engineering(m.gate_time_s, "s"),
                engineering(m.drain_time_s, "s"),
                engineering(m.best_width_m, "m"),
                engineering(m.least_loss_w, "W"),
            );
        }
    }
}
