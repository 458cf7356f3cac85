//! Fronts against evolutionary baselines and against long reference fronts.
//!
//! `cargo bench --bench front` compares; `cargo bench --bench front -- reference` makes the references anew,
//! `-- own` leaves the baselines out; names of cells, as `default-40`, restrict all three. Cells: both ends and the middle of the default study's diagonal, and the middle of the open
//! 130 nm study, the stacked study and the default study with two legs.
//!
//! A reference is the union of everything that NSGA-II (Deb, Pratap, Agarwal and Meyarivan 2002) and NSGA-III (Deb and Jain
//! 2014) see in a hundred times the search's own assessments of the cell, of two searches with finer levels, more
//! draws, more starts and other seeds, and of the search itself; thinned to a hundredth of its span. Infeasible designs rank
//! behind feasible ones by what they break (Deb's rules), whole numbers are rounded.

use forge_core::algo::{NsgaII, NsgaIII};
use forge_core::problem::{MultiProblem, multi_func};
use forge_core::solution::ParetoFront;
use forge_core::termination::Termination;
use std::cell::{Cell, RefCell};
use std::fmt::Write as _;
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicBool, AtomicUsize, Ordering};
use std::time::Instant;
use widefront::evaluate::Setup;
use widefront::numerics::hypervolume::hypervolume;
use widefront::run::summary::hypervolume_reference;
use widefront::search::cell::{best_efficiencies, point_costs, search_cell};
use widefront::search::front::{Costs, non_dominated, spread};
use widefront::search::problem::{Goal, SliceProblem};
use widefront::search::space::{self, Slice, cells, slices};
use widefront::search::{Context, Effort};
use widefront::study::{Objective, Study};
use widefront::technology::Technology;
use widefront::{study, technology};

/// Multiples of the search's own assessments that the baselines get.
const BUDGETS: [u64; 3] = [1, 10, 100];
/// As many as the search finds points in a cell; for NSGA-III also its reference directions, C(24, 2).
const POPULATION: usize = 300;
const DIVISIONS: usize = 23;
/// Objectives of an infeasible design: behind every feasible one, in the order of what is broken.
const INFEASIBLE: f64 = 1e3;
/// Points of a reference are no closer than this part of its span.
const REFERENCE_SPACING: f64 = 0.01;
/// Points that a baseline saw are first thinned to this part of their span, then to as many as the search has.
const FINE: f64 = 0.003;
/// Demands asked of a cell where the efficiency at equal power and area is compared.
const DEMANDS: usize = 400;
/// Halvings of the spacing that thins a reference to as many points as the search has.
const HALVINGS: usize = 20;
/// Seeds of the longer searches.
const LONG_SEEDS: [u64; 2] = [101, 102];
const LONG: Effort = Effort {
    levels: 60,
    samples: 160,
    starts: 8,
};

struct Subject {
    name: &'static str,
    study: Study,
    technology: Technology,
    cells: Vec<usize>,
}

fn subject(name: &'static str, file: &str, cells: &[usize]) -> Subject {
    let path = Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("configs/studies")
        .join(file);
    let file = study::read(&path).expect("study");
    let technology = technology::read_for(&file).expect("technology").technology;
    Subject {
        name,
        study: file.study,
        technology,
        cells: cells.to_vec(),
    }
}

fn subjects() -> Vec<Subject> {
    let mut two_legs = subject("two-legs", "default.toml", &[40]);
    two_legs.study.stage.legs = 2;
    vec![
        subject("default", "default.toml", &[0, 40, 80]),
        subject("open130", "open130.toml", &[40]),
        subject("stacked", "stacked.toml", &[40]),
        two_legs,
    ]
}

/// A cell as one problem of continuous and rounded variables.
struct Whole<'a> {
    problems: Vec<SliceProblem<'a>>,
    area_scale: f64,
    seen: RefCell<Vec<Costs>>,
    /// Filtered when so many are seen: twice what was kept, or each new one would cost a filtering.
    most_seen: Cell<usize>,
}

const LEAST_FILTERED: usize = 1 << 16;

