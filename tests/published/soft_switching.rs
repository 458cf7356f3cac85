//! Class DE: capacitance and load angle at which the drain arrives at turn-on with neither voltage nor slope.

use crate::class_d::figures;
use crate::common::{direct_design, direct_study, ideal_technology};
use crate::{Line, Within};
use std::f64::consts::{FRAC_1_PI, FRAC_PI_2, TAU};
use widefront::evaluate::{Setup, loop_waveform};
use widefront::study::Design;
use widefront::technology::Technology;

const SOURCE: &str = "Zhukov and Kozyrev (1975); Hamill (1996); Koizumi et al. (1996); from memory";
const FINITE: &str = "the same, computed apart";

/// Loaded Q of the tables whose loop carries a sine: what is left of its harmonics is 1e-5.
const SINE: f64 = 1e5;
/// Half of the sixth decimal, and what the loop's Q leaves.
const SIX_DECIMALS: f64 = 1e-5;
/// Half of the fifth decimal, and 2e-5 that a loaded Q of 250 makes: the printed values agree with one.
const FIVE_DECIMALS: f64 = 2.5e-5;
/// Half of the second decimal.
const DECIBELS: f64 = 0.0051;

const WIDTH_M: f64 = 1e-3;
const SAMPLES: usize = 2;

/// A leg on 50 Ω at 1 GHz and 1 V, its on-duty, ωCR and X/R given; the switches of r over R = 50 Ω.
struct Leg {
    loaded_q: f64,
    on_duty: f64,
    capacitance: f64,
    reactance: f64,
    resistance: f64,
}

impl Leg {
    fn design(&self) -> Design {
        Design {
            loaded_q: self.loaded_q,
            reactance: self.reactance,
            dead_time: 0.5 - self.on_duty,
            ..direct_design()
        }
    }

    /// Junctions that put ωCR on the drain, charge-equivalent over the swing.
    fn technology(&self) -> Technology {
        let mut technology = ideal_technology();
        let node_f = self.capacitance / (TAU * 1e9 * 50.0);
        // c_j over 1 V of a junction of c_j0 with m = 0.5 and φ = 1 V: 2(√2 − 1)c_j0.
        let of_unit = 2.0 * (2f64.sqrt() - 1.0);
        let pair = technology.transistors.get_mut("core").unwrap();
        for device in [&mut pair.nmos, &mut pair.pmos] {
            device.junction_capacitance_f_m = node_f / (2.0 * WIDTH_M * of_unit);
            device.access_resistance_ohm_m = (self.resistance * 50.0 * WIDTH_M).max(1e-9);
        }
        technology
    }

    /// Drain voltage and loop current where N turns on, over V and V/R: neither is left when both conditions hold.
    fn left(&self) -> [f64; 2] {
        let setup = Setup::new(&direct_study(), &self.technology()).unwrap();
        let wave = loop_waveform(&setup, &self.design(), SAMPLES).unwrap();
        [
            wave.drain_v[SAMPLES / 2],
            wave.current_a[SAMPLES / 2] * 50.0,
        ]
    }

    /// Both conditions solved for ωCR and X/R by Newton's method from a few per cent beside the printed ones.
    fn solved(mut self) -> Self {
        self.capacitance *= 1.03;
        self.reactance *= 0.97;
        for _ in 0..12 {
            let at = self.left();
            let (dc, dx) = (1e-6 * self.capacitance, 1e-6 * self.reactance);
            let by_c = Self {
                capacitance: self.capacitance + dc,
                ..self
            }
            .left();
            let by_x = Self {
                reactance: self.reactance + dx,
                ..self
            }
            .left();
            let c = [(by_c[0] - at[0]) / dc, (by_c[1] - at[1]) / dc];
            let x = [(by_x[0] - at[0]) / dx, (by_x[1] - at[1]) / dx];
            let determinant = c[0] * x[1] - c[1] * x[0];
            self.capacitance -= (at[0] * x[1] - at[1] * x[0]) / determinant;
            self.reactance -= (c[0] * at[1] - c[1] * at[0]) / determinant;
        }
        self
    }

    /// Power of all that is delivered over V²/R.
    fn power(&self) -> f64 {
        let f = figures(&direct_study(), &self.technology(), &self.design());
        (f.output_power_w + f.losses_w.harmonics) * 50.0
    }

    fn efficiency(&self) -> f64 {
        let f = figures(&direct_study(), &self.technology(), &self.design());
        (f.output_power_w + f.losses_w.harmonics) / f.dc_power_w
    }

    fn third_harmonic_dbc(&self) -> f64 {
        let f = figures(&direct_study(), &self.technology(), &self.design());
        f.third_harmonic_dbc.unwrap()
    }
}

