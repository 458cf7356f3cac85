"""The reference checked against published values and independent integration, before it is trusted.

Values marked M are from memory of the source named; all were also recomputed here.
"""

import math

import numpy as np
from scipy.integrate import quad, solve_ivp
from scipy.linalg import expm
from scipy.optimize import brentq

from processes import DEMO55, OPEN130_CORE, SPIRAL_A
from spiral import MU0, bare_impedance, coil, mutual
from steady import Network, solve
import transistor as tr

F = 2.45e9
W = 2 * math.pi * F


def close(name, got, want, rel):
    error = abs(got - want) / abs(want)
    print(f"  {name}: {got:.9g}, expected {want:.9g}, off {error:.1e} (allowed {rel:.0e})")
    assert error <= rel, name


def direct(q_l, r_n, x=0.0, dead=0.0, c_d=2e-12, r_a=50.0, v=1.0, legs=1):
    l = q_l * r_a / W
    c_s = 1 / (W * (q_l - x) * r_a)
    return solve(Network(legs, v, F, r_n, r_n, c_d, l, c_s, 0.0, r_a, None, 0.0, dead))


def delivered(state, r_a=50.0):
    return abs(state["harmonics_v"][1]) ** 2 / 2 / r_a


def published_finite_loaded_q():
    """Krauss, Bostian and Raab (1980), ch. 14 (M): square-wave drive of a series-tuned load."""
    for q_l, third, share in ((1, -18.63, 0.98415), (3, -27.67, 0.99802), (10, -38.07, 0.99982)):
        s = direct(q_l, 5e-3)
        h = s["harmonics_v"]
        close(f"third harmonic, Q {q_l}", 20 * math.log10(abs(h[3] / h[1])), third, 5e-4)
        close(f"share, Q {q_l}", delivered(s) / (s["vo2"] / 50), share, 1e-5)
    s = direct(3, 5.0, c_d=1e-15)
    close("r/R = 0.1", s["vo2"] / 50 / (s["vo2"] / 50 + s["conduction"]), 1 / 1.1, 1e-6)
    for legs in (1, 2):
        ideal = 2 / math.pi**2 / 50 * legs**2
        close(f"ideal power, {legs} legs", delivered(direct(300, 1e-3, legs=legs)), ideal, 1e-4)


def published_soft_switching():
    """Koizumi et al. (1996) (M): zero voltage and slope at turn-on, dead angle of a quarter period."""
    for q_l, wcr, x, power in (
        (500, 0.318310, 1.571531, 0.050628),
        (5, 0.317263, 1.649282, 0.047316),
        (3, 0.315435, 1.707096, 0.045067),
    ):
        s = direct(q_l, 1e-3, x=x, dead=0.25, c_d=wcr / (W * 50))
        close(f"P R/V^2, all harmonics, Q {q_l}", s["vo2"], power, 1e-4)
        assert abs(s["turn_on_v"]["N"]) < 2e-3 and abs(1 - s["turn_on_v"]["P"]) < 2e-3


def law_squares_by_block_exponential():
    """Van Loan (1978): the integral of x x^T from one exponential, against the quadrature."""
    net = Network(2, 1.1, F, 2.0, 3.0, 1.1e-12, 4e-9, 1.3e-12, 1.5, 60.0, 0.9e-12, 2e-4, 0.06)
    phases = list(net.phases())
    from steady import start_state, trajectory

    x, worst = start_state(phases), 0.0
    for _, length, a in phases:
        n = a.shape[0]
        _, weights, states = trajectory(a, length, x)
        square = np.einsum("t,ti,tj->ij", weights, states, states)
        # Short pieces: the block form holds a growing exponential beside the decaying one.
        pieces, total, y = 64, np.zeros((n, n)), x
        h = length / pieces
        for _ in range(pieces):
            big = np.zeros((2 * n, 2 * n))
            big[:n, :n], big[:n, n:], big[n:, n:] = -a, np.outer(y, y), a.T
            e = expm(big * h)
            total += e[n:, n:].T @ e[:n, n:]
            y = expm(a * h) @ y
        worst = max(worst, np.abs(total - square).max() / np.abs(total).max())
        x = expm(a * length) @ x
    print(f"  squares, quadrature against block exponential: {worst:.1e}")
    assert worst < 1e-11


