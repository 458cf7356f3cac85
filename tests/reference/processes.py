"""Technologies of the reference cases. Figures without a source are invented for the demo."""

FF_UM = 1e-9  # 1 fF/um in F/m
OHM_UM = 1e-6


def device(k, length, v_t, drift, n, theta, m, access, gate, overlap, junction, grading, phi, off):
    return {
        "transconductance_a_v2": k * 1e-6,
        "length_m": length * 1e-9,
        "threshold_v": v_t,
        "threshold_drift_v_k": drift * 1e-3,
        "slope": n,
        "degradation_per_v": theta,
        "mobility_exponent": m,
        "access_resistance_ohm_m": access * OHM_UM,
        "gate_capacitance_f_m": gate * FF_UM,
        "overlap_capacitance_f_m": overlap * FF_UM,
        "junction_capacitance_f_m": junction * FF_UM,
        "junction_grading": grading,
        "junction_potential_v": phi,
        "off_current_a_m": off * 1e-3,  # from nA/um
    }


FIXED_A = {"model": "fixed", "quality": 12.0, "area_base_m2": 2e-8, "area_slope_m2_h": 30.0}
FIXED_B = {"model": "fixed", "quality": 35.0, "area_base_m2": 0.0, "area_slope_m2_h": 12.0}
SPIRAL_A = {
    "model": "spiral",
    "resistivity_ohm_m": 1.9e-8,
    "thickness_m": 3.4e-6,
    "spacing_m": 3e-6,
    "oxide_height_m": 6e-6,
    "oxide_permittivity": 4.0,
    "substrate_capacitance_f_m2": 1.6e-6,
    "substrate_conductance_s_m2": 4e4,
    "underpass_height_m": 1e-6,
    "keep_out_m": 30e-6,
}
# Metal, oxide and underpass heights of an open 130 nm process (its specification, rev. 1.2).
SPIRAL_B = {
    "model": "spiral",
    "resistivity_ohm_m": 3.3e-8,
    "thickness_m": 3e-6,
    "spacing_m": 2.5e-6,
    "oxide_height_m": 10.83e-6,
    "oxide_permittivity": 4.1,
    "substrate_capacitance_f_m2": 2.5e-6,
    "substrate_conductance_s_m2": 1.2e4,
    "underpass_height_m": 2.8e-6,
    "keep_out_m": 45e-6,
}
CAPACITOR_A = {"density_f_m2": 2e-3, "quality": 60.0, "bottom_plate": 0.01}
CAPACITOR_B = {"density_f_m2": 1.5e-3, "quality": 140.0, "bottom_plate": 0.0}
LAYOUT_A = {
    "routing_resistance_ohm": 0.02,
    "width_area_m": 0.4e-6,
    "supply_ripple": 0.05,
    "decoupling_density_f_m2": 6e-3,
}
LAYOUT_B = {
    "routing_resistance_ohm": 0.0,
    "width_area_m": 0.9e-6,
    "supply_ripple": 0.02,
    "decoupling_density_f_m2": 4e-3,
}

# Invented for the demo.
DEMO55 = {
    "pair": {
        "rating_v": 1.32,
        "clamp_v": 0.6,
        "nmos": device(280, 60, 0.35, -0.8, 1.35, 0.5, -1.3, 200, 0.95, 0.28, 0.65, 0.4, 0.8, 20),
        "pmos": device(100, 60, 0.33, -0.7, 1.4, 0.35, -1.1, 420, 0.98, 0.26, 0.7, 0.42, 0.82, 9),
    },
    "capacitor": CAPACITOR_A,
    "layout": LAYOUT_A,
}
# Transistor parameters fitted to the measured transfer curves of an open 130 nm process
# (IHP-Open-PDK, commit 5cccb161, Apache-2.0); capacitances and off currents rounded from its
# measurements and specification, junction per width assumed.
OPEN130_CORE = {
    "pair": {
        "rating_v": 1.65,
        "clamp_v": 0.7,
        "nmos": device(436.7, 130, 0.5327, -0.821, 1.6, 0.0, -1.435, 233.5, 1.16, 0.36, 0.37, 0.3, 0.7, 0.1),
        "pmos": device(127.4, 130, 0.4944, -0.832, 1.0, 0.0507, -1.05, 751.2, 1.2, 0.35, 0.33, 0.35, 0.75, 0.05),
    },
    "capacitor": CAPACITOR_B,
    "layout": LAYOUT_B,
}
OPEN130_IO = {
    "pair": {
        "rating_v": 3.6,
        "clamp_v": 0.65,
        "nmos": device(244.1, 500, 0.8883, -0.864, 1.0, 0.134, -1.534, 536.0, 1.4, 0.45, 0.4, 0.32, 0.7, 3e-4),
        "pmos": device(58.24, 350, 0.6544, -1.029, 1.6, 0.0679, -1.225, 1599.2, 1.35, 0.35, 0.38, 0.36, 0.75, 3e-4),
    },
    "capacitor": CAPACITOR_B,
    "layout": LAYOUT_A,
}
