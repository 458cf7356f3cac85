//! Stages evaluated as drawn against the same stages evaluated as designed, and the cutting of widths into fingers.

use serde_json::Value;
use std::f64::consts::TAU;
use std::fs;
use std::path::Path;
use widefront::evaluate::{
    Drawn, DrawnInductor, Evaluation, Setup, evaluate, evaluate_drawn, tapered_widths_m,
};
use widefront::run::folder::read_front;
use widefront::sheet::{fingers, units};
use widefront::study::Study;
use widefront::technology::inductor::SpiralGeometry;
use widefront::technology::{DrawingRules, Technology};

/// Both ways solve the same circuit; parts are worked out in another order of roundings.
const SAME: f64 = 1e-9;

fn reference() -> (Study, Technology, Setup, Vec<Evaluation>) {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("results/reference");
    let run: Value = serde_json::from_slice(&fs::read(path.join("run.json")).unwrap()).unwrap();
    let study: Study = serde_json::from_value(run["study"].clone()).unwrap();
    let technology: Technology = serde_json::from_value(run["technology"].clone()).unwrap();
    let setup = Setup::new(&study, &technology).unwrap();
    let designs = read_front(&path).unwrap().designs;
    let designs: Vec<Evaluation> = designs
        .into_iter()
        .step_by(40)
        .map(|d| d.evaluation)
        .collect();
    assert!(designs.len() > 5);
    (study, technology, setup, designs)
}

/// The parts of a design as they are, none snapped.
fn unsnapped(setup: &Setup, evaluation: &Evaluation) -> Drawn {
    let (design, figures) = (&evaluation.design, evaluation.figures.as_ref().unwrap());
    Drawn {
        supply_v: design.supply_v,
        dead_time: design.dead_time,
        widths_m: [
            design.nmos_width_m,
            design.nmos_width_m * design.width_ratio,
        ],
        drivers_m: tapered_widths_m(setup, design, figures.taper),
        inductor: DrawnInductor::Spiral(SpiralGeometry {
            turns: design.turns.unwrap(),
            trace_m: design.trace_m.unwrap(),
            diameter_m: design.diameter_m.unwrap(),
        }),
        leg_series_capacitance_f: figures.series_capacitance_f * f64::from(setup.legs),
        shunt_capacitance_f: figures.shunt_capacitance_f,
    }
}

/// Every number of both, by name; those of the second within `tolerance` of the first.
fn agree(first: &Evaluation, second: &Evaluation, names: &[&str], tolerance: f64) {
    let json = |e: &Evaluation| serde_json::to_value(e).unwrap();
    let (first, second) = (json(first), json(second));
    for name in names {
        let read = |v: &Value| {
            let found = name.split('.').fold(v, |v, key| &v[key]);
            found.as_f64().unwrap_or_else(|| panic!("{name}: {found}"))
        };
        let (a, b) = (read(&first), read(&second));
        assert!((a - b).abs() <= tolerance * a.abs(), "{name}: {a} and {b}");
    }
}

const OF_THE_STAGE: [&str; 15] = [
    "output_power_w",
    "drain_efficiency",
    "dc_power_w",
    "losses_w.conduction",
    "losses_w.inductor",
    "losses_w.capacitor",
    "on_resistance_n_ohm",
    "on_resistance_p_ohm",
    "drain_capacitance_f",
    "gate_capacitance_f",
    "optimum_resistance_ohm",
    "inductance_h",
    "shunt_capacitance_f",
    "series_capacitance_f",
    "third_harmonic_dbc",
];

const OF_THE_DRIVERS: [&str; 8] = [
    "efficiency",
    "pae",
    "total_power_w",
    "losses_w.gate",
    "losses_w.driver_chain",
    "edge_time_fraction",
    "taper",
    "area_m2",
];

