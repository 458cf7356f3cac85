//! Where the blocks stand, micrometres, y downwards: a leg a row, decoupling above and below its drivers and switches,
//! then series capacitor and spiral, the shunt capacitor at the antenna's side.

use super::block::{Block, Kind};
use super::records::DrawnDevice;
use super::records::{DrawnSpiral, Pair, Sheet};
use crate::quantity::format;

/// Left free between blocks for wires and guard rings.
pub const GAP: f64 = 10.0;

/// A spiral in its place.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct PlacedSpiral {
    /// Centre.
    pub x: f64,
    /// Centre.
    pub y: f64,
    /// The spiral.
    pub spiral: DrawnSpiral,
}

/// Everything in its place.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Floorplan {
    /// All rectangles.
    pub blocks: Vec<Block>,
    /// Blocks of the first leg's drivers and switches, for a closer view.
    pub core: Vec<Block>,
    /// Spirals.
    pub spirals: Vec<PlacedSpiral>,
    /// Extent.
    pub width: f64,
    /// Extent.
    pub height: f64,
}

/// Places a sheet's parts.
pub fn floorplan(sheet: &Sheet) -> Floorplan {
    let mut plan = Floorplan::default();
    let inductors_m2 = sheet
        .evaluation
        .figures
        .as_ref()
        .map_or(0.0, |f| f.area_parts_m2.inductors)
        / f64::from(sheet.legs);
    let side = inductors_m2.sqrt() * 1e6;
    let core = core(sheet);
    let (core_width, core_height) = extent(&core);
    let share_m2 = sheet.decoupling.area_m2 / f64::from(sheet.legs);
    let column = core_width.max((0.5 * share_m2).sqrt() * 1e6);
    let half = 0.5 * share_m2 * 1e12 / column;
    let series = Block::capacitor("C_s".into(), &sheet.series_capacitor);
    let row = (core_height + 2.0 * (GAP + half))
        .max(series.height)
        .max(side);
    let mut right = 0.0f64;
    for leg in 0..sheet.legs {
        let name = |text: &str| {
            if sheet.legs == 1 {
                text.to_owned()
            } else {
                format!("{text} {}", leg + 1)
            }
        };
        let middle = f64::from(leg) * (row + GAP) + 0.5 * row;
        let top = middle - 0.5 * core_height;
        for (y, part) in [
            (top - GAP - half, "decoupling"),
            (top + core_height + GAP, "decoupling"),
        ] {
            let plain = Block::plain(Kind::Decoupling, part.to_owned(), 0.5 * share_m2, column);
            let share_f = 0.5 * sheet.decoupling.capacitance_f / f64::from(sheet.legs);
            plan.blocks.push(Block {
                detail: vec![format(share_f, "F")],
                ..plain.at(0.0, y)
            });
        }
        // Against the right edge of the column: the drains are next to the series capacitor.
        for block in &core {
            let (x, y) = (block.x + column - core_width, block.y + top);
            let placed = block.clone().at(x, y);
            if leg == 0 {
                plan.core.push(placed.clone());
            }
            plan.blocks.push(placed);
        }
        let x = column + GAP;
        let y = middle - 0.5 * series.height;
        plan.blocks.push(Block {
            label: name("C_s"),
            ..series.clone().at(x, y)
        });
        let x = x + series.width + GAP;
        match sheet.spiral {
            Some(spiral) => plan.spirals.push(PlacedSpiral {
                x: x + 0.5 * side,
                y: middle,
                spiral,
            }),
            None => plan.blocks.push(
                Block::plain(
                    Kind::Inductor,
                    name("inductor (area only)"),
                    inductors_m2,
                    side,
                )
                .at(x, middle - 0.5 * side),
            ),
        }
        right = right.max(x + side);
    }
    plan.height = f64::from(sheet.legs) * (row + GAP) - GAP;
    if let Some(shunt) = &sheet.shunt_capacitor {
        let block = Block::capacitor("C_p".into(), shunt);
        let y = 0.5 * (plan.height - block.height);
        right += GAP + block.width;
        plan.blocks.push(block.clone().at(right - block.width, y));
    }
    plan.width = right;
    plan
}

/// Drivers from left to right, P above N, then the switches, from the corner (0, 0).
fn core(sheet: &Sheet) -> Vec<Block> {
    /// Between P and N and between stages.
    const CLEAR: f64 = 2.0;
    let transistor = |kind, label: String, device: &DrawnDevice| {
        Block::transistor(
            kind,
            label,
            device,
            sheet.rules.finger_pitch_m,
            sheet.width_area_m,
        )
    };
    let mut columns: Vec<Vec<Block>> = sheet
        .drivers
        .iter()
        .enumerate()
        .map(|(i, stage): (usize, &Pair<DrawnDevice>)| {
            vec![
                transistor(Kind::Driver, format!("P{}", i + 1), &stage.pmos),
                transistor(Kind::Driver, format!("N{}", i + 1), &stage.nmos),
            ]
        })
        .collect();
    let names: &[&str] = if sheet.stack == 1 {
        &["switch"]
    } else {
        &["switch", "cascode"]
    };
    let upper = names
        .iter()
        .map(|n| transistor(Kind::Switch, format!("PMOS {n}"), &sheet.switches.pmos));
    let lower = names
        .iter()
        .rev()
        .map(|n| transistor(Kind::Switch, format!("NMOS {n}"), &sheet.switches.nmos));
    columns.push(upper.chain(lower).collect());
    let tall = |column: &[Block]| {
        column.iter().map(|b| b.height).sum::<f64>() + CLEAR * (column.len() as f64 - 1.0)
    };
    let height = columns.iter().map(|c| tall(c)).fold(0.0, f64::max);
    let mut x = 0.0;
    let mut placed = Vec::new();
    for column in columns {
        let mut y = 0.5 * (height - tall(&column));
        let width = column.iter().map(|b| b.width).fold(0.0, f64::max);
        for block in column {
            let next = y + block.height + CLEAR;
            let left = x + 0.5 * (width - block.width);
            placed.push(block.at(left, y));
            y = next;
        }
        x += width + CLEAR;
    }
    placed
}

fn extent(blocks: &[Block]) -> (f64, f64) {
    let width = blocks.iter().map(Block::right).fold(0.0, f64::max);
    let height = blocks.iter().map(Block::bottom).fold(0.0, f64::max);
    (width, height)
}
