"""Exact periodic steady state of the switched network, phase by phase over a whole period.

Time is counted in periods and the loop current is carried as i * z_ref, so that the
matrices are well scaled. The last entry of every state is the constant 1.
"""

import math

import numpy as np
from scipy.linalg import expm
from scipy.optimize import brentq

GAUSS_X, GAUSS_W = np.polynomial.legendre.leggauss(20)
GAUSS_X, GAUSS_W = (GAUSS_X + 1) / 2, GAUSS_W / 2
PANEL_DECAY = 3.0  # fastest live mode times the length of a quadrature panel, at most


class Network:
    """Element values of the network; `c_p` is None when the load is the antenna alone."""

    def __init__(self, legs, supply, frequency, r_n, r_p, c_d, l, c_s, r_s, r_a, c_p, g_p, dead):
        self.legs, self.supply, self.period = legs, supply, 1.0 / frequency
        self.r_n, self.r_p, self.c_d = r_n, r_p, c_d
        self.l, self.c_s, self.r_s = l, c_s, r_s
        self.r_a, self.c_p, self.g_p, self.dead = r_a, c_p, g_p, dead
        self.z_ref = 2 * math.pi * frequency * l
        # states: drains, series capacitor, current, output, 1
        self.v_c, self.i = legs, legs + 1
        self.v_o = None if c_p is None else legs + 2
        self.size = legs + 2 + (c_p is not None) + 1

    def row(self, **at):
        r = np.zeros(self.size)
        for name, value in at.items():
            r[int(name[1:])] = value
        return r

    def current_row(self):
        return self.row(**{f"_{self.i}": 1.0 / self.z_ref})

    def output_row(self):
        if self.v_o is None:
            return self.r_a * self.current_row()
        return self.row(**{f"_{self.v_o}": 1.0})

    def switch_row(self, leg, mode):
        """Current from the switches of a leg into its drain, as a row over the state."""
        r = np.zeros(self.size)
        if mode == "P":
            r[leg], r[-1] = -1.0 / self.r_p, self.supply / self.r_p
        elif mode == "N":
            r[leg] = -1.0 / self.r_n
        return r

    def phases(self):
        """(modes of the legs, length in periods, generator per period), dead times left out at 0."""
        other = {"P": "N", "N": "P", "-": "-"}
        on, dead = 0.5 - self.dead, self.dead
        for mode, length in (("P", on), ("-", dead), ("N", on), ("-", dead)):
            if length > 0:
                modes = (mode,) if self.legs == 1 else (mode, other[mode])
                yield modes, length, self.generator(modes)

    def generator(self, modes):
        i, out = self.current_row(), self.output_row()
        a = np.zeros((self.size, self.size))
        loop = -self.r_s * i - out
        loop[self.v_c] -= 1.0
        for leg, mode in enumerate(modes):
            sign = 1.0 if leg == 0 else -1.0  # the current enters the second leg
            a[leg] = (self.switch_row(leg, mode) - sign * i) / self.c_d
            loop[leg] += sign
        a[self.v_c] = i / self.c_s
        a[self.i] = loop * self.z_ref / self.l
        if self.v_o is not None:
            a[self.v_o] = (i - (1 / self.r_a + self.g_p) * out) / self.c_p
        return a * self.period


def start_state(phases):
    size = phases[0][2].shape[0]
    whole = np.eye(size)
    for _, length, a in phases:
        whole = expm(a * length) @ whole
    x = np.linalg.solve(np.eye(size - 1) - whole[:-1, :-1], whole[:-1, -1])
    return np.append(x, 1.0)


def mean_integral(a, length, x0):
    """Integral of the state over a phase, from the exponential of [[A, 1], [0, 0]]."""
    n = a.shape[0]
    big = np.zeros((2 * n, 2 * n))
    big[:n, :n], big[:n, n:] = a, np.eye(n)
    return expm(big * length)[:n, n:] @ x0


def fourier_integral(a, start, length, x0, x1, k):
    """Integral of x e^{-j k 2 pi t} over a phase by the resolvent of its generator."""
    w = 2j * math.pi * k
    ends = x1 * np.exp(-w * (start + length)) - x0 * np.exp(-w * start)
    return np.linalg.solve(a - w * np.eye(a.shape[0]), ends)


