//! Load network: optimum resistance, matching section, series capacitor.

use super::Impossible;
use crate::numerics::complex::Complex;
use crate::numerics::scalar::Scalar;
use crate::study::Network;

/// Smallest reactance of the series capacitor over R_opt, equation (12): less is a short, not a capacitor.
const LEAST_SERIES_REACTANCE: f64 = 0.02;

/// The load network of one design, as the loop sees it.
#[derive(Debug, Clone, Copy)]
pub struct LoadNetwork<S> {
    /// R_opt, what the lossless network shows in series at the carrier, Ω.
    pub optimum_resistance_ohm: S,
    /// L, H.
    pub inductance_h: S,
    /// R_L, Ω.
    pub inductor_resistance_ohm: S,
    /// C_s, F.
    pub series_capacitance_f: S,
    /// Loss of C_s in series, X_Cs/Q_c, Ω.
    pub capacitor_resistance_ohm: S,
    /// The shunt capacitor of the low-pass section.
    pub shunt: Option<Shunt<S>>,
    /// R_a, Ω.
    pub antenna_resistance_ohm: f64,
}

/// The capacitor across the antenna.
#[derive(Debug, Clone, Copy)]
pub struct Shunt<S> {
    /// C_p, F.
    pub capacitance_f: S,
    /// G_p = ω0 C_p/Q_c, S.
    pub loss_s: S,
}

/// What a network is made from.
#[derive(Debug, Clone, Copy)]
pub struct NetworkGivens {
    /// Kind.
    pub kind: Network,
    /// ω0, rad/s.
    pub angular_frequency: f64,
    /// R_a, Ω.
    pub antenna_resistance_ohm: f64,
    /// Quality of the capacitors Q_c.
    pub capacitor_quality: f64,
}

impl<S: Scalar> LoadNetwork<S> {
    /// The network around an inductor of `inductance_h` and `inductor_resistance_ohm` (loop values).
    ///
    /// *Direct*: R_opt = R_a, and the caller hands L = Q_L R_a/ω0. *Low-pass*: R_opt = ω0 L/Q_L,
    /// `Q_m = √(R_a/R_opt − 1)`, `C_p = Q_m/(ω0 R_a)`. Both: `X_Cs = (Q_L − Q_m − x)R_opt` (12).
    /// The L section is textbook (Bowick, *RF Circuit Design*, ch. 4; from memory).
    ///
    /// # Errors
    /// [`Impossible::Matching`] when R_opt ≥ R_a, [`Impossible::SeriesCapacitor`] when X_Cs ≤ 0.02 R_opt.
    pub fn new(
        givens: &NetworkGivens,
        loaded_q: S,
        reactance: S,
        inductance_h: S,
        inductor_resistance_ohm: S,
    ) -> Result<Self, Impossible> {
        let w = givens.angular_frequency;
        let antenna = givens.antenna_resistance_ohm;
        let (optimum, matching_q) = match givens.kind {
            Network::Direct => (S::constant(antenna), S::zero()),
            Network::LowPass => {
                let optimum = inductance_h * w / loaded_q;
                let step = S::constant(antenna) / optimum - 1.0;
                if step.value().is_nan() || step.value() <= 0.0 {
                    return Err(Impossible::Matching {
                        optimum_ohm: optimum.value(),
                        antenna_ohm: antenna,
                    });
                }
                (optimum, step.sqrt())
            }
        };
        let factor = loaded_q - matching_q - reactance;
        if factor.value().is_nan() || factor.value() <= LEAST_SERIES_REACTANCE {
            return Err(Impossible::SeriesCapacitor {
                factor: factor.value(),
            });
        }
        let series_reactance = factor * optimum;
        let shunt = (givens.kind == Network::LowPass).then(|| {
            let capacitance_f = matching_q / (w * antenna);
            Shunt {
                capacitance_f,
                loss_s: capacitance_f * (w / givens.capacitor_quality),
            }
        });
        Ok(Self {
            optimum_resistance_ohm: optimum,
            inductance_h,
            inductor_resistance_ohm,
            series_capacitance_f: S::one() / (series_reactance * w),
            capacitor_resistance_ohm: series_reactance / givens.capacitor_quality,
            shunt,
            antenna_resistance_ohm: antenna,
        })
    }

    /// R_s = R_L + X_Cs/Q_c, Ω.
    pub fn series_resistance_ohm(&self) -> S {
        self.inductor_resistance_ohm + self.capacitor_resistance_ohm
    }

    /// Impedance from the loop current to the voltage at the antenna, at angular frequency `w`.
    pub fn output_impedance(&self, w: f64) -> Complex<S> {
        match &self.shunt {
            None => Complex::real(S::constant(self.antenna_resistance_ohm)),
            Some(shunt) => Complex::new(
                shunt.loss_s + 1.0 / self.antenna_resistance_ohm,
                shunt.capacitance_f * w,
            )
            .reciprocal(),
        }
    }

    /// Impedance of the whole loop outside the switches, losses included, at angular frequency `w`.
    pub fn loop_impedance(&self, w: f64) -> Complex<S> {
        let series = Complex::new(
            self.series_resistance_ohm(),
            self.inductance_h * w - S::one() / (self.series_capacitance_f * w),
        );
        series + self.output_impedance(w)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A few roundings of a division and a square root.
    const ROUNDING: f64 = 1e-12;

    fn givens(kind: Network) -> NetworkGivens {
        NetworkGivens {
            kind,
            angular_frequency: std::f64::consts::TAU * 2.4e9,
            antenna_resistance_ohm: 50.0,
            capacitor_quality: 1e15,
        }
    }

    /// 50 → 5 Ω at 2.4 GHz: Q = 3, shunt reactance 16.667 Ω, C = 3.979 pF (textbook L section, recomputed).
    #[test]
    fn published_l_section_from_50_to_5_ohm() {
        let g = givens(Network::LowPass);
        let (q, x) = (5.0, 0.5);
        let inductance = q * 5.0 / g.angular_frequency;
        let network = LoadNetwork::new(&g, q, x, inductance, 0.0).unwrap();
        assert!((network.optimum_resistance_ohm - 5.0f64).abs() < ROUNDING);
        let shunt = network.shunt.unwrap();
        assert!((shunt.capacitance_f - 3.979e-12f64).abs() < 0.5e-15);
        // The series inductance that the section itself takes: 15 Ω, 0.9947 nH.
        assert!((15.0 / g.angular_frequency - 0.9947e-9f64).abs() < 0.5e-13);
        // What the loop sees is R_opt(1 + jx).
        let z = network.loop_impedance(g.angular_frequency);
        assert!((z.re - 5.0).abs() < 1e-9 && (z.im - 5.0 * x).abs() < 1e-9);
    }

    #[test]
    fn law_what_cannot_be_built_is_refused() {
        let g = givens(Network::LowPass);
        let large = 3.0 * 60.0 / g.angular_frequency;
        assert!(matches!(
            LoadNetwork::new(&g, 3.0, 0.0, large, 0.0),
            Err(Impossible::Matching { .. })
        ));
        let small = 3.0 * 5.0 / g.angular_frequency;
        assert!(matches!(
            LoadNetwork::new(&g, 3.0, 0.0, small, 0.0),
            Err(Impossible::SeriesCapacitor { .. })
        ));
    }
}
