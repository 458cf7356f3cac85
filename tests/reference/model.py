"""One design evaluated from its study, technology and sizing: every figure, SI units."""

import math

from spiral import DoesNotClose, coil, trace_for
from steady import Network, solve
import transistor as tr

MESH = {"across": 24, "deep": 6}


class Impossible(Exception):
    """A design that cannot exist; the argument is its reason."""


def loop_coil(study, inductor, design, given):
    """Inductance and series resistance of the whole loop, and the trace that was found (or None)."""
    legs, f = study["stage"]["legs"], study["frequency_hz"]
    w, direct = 2 * math.pi * f, study["stage"]["network"] == "direct"
    wanted = design["loaded_q"] / w * (
        study["antenna_resistance_ohm"] if direct else design["resistance_ohm"] or 0.0
    )
    if inductor["model"] == "fixed":
        return wanted, w * wanted / inductor["quality"], None
    if given is not None:
        return given["inductance_h"], given["resistance_ohm"], None
    trace = design["trace_m"]
    try:
        if direct:
            trace = trace_for(inductor, design["turns"], design["diameter_m"], f, wanted / legs, **MESH)
        one = coil(inductor, design["turns"], trace, design["diameter_m"], f, **MESH)
    except DoesNotClose as error:
        raise Impossible("spiral") from error
    inductance = wanted if direct else legs * one["inductance_h"]
    return inductance, legs * one["resistance_ohm"], trace if direct else None


def network_parts(study, technology, design, given):
    """Section 4: the series branch, the shunt capacitor and their losses, whole loop."""
    w, r_a = 2 * math.pi * study["frequency_hz"], study["antenna_resistance_ohm"]
    direct = study["stage"]["network"] == "direct"
    inductance, r_l, trace = loop_coil(study, technology["inductor"], design, given)
    q_l, q_c = design["loaded_q"], technology["capacitor"]["quality"]
    r_opt = r_a if direct else w * inductance / q_l
    if not direct and r_opt >= r_a:
        raise Impossible("matching")
    q_m = 0.0 if direct else math.sqrt(r_a / r_opt - 1)
    x_cs = (q_l - q_m - design["reactance"]) * r_opt
    if x_cs <= 0.02 * r_opt:
        raise Impossible("series_capacitor")
    c_p = None if direct else q_m / (w * r_a)
    g_p = 0.0 if direct else w * c_p / q_c
    follows = r_a if direct else 1 / (1 / r_a + g_p + 1j * w * c_p)
    return {
        "r_opt": r_opt,
        "l": inductance,
        "r_l": r_l,
        "c_s": 1 / (w * x_cs),
        "r_cs": x_cs / q_c,
        "c_p": c_p,
        "g_p": g_p,
        "z": r_l + x_cs / q_c + 1j * (w * inductance - x_cs) + follows,
        "trace_m": trace,
    }


def total_area(study, technology, design, w_n, w_p, chain, parts, total_w):
    stage, layout = study["stage"], technology["layout"]
    legs, inductor = stage["legs"], technology["inductor"]
    devices = legs * stage["stack"] * (w_n + w_p) * layout["width_area_m"]
    drivers = legs * sum(chain["widths_m"]) * (1 + study["driver"]["ratio"]) * layout["width_area_m"]
    held = legs * legs * parts["c_s"] + (parts["c_p"] or 0.0)
    capacitors = held / technology["capacitor"]["density_f_m2"]
    charge = total_w / (design["supply_v"] * study["frequency_hz"])
    smoothing = charge / (layout["supply_ripple"] * design["supply_v"]) / layout["decoupling_density_f_m2"]
    if inductor["model"] == "fixed":
        coils = legs * (inductor["area_base_m2"] + inductor["area_slope_m2_h"] * parts["l"] / legs)
    else:
        coils = legs * (design["diameter_m"] + 2 * inductor["keep_out_m"]) ** 2
    return devices + drivers + capacitors + smoothing + coils


def dbc(value, fundamental):
    return 20 * math.log10(abs(value) / abs(fundamental))


