"""Writes the reference cases: make_values.py [FILE], values.json beside this file by default."""

import copy
import json
import math
import os
import sys

# One thread: the matrices are small, and sums keep their order.
for variable in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS"):
    os.environ.setdefault(variable, "1")

import numpy as np

from model import MESH, evaluate
from processes import (
    CAPACITOR_A, CAPACITOR_B, DEMO55, FIXED_A, FIXED_B, LAYOUT_A, LAYOUT_B,
    OPEN130_CORE, OPEN130_IO, SPIRAL_A, SPIRAL_B,
)
from spiral import DoesNotClose, coil, trace_for
import transistor as tr

SEED = 20240917
A_KIND = 5  # designs of each of the sixteen kinds
COILS = 25
WIDEST = 8e-3  # of an NMOS, m
FREQUENCIES = (0.9e9, 1.575e9, 2.45e9, 3.5e9, 5.8e9)
TEMPERATURES = (248.15, 300.15, 300.15, 343.15, 398.15)


def pick(rng, options):
    return options[int(rng.integers(len(options)))]


def log_uniform(rng, low, high):
    return float(math.exp(rng.uniform(math.log(low), math.log(high))))


def technology_for(rng, kind):
    base = copy.deepcopy(pick(rng, (DEMO55, DEMO55, OPEN130_CORE, OPEN130_IO)))
    for polarity in ("nmos", "pmos"):  # no two cases share a transistor
        d = base["pair"][polarity]
        for key in ("transconductance_a_v2", "junction_capacitance_f_m", "access_resistance_ohm_m"):
            d[key] *= float(rng.uniform(0.9, 1.1))
    base["capacitor"] = dict(pick(rng, (CAPACITOR_A, CAPACITOR_B)))
    base["layout"] = dict(pick(rng, (LAYOUT_A, LAYOUT_B)))
    base["inductor"] = dict(pick(rng, (FIXED_A, FIXED_B) if kind == "fixed" else (SPIRAL_A, SPIRAL_B)))
    return base


def draw(rng, legs, stack, network, kind, soft):
    """One random study, technology, sizing and injected coil; None when the draw is no good.

    `soft` asks for small switches, a long dead time and much reactance: drains swing far.
    """
    tech = technology_for(rng, kind)
    pair = tech["pair"]
    thick = pair["rating_v"] > 2.0
    frequency = pick(rng, FREQUENCIES[:3] if thick else FREQUENCIES)
    w = 2 * math.pi * frequency
    t_k = pick(rng, TEMPERATURES)
    supply = stack * pair["rating_v"] * float(rng.uniform(0.7, 1.0))
    if rng.random() < 0.12:
        supply = stack * pair["rating_v"] * 1.04
    swing = None
    if stack == 1 and rng.random() < 0.35:
        swing = min(pair["rating_v"], supply * float(rng.uniform(0.85, 1.15)))
    r_a = pick(rng, (50.0, 75.0, 100.0)) if legs == 2 else pick(rng, (30.0, 50.0))
    dead = 0.0 if rng.random() < 0.25 else float(rng.uniform(0.01, 0.1))
    x = 0.0 if rng.random() < 0.15 else float(rng.uniform(0.0, 2.0))
    if soft:
        dead, x = float(rng.uniform(0.08, 0.16)), float(rng.uniform(1.0, 3.0))
    beyond = float(rng.uniform(0.4, 3.0))  # loaded Q past what matching and reactance use
    design = {
        "supply_v": supply, "loaded_q": None, "nmos_width_m": None,
        "width_ratio": float(rng.uniform(1.2, 3.2)), "turns": None, "trace_m": None,
        "diameter_m": None, "resistance_ohm": None, "reactance": x, "dead_time": dead, "stages": None,
    }
    study = {
        "temperature_k": t_k, "frequency_hz": frequency, "antenna_resistance_ohm": r_a,
        "antenna_loss_db": 0.0 if rng.random() < 0.4 else float(rng.uniform(0.1, 1.5)),
        "stage": {"legs": legs, "stack": stack, "network": network},
        "driver": {
            "input_capacitance_f": log_uniform(rng, 8e-15, 60e-15),
            "ratio": float(rng.uniform(1.2, 3.0)),
            "crowbar": pick(rng, (0.0, 0.05, 0.1)),
            "swing_v": swing,
        },
    }

    r_opt = r_a if network == "direct" else r_a * float(rng.uniform(0.08, 0.7))
    q_m = 0.0 if network == "direct" else math.sqrt(r_a / r_opt - 1)
    given = None
    if kind == "spiral":
        process = tech["inductor"]
        design["turns"] = int(rng.integers(1, 5))
        design["diameter_m"] = log_uniform(rng, 120e-6, 600e-6)
        try:
            if network == "direct":
                design["loaded_q"] = q_m + x + beyond
                inductance = design["loaded_q"] * r_a / w
                trace = trace_for(
                    process, design["turns"], design["diameter_m"], frequency, inductance / legs, 8, 4
                )
            else:
                trace = design["trace_m"] = log_uniform(rng, 4e-6, 30e-6)
            one = coil(process, design["turns"], trace, design["diameter_m"], frequency, **MESH)
        except DoesNotClose:
            return None
        if network != "direct":
            inductance = legs * one["inductance_h"]
            # The resistance the branch shows follows from loaded Q: find the one that leaves `beyond`.
            ratios = np.linspace(0.06, 0.9, 400)
            q_at = w * inductance / (ratios * r_a)
            left = q_at - np.sqrt(1 / ratios - 1) - x
            design["loaded_q"] = float(q_at[int(np.abs(left - beyond).argmin())])
            if np.abs(left - beyond).min() > 0.3:
                return None
            r_opt = w * inductance / design["loaded_q"]
        if not 4.0 < one["quality"]:
            return None
        given = {"inductance_h": inductance, "resistance_ohm": legs * one["resistance_ohm"]}
    else:
        design["loaded_q"] = q_m + x + beyond
        design["resistance_ohm"] = None if network == "direct" else r_opt

    gate_v = supply / 2 if stack == 2 else (supply if swing is None else swing)
    share = log_uniform(rng, 0.2, 0.5) if soft else log_uniform(rng, 0.05, 0.35)
    width = stack * tr.on_resistance(pair["nmos"], t_k, gate_v) / (share * r_opt / legs)
    design["nmos_width_m"] = width
    if width > WIDEST:
        return None
    load = tr.gate_capacitance(pair, width, width * design["width_ratio"], stack, gate_v, 0, 0)
    wanted = float(rng.uniform(2.2, 4.0))
    fan_out = load / study["driver"]["input_capacitance_f"]
    design["stages"] = max(1, round(math.log(max(fan_out, 1.0)) / math.log(wanted)))
    return study, tech, design, given