def law_extremes_and_steady_state_by_time_stepping():
    """A stiff-free case run for many periods by an explicit Runge-Kutta method."""
    net = Network(1, 1.2, F, 3.0, 4.0, 1.5e-12, 1.2e-9, 5e-12, 0.8, 50.0, 2e-12, 5e-4, 0.08)
    s = solve(net)
    phases = list(net.phases())
    x, lo, hi = np.zeros(net.size), math.inf, -math.inf
    x[-1] = 1.0
    for period in range(60):
        for _, length, a in phases:
            r = solve_ivp(lambda t, y: a @ y, (0, length), x, "DOP853", rtol=1e-11, atol=1e-12,
                          dense_output=period == 59)
            x = r.y[:, -1]
            if period == 59:
                v = r.sol(np.linspace(0, length, 4001))[0]
                lo, hi = min(lo, v.min()), max(hi, v.max())
    close("peak drain", s["high_v"], hi, 1e-6)
    assert abs(s["low_v"] - lo) < 1e-6


def law_junction_charge():
    d = DEMO55["pair"]["nmos"]
    mean = quad(lambda v: d["junction_capacitance_f_m"]
                * (1 + v / d["junction_potential_v"]) ** -d["junction_grading"], 0, 1.2)[0] / 1.2
    close("junction", tr.junction_capacitance(d, 1.2), mean, 1e-10)


def law_resistance_at_current():
    """Dissipation of a half sine of current through the triode law, to second order."""
    d = {**DEMO55["pair"]["nmos"], "access_resistance_ohm_m": 0.0}
    r, v_ov = tr.channel_resistance(d, 300.15, 1.2), tr.overdrive(d, 300.15, 1.2)
    width, n = 1e-3, d["slope"]
    for use in (0.02, 0.05):
        peak = use * v_ov / (n * r / width)

        def drop(i):
            return v_ov / n * (1 - math.sqrt(1 - 2 * n * i * r / width / v_ov))

        lost = quad(lambda p: drop(peak * math.sin(p)) * peak * math.sin(p), 0, math.pi)[0]
        mean = lost / (peak**2 * math.pi / 2)
        close(f"r at use {use}", tr.resistance_at_current(d, 300.15, 1.2, width, peak) / width,
              mean, 6 * (use / 2) ** 3)


def edge_by_integration(d, t_k, swing):
    """r_edge without the chain: C dv/dt = -I of the saturation and triode law, ohm m.

    The access resistance is half at the source, half at the drain.
    """
    beta, v_ov, n = tr.beta_width(d, t_k, swing), tr.overdrive(d, t_k, swing), d["slope"]
    access = d["access_resistance_ohm_m"]

    def current(v):
        def law(i):
            over, across = v_ov - i * access / 2, v - i * access
            if across >= over / n:
                return beta * over**2 / (2 * n)
            return beta * (over * across - n * across**2 / 2)

        return brentq(lambda i: law(i) - i, 0.0, min(v / access if access else 1e9, 1e5))

    return quad(lambda v: 1 / current(v), 0.1 * swing, 0.9 * swing, limit=400)[0] / math.log(9)


def law_edge_time():
    for name, tech in (("demo55", DEMO55), ("open130", OPEN130_CORE)):
        for polarity in ("nmos", "pmos"):
            d = tech["pair"][polarity]
            bare = {**d, "access_resistance_ohm_m": 0.0}
            close(f"{name} {polarity} edge, no access resistance", tr.edge_resistance(bare, 300.15, 1.2),
                  edge_by_integration({**bare, "access_resistance_ohm_m": 1e-12}, 300.15, 1.2), 1e-6)
            close(f"{name} {polarity} edge", tr.edge_resistance(d, 300.15, 1.2),
                  edge_by_integration(d, 300.15, 1.2), 0.12)


