//! Each supply's own front of efficiency and output power, gathered cell by cell.

use super::records::{CellRecord, SupplyFront, SupplyPoint};
use crate::search::front::non_dominated;

/// Adds the designs of a cell to its supply's front; supplies are kept rising.
pub fn add(supplies: &mut Vec<SupplyFront>, cell: &CellRecord) {
    let Some(supply_v) = cell.supply_v else {
        return;
    };
    let found = supplies.binary_search_by(|s| s.supply_v.total_cmp(&supply_v));
    let place = found.unwrap_or_else(|place| {
        let points = Vec::new();
        supplies.insert(place, SupplyFront { supply_v, points });
        place
    });
    let points = &mut supplies[place].points;
    points.extend(cell.designs.iter().filter_map(|d| {
        let figures = d.evaluation.figures.as_ref()?;
        Some(SupplyPoint {
            id: d.id.clone(),
            output_power_dbm: figures.output_power_dbm,
            efficiency: figures.efficiency,
        })
    }));
    let costs: Vec<[f64; 3]> = points
        .iter()
        .map(|p| [-p.efficiency, -p.output_power_dbm, 0.0])
        .collect();
    let kept = non_dominated(&costs);
    *points = kept.into_iter().map(|i| points[i].clone()).collect();
    points.sort_by(|a, b| a.output_power_dbm.total_cmp(&b.output_power_dbm));
}