def telling(figures, inner, study, tech, design):
    """Keep designs near sense, and none whose limit hangs on a last digit."""
    if "reason" in figures or figures["edge_time_fraction"] > 0.3 or figures["taper"] < 1.5:
        return False
    if max(figures["overdrive_use_n"], figures["overdrive_use_p"]) > 0.5:
        return False
    if inner["dead_peak_drain_v"] is not None:
        clamp = tech["pair"]["clamp_v"]
        room = (inner["dead_lowest_drain_v"] + clamp, design["supply_v"] + clamp - inner["dead_peak_drain_v"])
        return min(map(abs, room)) > 2e-3
    return True


def case(name, study, technology, design, given):
    figures, inner = evaluate(study, technology, design, given)
    return {
        "name": name, "study": study, "technology": technology, "design": design,
        "coil": given, "expected": figures, "inner": inner,
    }, inner


def designs(rng):
    cases = []
    for legs in (1, 2):
        for stack in (1, 2):
            for network in ("direct", "low-pass"):
                for kind in ("fixed", "spiral"):
                    made = 0
                    while made < A_KIND:
                        drawn = draw(rng, legs, stack, network, kind, soft=made >= 3)
                        if drawn is None:
                            continue
                        study, tech, design, given = drawn
                        name = f"{legs}-leg stack-{stack} {network} {kind} {made + 1}"
                        done, inner = case(name, study, tech, design, given)
                        if telling(done["expected"], inner, study, tech, design):
                            cases.append(done)
                            made += 1
    return cases


def impossible(cases):
    """Neighbours of the designs above that cannot exist."""
    found = []

    def spoil(base, reason, **change):
        one = copy.deepcopy(next(c for c in cases if c["name"] == base))
        given = change.pop("coil", one["coil"])
        one["design"].update(change)
        done, _ = case(f"{base}, {reason}", one["study"], one["technology"], one["design"], given)
        assert done["expected"] == {"feasible": False, "reason": reason}, done["expected"]
        found.append(done)

    for legs in (1, 2):
        low, direct = f"{legs}-leg stack-1 low-pass fixed 1", f"{legs}-leg stack-2 direct fixed 1"
        coiled = f"{legs}-leg stack-1 low-pass spiral 2"
        antenna = next(c for c in cases if c["name"] == low)["study"]["antenna_resistance_ohm"]
        spoil(low, "matching", resistance_ohm=1.1 * antenna)
        spoil(low, "series_capacitor", loaded_q=0.5)
        spoil(direct, "series_capacitor", loaded_q=0.6, reactance=0.7)
        spoil(coiled, "matching", loaded_q=0.1)
        spoil(coiled, "spiral", coil=None, turns=8, trace_m=30e-6, diameter_m=200e-6)
        spoil(f"{legs}-leg stack-1 direct spiral 1", "spiral", coil=None, turns=1, diameter_m=60e-6)
    return found


def coils(rng):
    found = []
    while len(found) < COILS:
        process = dict(pick(rng, (SPIRAL_A, SPIRAL_B)))
        process["thickness_m"] *= float(rng.uniform(0.6, 1.3))
        turns, frequency = len(found) % 5 + 1, pick(rng, FREQUENCIES)
        trace, diameter = log_uniform(rng, 4e-6, 30e-6), log_uniform(rng, 110e-6, 500e-6)
        try:
            solved = coil(process, turns, trace, diameter, frequency, 56, 14)
        except DoesNotClose:
            continue
        if solved["quality"] < 3:  # near its own resonance a coil is no coil
            continue
        found.append({
            "process": process, "turns": turns, "trace_m": trace, "diameter_m": diameter,
            "frequency_hz": frequency, "expected": solved,
        })
    return found


def main():
    target = sys.argv[1] if len(sys.argv) > 1 else os.path.join(os.path.dirname(__file__), "values.json")
    rng = np.random.default_rng(SEED)
    cases = designs(rng)
    wrong = impossible(cases)
    whole = {"cases": cases + wrong, "coils": coils(rng)}
    with open(target, "w", encoding="utf-8") as out:
        json.dump(whole, out, indent=1, allow_nan=False)
        out.write("\n")
    print(f"{len(cases)} designs, {len(wrong)} impossible ones, {len(whole['coils'])} coils")


if __name__ == "__main__":
    main()
