//! What designers find, without a source.

use std::path::Path;
use std::sync::atomic::AtomicBool;
use widefront::evaluate::{Figures, Setup};
use widefront::search::Context;
use widefront::search::cell::search_cell;
use widefront::search::space::cells;
use widefront::study::{Objective, Range};
use widefront::{study, technology};

/// A loaded Q of 3 to 5 on chip keeps the losses of the passives tolerable (common practice): with inductors of Q 10 to
/// 15 (here 22 at best) the most efficient cell lies there or below, and efficiency falls past it.
#[test]
fn published_loaded_q_of_common_practice() {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("configs/studies/quick.toml");
    let file = study::read(&path).unwrap();
    let technology = technology::read_for(&file).unwrap().technology;
    let setup = Setup::new(&file.study, &technology).unwrap();
    let mut space = file.study.space.unwrap();
    space.supply_v = Range::Fixed(1.2);
    space.loaded_q = Range::Grid(vec![2.0, 3.0, 4.0, 5.0, 6.5, 8.0]);
    space.turns = Some(Range::Fixed(2.0));
    space.stages = Range::Fixed(4.0);
    let objectives = [Objective::Efficiency];
    let context = Context::new(&setup, &space, &objectives, 1);
    let best: Vec<(f64, Figures)> = cells(&space)
        .iter()
        .filter_map(|cell| {
            let front = search_cell(&context, cell, &AtomicBool::new(false))?;
            let figures = front.points.first()?.evaluation.figures.clone()?;
            Some((cell.loaded_q?, figures))
        })
        .collect();
    let (loaded_q, figures) = best
        .iter()
        .max_by(|a, b| a.1.efficiency.total_cmp(&b.1.efficiency))
        .unwrap();
    assert!(*loaded_q <= 5.0, "{loaded_q}");
    assert!(
        (10.0..25.0).contains(&figures.inductor_q),
        "{}",
        figures.inductor_q
    );
    let past: Vec<f64> = best
        .iter()
        .filter(|b| b.0 >= 5.0)
        .map(|b| b.1.efficiency)
        .collect();
    assert!(
        past.len() >= 2 && past.is_sorted_by(|a, b| a > b),
        "{past:?}"
    );
}
