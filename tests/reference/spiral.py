"""Planar spiral as concentric rings cut into filaments; Yue and Wong's substrate."""

import math

import numpy as np
from scipy.linalg import lu_factor, lu_solve
from scipy.optimize import brentq
from scipy.special import ellipe, ellipkm1

MU0 = 4e-7 * math.pi
EPS0 = 8.8541878128e-12  # F/m (CODATA 2018)


class DoesNotClose(ValueError):
    """The turns leave no hole, or no trace width gives the inductance wanted."""


def mutual(a, b, z):
    """Coaxial circular filaments (Maxwell). The complement of the modulus keeps near pairs exact."""
    span = (a + b) ** 2 + z**2
    rest = ((a - b) ** 2 + z**2) / span
    kappa2 = 4 * a * b / span
    kappa = np.sqrt(kappa2)
    return MU0 * np.sqrt(a * b) * ((2 / kappa - kappa) * ellipkm1(rest) - 2 / kappa * ellipe(kappa2))


def cosine_edges(length, parts):
    """Edges of `parts` slices of 0..length, finer toward both ends."""
    return length * (1 - np.cos(np.pi * np.arange(parts + 1) / parts)) / 2


def bare_impedance(process, turns, trace, diameter, frequency, across=40, deep=10):
    """Complex impedance without the substrate.

    The section is the same above and below its middle, so filaments are solved in
    mirrored pairs: `deep` is even and only the upper half is kept.
    """
    if deep % 2:
        raise ValueError("an even number of filaments over the thickness")
    cut = cosine_edges(trace, across)
    thick = process["thickness_m"]
    height = cosine_edges(thick, deep)[deep // 2 :] - thick / 2
    r_cell, r_width = (cut[1:] + cut[:-1]) / 2, np.diff(cut)
    z_cell, z_width = (height[1:] + height[:-1]) / 2, np.diff(height)
    pitch = trace + process["spacing_m"]
    inner = diameter / 2 - trace - pitch * np.arange(turns)
    radius = (inner[:, None, None] + r_cell[None, :, None] + 0 * z_cell).ravel()
    if radius.min() <= process["spacing_m"]:
        raise DoesNotClose("the innermost filament is within a spacing of the centre")
    z = np.broadcast_to(z_cell, (turns, across, deep // 2)).ravel()
    width = np.broadcast_to(r_width[None, :, None], (turns, across, deep // 2)).ravel()
    tall = np.broadcast_to(z_width, (turns, across, deep // 2)).ravel()

    a, b = radius[:, None], radius[None, :]
    apart = z[:, None] - z[None, :]
    np.fill_diagonal(apart, 1.0)  # a placeholder, the diagonal is set below
    near = mutual(a, b, apart)
    gmd = 0.2235 * (width + tall)
    np.fill_diagonal(near, MU0 * radius * (np.log(8 * radius / gmd) - 2))
    far = mutual(a, b, z[:, None] + z[None, :])

    # A mirrored pair carries twice the current of one of its halves at the same voltage.
    resistance = process["resistivity_ohm_m"] * 2 * np.pi * radius / (width * tall)
    system = 2j * np.pi * frequency * (near + far) + np.diag(resistance)
    turn_of = np.zeros((radius.size, turns))
    turn_of[np.arange(radius.size), np.repeat(np.arange(turns), across * deep // 2)] = 1.0
    currents = lu_solve(lu_factor(system), turn_of.astype(complex))
    admittance = 2 * turn_of.T @ currents
    return np.linalg.solve(admittance, np.ones(turns)).sum()


def with_substrate(process, turns, trace, diameter, frequency, bare):
    """Impedance of the spiral with the shunt of Yue and Wong (1998, 2000)."""
    w = 2 * math.pi * frequency
    hole = diameter - 2 * (turns * trace + (turns - 1) * process["spacing_m"])
    area = math.pi * turns * (diameter + hole) / 2 * trace
    eps = process["oxide_permittivity"] * EPS0
    y_oxide = 1j * w * 0.5 * area * eps / process["oxide_height_m"]
    y_silicon = 0.5 * area * (
        process["substrate_conductance_s_m2"] + 1j * w * process["substrate_capacitance_f_m2"]
    )
    # The printed R_p and C_pp are this series admittance, written as a parallel pair.
    shunt = y_oxide * y_silicon / (y_oxide + y_silicon)
    under = (turns - 1) * trace**2 * eps / process["underpass_height_m"]
    return 1 / (1 / bare + shunt + 1j * w * under)


def coil(process, turns, trace, diameter, frequency, across=40, deep=10):
    bare = bare_impedance(process, turns, trace, diameter, frequency, across, deep)
    whole = with_substrate(process, turns, trace, diameter, frequency, bare)
    w = 2 * math.pi * frequency
    return {
        "series_inductance_h": float(bare.imag / w),
        "series_resistance_ohm": float(bare.real),
        "inductance_h": float(whole.imag / w),
        "resistance_ohm": float(whole.real),
        "quality": float(whole.imag / whole.real),
    }


def trace_for(process, turns, diameter, frequency, inductance, across=24, deep=6):
    """The trace width whose effective inductance is `inductance`; wider traces give less."""

    def excess(trace):
        return coil(process, turns, trace, diameter, frequency, across, deep)["inductance_h"] - inductance

    # The hole keeps a radius of two spacings at the widest, a trace is at least 1 um.
    spacing = process["spacing_m"]
    widest = (diameter / 2 - 2 * spacing - (turns - 1) * spacing) / turns
    if widest <= 1e-6 or excess(1e-6) < 0 or excess(widest) > 0:
        raise DoesNotClose("no trace width gives the inductance")
    return brentq(excess, 1e-6, widest, xtol=1e-15, rtol=1e-13)
