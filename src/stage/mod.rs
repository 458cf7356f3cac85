//! The parts of an output stage: the leg's switches, its driver chain, the load network, the area they take.

pub mod area;
pub mod driver;
pub mod leg;
pub mod network;

use crate::numerics::scalar::Scalar;
use thiserror::Error;

/// The continuous and whole-number choices of one sizing, without its inductor.
#[derive(Debug, Clone, Copy)]
pub struct Sizing<S> {
    /// V_DD, V.
    pub supply_v: S,
    /// Q_L.
    pub loaded_q: S,
    /// W_n, m.
    pub nmos_width_m: S,
    /// W_p/W_n.
    pub width_ratio: S,
    /// Load angle x.
    pub reactance: S,
    /// Dead time δ, a fraction of the period.
    pub dead_time: S,
    /// Driver stages N.
    pub stages: u32,
}

impl<S: Scalar> Sizing<S> {
    /// W_n and W_p, m.
    pub fn widths_m(&self) -> [S; 2] {
        [self.nmos_width_m, self.nmos_width_m * self.width_ratio]
    }
}

/// The series inductor as the loop sees it (two legs: both spirals together).
#[derive(Debug, Clone, Copy)]
pub struct Coil<S> {
    /// L at the carrier, H.
    pub inductance_h: S,
    /// R_L at the carrier, Ω.
    pub resistance_ohm: S,
    /// Area of all its spirals, m².
    pub area_m2: S,
}

/// Why a design cannot exist.
#[derive(Debug, Clone, Copy, PartialEq, Error)]
pub enum Impossible {
    /// The L section only steps down.
    #[error(
        "matching: the optimum resistance {optimum_ohm:.4} ohm is not below the antenna's {antenna_ohm:.4} ohm; \
         take less inductance or a higher loaded Q"
    )]
    Matching {
        /// R_opt, Ω.
        optimum_ohm: f64,
        /// R_a, Ω.
        antenna_ohm: f64,
    },
    /// Equation (12) leaves no series capacitor.
    #[error(
        "series_capacitor: no room for the series capacitor: its reactance would be {factor:.4} of the optimum \
         resistance, above 0.02 is needed; take a higher loaded Q or less reactance"
    )]
    SeriesCapacitor {
        /// X_Cs/R_opt.
        factor: f64,
    },
    /// A spiral whose innermost turn does not close.
    #[error("spiral: {turns} turns of this trace do not fit inside the diameter")]
    Spiral {
        /// Turns asked for.
        turns: u32,
    },
    /// The spiral is capacitive at the carrier, or lossless to rounding.
    #[error("spiral: the inductor is past its self-resonance at the carrier")]
    PastResonance,
    /// No trace width gives the inductance that the direct network needs.
    #[error("spiral: no trace width gives {inductance_h:.4e} H at this diameter and these turns")]
    Trace {
        /// L wanted, H.
        inductance_h: f64,
    },
    /// Equation (11) holds for 0.1 V < V_ov/n < 0.9 V of the swing V.
    #[error(
        "driver_swing: the drivers' saturation voltage is {fraction:.4} of their swing; the edge-time model holds \
         between 0.1 and 0.9"
    )]
    DriverSwing {
        /// V_s/V.
        fraction: f64,
    },
    /// A switch that passes no current to speak of, as a cascode whose gate drive the drop across its switch takes.
    #[error(
        "cut_off: a switch never turns on: its resistance is {resistance_ohm:.3e} ohm, below 1e9 ohm is needed; take \
         more swing or wider devices"
    )]
    CutOff {
        /// R_n or R_p, Ω.
        resistance_ohm: f64,
    },
    /// A value that this kind of stage needs is not given.
    #[error("missing: this stage needs a value for `{key}`")]
    Missing {
        /// Key of `[design]`.
        key: &'static str,
    },
    /// A value left the range of floating-point numbers.
    #[error(
        "numbers: the steady state of this design is out of the range of floating-point numbers"
    )]
    Numbers,
}
