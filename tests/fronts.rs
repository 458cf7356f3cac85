//! Fronts: gradients against differences, no dominated points, hypervolume against counted cubes.

use proptest::prelude::*;
use proptest::test_runner::TestRunner;
use std::cell::Cell;
use std::path::Path;
use widefront::evaluate::Setup;
use widefront::numerics::hypervolume::hypervolume;
use widefront::run::folder::{read_cell, read_front};
use widefront::run::records::DesignRecord;
use widefront::search::Context;
use widefront::search::constrained::{Assessment, Constrained, Linear};
use widefront::search::front::{Costs, costs, dominates, non_dominated};
use widefront::search::problem::{Goal, SliceProblem};
use widefront::search::quadratic::MOST_VARIABLES;
use widefront::search::space::{cells, slices};
use widefront::study::{Objective, Space, StudyFile};
use widefront::{study, technology};

struct Fixture {
    setup: Setup,
    space: Space,
    objectives: Vec<Objective>,
}

/// The quick study with changes.
fn fixture(changes: &[(&str, &str)]) -> Fixture {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("configs/studies/quick.toml");
    let mut text = std::fs::read_to_string(&path).unwrap();
    for (from, to) in changes {
        assert!(text.contains(from), "{from}");
        text = text.replace(from, to);
    }
    resolved(study::read_str(&text, &path).unwrap())
}

fn resolved(file: StudyFile) -> Fixture {
    let technology = technology::read_for(&file).unwrap().technology;
    Fixture {
        setup: Setup::new(&file.study, &technology).unwrap(),
        space: file.study.space.unwrap(),
        objectives: file.study.search.objectives,
    }
}

/// Exact gradients of objectives and limits agree with central differences; says how many points were compared.
fn compare_gradients(fixture: &Fixture, cases: u32) -> usize {
    /// Step in variables scaled to 0..1; its square is the difference's own error.
    const STEP: f64 = 1e-6;
    /// Rounding over the step: 1e-11 where harmonics nearly cancel.
    const TOLERANCE: f64 = 2e-5;
    let context = Context::new(&fixture.setup, &fixture.space, &fixture.objectives, 1);
    let slices = slices(&fixture.space, &cells(&fixture.space)[1]);
    let compared = Cell::new(0);
    let points = proptest::array::uniform8(0.05..0.95f64);
    let mut runner = TestRunner::new(ProptestConfig {
        failure_persistence: None,
        ..ProptestConfig::with_cases(cases)
    });
    let checked = runner.run(&(points, 0..slices.len()), |(places, which)| {
        let slice = &slices[which];
        let Some(coil) = context.coil_source(slice.turns) else {
            return Ok(());
        };
        // The targets make output power and area constraints of the problem.
        let problem = SliceProblem {
            setup: &fixture.setup,
            slice,
            coil,
            goal: Goal {
                best: Objective::Efficiency,
                least_ln_power: Some(0.0),
                most_ln_area: Some(0.0),
            },
        };
        let size = problem.size();
        let mut point = [0.0; MOST_VARIABLES];
        point[..size].copy_from_slice(&places[..size]);
        let Some(center) = problem.assess(&point) else {
            return Ok(());
        };
        for variable in 0..size {
            let moved = |by: f64| {
                let mut p = point;
                p[variable] += by;
                problem.assess(&p)
            };
            let (Some(up), Some(down)) = (moved(STEP), moved(-STEP)) else {
                continue;
            };
            compared.set(compared.get() + 1);
            let all = |a: &Assessment| -> Vec<Linear> {
                std::iter::once(&a.cost)
                    .chain(&a.constraints)
                    .copied()
                    .collect()
            };
            for (place, ((c, u), d)) in all(&center)
                .iter()
                .zip(all(&up))
                .zip(all(&down))
                .enumerate()
            {
                let slope = c.gradient[variable];
                let difference = (u.value - d.value) / (2.0 * STEP);
                prop_assert!(
                    (difference - slope).abs() < TOLERANCE * (1.0 + slope.abs()),
                    "value {place}, variable {variable}: {difference} for {slope}; {} {} {}",
                    d.value,
                    c.value,
                    u.value
                );
            }
        }
        Ok(())
    });
    assert!(checked.is_ok(), "{}", checked.unwrap_err());
    compared.get()
}

