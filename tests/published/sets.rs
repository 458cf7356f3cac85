//! Fronts of printed problems, filtered and measured.

use crate::{Line, Within};
use std::f64::consts::PI;
use widefront::numerics::hypervolume::hypervolume;
use widefront::search::front::non_dominated;

const SMALL: &str = "textbook sets (Zitzler, Deb and Thiele 2000), counted by hand";
const ZDT: &str = "Zitzler, Deb and Thiele (2000), integrated apart";
const DTLZ: &str = "Deb, Thiele, Laumanns and Zitzler (2002), integrated apart";

const SAMPLES: usize = 20_000;
const GRID: usize = 300;
/// A staircase of 20,000 points misses about (its two spans)/40,000 of the area under a smooth front.
const PLANE: f64 = 1e-4;

/// What is left of the extrapolation from two grids.
const SURFACE: f64 = 2e-5;

/// Hypervolume at (1.1, 1.1) of a sampled plane front, dominated samples filtered out first.
fn plane(front: impl Fn(f64) -> f64) -> f64 {
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

/// Hypervolume of a surface over the unit square, sampled at two spacings: what a grid misses is proportional to its
/// spacing, so twice the finer less the coarser leaves the square of it.
fn surface(reference: [f64; 3], point: impl Fn(f64, f64) -> [f64; 3]) -> f64 {
    let sampled = |grid: usize| {
        let at = |i: usize| i as f64 / grid as f64;
        let points: Vec<[f64; 3]> = (0..=grid)
            .flat_map(|i| (0..=grid).map(move |k| (i, k)))
            .map(|(i, k)| point(at(i), at(k)))
            .collect();
        let kept: Vec<[f64; 3]> = non_dominated(&points)
            .into_iter()
            .map(|i| points[i])
            .collect();
        hypervolume(&kept, &reference)
    };
    2.0 * sampled(GRID) - sampled(GRID / 2)
}

fn small() -> Line {
    let pair = [[1.0, 3.0], [2.0, 2.0], [3.0, 1.0]];
    let triple = [[1.0, 2.0, 3.0], [2.0, 3.0, 1.0], [3.0, 1.0, 2.0]];
    Line {
        quantity:
            "hypervolume of {(1,3),(2,2),(3,1)} at (4,4), of {(1,2,3),(2,3,1),(3,1,2)} at (4,4,4)"
                .into(),
        source: SMALL,
        values: vec![
            ("6", hypervolume(&pair, &[4.0; 2])),
            ("13", hypervolume(&triple, &[4.0; 3])),
        ],
        within: Within::Units(0.0),
    }
}

fn planes() -> Line {
    Line {
        quantity: "hypervolume of ZDT1, ZDT2, ZDT3 at (1.1, 1.1), 20,001 samples".into(),
        source: ZDT,
        values: vec![
            ("0.876667", plane(|x| 1.0 - x.sqrt())),
            ("0.543333", plane(|x| 1.0 - x * x)),
            (
                "1.331763",
                plane(|x| 1.0 - x.sqrt() - x * (10.0 * PI * x).sin()),
            ),
        ],
        within: Within::Units(PLANE),
    }
}

fn surfaces() -> Line {
    let simplex = |a: f64, b: f64| [0.5 * a * b, 0.5 * a * (1.0 - b), 0.5 * (1.0 - a)];
    let sphere = |a: f64, b: f64| {
        let (s, t) = (0.5 * PI * a, 0.5 * PI * b);
        [s.cos() * t.cos(), s.cos() * t.sin(), s.sin()]
    };
    let patches = |a: f64, b: f64| {
        let term = |x: f64| x * (1.0 + (3.0 * PI * x).sin());
        [a, b, 6.0 - term(a) - term(b)]
    };
    Line {
        quantity: "hypervolume of DTLZ1, DTLZ2 at (1.1, 1.1, 1.1), DTLZ7 at (1.1, 1.1, 6.6), grids of 300 and 150".into(),
        source: DTLZ,
        values: vec![
            ("1.310167", surface([1.1; 3], simplex)),
            ("0.807401", surface([1.1; 3], sphere)),
            ("2.701895", surface([1.1, 1.1, 6.6], patches)),
        ],
        within: Within::Units(SURFACE),
    }
}

pub fn lines() -> Vec<Line> {
    vec![small(), planes(), surfaces()]
}

#[test]
fn published_hypervolumes() {
    lines().iter().for_each(Line::check);
}