def trajectory(a, length, x0):
    """Gauss-Legendre times, weights and states, on panels short against the fastest live mode.

    A mode that has decayed by e^-45 since the phase began no longer counts.
    """
    modes = np.linalg.eigvals(a)
    times, weights, states = [], [], []
    now, x = 0.0, x0
    while length - now > 1e-15:
        live = modes[-modes.real * now < 45.0]
        fastest = live[np.abs(live).argmax()]
        dies = 45.5 / -fastest.real if fastest.real < 0 else math.inf
        stretch = min(dies, length) - now
        panels = max(8, math.ceil(abs(fastest) * stretch / PANEL_DECAY))
        h = stretch / panels
        to_nodes, step = np.array([expm(a * h * g) for g in GAUSS_X]), expm(a * h)
        for p in range(panels):
            states.append(to_nodes @ x)
            weights.append(GAUSS_W * h)
            times.append(now + (p + GAUSS_X) * h)
            x = step @ x
        now += stretch
    return np.concatenate(times), np.concatenate(weights), np.vstack(states)


def extremes(a, length, x0, times, states):
    """Lowest and highest first drain voltage in a phase, stationary points inside included."""
    t = np.concatenate(([0.0], times, [length]))
    x = np.vstack((x0, states, expm(a * length) @ x0))
    seen = [x[0, 0], x[-1, 0]]
    slope = x @ a[0]
    for k in np.nonzero(slope[:-1] * slope[1:] < 0)[0]:
        moved = brentq(lambda s: a[0] @ (expm(a * s) @ x[k]), 0.0, t[k + 1] - t[k], xtol=1e-16)
        seen.append((expm(a * moved) @ x[k])[0])
    return min(seen), max(seen)


def solve(net, harmonics=5):
    """Averages over a period: powers in W, squares, Fourier coefficients, drain voltages."""
    phases = list(net.phases())
    x = first = start_state(phases)
    out, cur = net.output_row(), net.current_row()
    total = dict.fromkeys(("dc", "switch", "conduction", "i2", "vo2", "integral_i"), 0.0)
    coefficients = np.zeros(harmonics + 1, dtype=complex)
    low, high, dead_low, dead_high = math.inf, -math.inf, math.inf, -math.inf
    turn_on = {}
    now = 0.0
    for modes, length, a in phases:
        if modes[0] != "-":
            turn_on[modes[0]] = float(x[0])
        times, weights, states = trajectory(a, length, x)
        i2 = weights @ (states @ cur) ** 2
        total["i2"] += i2
        total["vo2"] += weights @ (states @ out) ** 2
        mean = mean_integral(a, length, x)
        total["integral_i"] += cur @ mean
        for leg, mode in enumerate(modes):
            if mode == "-":
                continue
            r, row = (net.r_p if mode == "P" else net.r_n), net.switch_row(leg, mode)
            total["switch"] += r * (weights @ (states @ row) ** 2)
            total["conduction"] += r * i2
            if mode == "P":
                total["dc"] += net.supply * (row @ mean)
        ends = expm(a * length) @ x
        for k in range(1, harmonics + 1):
            coefficients[k] += 2 * (out @ fourier_integral(a, now, length, x, ends, k))
        lo, hi = extremes(a, length, x, times, states)
        low, high = min(low, lo), max(high, hi)
        if modes[0] == "-":
            dead_low, dead_high = min(dead_low, lo), max(dead_high, hi)
        x, now = ends, now + length

    assert np.allclose(x, first, rtol=1e-9, atol=1e-9 * net.supply), "the period does not close"
    spent = total["switch"] + net.r_s * total["i2"] + (net.g_p + 1 / net.r_a) * total["vo2"]
    assert abs(spent - total["dc"]) <= 1e-9 * total["dc"], ("energy", spent, total["dc"])
    return total | {
        "harmonics_v": coefficients,
        "low_v": low,
        "high_v": high,
        "dead_low_v": dead_low,
        "dead_high_v": dead_high,
        "turn_on_v": turn_on,
    }