#[test]
fn law_gradients_agree_with_differences() {
    const ALL_LIMITS: (&str, &str) = (
        "third_harmonic = ",
        "second_harmonic = \"-20 dBc\"\noverdrive_use = 0.8\nefficiency = { at_least = 0.1 }\nthird_harmonic = ",
    );
    let two = [("legs = 1 ", "legs = 2 "), ("stack = 1 ", "stack = 2 ")];
    let direct = [
        ("network = \"low-pass\"", "network = \"direct\""),
        ("trace       = { from = \"4 um\", to = \"30 um\" }\n", ""),
        ("trace = \"15 um\"\n", ""),
        ("resistance = \"50 ohm\"", "resistance = \"10 ohm\""),
    ];
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/studies/good/fixed-inductor.toml");
    let fixed = resolved(study::read(&path).unwrap());
    // Many points of a box are no designs.
    for (kind, fixture, cases) in [
        ("one leg", fixture(&[ALL_LIMITS]), 200),
        (
            "two stacked legs",
            fixture(&[ALL_LIMITS, two[0], two[1]]),
            60,
        ),
        ("direct", fixture(&direct), 200),
        ("fixed inductor", fixed, 3000),
    ] {
        let compared = compare_gradients(&fixture, cases);
        println!("{kind}: {compared} derivatives compared");
        assert!(compared > 50, "{kind}: {compared}");
    }
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(200))]

    /// The hypervolume of points on whole numbers is the count of unit cubes that one of them dominates.
    #[test]
    fn law_hypervolume_is_counted_cubes(
        points in proptest::collection::vec([0u8..7, 0u8..7, 0u8..7], 0..40),
    ) {
        const SIDE: u8 = 6;
        let cubes = (0..SIDE).flat_map(|x| (0..SIDE).flat_map(move |y| (0..SIDE).map(move |z| [x, y, z])));
        let below = |p: &[u8; 3], cube: &[u8; 3]| p.iter().zip(cube).all(|(p, c)| p <= c);
        let count = cubes.filter(|cube| points.iter().any(|p| below(p, cube))).count();
        let points: Vec<[f64; 3]> = points.iter().map(|p| p.map(f64::from)).collect();
        // Sums of whole numbers are exact.
        prop_assert_eq!(hypervolume(&points, &[f64::from(SIDE); 3]), count as f64);
        let kept: Vec<[f64; 3]> = non_dominated(&points).into_iter().map(|i| points[i]).collect();
        prop_assert_eq!(hypervolume(&kept, &[f64::from(SIDE); 3]), count as f64);
        let plane: Vec<[f64; 2]> = kept.iter().map(|p| [p[0], p[1]]).collect();
        let columns = (0..SIDE).flat_map(|x| (0..SIDE).map(move |y| [x, y].map(f64::from)));
        let area = columns.filter(|c| plane.iter().any(|p| p[0] <= c[0] && p[1] <= c[1])).count();
        prop_assert_eq!(hypervolume(&plane, &[f64::from(SIDE); 2]), area as f64);
        let line = points.iter().map(|p| p[0]).fold(f64::from(SIDE), f64::min);
        let ends: Vec<[f64; 1]> = points.iter().map(|p| [p[0]]).collect();
        prop_assert_eq!(hypervolume(&ends, &[f64::from(SIDE)]), f64::from(SIDE) - line);
    }
}

/// The overall front and each cell's front of the committed run: no design dominates another, and the overall front
/// leaves out nothing that no design of any cell dominates.
#[test]
fn law_fronts_hold_no_dominated_point() {
    let reference = Path::new(env!("CARGO_MANIFEST_DIR")).join("results/reference");
    let objectives = [
        Objective::Efficiency,
        Objective::OutputPower,
        Objective::Area,
    ];
    let all = |designs: &[DesignRecord]| -> Vec<Costs> {
        designs
            .iter()
            .filter_map(|d| d.evaluation.figures.as_ref())
            .map(|f| costs(&objectives, f.efficiency, f.output_power_w, f.area_m2))
            .collect()
    };
    let pure = |points: &[Costs]| {
        points
            .iter()
            .all(|a| points.iter().all(|b| !dominates(b, a)))
    };
    let front = all(&read_front(&reference).unwrap().designs);
    assert!(front.len() > 100 && pure(&front));
    let mut count = 0;
    while let Some(cell) = read_cell(&reference, count).unwrap() {
        let points = all(&cell.designs);
        assert!(points.len() == cell.designs.len() && pure(&points));
        assert!(
            points
                .iter()
                .all(|p| front.iter().any(|f| f == p || dominates(f, p)))
        );
        count += 1;
    }
    assert_eq!(count, 4);
}
