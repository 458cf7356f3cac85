//! Time of one evaluation: value, value with gradient, and the same steady state by a general-purpose exponential.

use criterion::{Criterion, criterion_group, criterion_main};
use std::hint::black_box;
use std::path::Path;
use widefront::evaluate::Setup;
use widefront::search::Context;
use widefront::search::problem::{Goal, SliceProblem};
use widefront::search::quadratic::MOST_VARIABLES;
use widefront::search::solver::Constrained;
use widefront::search::space::{cells, slices};
use widefront::stage::{Coil, Sizing};
use widefront::steady::period::ALL_HARMONICS;
use widefront::study::Objective;
use widefront::{evaluate, study, technology};

fn kernel(c: &mut Criterion) {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("configs/studies/quick.toml");
    let file = study::read(&path).expect("study");
    let technology = technology::read_for(&file).expect("technology").technology;
    let setup = Setup::new(&file.study, &technology).expect("setup");
    for dead_time in [0.05, 0.0] {
        let sizing = Sizing {
            supply_v: 1.2,
            loaded_q: 4.0,
            nmos_width_m: 600e-6,
            width_ratio: 2.0,
            reactance: 0.5,
            dead_time,
            stages: 5,
        };
        let coil = Coil {
            inductance_h: 1.7e-9,
            resistance_ohm: 2.0,
            area_m2: 1e-7,
        };
        let phases = if dead_time > 0.0 { 4 } else { 2 };
        c.bench_function(&format!("steady state and leg, {phases} phases"), |b| {
            b.iter(|| {
                evaluate::core(
                    black_box(&setup),
                    black_box(&sizing),
                    black_box(&coil),
                    ALL_HARMONICS,
                )
            });
        });
    }
    let space = file.study.space.as_ref().expect("space");
    let objectives = &file.study.search.objectives;
    let context = Context::new(&setup, space, objectives, 1);
    let cell = cells(space)[1];
    let slices = slices(space, &cell);
    let problem = SliceProblem {
        setup: &setup,
        slice: &slices[0],
        coil: context.coil_source(slices[0].turns).expect("coil"),
        goal: Goal {
            best: Objective::Efficiency,
            least_ln_power: None,
            most_ln_area: None,
        },
    };
    // Width, ratio, trace, diameter, reactance, dead time, residuals; the first diameter whose design exists.
    let point = (1..20)
        .map(|place| {
            let mut point = [0.0; MOST_VARIABLES];
            let diameter = f64::from(place) / 20.0;
            point[..8].copy_from_slice(&[0.5, 0.3, 0.4, diameter, 0.1, 0.4, 0.3, 0.3]);
            point
        })
        .find(|point| problem.merits(point).is_ok())
        .expect("some diameter gives a design");
    c.bench_function("value and gradient in 8 variables", |b| {
        b.iter(|| problem.assess(black_box(&point)));
    });
}

criterion_group!(benches, kernel);
criterion_main!(benches);