#[test]
fn law_a_design_drawn_without_snapping_is_the_design() {
    let (_, _, setup, designs) = reference();
    for searched in &designs {
        let drawn = evaluate_drawn(&setup, &unsnapped(&setup, searched), 64).unwrap();
        agree(searched, &drawn.evaluation, &OF_THE_STAGE, SAME);
        agree(searched, &drawn.evaluation, &OF_THE_DRIVERS, SAME);
        assert!((drawn.evaluation.design.loaded_q / searched.design.loaded_q - 1.0).abs() < SAME);
    }
}

/// The design that the drawn parts amount to, evaluated as any other: only the driver chain differs, which is drawn in
/// whole fingers there and tapers exactly here.
#[test]
fn law_the_snapped_design_evaluates_as_any_design() {
    /// A finger of the first stage is a few per cent of it.
    const WHOLE_FINGERS: f64 = 0.05;
    let (_, technology, setup, designs) = reference();
    let rules = technology.rules.complete().unwrap();
    for searched in &designs {
        let figures = searched.figures.as_ref().unwrap();
        let made = widefront::sheet::make(&setup, &rules, searched, figures).unwrap();
        let drawn = &made.drawn.evaluation;
        let again = evaluate(&setup, &drawn.design);
        agree(&again, drawn, &OF_THE_STAGE, SAME);
        agree(&again, drawn, &OF_THE_DRIVERS, WHOLE_FINGERS);
        let (n, p) = (&made.snapped.switches[0], &made.snapped.switches[1]);
        assert!((drawn.design.nmos_width_m / n.width_m - 1.0).abs() < SAME);
        assert!((drawn.design.width_ratio / (p.width_m / n.width_m) - 1.0).abs() < SAME);
        // The spiral resonates with what is drawn: X_Cs = (Q_L − Q_m − x) R_opt.
        let f = drawn.figures.as_ref().unwrap();
        let shunt = f.shunt_capacitance_f.unwrap();
        let w = TAU * setup.frequency_hz;
        let matching = w * setup.network.antenna_resistance_ohm * shunt;
        let factor = drawn.design.loaded_q - matching - drawn.design.reactance;
        let series = f64::from(setup.legs) / (w * factor * f.optimum_resistance_ohm);
        assert!((series / made.snapped.series.capacitance_f - 1.0).abs() < SAME);
    }
}

fn rules() -> DrawingRules {
    let (_, technology, _, _) = reference();
    technology.rules.complete().unwrap()
}

#[test]
fn law_fingers_keep_the_rules_and_the_width() {
    const ROUNDING: f64 = 1e-15;
    let rules = rules();
    for step in 0..2000 {
        let width_m = 1.3e-6 * 1.006f64.powi(step);
        for even in [false, true] {
            let cut = fingers(&rules, width_m, rules.most_finger_m, even);
            let (n, m) = (f64::from(cut.fingers), f64::from(cut.devices));
            let steps = cut.finger_m / rules.grid_m;
            assert!((steps - steps.round()).abs() < 1e-6, "{cut:?}");
            assert!(cut.finger_m >= rules.least_finger_m - ROUNDING, "{cut:?}");
            assert!(cut.finger_m <= rules.most_finger_m + ROUNDING, "{cut:?}");
            assert!(cut.fingers <= rules.most_fingers && (!even || cut.fingers.is_multiple_of(2)));
            assert!((cut.width_m - cut.finger_m * n * m).abs() < ROUNDING);
            let off = (cut.width_m - width_m).abs();
            assert!(off <= 0.5 * rules.grid_m * n * m + ROUNDING, "{cut:?}");
        }
    }
}

#[test]
fn law_capacitors_are_the_nearest_whole_units() {
    let rules = rules();
    let unit = rules.capacitor_unit_f;
    for (wanted, count) in [(0.1, 1), (1.4, 1), (1.6, 2), (1234.4, 1234)] {
        let drawn = units(&rules, wanted * unit);
        assert_eq!(drawn.units, count);
        assert!((drawn.capacitance_f - f64::from(count) * unit).abs() < 1e-27);
    }
}