fn number(printed: &str) -> f64 {
    printed.parse().unwrap()
}

fn sine() -> Vec<Line> {
    let table = [
        (0.25, "0.050661", "0.318310", "1.570796", "0.95276"),
        (0.30, "0.086808", "0.287914", "1.064384", "0.93520"),
        (0.35, "0.127718", "0.208337", "0.713435", "0.92127"),
        (0.40, "0.165789", "0.109973", "0.442240", "0.91280"),
        (0.45, "0.192846", "0.030396", "0.212235", "0.90949"),
    ];
    let leg = |row: &(f64, &str, &str, &str, &str), resistance| Leg {
        loaded_q: SINE,
        on_duty: row.0,
        capacitance: number(row.2),
        reactance: number(row.3),
        resistance,
    };
    let found = table.map(|row| (row, leg(&row, 0.0).solved()));
    let line = |quantity: &str, values, within| Line {
        quantity: format!("on-duty 0.25, 0.3, 0.35, 0.4, 0.45: {quantity}"),
        source: SOURCE,
        values,
        within: Within::Units(within),
    };
    vec![
        line(
            "ωCR",
            found
                .iter()
                .map(|(row, l)| (row.2, l.capacitance))
                .collect(),
            SIX_DECIMALS,
        ),
        line(
            "X/R",
            found.iter().map(|(row, l)| (row.3, l.reactance)).collect(),
            SIX_DECIMALS,
        ),
        line(
            "output power over V²/R",
            found.iter().map(|(row, l)| (row.1, l.power())).collect(),
            SIX_DECIMALS,
        ),
        line(
            "efficiency with r/R = 0.1",
            table
                .iter()
                .map(|row| (row.4, leg(row, 0.1).efficiency()))
                .collect(),
            FIVE_DECIMALS,
        ),
    ]
}

fn finite() -> Vec<Line> {
    let table = [
        (3.0, "0.315435", "1.707096", "0.045067"),
        (5.0, "0.317263", "1.649282", "0.047316"),
        (10.0, "0.318047", "1.608771", "0.048997"),
        (500.0, "0.318310", "1.571531", "0.050628"),
    ];
    let found = table.map(|row| {
        let leg = Leg {
            loaded_q: row.0,
            on_duty: 0.25,
            capacitance: number(row.1),
            reactance: number(row.2),
            resistance: 0.0,
        };
        (row, leg.solved())
    });
    let line = |quantity: &str, values, within| Line {
        quantity: format!("on-duty 0.25, Q_L 3, 5, 10{quantity}"),
        source: FINITE,
        values,
        within: Within::Units(within),
    };
    let third = ["-27.63", "-32.05", "-38.06"];
    vec![
        line(
            ", 500: ωCR",
            found
                .iter()
                .map(|(row, l)| (row.1, l.capacitance))
                .collect(),
            SIX_DECIMALS,
        ),
        line(
            ", 500: X/R",
            found.iter().map(|(row, l)| (row.2, l.reactance)).collect(),
            SIX_DECIMALS,
        ),
        line(
            ", 500: all delivered power over V²/R",
            found.iter().map(|(row, l)| (row.3, l.power())).collect(),
            SIX_DECIMALS,
        ),
        line(
            ": third harmonic, dBc",
            third
                .iter()
                .zip(&found)
                .map(|(dbc, (_, l))| (*dbc, l.third_harmonic_dbc()))
                .collect(),
            DECIBELS,
        ),
    ]
}

pub fn lines() -> Vec<Line> {
    [sine(), finite()].into_iter().flatten().collect()
}

#[test]
fn published_soft_switching() {
    lines().iter().for_each(Line::check);
}

/// Where both conditions hold nothing is lost to charging, and the drain stays between the rails.
#[test]
fn law_soft_switching_loses_nothing() {
    /// Of the hard-switched loss C V² f: switches of a microohm, and the voltage left by the table's last digit.
    const NOTHING: f64 = 1e-3;
    for (on_duty, capacitance, reactance) in
        [(0.25, FRAC_1_PI, FRAC_PI_2), (0.4, 0.109973, 0.442240)]
    {
        let leg = Leg {
            loaded_q: SINE,
            on_duty,
            capacitance,
            reactance,
            resistance: 0.0,
        };
        let f = figures(&direct_study(), &leg.technology(), &leg.design());
        let hard_w = f.drain_capacitance_f * 1e9;
        assert!(f.losses_w.drain_charge.abs() + f.losses_w.conduction < NOTHING * hard_w);
        assert!(f.peak_drain_v < 1.0 + NOTHING && f.lowest_drain_v > -NOTHING);
    }
}
