//! The search's problem: gradients against differences.

use proptest::prelude::*;
use std::path::Path;
use std::sync::LazyLock;
use widefront::evaluate::Setup;
use widefront::search::Context;
use widefront::search::problem::{Goal, SliceProblem};
use widefront::search::quadratic::MOST_VARIABLES;
use widefront::search::solver::{Assessment, Constrained, Linear};
use widefront::search::space::{Slice, cells, slices};
use widefront::study::{Objective, Space};
use widefront::{study, technology};

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
