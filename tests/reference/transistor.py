"""Transistors, the output leg and its driver chain. Plain SI numbers throughout.

A transistor is a dict whose keys carry their units, per metre of gate width;
a pair is {"nmos": ..., "pmos": ..., "rating_v": ..., "clamp_v": ...}.
"""

import math

import numpy as np
from scipy.optimize import brentq

K_B = 1.380649e-23  # J/K, exact (CODATA 2018)
Q_E = 1.602176634e-19  # C, exact (CODATA 2018)
T0 = 300.15  # K
HALF_SINE = 8.0 / (3.0 * math.pi)  # <|I|^3> / (<I^2> I_peak) of a half sine


def thermal_voltage(t_k):
    return K_B * t_k / Q_E


def threshold(d, t_k):
    return d["threshold_v"] + d["threshold_drift_v_k"] * (t_k - T0)


def overdrive(d, t_k, v_gate):
    """Smooth overdrive voltage 2 n phi_t ln(1 + e^u)."""
    scale = 2.0 * d["slope"] * thermal_voltage(t_k)
    return scale * float(np.logaddexp(0.0, (v_gate - threshold(d, t_k)) / scale))


def beta_width(d, t_k, v_gate):
    """Transconductance factor per metre of width, A/V^2/m."""
    mobility = (t_k / T0) ** d["mobility_exponent"]
    fall = 1.0 + d["degradation_per_v"] * overdrive(d, t_k, v_gate)
    return d["transconductance_a_v2"] / d["length_m"] * mobility / fall


def channel_resistance(d, t_k, v_gate):
    """On-resistance times width without the access resistance, ohm m.

    Conductance at no drain voltage of Enz, Krummenacher and Vittoz (1995);
    infinite once it underflows.
    """
    scale = 2.0 * d["slope"] * thermal_voltage(t_k)
    u = (v_gate - threshold(d, t_k)) / scale
    weight = math.exp(-float(np.logaddexp(0.0, -u)))  # 1/(1 + e^-u)
    conductance = beta_width(d, t_k, v_gate) * overdrive(d, t_k, v_gate) * weight
    return 1.0 / conductance if conductance > 1e-300 else math.inf


def on_resistance(d, t_k, v_gate):
    return channel_resistance(d, t_k, v_gate) + d["access_resistance_ohm_m"]


def junction_capacitance(d, v):
    """Mean of c_j0 (1 + v/phi)^-m over 0..v, F/m."""
    m, phi = d["junction_grading"], d["junction_potential_v"]
    return d["junction_capacitance_f_m"] * phi / ((1 - m) * v) * ((1 + v / phi) ** (1 - m) - 1)


def off_current(d, t_k):
    """Subthreshold current at zero gate voltage, A/m."""
    phi, phi0, n = thermal_voltage(t_k), thermal_voltage(T0), d["slope"]
    exponent = d["threshold_v"] / (n * phi0) - threshold(d, t_k) / (n * phi)
    scale = (phi / phi0) ** 2 * (t_k / T0) ** d["mobility_exponent"]
    return d["off_current_a_m"] * scale * math.exp(exponent)


def resistance_at_current(d, t_k, v_gate, width, current):
    """Resistance times width at a half sine of peak `current`, weighted by dissipation."""
    channel, access = channel_resistance(d, t_k, v_gate), d["access_resistance_ohm_m"]
    if math.isinf(channel):
        return math.inf
    y = d["slope"] * current * channel / (2.0 * overdrive(d, t_k, v_gate) * width)
    return channel * (1.0 + HALF_SINE * y + 1.5 * y * y) + access


def side_resistance(d, t_k, stack, swing, width, routing, current):
    """One side of a leg: a device, or a switch and a cascode that loses the switch's drop."""
    switch = resistance_at_current(d, t_k, swing, width, current)
    if stack == 1:
        return switch / width + routing
    drop = HALF_SINE * current * switch / width
    if math.isinf(drop):
        return math.inf
    cascode = resistance_at_current(d, t_k, swing - drop, width, current)
    return (switch + cascode) / width + routing


def leg_resistances(pair, t_k, stack, swing, w_n, w_p, routing, legs, supply, load):
    """R_n, R_p and the peak current: the root of I = (2/pi) V_DD B / |B (R_n + R_p)/2 + Z|."""

    def sides(current):
        return tuple(
            side_resistance(pair[k], t_k, stack, swing, w, routing, current)
            for k, w in (("nmos", w_n), ("pmos", w_p))
        )

    def excess(current):
        mean = legs * sum(sides(current)) / 2.0
        drive = 0.0 if math.isinf(mean) else 2.0 / math.pi * supply * legs / abs(mean + load)
        return drive - current

    top = excess(0.0)
    current = brentq(excess, 0.0, top, xtol=1e-20, rtol=1e-15, maxiter=500)
    r_n, r_p = sides(current)
    return r_n, r_p, current


