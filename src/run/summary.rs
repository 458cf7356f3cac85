//! What is made of finished cells: the overall front, the table of cells, the spread of residuals.
//!
//! Cells are read one at a time, so a run of many cells takes no more memory than its front.

use super::RunError;
use super::folder::{RunFolder, read_cell};
use super::records::{
    CellRecord, DesignList, DesignRecord, HypervolumeReference, Residuals, SupplyFront,
};
use super::supplies;
use super::table;
use crate::evaluate::{Figures, Setup};
use crate::numerics::hypervolume::hypervolume;
use crate::search::front::{Costs, costs, non_dominated};
use crate::search::space;
use crate::study::{Objective, SearchSettings, Space, Study};
use crate::technology::Inductor;
use serde::{Deserialize, Serialize};
use std::collections::{BTreeMap, BTreeSet};
use std::path::Path;

/// Square millimetres in a square metre: the unit of area in a hypervolume.
const MM2: f64 = 1e6;

/// A line of `cells.csv`.
#[derive(Debug, Clone, Serialize, Deserialize)]
pub struct CellLine {
    /// Index.
    pub cell: usize,
    /// Q_L; none where it is free.
    pub loaded_q: Option<f64>,
    /// V_DD, V; none where it is free.
    pub supply_v: Option<f64>,
    /// None without a feasible design.
    pub best_efficiency: Option<f64>,
    least_output_power_dbm: Option<f64>,
    most_output_power_dbm: Option<f64>,
    least_area_m2: Option<f64>,
    front_size: usize,
    hypervolume: f64,
    evaluations: u64,
    /// Largest residual of its front; none without a design, or in a run made before it was written.
    worst_residual: Option<f64>,
    /// Technology of its variant, where the study lists several; so with what follows.
    pub technology: Option<String>,
    /// Transistor pair.
    pub device: Option<String>,
    /// Devices a side.
    pub stack: Option<u32>,
    /// Legs.
    pub legs: Option<u32>,
    /// Carrier, Hz.
    pub frequency_hz: Option<f64>,
    /// Junction, K.
    pub temperature_k: Option<f64>,
}

/// Reads `cells.csv`.
///
/// # Errors
/// [`RunError::Damaged`] when it is none, or the system's.
pub fn read_cells(path: &Path) -> Result<Vec<CellLine>, RunError> {
    let name = path.join("cells.csv");
    let text = std::fs::read(&name).map_err(|error| RunError::Io {
        path: name.clone(),
        error,
    })?;
    let lines: Result<Vec<CellLine>, csv::Error> = csv::Reader::from_reader(text.as_slice())
        .deserialize()
        .collect();
    lines.map_err(|e| RunError::Damaged {
        path: name,
        reason: format!("is damaged: {e}"),
    })
}

/// What all finished cells amount to.
#[derive(Debug, Clone)]
pub struct Summary {
    /// The overall front, best efficiency first.
    pub front: Vec<DesignRecord>,
    /// A line a finished cell.
    pub cells: Vec<CellLine>,
    /// Cells found finished.
    pub finished: usize,
    /// Assessments of these.
    pub evaluations: u64,
    /// Hypervolume of the overall front.
    pub hypervolume: f64,
    /// Spread of the residuals of all cells' points.
    pub residuals: Option<Residuals>,
    /// Fronts of efficiency and output power, a supply each, rising; none where the supply is free.
    pub supplies: Vec<SupplyFront>,
}

/// What finished cells amount to, for progress.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Standing {
    /// How many.
    pub cells: usize,
    /// Their assessments.
    pub evaluations: u64,
    /// None without a design.
    pub best_efficiency: Option<f64>,
}

impl Standing {
    /// With one more cell.
    pub fn add(&mut self, cell: &CellRecord) {
        self.cells += 1;
        self.evaluations += cell.evaluations;
        let efficiency = cell
            .designs
            .iter()
            .filter_map(|d| d.evaluation.figures.as_ref())
            .map(|f| f.efficiency);
        self.best_efficiency = efficiency.chain(self.best_efficiency).reduce(f64::max);
    }
}

