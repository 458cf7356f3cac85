//! Time of one evaluation: value, value with gradient, the same steady state by a general-purpose exponential; ratios.

mod general;

use criterion::{Criterion, criterion_group, criterion_main};
use std::hint::black_box;
use std::path::Path;
use std::time::Instant;
use widefront::evaluate::Setup;
use widefront::search::Context;
use widefront::search::constrained::Constrained;
use widefront::search::problem::{Goal, SliceProblem};
use widefront::search::quadratic::MOST_VARIABLES;
use widefront::search::space::{cells, slices};
use widefront::stage::{Coil, Sizing};
use widefront::steady::circuit::Circuit;
use widefront::steady::period::{self, ALL_HARMONICS};
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
        let circuit = evaluate::core(&setup, &sizing, &coil, ALL_HARMONICS)
            .expect("a design")
            .circuit;
        c.bench_function(&format!("steady state alone, {phases} phases"), |b| {
            b.iter(|| period::figures(black_box(&circuit), ALL_HARMONICS));
        });
        if phases == 4 {
            same_figures(&circuit);
            c.bench_function("the same by a general-purpose exponential", |b| {
                b.iter(|| general::period(black_box(&circuit)));
            });
            ratio(
                "general-purpose exponential over own",
                || period::figures(black_box(&circuit), ALL_HARMONICS),
                || general::period(black_box(&circuit)),
            );
        }
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
    c.bench_function("value alone", |b| {
        b.iter(|| problem.merits(black_box(&point[..8])));
    });
    c.bench_function("value and gradient in 8 variables", |b| {
        b.iter(|| problem.assess(black_box(&point)));
    });
    ratio(
        "value and gradient over value",
        || problem.merits(black_box(&point[..8])),
        || problem.assess(black_box(&point)),
    );
}

/// Time of `two` over that of `one`: medians of batches taken in turn, so that a busy machine slows both.
fn ratio<A, B>(what: &str, mut one: impl FnMut() -> A, mut two: impl FnMut() -> B) {
    const BATCHES: usize = 51;
    const CALLS: u32 = 200;
    let mut spent = [Vec::new(), Vec::new()];
    for _ in 0..BATCHES {
        let start = Instant::now();
        (0..CALLS).for_each(|_| drop(black_box(one())));
        let middle = Instant::now();
        (0..CALLS).for_each(|_| drop(black_box(two())));
        spent[0].push(middle.duration_since(start).as_secs_f64());
        spent[1].push(middle.elapsed().as_secs_f64());
    }
    let [one_s, two_s] = spent.map(|mut s| {
        s.sort_by(f64::total_cmp);
        s[BATCHES / 2] / f64::from(CALLS)
    });
    println!(
        "ratio: {what}: {:.2} us / {:.2} us = {:.2}",
        1e6 * two_s,
        1e6 * one_s,
        two_s / one_s
    );
}

/// Both ways give the same figures, or their times are no comparison.
fn same_figures(circuit: &Circuit<f64>) {
    const AGREEMENT: f64 = 1e-8;
    let own = period::figures(circuit, ALL_HARMONICS).expect("a steady state");
    let other = general::period(circuit);
    let pairs = [
        (own.supply_power_w, other.supply_power_w),
        (own.switch_dissipation_w, other.switch_dissipation_w),
        (own.current_squared_a2, other.current_squared_a2),
        (own.output_squared_v2, other.output_squared_v2),
    ];
    let harmonics = own.harmonic_v.into_iter().zip(other.harmonic_v);
    for (a, b) in pairs.into_iter().chain(harmonics) {
        assert!((a - b).abs() <= AGREEMENT * a.abs(), "own {a}, general {b}");
    }
    let [low, high] = other.drain_v;
    assert!(low < high);
}

criterion_group!(benches, kernel);
criterion_main!(benches);