def drain_capacitance(pair, w_n, w_p, supply):
    return sum(
        w * (junction_capacitance(d, supply) + d["overlap_capacitance_f_m"])
        for d, w in ((pair["nmos"], w_n), (pair["pmos"], w_p))
    )


def gate_capacitance(pair, w_n, w_p, stack, swing, residual_n, residual_p):
    sides = ((pair["nmos"], w_n, residual_n), (pair["pmos"], w_p, residual_p))
    return sum(
        w * (d["gate_capacitance_f_m"] + d["overlap_capacitance_f_m"] * (1 + v_r / (stack * swing)))
        for d, w, v_r in sides
    )


def mid_node_power(pair, t_k, w_n, w_p, swing, frequency):
    """Nodes between switch and cascode, one leg of a stack."""
    return frequency * swing * sum(
        w
        * (
            junction_capacitance(d, swing)
            + d["gate_capacitance_f_m"]
            + 2 * d["overlap_capacitance_f_m"]
        )
        * (swing - threshold(d, t_k) / 2)
        for d, w in ((pair["nmos"], w_n), (pair["pmos"], w_p))
    )


def leakage_power(pair, t_k, w_n, w_p, stack, legs, supply):
    both = off_current(pair["nmos"], t_k) * w_n + off_current(pair["pmos"], t_k) * w_p
    return legs * supply * both / 2.0 / stack


def crowbar_power(pair, t_k, w_n, w_p, stack, legs, supply, swing, frequency, dead, edge_s):
    """Veendrick (1984) for a full-swing ramp of edge/0.8, the two gates apart by the dead time."""
    ramp = edge_s / 0.8
    n, p = pair["nmos"], pair["pmos"]
    beta = math.sqrt(beta_width(n, t_k, swing) * w_n * beta_width(p, t_k, swing) * w_p) / stack
    left = swing * (1 - dead / frequency / ramp) - threshold(n, t_k) - threshold(p, t_k)
    return legs * frequency * beta / 12 * max(0.0, left) ** 3 * ramp * supply / swing


def edge_resistance(d, t_k, swing):
    """Resistance times width whose RC edge takes as long as the transistor's own, ohm m."""
    v_ov, beta, n = overdrive(d, t_k, swing), beta_width(d, t_k, swing), d["slope"]
    access, v_sat = d["access_resistance_ohm_m"], overdrive(d, t_k, swing) / d["slope"]
    if v_sat >= 0.9 * swing:
        raise ValueError("the edge law needs a saturation voltage below 0.9 of the swing")
    saturated = (0.9 * swing - v_sat) * 2 * n / v_ov**2 * (1 + beta * v_ov * access / (2 * n))
    triode = math.log(2 / n * (v_ov - 0.05 * n * swing) / (0.1 * swing)) / v_ov
    return (saturated + triode) / (beta * math.log(9)) + access


def driver_chain(pair, t_k, driver, stages, swing, frequency, c_gate):
    """Taper, widths, powers and 10-90 % edge of the tapered chain of one leg."""
    n, p, ratio = pair["nmos"], pair["pmos"], driver["ratio"]

    def of_inverter(per_device):
        return per_device(n) + ratio * per_device(p)

    c_in = of_inverter(lambda d: d["gate_capacitance_f_m"] + 2 * d["overlap_capacitance_f_m"])
    c_self = of_inverter(lambda d: junction_capacitance(d, swing) + d["overlap_capacitance_f_m"])
    first = driver["input_capacitance_f"]
    taper = (c_gate / first) ** (1.0 / stages)
    inputs = [first * taper**i for i in range(stages)]
    widths = [c / c_in for c in inputs]
    energy = (1 + driver["crowbar"]) * frequency * swing**2
    r_edge = (edge_resistance(n, t_k, swing) + edge_resistance(p, t_k, swing) / ratio) / 2
    return {
        "taper": taper,
        "widths_m": widths,
        "gate_w": energy * c_gate,
        "chain_w": energy * (sum(widths) * c_self + sum(inputs[1:])),
        "edge_s": math.log(9) * r_edge / widths[-1] * (c_gate + widths[-1] * c_self),
    }