def law_crowbar():
    """Overlap charge of two square-law devices, their gates apart by the dead time."""
    v, vt_n, vt_p, beta, ramp, gap = 1.2, 0.35, 0.30, 1e-3, 1e-10, 1.5e-11

    def overlap(t):
        n, p = v * (t - gap) / ramp - vt_n, v - v * t / ramp - vt_p
        return beta / 2 * min(max(n, 0.0), max(p, 0.0)) ** 2

    both = 2 * v * F * quad(overlap, 0, ramp, epsabs=0, epsrel=1e-9, limit=800)[0]
    want = F * beta / 12 * (v * (1 - gap / ramp) - vt_n - vt_p) ** 3 * ramp
    close("overlap power", both, want, 1e-6)
    # Veendrick (1984), M: 1.8 V, 0.5 V, 1 mA/V^2, 100 ps, 1 GHz.
    close("unloaded inverter", 1e9 * 1e-3 / 12 * 0.8**3 * 1e-10, 4.2667e-6, 1e-4)


def published_spiral():
    """Grover's loop, Maxwell's mutual far away, and Mohan et al. (1999), circle coefficients (M)."""
    far = mutual(100e-6, 90e-6, 5e-3)
    dipole = MU0 * math.pi * (100e-6 * 90e-6) ** 2 / (2 * 5e-3**3)
    close("mutual of far loops", far, dipole, 2e-3)
    thin = {**SPIRAL_A, "thickness_m": 1e-6}
    loop = bare_impedance(thin, 1, 1e-6, 402e-6, 1e6, 20, 20).imag / (2 * math.pi * 1e6)
    a, g = 200.5e-6, 0.2235 * 2e-6
    close("one loop", loop, MU0 * a * (math.log(8 * a / g) - 2), 2e-3)
    for turns, trace, diameter in ((2, 12e-6, 260e-6), (4, 8e-6, 260e-6)):
        hole = diameter - 2 * (turns * trace + (turns - 1) * SPIRAL_A["spacing_m"])
        mean, fill = (diameter + hole) / 2, (diameter - hole) / (diameter + hole)
        sheet = MU0 * turns**2 * mean / 2 * (math.log(2.46 / fill) + 0.20 * fill**2)
        close(f"{turns} turns, low frequency",
              bare_impedance(SPIRAL_A, turns, trace, diameter, 1e6).imag / (2 * math.pi * 1e6), sheet, 0.06)
    shape = (3, 10e-6, 240e-6)
    fine, finer = coil(SPIRAL_A, *shape, F), coil(SPIRAL_A, *shape, F, 64, 16)
    close("mesh, resistance", fine["series_resistance_ohm"], finer["series_resistance_ohm"], 3e-3)
    close("mesh, inductance", fine["series_inductance_h"], finer["series_inductance_h"], 5e-4)


def law_substrate():
    """Yue and Wong's printed parallel pair against the series admittance that the model uses."""
    p, (n, w, d) = SPIRAL_A, (3, 10e-6, 240e-6)
    from spiral import EPS0, with_substrate

    bare = bare_impedance(p, n, w, d, F, 8, 4)
    hole = d - 2 * (n * w + (n - 1) * p["spacing_m"])
    area = math.pi * n * (d + hole) / 2 * w
    eps = p["oxide_permittivity"] * EPS0
    c_ox, c_si = area * eps / p["oxide_height_m"] / 2, area * p["substrate_capacitance_f_m2"] / 2
    r_si = 2 / (area * p["substrate_conductance_s_m2"])
    r_p = 1 / (W**2 * c_ox**2 * r_si) + r_si * (c_ox + c_si) ** 2 / c_ox**2
    c_pp = c_ox * (1 + W**2 * (c_ox + c_si) * c_si * r_si**2) / (1 + W**2 * (c_ox + c_si) ** 2 * r_si**2)
    c_u = (n - 1) * w**2 * eps / p["underpass_height_m"]
    printed = 1 / (1 / bare + 1 / r_p + 1j * W * (c_pp + c_u))
    got = with_substrate(p, n, w, d, F, bare)
    close("substrate, resistance", got.real, printed.real, 1e-12)
    close("substrate, reactance", got.imag, printed.imag, 1e-12)


if __name__ == "__main__":
    for name, check in list(globals().items()):
        if name.startswith(("published_", "law_")):
            print(name)
            check()
    print("the reference keeps its laws")
