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
    let cut = Cut::new(process, geometry, mesh);
    let layers = mesh.half_through;
    let per_turn = mesh.across * layers;
    let count = per_turn * turns;
    // Unknowns: pair currents, turn voltages, and last the common current: the last pivot is the impedance.
    let size = count + turns + 1;
    let mut system = ComplexSymmetric::zeros(size);
    // Columns of filaments one above the other: between two columns only a few axial distances occur.
    let columns = cut.radii.len();
    let mut near = vec![0.0; layers * layers * columns];
    let mut far = vec![0.0; layers * layers * columns];
    for p in 0..columns {
        let (radius, right) = (cut.radii[p], &cut.radii[p..]);
        let row = |l: usize, m: usize| {
            let begin = (l * layers + m) * columns;
            begin..begin + right.len()
        };
        mutual_row(radius, right, 0.0, &mut near[row(0, 0)]);
        for l in 0..layers {
            for m in l..layers {
                let (low, high) = (cut.heights[l], cut.heights[m]);
                mutual_row(radius, right, low + high, &mut far[row(l, m)]);
                if l == m {
                    near.copy_within(row(0, 0), row(l, l).start);
                } else {
                    mutual_row(radius, right, high - low, &mut near[row(l, m)]);
                }
            }
        }
        for l in 0..layers {
            let i = p * layers + l;
            let line = &mut system.row_im_mut(i)[p * layers..count];
            for m in 0..layers {
                let pair = row(l.min(m), l.max(m));
                let both = near[pair.clone()].iter().zip(&far[pair]);
                for (slot, (n, f)) in line.iter_mut().skip(m).step_by(layers).zip(both) {
                    *slot = 0.5 * omega * (n + f);
                }
            }
            let own = VACUUM_PERMEABILITY_H_M
                * radius
                * ((8.0 * radius / cut.mean_distance_m(p, l)).ln() - 2.0);
            let image = far[row(l, l).start];
            system.set(
                i,
                i,
                cut.half_resistance_ohm(p, l),
                0.5 * omega * (own + image),
            );
            system.set(i, count + i / per_turn, -1.0, 0.0);
        }
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

/// The upper half of the turns' sections, cut into columns across the width and layers through the thickness.
struct Cut {
    /// Of the columns, m, turn by turn.
    radii: Vec<f64>,
    /// Of the columns, m.
    widths: Vec<f64>,
    /// Of the layers above the middle plane, m.
    heights: Vec<f64>,
    /// Of the layers, m.
    thicknesses: Vec<f64>,
    resistivity_ohm_m: f64,
}

impl Cut {
    fn new(process: &SpiralProcess, geometry: &SpiralGeometry, mesh: Mesh) -> Self {
        let across = cosine_edges(mesh.across);
        let through = cosine_edges(2 * mesh.half_through);
        let (w, t) = (geometry.trace_m, process.thickness_m);
        let turns = 0..geometry.turns;
        let outer =
            |turn: u32| 0.5 * geometry.diameter_m - f64::from(turn) * (w + process.spacing_m);
        let upper = || through[mesh.half_through..].windows(2);
        Self {
            radii: turns
                .clone()
                .flat_map(|turn| {
                    let edges = across.windows(2);
                    edges.map(move |e| outer(turn) - w * 0.5 * (e[0] + e[1]))
                })
                .collect(),
            widths: turns
                .flat_map(|_| across.windows(2).map(|e| w * (e[1] - e[0])))
                .collect(),
            heights: upper().map(|e| t * (0.5 * (e[0] + e[1]) - 0.5)).collect(),
            thicknesses: upper().map(|e| t * (e[1] - e[0])).collect(),
            resistivity_ohm_m: process.resistivity_ohm_m,
        }
    }

    /// Half the resistance of a filament, Ω: it and its mirror image in parallel.
    fn half_resistance_ohm(&self, column: usize, layer: usize) -> f64 {
        let area = self.widths[column] * self.thicknesses[layer];
        0.5 * self.resistivity_ohm_m * TAU * self.radii[column] / area
    }

    /// Geometric mean distance g of a filament's section from itself, m.
    fn mean_distance_m(&self, column: usize, layer: usize) -> f64 {
        0.2235 * (self.widths[column] + self.thicknesses[layer])
    }
}
