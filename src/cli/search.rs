//! stub
use super::{Failure, load};
use crate::search::{Context, cell::search_cell, space};
use rayon::prelude::*;
#[derive(Debug, clap::Args)]
pub struct SearchArguments {
    study: std::path::PathBuf,
}
pub fn run(a: &SearchArguments) -> Result<(), Failure> {
    let l = load(&a.study, &[])?;
    let s = l.file.study.space.as_ref().unwrap();
    let t = std::time::Instant::now();
    let c = Context::new(
        &l.setup,
        s,
        &l.file.study.search.objectives,
        l.file.study.search.seed,
    );
    eprintln!("tables {:?}", t.elapsed());
    let t = std::time::Instant::now();
    let cells = space::cells(s);
    let fronts: Vec<_> = cells
        .par_iter()
        .map(|cell| {
            let t = std::time::Instant::now();
            let f = search_cell(&c, cell);
            (f, t.elapsed())
        })
        .collect();
    let mut ev = 0;
    for (f, t) in &fronts {
        ev += f.evaluations;
        let best = f
            .points
            .first()
            .and_then(|p| p.evaluation.figures.as_ref())
            .map(|f| (f.efficiency, f.output_power_dbm, f.area_m2 * 1e6));
        let bad = f.points.iter().filter(|p| p.residual > 1e-4).count();
        println!(
            "{:?} {:?} n {} bad {} ev {} {:?} best {:?} {:?}",
            f.cell.loaded_q,
            f.cell.supply_v,
            f.points.len(),
            bad,
            f.evaluations,
            t,
            best,
            f.points.first().map(|p| &p.evaluation.design)
        );
    }
    println!("total {:?} ev {ev}", t.elapsed());
    Ok(())
}
