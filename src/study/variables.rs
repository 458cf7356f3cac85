//! The variables of a design: what each measures and where it must lie, the same in `[space]`, in `[design]` and for
//! `--set`.

use super::figure::{Figure, above, below, number, quantity, whole, within};
use crate::quantity::Dimension;

/// V_DD; thick-oxide stacks reach 7 V.
pub(crate) const SUPPLY: Figure = quantity(Dimension::Voltage, within(0.05, 20.0));
/// Q_L; past 100 no integrated inductor leaves any efficiency.
pub(crate) const LOADED_Q: Figure = number(above(0.0, 100.0));
/// W_n.
pub(crate) const NMOS_WIDTH: Figure = quantity(Dimension::Length, within(1e-7, 0.1));
/// W_p/W_n.
pub(crate) const WIDTH_RATIO: Figure = number(within(0.1, 20.0));
/// Turns of a spiral.
pub(crate) const TURNS: Figure = whole(1, 20);
/// Trace width of a spiral.
pub(crate) const TRACE: Figure = quantity(Dimension::Length, within(1e-7, 1e-3));
/// Outer diameter of a spiral.
pub(crate) const DIAMETER: Figure = quantity(Dimension::Length, within(1e-6, 2e-2));
/// R_opt with a fixed inductor.
pub(crate) const RESISTANCE: Figure = quantity(Dimension::Resistance, within(0.01, 1e4));
/// Load angle x; negative ones cannot switch softly.
pub(crate) const REACTANCE: Figure = number(within(0.0, 20.0));
/// Dead time; at half a period a device would never turn on.
pub(crate) const DEAD_TIME: Figure = number(below(0.0, 0.5));
/// Driver stages.
pub(crate) const STAGES: Figure = whole(1, 20);
