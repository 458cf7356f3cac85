//! What a drawing must keep: grid, fingers, current limits of metals, unit capacitors.

use serde::{Deserialize, Serialize};

/// The table `[rules]` as read: every key may be left out, since only a `sheet` needs them.
#[derive(Debug, Clone, PartialEq, Default, Serialize, Deserialize)]
#[serde(default)]
pub struct Rules {
    /// Every drawn length is a whole number of these, m.
    pub grid_m: Option<f64>,
    /// Narrowest finger, m.
    pub least_finger_m: Option<f64>,
    /// Widest finger, m.
    pub most_finger_m: Option<f64>,
    /// Most fingers of one device.
    pub most_fingers: Option<u32>,
    /// From gate to gate, m.
    pub finger_pitch_m: Option<f64>,
    /// Width of the metal along a source or drain, m.
    pub finger_metal_width_m: Option<f64>,
    /// Its sheet resistance, Ω a square, all metals stacked there in parallel.
    pub finger_sheet_resistance_ohm: Option<f64>,
    /// Highest current a width of it, A/m.
    pub finger_current_a_m: Option<f64>,
    /// Highest current a width of the spiral's metal, A/m.
    pub top_current_a_m: Option<f64>,
    /// Junction temperature that both current limits hold for, K.
    pub current_temperature_k: Option<f64>,
    /// One unit of a capacitor array, F.
    pub capacitor_unit_f: Option<f64>,
}

/// [`Rules`] with nothing missing.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct DrawingRules {
    /// See [`Rules::grid_m`].
    pub grid_m: f64,
    /// See [`Rules::least_finger_m`].
    pub least_finger_m: f64,
    /// See [`Rules::most_finger_m`].
    pub most_finger_m: f64,
    /// See [`Rules::most_fingers`].
    pub most_fingers: u32,
    /// See [`Rules::finger_pitch_m`].
    pub finger_pitch_m: f64,
    /// See [`Rules::finger_metal_width_m`].
    pub finger_metal_width_m: f64,
    /// See [`Rules::finger_sheet_resistance_ohm`].
    pub finger_sheet_resistance_ohm: f64,
    /// See [`Rules::finger_current_a_m`].
    pub finger_current_a_m: f64,
    /// See [`Rules::top_current_a_m`].
    pub top_current_a_m: f64,
    /// See [`Rules::current_temperature_k`].
    pub current_temperature_k: f64,
    /// See [`Rules::capacitor_unit_f`].
    pub capacitor_unit_f: f64,
}

impl Rules {
    /// True when no key is given.
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }

    /// All rules, or the keys of `[rules]` that are missing.
    ///
    /// # Errors
    /// The names of the missing keys, as a file would hold them.
    pub fn complete(&self) -> Result<DrawingRules, Vec<&'static str>> {
        let mut missing = Vec::new();
        let mut take = |key, value: Option<f64>| {
            value.unwrap_or_else(|| {
                missing.push(key);
                0.0
            })
        };
        let rules = DrawingRules {
            grid_m: take("grid", self.grid_m),
            least_finger_m: take("least_finger", self.least_finger_m),
            most_finger_m: take("most_finger", self.most_finger_m),
            most_fingers: take("most_fingers", self.most_fingers.map(f64::from)) as u32,
            finger_pitch_m: take("finger_pitch", self.finger_pitch_m),
            finger_metal_width_m: take("finger_metal_width", self.finger_metal_width_m),
            finger_sheet_resistance_ohm: take(
                "finger_sheet_resistance",
                self.finger_sheet_resistance_ohm,
            ),
            finger_current_a_m: take("finger_current", self.finger_current_a_m),
            top_current_a_m: take("top_current", self.top_current_a_m),
            current_temperature_k: take("current_temperature", self.current_temperature_k),
            capacitor_unit_f: take("capacitor_unit", self.capacitor_unit_f),
        };
        if missing.is_empty() {
            Ok(rules)
        } else {
            Err(missing)
        }
    }
}
