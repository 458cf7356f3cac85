//! The front's filter and hypervolume on problems whose fronts are printed, and gradients against differences.

use proptest::prelude::*;
use std::f64::consts::PI;
use std::path::Path;
use std::sync::LazyLock;
use widefront::evaluate::Setup;
use widefront::numerics::hypervolume::hypervolume;
use widefront::search::Context;
use widefront::search::front::non_dominated;
use widefront::search::problem::{Goal, SliceProblem};
use widefront::search::quadratic::MOST_VARIABLES;
use widefront::search::solver::{Assessment, Constrained, Linear};
use widefront::search::space::{Slice, cells, slices};
use widefront::study::{Objective, Space};
use widefront::{study, technology};

const SAMPLES: usize = 20_000;
/// A staircase of N points misses about (its two spans)/2N of the area under a smooth front.
const PLANE: f64 = 1e-4;

/// Hypervolume of a sampled plane front at (1.1, 1.1), dominated samples filtered out first.
fn plane_volume(front: impl Fn(f64) -> f64) -> f64 {
    let points: Vec<[f64; 3]> = (0..=SAMPLES)
        .map(|i| {
            let x = i as f64 / SAMPLES as f64;
            [x, front(x), 0.0]
        })
        .collect();
    let kept: Vec<[f64; 2]> = non_dominated(&points)
        .into_iter()
        .map(|i| [points[i][0], points[i][1]])
        .collect();
    hypervolume(&kept, &[1.1, 1.1])
}

/// ZDT1, 2 and 3 (Zitzler, Deb and Thiele 2000): exact hypervolumes at (1.1, 1.1), recomputed.
#[test]
fn published_zdt_fronts() {
    for (volume, exact) in [
        (plane_volume(|x| 1.0 - x.sqrt()), 0.876667),
        (plane_volume(|x| 1.0 - x * x), 0.543333),
        (
            plane_volume(|x| 1.0 - x.sqrt() - x * (10.0 * PI * x).sin()),
            1.331762909,
        ),
    ] {
        assert!(
            volume <= exact + 1e-6 && exact - volume < PLANE,
            "{volume} {exact}"
        );
    }
}

/// DTLZ1 and 2 (Deb and others 2002): exact hypervolumes at 1.1³, recomputed; a grid of n × n points of a surface misses
/// a few n-ths of it.
#[test]
fn published_dtlz_fronts() {
    const GRID: usize = 150;
    let surface = |point: &dyn Fn(f64, f64) -> [f64; 3]| {
        let at = |i: usize| i as f64 / GRID as f64;
        let points: Vec<[f64; 3]> = (0..=GRID * GRID + 2 * GRID)
            .map(|k| point(at(k % (GRID + 1)), at(k / (GRID + 1))))
            .collect();
        let kept: Vec<[f64; 3]> = non_dominated(&points)
            .into_iter()
            .map(|i| points[i])
            .collect();
        hypervolume(&kept, &[1.1; 3])
    };
    let plane = surface(&|a, b| [0.5 * a * b, 0.5 * a * (1.0 - b), 0.5 * (1.0 - a)]);
    let sphere = surface(&|a, b| {
        let (s, t) = (0.5 * PI * a, 0.5 * PI * b);
        [s.cos() * t.cos(), s.cos() * t.sin(), s.sin()]
    });
    for (volume, exact, missing) in [(plane, 1.310166667, 0.003), (sphere, 0.807401224, 0.015)] {
        assert!(
            volume < exact && exact - volume < missing,
            "{volume} {exact}"
        );
    }
}

struct Fixture {
    setup: Setup,
    space: Space,
    objectives: Vec<Objective>,
}

static FIXTURE: LazyLock<Fixture> = LazyLock::new(|| {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("configs/studies/quick.toml");
    let file = study::read(&path).unwrap();
    let technology = technology::read_for(&file).unwrap().technology;
    Fixture {
        setup: Setup::new(&file.study, &technology).unwrap(),
        space: file.study.space.unwrap(),
        objectives: file.study.search.objectives,
    }
});

static CONTEXT: LazyLock<Context<'static>> =
    LazyLock::new(|| Context::new(&FIXTURE.setup, &FIXTURE.space, &FIXTURE.objectives, 1));

static SLICES: LazyLock<Vec<Slice>> =
    LazyLock::new(|| slices(&FIXTURE.space, &cells(&FIXTURE.space)[1]));

proptest! {
    #![proptest_config(ProptestConfig::with_cases(200))]

    /// Exact gradients of objectives and limits agree with central differences.
    #[test]
    fn law_gradients_agree_with_differences(
        places in proptest::collection::vec(0.05..0.95f64, 8),
        which in 0usize..4,
    ) {
        /// Step in variables scaled to 0..1; its square is the difference's own error.
        const STEP: f64 = 1e-6;
        /// Rounding over the step: about 1e-9 of values of order 1, grown by slopes of order 10².
        const TOLERANCE: f64 = 2e-6;
        let slice = &SLICES[which % SLICES.len()];
        let problem = SliceProblem {
            setup: &FIXTURE.setup,
            slice,
            coil: CONTEXT.coil_source(slice.turns).unwrap(),
            goal: Goal { best: Objective::Efficiency, least_ln_power: Some(0.0), most_ln_area: Some(0.0) },
        };
        let mut point = [0.0; MOST_VARIABLES];
        point[..8].copy_from_slice(&places);
        let Some(center) = problem.assess(&point) else { return Ok(()); };
        for variable in 0..8 {
            let moved = |by: f64| {
                let mut p = point;
                p[variable] += by;
                problem.assess(&p)
            };
            let (Some(up), Some(down)) = (moved(STEP), moved(-STEP)) else { continue; };
            // The targets make output power and area constraints of the problem.
            let all = |a: &Assessment| -> Vec<Linear> {
                std::iter::once(&a.cost).chain(&a.constraints).copied().collect()
            };
            for ((c, u), d) in all(&center).iter().zip(all(&up)).zip(all(&down)) {
                let slope = c.gradient[variable];
                let difference = (u.value - d.value) / (2.0 * STEP);
                prop_assert!(
                    (difference - slope).abs() < TOLERANCE * (1.0 + slope.abs()),
                    "variable {}: {} {}", variable, difference, slope
                );
            }
        }
    }
}