impl Summary {
    /// Designs that stand for the front, `most` of them: its [`headlines`], then the most efficient of each cell.
    pub fn exemplary(&self, most: usize) -> Vec<&DesignRecord> {
        let mut cells = BTreeSet::new();
        let of_cells = self.front.iter().filter(|d| cells.insert(d.cell));
        let mut taken = BTreeSet::new();
        headlines(&self.front)
            .into_iter()
            .flatten()
            .chain(of_cells)
            .filter(|d| taken.insert(&d.id))
            .take(most)
            .collect()
    }
}

/// The most efficient, the strongest and the smallest of designs; of equals the first.
pub fn headlines(designs: &[DesignRecord]) -> [Option<&DesignRecord>; 3] {
    let least = |cost: fn(&Figures) -> f64| {
        designs
            .iter()
            .filter_map(|d| Some((d, cost(d.evaluation.figures.as_ref()?))))
            .min_by(|a, b| a.1.total_cmp(&b.1))
            .map(|(d, _)| d)
    };
    [
        least(|f| -f.efficiency),
        least(|f| -f.output_power_w),
        least(|f| f.area_m2),
    ]
}

/// Costs of a record by the objectives in play.
pub fn record_costs(objectives: &[Objective], design: &DesignRecord) -> Costs {
    design
        .evaluation
        .figures
        .as_ref()
        .map_or([f64::INFINITY; 3], |f| {
            costs(objectives, f.efficiency, f.output_power_w, f.area_m2)
        })
}

/// Hypervolume of a front: efficiency × W × mm² below `reference`; an objective not traded counts as one.
pub fn front_hypervolume(
    objectives: &[Objective],
    reference: &HypervolumeReference,
    front: &[DesignRecord],
) -> f64 {
    let traded = |o| objectives.contains(&o);
    let points: Vec<[f64; 3]> = front
        .iter()
        .map(|d| {
            let [efficiency, power, area] = record_costs(objectives, d);
            [
                if traded(Objective::Efficiency) {
                    efficiency
                } else {
                    -1.0
                },
                if traded(Objective::OutputPower) {
                    power
                } else {
                    -1.0
                },
                if traded(Objective::Area) {
                    area * MM2
                } else {
                    reference.area_m2 * MM2 - 1.0
                },
            ]
        })
        .collect();
    hypervolume(&points, &[0.0, 0.0, reference.area_m2 * MM2])
}

/// The area a hypervolume is measured from: the study's limit, or twice the largest inductors and switches.
pub fn hypervolume_reference(study: &Study, setup: &Setup, space: &Space) -> HypervolumeReference {
    let area_m2 = study.limits.area_m2.at_most.unwrap_or_else(|| {
        let legs = f64::from(setup.legs);
        let coil = match &setup.inductor {
            Inductor::Spiral(process) => {
                let side = space.diameter_m.as_ref().map_or(0.0, space::largest)
                    + 2.0 * process.keep_out_m;
                side * side
            }
            Inductor::Fixed {
                area_base_m2,
                area_slope_m2_h,
                ..
            } => {
                let ohm = space
                    .resistance_ohm
                    .as_ref()
                    .map_or(setup.network.antenna_resistance_ohm, space::largest);
                area_base_m2
                    + area_slope_m2_h * space::largest(&space.loaded_q) * ohm
                        / setup.network.angular_frequency
            }
        };
        let switches = f64::from(setup.stack)
            * space::largest(&space.nmos_width_m)
            * (1.0 + space::largest(&space.width_ratio))
            * setup.layout.width_area_m;
        2.0 * legs * (coil + switches)
    });
    HypervolumeReference { area_m2 }
}