impl<'a> Whole<'a> {
    fn new(context: &'a Context<'a>, slices: &'a [Slice], area_m2: f64) -> Self {
        let problem = |slice: &'a Slice| {
            Some(SliceProblem {
                setup: context.setup,
                slice,
                coil: context.coil_source(slice.turns)?,
                goal: Goal {
                    best: Objective::Efficiency,
                    least_ln_power: None,
                    most_ln_area: None,
                },
            })
        };
        Self {
            problems: slices.iter().filter_map(problem).collect(),
            area_scale: area_m2,
            seen: RefCell::new(Vec::new()),
            most_seen: Cell::new(LEAST_FILTERED),
        }
    }

    /// Objectives of order 1; feasible designs are remembered.
    fn objectives(&self, x: &[f64]) -> Vec<f64> {
        let (places, which) = x.split_at(x.len() - 1);
        let last = self.problems.len() - 1;
        let slice = (which[0] * self.problems.len() as f64) as usize;
        let Ok(merits) = self.problems[slice.min(last)].merits(places) else {
            return vec![2.0 * INFEASIBLE; 3];
        };
        let broken: f64 = merits.limits.iter().map(|l| (-l).max(0.0)).sum();
        if broken > 0.0 {
            return vec![INFEASIBLE + broken.min(INFEASIBLE); 3];
        }
        let [efficiency, power, area] = merits.objectives.map(f64::exp);
        let mut seen = self.seen.borrow_mut();
        seen.push([-efficiency, -power, area]);
        if seen.len() >= self.most_seen.get() {
            let kept = non_dominated(&seen).into_iter().map(|i| seen[i]).collect();
            *seen = kept;
            self.most_seen.set(LEAST_FILTERED.max(2 * seen.len()));
        }
        vec![-efficiency, -10.0 * power, area / self.area_scale]
    }

    /// Non-dominated of what was seen, and forgets it.
    fn take(&self) -> Vec<Costs> {
        let seen = self.seen.take();
        non_dominated(&seen).into_iter().map(|i| seen[i]).collect()
    }
}

fn evolve(whole: &Whole<'_>, third: bool, budget: u64) -> ParetoFront {
    let dimension = whole.problems[0].axes() + 1;
    let problem = multi_func(vec![(0.0, 1.0); dimension], 3, |x: &[f64]| {
        whole.objectives(x)
    });
    assert_eq!(problem.dim(), dimension);
    let until = Termination::budget(budget as usize);
    if third {
        let settings = NsgaIII {
            pop_size: POPULATION,
            divisions: DIVISIONS,
            ..NsgaIII::default()
        };
        settings.optimize(&problem, &until)
    } else {
        let settings = NsgaII {
            pop_size: POPULATION,
            ..NsgaII::default()
        };
        settings.optimize(&problem, &until)
    }
}

fn population(front: &ParetoFront, area_scale: f64) -> Vec<Costs> {
    front
        .solutions
        .iter()
        .filter(|s| s.objectives[0] < 0.0)
        .map(|s| {
            [
                s.objectives[0],
                s.objectives[1] / 10.0,
                s.objectives[2] * area_scale,
            ]
        })
        .collect()
}

/// Efficiency × W × mm².
fn volume(points: &[Costs], area_m2: f64) -> f64 {
    const MM2: f64 = 1e6;
    let scaled: Vec<Costs> = points.iter().map(|p| [p[0], p[1], p[2] * MM2]).collect();
    hypervolume(&scaled, &[0.0, 0.0, area_m2 * MM2])
}

/// One cell with all that a comparison needs.
struct Place<'a> {
    name: String,
    context: Context<'a>,
    cell: space::Cell,
    area_m2: f64,
}

fn searched(place: &Place<'_>) -> (Vec<Costs>, u64) {
    let never = AtomicBool::new(false);
    let front = search_cell(&place.context, &place.cell, &never).expect("not stopped");
    let costs = front
        .points
        .iter()
        .map(|p| point_costs(place.context.objectives, p));
    (costs.collect(), front.evaluations)
}

fn reference_path(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("tests/reference/fronts")
        .join(format!("{name}.csv"))
}

fn thinned(points: &[Costs], spacing: f64) -> Vec<Costs> {
    spread(points, spacing)
        .into_iter()
        .map(|i| points[i])
        .collect()
}

