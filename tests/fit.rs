//! Fitting a technology to tables: known figures come back, and garbage gets a clear answer.

use std::fmt::Write as _;
use std::path::{Path, PathBuf};
use widefront::fit::{self, Existing, FitError, FittedPair, Options, Polarity};
use widefront::technology::transistor::WarmTransistor;
use widefront::technology::{Transistor, TransistorPair};

const KELVINS: [f64; 4] = [233.15, 300.15, 343.15, 398.15];

/// Invented, of the size of a 130 nm process.
fn demo(polarity: Polarity) -> Transistor {
    let nmos = Transistor {
        transconductance_a_v2: 420e-6,
        length_m: 130e-9,
        threshold_v: 0.45,
        threshold_drift_v_k: -0.8e-3,
        slope: 1.3,
        degradation_per_v: 0.3,
        mobility_exponent: -1.4,
        access_resistance_ohm_m: 200e-6,
        gate_capacitance_f_m: 0.8e-9,
        overlap_capacitance_f_m: 0.35e-9,
        junction_capacitance_f_m: 0.22e-9,
        junction_grading: 0.35,
        junction_potential_v: 0.7,
        off_current_a_m: 40e-6,
    };
    match polarity {
        Polarity::Nmos => nmos,
        Polarity::Pmos => Transistor {
            transconductance_a_v2: 120e-6,
            threshold_v: 0.42,
            slope: 1.4,
            degradation_per_v: 0.1,
            mobility_exponent: -1.1,
            access_resistance_ohm_m: 500e-6,
            ..nmos
        },
    }
}

/// Evenly spread numbers by a linear congruence (Knuth, MMIX), made normal by Box and Muller (1958).
struct Noise(u64);

impl Noise {
    fn even(&mut self) -> f64 {
        self.0 = self
            .0
            .wrapping_mul(6364136223846793005)
            .wrapping_add(1442695040888963407);
        ((self.0 >> 11) as f64 + 0.5) / (1u64 << 53) as f64
    }

    fn normal(&mut self) -> f64 {
        (-2.0 * self.even().ln()).sqrt() * (std::f64::consts::TAU * self.even()).cos()
    }
}

/// Transfer curves of the demo with relative noise of the currents.
fn transfer(kelvins: &[f64], spread: f64, noise: &mut Noise) -> String {
    let mut out = String::from("device,polarity,width_m,length_m,temperature_k,v_gs,v_ds,i_d\n");
    for polarity in Polarity::BOTH {
        let device = demo(polarity);
        for kelvin in kelvins {
            let warm = WarmTransistor::new(&device, *kelvin);
            for step in 0..28 {
                let v = 0.05 * f64::from(step);
                let r = warm.on_resistance_ohm_m(v - 0.025) / 10e-6;
                let i = 0.05 / r * (spread * noise.normal()).exp();
                let _ = writeln!(
                    out,
                    "core,{},1e-5,1.3e-7,{kelvin},{v},0.05,{i:e}",
                    polarity.name()
                );
            }
        }
    }
    out
}

fn written(folder: &Path, name: &str, text: &str) -> PathBuf {
    let path = folder.join(name);
    std::fs::write(&path, text).expect("the test's folder takes files");
    path
}

fn options() -> Options {
    let mut options = Options::new("2026-01-31");
    let rating = ["1.32 V".to_owned()];
    options.rating_v =
        fit::PerDevice::parse(&rating, widefront::quantity::Dimension::Voltage).expect("a voltage");
    options
}

fn fitted(paths: &[PathBuf]) -> Result<Vec<FittedPair>, FitError> {
    fit::fit(&fit::read(paths)?, &options(), &Existing::default())
}

fn figure(pair: &FittedPair, polarity: Polarity, key: &str) -> (f64, Option<f64>) {
    let device = pair
        .devices
        .iter()
        .find(|device| device.polarity == polarity);
    let figures = &device.expect("both polarities").figures;
    let figure = figures
        .iter()
        .find(|figure| figure.key == key)
        .expect("a key of the section");
    (figure.value, figure.error)
}

fn truth(polarity: Polarity) -> [(&'static str, f64); 7] {
    let d = demo(polarity);
    [
        ("transconductance", d.transconductance_a_v2),
        ("threshold", d.threshold_v),
        ("threshold_drift", d.threshold_drift_v_k),
        ("slope", d.slope),
        ("degradation", d.degradation_per_v),
        ("mobility_exponent", d.mobility_exponent),
        ("access_resistance", d.access_resistance_ohm_m),
    ]
}

const TRIALS: usize = 200;
/// A figure lies within its stated error 95 times in 100; of 200 trials at least 184, three standard deviations of
/// their binomial below 190.
const LEAST_INSIDE: usize = 181;

#[test]
fn law_known_figures_come_back_within_their_stated_errors() {
    let folder = tempfile::tempdir().expect("a folder");
    let mut noise = Noise(7);
    let mut inside = [[0usize; 7]; 2];
    for _ in 0..TRIALS {
        let path = written(
            folder.path(),
            "t.csv",
            &transfer(&KELVINS, 0.01, &mut noise),
        );
        let pairs = fitted(&[path]).expect("a fit");
        for (place, polarity) in Polarity::BOTH.into_iter().enumerate() {
            for (k, (key, truth)) in truth(polarity).into_iter().enumerate() {
                let (value, error) = figure(&pairs[0], polarity, key);
                inside[place][k] += usize::from((value - truth).abs() <= error.expect("an error"));
            }
        }
    }
    assert!(
        inside.iter().flatten().all(|count| *count >= LEAST_INSIDE),
        "{inside:?}"
    );
}
