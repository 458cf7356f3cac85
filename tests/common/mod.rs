//! Studies and technologies built in code, shared by tests.

use std::collections::BTreeMap;
use std::path::PathBuf;
use widefront::study::{
    Design, DriverChoice, Limits, Network, Objective, SearchSettings, StageChoice, Study, Swing,
};
use widefront::technology::{
    Capacitor, Inductor, Layout, Rules, Technology, Transistor, TransistorPair,
};

/// A technology whose transistors are nothing but resistance and whose passives are lossless: limits are recovered on it.
pub fn ideal_technology() -> Technology {
    let transistor = Transistor {
        // So conductive that only the access resistance is left.
        transconductance_a_v2: 1e6,
        length_m: 1e-7,
        threshold_v: 0.5,
        threshold_drift_v_k: 0.0,
        slope: 1.0,
        degradation_per_v: 0.0,
        mobility_exponent: 0.0,
        access_resistance_ohm_m: 1e-11,
        gate_capacitance_f_m: 1e-22,
        overlap_capacitance_f_m: 0.0,
        junction_capacitance_f_m: 1e-15,
        junction_grading: 0.5,
        junction_potential_v: 1.0,
        off_current_a_m: 0.0,
    };
    Technology {
        name: "ideal".into(),
        source: "a limit".into(),
        transistors: BTreeMap::from([(
            "core".into(),
            TransistorPair {
                rating_v: 10.0,
                clamp_v: 100.0,
                nmos: transistor.clone(),
                pmos: transistor,
            },
        )]),
        inductor: Inductor::Fixed {
            quality: 1e14,
            area_base_m2: 1e-8,
            area_slope_m2_h: 30.0,
        },
        capacitor: Capacitor {
            density_f_m2: 2e-3,
            quality: 1e14,
            bottom_plate: 0.0,
        },
        layout: Layout {
            routing_resistance_ohm: 0.0,
            width_area_m: 4e-7,
            supply_ripple: 0.05,
            decoupling_density_f_m2: 6e-3,
        },
        rules: Rules::default(),
    }
}

/// A single-ended stage straight onto 50 Ω at 1 GHz, nothing limited.
pub fn direct_study() -> Study {
    Study {
        title: "limit".into(),
        technology: PathBuf::new(),
        temperature_k: 300.15,
        frequency_hz: 1e9,
        antenna_resistance_ohm: 50.0,
        antenna_loss_db: 0.0,
        stage: StageChoice {
            legs: 1,
            stack: 1,
            device: "core".into(),
            network: Network::Direct,
        },
        driver: DriverChoice {
            input_capacitance_f: 1e-25,
            ratio: 1.0,
            crowbar: 0.0,
            swing: Swing::Supply,
        },
        space: None,
        limits: Limits::default(),
        search: SearchSettings {
            objectives: vec![Objective::Efficiency],
            seed: 1,
            fronts_by: Vec::new(),
        },
        design: None,
        sweep: widefront::study::Sweep::default(),
    }
}

/// A millimetre of each device, no dead time.
pub fn direct_design() -> Design {
    Design {
        supply_v: 1.0,
        loaded_q: 5.0,
        nmos_width_m: 1e-3,
        width_ratio: 1.0,
        turns: None,
        trace_m: None,
        diameter_m: None,
        resistance_ohm: None,
        reactance: 0.0,
        dead_time: 0.0,
        stages: 1,
    }
}