/// Makes a cell's reference; returns what there is to say of it.
fn make_reference(place: &mut Place<'_>) -> String {
    let (own, evaluations) = searched(place);
    let budget = evaluations * BUDGETS[2];
    let mut union = own.clone();
    let mut spent = evaluations;
    {
        let slices = slices(place.context.space, &place.cell);
        let whole = Whole::new(&place.context, &slices, place.area_m2);
        for third in [false, true] {
            spent += evolve(&whole, third, budget).evaluations as u64;
        }
        union.extend(whole.take());
    }
    let (seed, effort) = (place.context.seed, place.context.effort);
    place.context.effort = LONG;
    for seed in LONG_SEEDS {
        place.context.seed = seed;
        let (points, evaluations) = searched(place);
        spent += evaluations;
        union.extend(points);
    }
    (place.context.seed, place.context.effort) = (seed, effort);
    let full: Vec<Costs> = non_dominated(&union)
        .into_iter()
        .map(|i| union[i])
        .collect();
    let kept = thinned(&full, REFERENCE_SPACING);
    let mut text = format!(
        "# cargo bench --bench front -- reference: union of NSGA-II, NSGA-III, longer searches and the search, {spent} \
         assessments\n# hypervolume of all {} points, efficiency x W x mm^2: {:.9}\nefficiency,output_power_w,area_m2\n",
        full.len(),
        volume(&full, place.area_m2)
    );
    for p in &kept {
        let _ = writeln!(text, "{:.7},{:.7e},{:.7e}", -p[0], -p[1], p[2]);
    }
    let path = reference_path(&place.name);
    std::fs::create_dir_all(path.parent().expect("folder")).expect("folder");
    std::fs::write(path, text).expect("reference");
    format!(
        "{:<12} {spent:>9} assessments, {} points, {} kept; the search's own front has {:.4} of its hypervolume",
        place.name,
        full.len(),
        kept.len(),
        volume(&own, place.area_m2) / volume(&full, place.area_m2)
    )
}

fn read_reference(name: &str) -> (Vec<Costs>, f64) {
    let path = reference_path(name);
    let text = std::fs::read_to_string(&path).unwrap_or_else(|e| panic!("{}: {e}", path.display()));
    let all = text
        .lines()
        .find_map(|l| {
            l.strip_prefix("# hypervolume")?
                .rsplit(' ')
                .next()?
                .parse()
                .ok()
        })
        .expect("hypervolume");
    let points = text
        .lines()
        .filter(|l| !l.starts_with(['#', 'e']))
        .map(|line| {
            let mut fields = line.split(',').map(|f| f.parse::<f64>().expect("number"));
            let mut next = || fields.next().expect("field");
            [-next(), -next(), next()]
        });
    (points.collect(), all)
}

/// A reference is printed to eight digits; what its rounding asks for too much is let go.
const ROUNDING: f64 = 1e-6;

/// A cell asked for the powers and areas of points of its reference.
struct Demanded {
    demands: usize,
    assessments: u64,
    unanswered: usize,
    /// Worst of (reference − answer) / reference among what was answered.
    shortfall: f64,
    /// Hypervolume of the answers over that of the points asked for: fronts compared at equal density.
    volume_ratio: f64,
}

fn demanded(place: &Place<'_>, reference: &[Costs]) -> Demanded {
    let step = reference.len().div_ceil(DEMANDS);
    let asked: Vec<Costs> = reference.iter().step_by(step).copied().collect();
    let demands: Vec<[f64; 2]> = asked
        .iter()
        .map(|p| [-p[1] * (1.0 - ROUNDING), p[2] * (1.0 + ROUNDING)])
        .collect();
    let (answers, assessments) = best_efficiencies(&place.context, &place.cell, &demands);
    let pairs = asked.iter().zip(&answers);
    let shortfall = pairs
        .clone()
        .filter_map(|(p, answer)| Some(1.0 - (*answer)? / -p[0]))
        .fold(0.0, f64::max);
    let answered: Vec<Costs> = pairs
        .filter_map(|(p, answer)| Some([-(*answer)?, p[1], p[2]]))
        .collect();
    Demanded {
        demands: asked.len(),
        assessments,
        unanswered: asked.len() - answered.len(),
        shortfall,
        volume_ratio: volume(&answered, place.area_m2) / volume(&asked, place.area_m2),
    }
}

/// As many points as wanted, or a few less, by the search's own rule of spacing.
fn thinned_to(points: &[Costs], most: usize) -> Vec<Costs> {
    let (mut low, mut high) = (0.0, 1.0);
    for _ in 0..HALVINGS {
        let middle = 0.5 * (low + high);
        if thinned(points, middle).len() > most {
            low = middle;
        } else {
            high = middle;
        }
    }
    thinned(points, high)
}

