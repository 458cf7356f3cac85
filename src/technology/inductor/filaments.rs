//! Series inductance and resistance of a spiral's metal, skin and proximity effect in them, by filaments.
//!
//! Turns are concentric circles. Each turn's rectangular section is cut into filaments, finer toward its edges (cosine
//! grading); filaments of a turn share a voltage, turns carry one current in series. Mutual inductances are Maxwell's
//! of coaxial circles, self inductances those of a ring of rectangular section by its geometric mean distance:
//! `µ0 a (ln(8a/g) − 2)`, `g = 0.2235(width + thickness)` (Grover, *Inductance Calculations*). One dense complex
//! solve gives the impedance.

use super::{SpiralGeometry, SpiralProcess};
use crate::numerics::elliptic::{VACUUM_PERMEABILITY_H_M, mutual_row};
use crate::numerics::symmetric::ComplexSymmetric;
use std::f64::consts::{PI, TAU};

/// L and R of the metal at one frequency.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SeriesImpedance {
    /// H.
    pub inductance_h: f64,
    /// Ω.
    pub resistance_ohm: f64,
}

/// Filaments across a turn's width and, mirrored about the middle, through half its thickness.
#[derive(Debug, Clone, Copy)]
pub struct Mesh {
    /// Across the width.
    pub across: usize,
    /// Through half the thickness.
    pub half_through: usize,
}

/// The mesh of every answer: against meshes of 56 × 14 a turn the resistance is within the tolerance that the tests
/// hold, and a solve takes about a millisecond.
pub const MESH: Mesh = Mesh {
    across: 16,
    half_through: 3,
};

/// Edges of `count` cells over [0, 1], finer toward both ends.
fn cosine_edges(count: usize) -> Vec<f64> {
    (0..=count)
        .map(|i| 0.5 * (1.0 - (PI * i as f64 / count as f64).cos()))
        .collect()
}

/// The metal's impedance at `omega` (rad/s) with the default [`MESH`]. The spiral must close.
pub fn series_impedance(
    process: &SpiralProcess,
    geometry: &SpiralGeometry,
    omega: f64,
) -> SeriesImpedance {
    series_impedance_meshed(process, geometry, omega, MESH)
}

/// As [`series_impedance`] with a mesh of choice.
///
/// The currents are even about the middle plane, so a filament stands for itself and its mirror image: a pair in
/// parallel has half a filament's resistance and the mean of its inductances to the other pair's two.
pub fn series_impedance_meshed(
    process: &SpiralProcess,
    geometry: &SpiralGeometry,
    omega: f64,
    mesh: Mesh,
) -> SeriesImpedance {
    let turns = geometry.turns as usize;
    let (radii, heights, half_resistances, distances) = filaments(process, geometry, mesh);
    let per_turn = mesh.across * mesh.half_through;
    let count = per_turn * turns;
    // Unknowns: pair currents, turn voltages, and last the common current: the last pivot is the impedance.
    let size = count + turns + 1;
    let mut system = ComplexSymmetric::zeros(size);
    let mut near = vec![0.0; count];
    let mut far = vec![0.0; count];
    let mut z2 = vec![0.0; count];
    for i in 0..count {
        let right = i..count;
        for (slot, &z) in z2[right.clone()].iter_mut().zip(&heights[right.clone()]) {
            *slot = (z - heights[i]).powi(2);
        }
        mutual_row(
            radii[i],
            &radii[right.clone()],
            &z2[right.clone()],
            &mut near[right.clone()],
        );
        for (slot, &z) in z2[right.clone()].iter_mut().zip(&heights[right.clone()]) {
            *slot = (z + heights[i]).powi(2);
        }
        mutual_row(
            radii[i],
            &radii[right.clone()],
            &z2[right.clone()],
            &mut far[right.clone()],
        );
        near[i] = VACUUM_PERMEABILITY_H_M * radii[i] * ((8.0 * radii[i] / distances[i]).ln() - 2.0);
        for (slot, (n, f)) in system.row_im_mut(i)[right.clone()]
            .iter_mut()
            .zip(near[right.clone()].iter().zip(&far[right]))
        {
            *slot = 0.5 * omega * (n + f);
        }
        let im = system.row_im_mut(i)[i];
        system.set(i, i, half_resistances[i], im);
        system.set(i, count + i / per_turn, -1.0, 0.0);
    }
    for turn in 0..turns {
        system.set(count + turn, size - 1, -1.0, 0.0);
    }
    let (resistance_ohm, reactance) = system.last_pivot();
    SeriesImpedance {
        inductance_h: reactance / omega,
        resistance_ohm,
    }
}

/// Radii, heights above the middle plane, half the resistances and mean distances g of the upper filaments, turn by turn.
fn filaments(
    process: &SpiralProcess,
    geometry: &SpiralGeometry,
    mesh: Mesh,
) -> (Vec<f64>, Vec<f64>, Vec<f64>, Vec<f64>) {
    let across = cosine_edges(mesh.across);
    let through = cosine_edges(2 * mesh.half_through);
    let (w, t) = (geometry.trace_m, process.thickness_m);
    let count = geometry.turns as usize * mesh.across * mesh.half_through;
    let mut lists = [const { Vec::new() }; 4];
    lists
        .iter_mut()
        .for_each(|l: &mut Vec<f64>| l.reserve(count));
    for turn in 0..geometry.turns {
        let outer = 0.5 * geometry.diameter_m - f64::from(turn) * (w + process.spacing_m);
        for column in across.windows(2) {
            let radius = outer - w * 0.5 * (column[0] + column[1]);
            let width = w * (column[1] - column[0]);
            for layer in through[mesh.half_through..].windows(2) {
                let thickness = t * (layer[1] - layer[0]);
                let area = width * thickness;
                lists[0].push(radius);
                lists[1].push(t * (0.5 * (layer[0] + layer[1]) - 0.5));
                lists[2].push(0.5 * process.resistivity_ohm_m * TAU * radius / area);
                lists[3].push(0.2235 * (width + thickness));
            }
        }
    }
    let [radii, heights, half_resistances, distances] = lists;
    (radii, heights, half_resistances, distances)
}