def evaluate(study, technology, design, given=None):
    """(figures, inner results). Figures bear the names of the program's JSON."""
    try:
        parts = network_parts(study, technology, design, given)
    except Impossible as error:
        return {"feasible": False, "reason": str(error)}, {}

    stage, pair, t_k = study["stage"], technology["pair"], study["temperature_k"]
    legs, stack, f, v_dd = stage["legs"], stage["stack"], study["frequency_hz"], design["supply_v"]
    r_a, dead = study["antenna_resistance_ohm"], design["dead_time"]
    w_n = design["nmos_width_m"]
    w_p = w_n * design["width_ratio"]
    given_swing = study["driver"]["swing_v"]
    swing = v_dd / 2 if stack == 2 else (v_dd if given_swing is None else given_swing)

    r_n, r_p, peak = tr.leg_resistances(
        pair, t_k, stack, swing, w_n, w_p,
        technology["layout"]["routing_resistance_ohm"], legs, v_dd, parts["z"],
    )
    plate = technology["capacitor"]["bottom_plate"] * legs * parts["c_s"]
    c_d = tr.drain_capacitance(pair, w_n, w_p, v_dd) + plate
    net = Network(
        legs, v_dd, f, r_n, r_p, c_d, parts["l"], parts["c_s"], parts["r_l"] + parts["r_cs"],
        r_a, parts["c_p"], parts["g_p"], dead,
    )
    state = solve(net)

    residual_n = max(0.0, state["turn_on_v"]["N"])
    residual_p = max(0.0, v_dd - state["turn_on_v"]["P"])
    c_g = tr.gate_capacitance(pair, w_n, w_p, stack, swing, residual_n, residual_p)
    chain = tr.driver_chain(pair, t_k, study["driver"], design["stages"], swing, f, c_g)
    edge = chain["edge_s"]

    carrier = abs(state["harmonics_v"][1]) ** 2 / 2 / r_a
    p_out = carrier * 10 ** (-study["antenna_loss_db"] / 10)
    losses = {
        "conduction": state["conduction"],
        "drain_charge": state["switch"] - state["conduction"],
        "crowbar": tr.crowbar_power(pair, t_k, w_n, w_p, stack, legs, v_dd, swing, f, dead, edge),
        "gate": legs * chain["gate_w"],
        "driver_chain": legs * chain["chain_w"],
        "inductor": parts["r_l"] * state["i2"],
        "capacitor": parts["r_cs"] * state["i2"] + parts["g_p"] * state["vo2"],
        "leakage": tr.leakage_power(pair, t_k, w_n, w_p, stack, legs, v_dd),
        "harmonics": state["vo2"] / r_a - carrier,
        "balun": carrier - p_out,
        "mid_node": legs * tr.mid_node_power(pair, t_k, w_n, w_p, swing, f) if stack == 2 else 0.0,
    }
    outside = ("crowbar", "gate", "driver_chain", "leakage", "mid_node")
    p_total = state["dc"] + sum(losses[k] for k in outside)
    assert abs(p_total - p_out - sum(losses.values())) <= 1e-9 * p_total, "loss budget"
    drive = legs * f * swing**2 * study["driver"]["input_capacitance_f"]
    i_rms = math.sqrt(state["i2"])

    broken = []
    if v_dd > stack * pair["rating_v"]:
        broken.append("supply_rating")
    if dead > 0 and (
        state["dead_low_v"] < -pair["clamp_v"] or state["dead_high_v"] > v_dd + pair["clamp_v"]
    ):
        broken.append("drain_voltage")

    def stretch(d, width):
        drop = math.sqrt(2) * i_rms * tr.on_resistance(d, t_k, swing) / width
        return drop / tr.overdrive(d, t_k, swing)

    v = state["harmonics_v"]
    figures = {
        "feasible": not broken,
        "broken_limits": broken,
        "output_power_w": p_out,
        "output_power_dbm": 10 * math.log10(p_out / 1e-3),
        "efficiency": p_out / p_total,
        "drain_efficiency": carrier / state["dc"],
        "pae": (p_out - drive) / p_total,
        "area_m2": total_area(study, technology, design, w_n, w_p, chain, parts, p_total),
        "dc_power_w": state["dc"],
        "total_power_w": p_total,
        "losses_w": losses,
        "on_resistance_n_ohm": r_n,
        "on_resistance_p_ohm": r_p,
        "drain_capacitance_f": c_d,
        "gate_capacitance_f": c_g,
        "optimum_resistance_ohm": parts["r_opt"],
        "inductance_h": parts["l"],
        "inductor_resistance_ohm": parts["r_l"],
        "inductor_q": 2 * math.pi * f * parts["l"] / parts["r_l"],
        "series_capacitance_f": parts["c_s"],
        "shunt_capacitance_f": parts["c_p"],
        "taper": chain["taper"],
        "edge_time_fraction": edge * f,
        "second_harmonic_dbc": None if legs == 2 else dbc(v[2], v[1]),
        "third_harmonic_dbc": dbc(v[3], v[1]),
        "peak_drain_v": state["high_v"],
        "lowest_drain_v": state["low_v"],
        "network_current_rms_a": i_rms,
        "overdrive_use_n": stretch(pair["nmos"], w_n),
        "overdrive_use_p": stretch(pair["pmos"], w_p),
    }
    inner = {
        "peak_current_a": peak,
        "swing_v": swing,
        "residual_n_v": residual_n,
        "residual_p_v": residual_p,
        "dead_lowest_drain_v": state["dead_low_v"] if dead > 0 else None,
        "dead_peak_drain_v": state["dead_high_v"] if dead > 0 else None,
        "fourth_harmonic_dbc": None if legs == 2 else dbc(v[4], v[1]),
        "fifth_harmonic_dbc": dbc(v[5], v[1]),
        "trace_m": parts["trace_m"],
    }
    return plain(figures), plain(inner)


def plain(value):
    """Built-in floats in place of numpy's, so that the JSON writer prints all digits."""
    if isinstance(value, dict):
        return {k: plain(v) for k, v in value.items()}
    if isinstance(value, (bool, str, list, int)) or value is None:
        return value
    return float(value)