fn compare(place: &Place<'_>, budgets: &[u64]) -> String {
    let start = Instant::now();
    let (own, evaluations) = searched(place);
    let own_s = start.elapsed().as_secs_f64();
    let (reference, all) = read_reference(&place.name);
    let ratio = |points: &[Costs]| volume(points, place.area_m2) / all;
    let as_many = thinned_to(&reference, own.len());
    let demanded = demanded(place, &reference);
    let mut line = format!(
        "{:<12} search    {evaluations:>8} {own_s:>7.2} s {:>5} points  volume {:.4}; of the reference thinned to {} points {:.4}\n\
         {:<12} at {} powers and areas of the reference: volume {:.5} of its own, worst shortfall {:.4} %, {} unanswered ({} assessments more)\n",
        place.name,
        own.len(),
        ratio(&own),
        as_many.len(),
        ratio(&own) / ratio(&as_many),
        "",
        demanded.demands,
        demanded.volume_ratio,
        100.0 * demanded.shortfall,
        demanded.unanswered,
        demanded.assessments - evaluations.min(demanded.assessments),
    );
    let slices = slices(place.context.space, &place.cell);
    let whole = Whole::new(&place.context, &slices, place.area_m2);
    for &times in budgets {
        for (third, name) in [(false, "NSGA-II"), (true, "NSGA-III")] {
            let start = Instant::now();
            let front = evolve(&whole, third, evaluations * times);
            let seconds = start.elapsed().as_secs_f64();
            let last = population(&front, place.area_m2);
            let seen = thinned_to(&thinned(&whole.take(), FINE), own.len());
            let _ = writeln!(
                line,
                "{:<12} {name:<9} {:>8} {seconds:>7.2} s {:>5} points  volume {:.4}  all it saw, {} points: {:.4}",
                "",
                front.evaluations,
                last.len(),
                ratio(&last),
                seen.len(),
                ratio(&seen),
            );
        }
    }
    line
}

fn main() {
    let subjects = subjects();
    let asked: Vec<String> = std::env::args()
        .skip(1)
        .filter(|a| !a.starts_with('-'))
        .collect();
    let is_asked = |word: &str| asked.iter().any(|a| a == word);
    let task = match (is_asked("reference"), is_asked("own")) {
        (true, _) => Task::Reference,
        (_, true) => Task::Own,
        _ => Task::Compare,
    };
    let named: Vec<&String> = asked
        .iter()
        .filter(|a| *a != "reference" && *a != "own")
        .collect();
    let setups: Vec<Setup> = subjects
        .iter()
        .map(|s| Setup::new(&s.study, &s.technology).expect("setup"))
        .collect();
    let work: Vec<(&Subject, &Setup, usize)> = subjects
        .iter()
        .zip(&setups)
        .flat_map(|(subject, setup)| {
            subject
                .cells
                .iter()
                .map(move |&cell| (subject, setup, cell))
        })
        .filter(|(subject, _, cell)| {
            named.is_empty() || named.iter().any(|n| **n == cell_name(subject, *cell))
        })
        .collect();
    // Threads of their own: a thread of the pool that waits for spirals would take up another cell meanwhile.
    let next = AtomicUsize::new(0);
    let workers = std::thread::available_parallelism().map_or(1, usize::from);
    std::thread::scope(|scope| {
        for _ in 0..workers {
            scope.spawn(|| {
                while let Some(&(subject, setup, index)) =
                    work.get(next.fetch_add(1, Ordering::Relaxed))
                {
                    println!("{}", worked(subject, setup, index, task));
                }
            });
        }
    });
}

#[derive(Clone, Copy)]
enum Task {
    Reference,
    Own,
    Compare,
}

fn cell_name(subject: &Subject, index: usize) -> String {
    format!("{}-{index:02}", subject.name)
}

fn worked(subject: &Subject, setup: &Setup, index: usize, task: Task) -> String {
    let space = subject.study.space.as_ref().expect("space");
    let search = &subject.study.search;
    let mut place = Place {
        name: cell_name(subject, index),
        context: Context::new(setup, space, &search.objectives, search.seed),
        cell: cells(space)[index],
        area_m2: hypervolume_reference(&subject.study, setup, space).area_m2,
    };
    match task {
        Task::Reference => make_reference(&mut place),
        Task::Own => compare(&place, &[]),
        Task::Compare => compare(&place, &BUDGETS),
    }
}