/// Reads every cell of `cells`, in order, writes `cells.csv`, `front.csv` and `front.json`.
///
/// # Errors
/// A damaged cell, or the system's.
pub fn summarise(
    folder: &RunFolder,
    cells: impl Iterator<Item = usize>,
    search: &SearchSettings,
    reference: &HypervolumeReference,
) -> Result<Summary, RunError> {
    let objectives = search.objectives.as_slice();
    /// Designs gathered beyond the front's own number before it is filtered anew.
    const BATCH: usize = 1_000;
    let mut front: Vec<DesignRecord> = Vec::new();
    let mut kept = 0;
    let mut lines = Vec::new();
    let mut residuals = Vec::new();
    let mut evaluations = 0;
    let mut supplies = Vec::new();
    for cell in cells {
        let Some(record) = read_cell(folder.path(), cell)? else {
            continue;
        };
        evaluations += record.evaluations;
        residuals.extend(record.designs.iter().map(|d| (d.residual, d.certified)));
        lines.push(line(&record));
        supplies::add(&mut supplies, &record);
        front.extend(record.designs);
        if front.len() > 2 * kept + BATCH {
            front = filtered(search, front);
            kept = front.len();
        }
    }
    let mut front = filtered(search, front);
    front.sort_by(|a, b| {
        let (x, y) = (record_costs(objectives, a), record_costs(objectives, b));
        (x[0].total_cmp(&y[0]))
            .then(x[1].total_cmp(&y[1]))
            .then(x[2].total_cmp(&y[2]))
            .then(a.id.cmp(&b.id))
    });
    let path = folder.path();
    folder.write("cells.csv", &table::csv(&path.join("cells.csv"), &lines)?)?;
    folder.write("front.csv", &table::csv(&path.join("front.csv"), &front)?)?;
    let list = DesignList { designs: front };
    folder.write_json("front.json", &list)?;
    let front = list.designs;
    Ok(Summary {
        hypervolume: front_hypervolume(objectives, reference, &front),
        front,
        finished: lines.len(),
        cells: lines,
        evaluations,
        residuals: spread_of(residuals),
        supplies,
    })
}

/// The non-dominated designs of each group.
fn filtered(search: &SearchSettings, designs: Vec<DesignRecord>) -> Vec<DesignRecord> {
    let mut groups: BTreeMap<Vec<String>, Vec<usize>> = BTreeMap::new();
    for (index, design) in designs.iter().enumerate() {
        let label = design.variant.as_ref();
        let group = label.map_or(Vec::new(), |v| v.group(&search.fronts_by));
        groups.entry(group).or_default().push(index);
    }
    let mut keep = vec![false; designs.len()];
    for members in groups.values() {
        let costs = |&i: &usize| record_costs(&search.objectives, &designs[i]);
        let all: Vec<Costs> = members.iter().map(costs).collect();
        for place in non_dominated(&all) {
            keep[members[place]] = true;
        }
    }
    let mut marks = keep.into_iter();
    designs
        .into_iter()
        .filter(|_| marks.next().unwrap_or(false))
        .collect()
}

fn line(record: &CellRecord) -> CellLine {
    let figures = || {
        record
            .designs
            .iter()
            .filter_map(|d| d.evaluation.figures.as_ref())
    };
    CellLine {
        cell: record.cell,
        loaded_q: record.loaded_q,
        supply_v: record.supply_v,
        best_efficiency: figures().map(|f| f.efficiency).reduce(f64::max),
        least_output_power_dbm: figures().map(|f| f.output_power_dbm).reduce(f64::min),
        most_output_power_dbm: figures().map(|f| f.output_power_dbm).reduce(f64::max),
        least_area_m2: figures().map(|f| f.area_m2).reduce(f64::min),
        front_size: record.designs.len(),
        hypervolume: record.hypervolume,
        evaluations: record.evaluations,
        worst_residual: record.designs.iter().map(|d| d.residual).reduce(f64::max),
        technology: record.variant.as_ref().map(|v| v.technology.clone()),
        device: record.variant.as_ref().map(|v| v.device.clone()),
        stack: record.variant.as_ref().map(|v| v.stack),
        legs: record.variant.as_ref().map(|v| v.legs),
        frequency_hz: record.variant.as_ref().map(|v| v.frequency_hz),
        temperature_k: record.variant.as_ref().map(|v| v.temperature_k),
    }
}

fn spread_of(mut residuals: Vec<(f64, bool)>) -> Option<Residuals> {
    residuals.sort_by(|a, b| a.0.total_cmp(&b.0));
    let last = residuals.len().checked_sub(1)?;
    let at = |share: f64| residuals[(share * last as f64).round() as usize].0;
    Some(Residuals {
        points: residuals.len(),
        certified: residuals.iter().filter(|r| r.1).count(),
        median: at(0.5),
        percentile_99: at(0.99),
        worst: at(1.0),
    })
}
