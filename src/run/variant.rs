//! Variants of a study that lists several technologies, devices and so on, and their cells.

use super::RunError;
use super::folder::{read_run, resolved};
use crate::evaluate::Setup;
use crate::quantity::{format as engineering, format_in};
use crate::search::space::{self, Cell};
use crate::study::{Listed, Space, Study};
use crate::technology::Technology;
use serde::{Deserialize, Serialize};
use std::path::Path;

/// One combination of what a study lists, ready to be searched.
#[derive(Debug, Clone)]
pub struct Variant {
    /// The study with this combination alone.
    pub study: Study,
    /// Its technology.
    pub technology: Technology,
    /// Both together.
    pub setup: Setup,
}

/// What tells variants apart, as designs and cells of a sweep carry it.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct VariantLabel {
    /// Name of the technology.
    pub technology: String,
    /// Transistor pair.
    pub device: String,
    /// Devices a side.
    pub stack: u32,
    /// Legs.
    pub legs: u32,
    /// Carrier, Hz.
    pub frequency_hz: f64,
    /// Junction, K.
    pub temperature_k: f64,
}

impl VariantLabel {
    /// Of a variant.
    pub fn new(variant: &Variant) -> Self {
        let study = &variant.study;
        Self {
            technology: variant.technology.name.clone(),
            device: study.stage.device.clone(),
            stack: study.stage.stack,
            legs: study.stage.legs,
            frequency_hz: study.frequency_hz,
            temperature_k: study.temperature_k,
        }
    }

    /// Its values of `keys` in words: `2 legs, 870 MHz`.
    pub fn told(&self, keys: &[Listed]) -> String {
        let words: Vec<String> = keys
            .iter()
            .map(|key| match key {
                Listed::Technology => self.technology.clone(),
                Listed::Device => self.device.clone(),
                Listed::Stack => format!("stack {}", self.stack),
                Listed::Legs if self.legs == 1 => "1 leg".into(),
                Listed::Legs => format!("{} legs", self.legs),
                Listed::Frequency => engineering(self.frequency_hz, "Hz"),
                Listed::Temperature => format_in(self.temperature_k, "degC"),
            })
            .collect();
        words.join(", ")
    }

    /// Its values of `keys`: equal for variants of one group.
    pub fn group(&self, keys: &[Listed]) -> Vec<String> {
        keys.iter()
            .map(|key| match key {
                Listed::Technology => self.technology.clone(),
                Listed::Device => self.device.clone(),
                Listed::Stack => self.stack.to_string(),
                Listed::Legs => self.legs.to_string(),
                Listed::Frequency => self.frequency_hz.to_string(),
                Listed::Temperature => self.temperature_k.to_string(),
            })
            .collect()
    }
}

/// A cell of a run: one of its variant's, under the number it has in the run.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct RunCell {
    /// Number in the run: variants one after the other.
    pub index: usize,
    /// Which variant.
    pub variant: usize,
    /// The cell within its variant; what a search draws by seed depends on this alone.
    pub cell: Cell,
}

/// Every cell of a run of so many variants.
pub fn run_cells(space: &Space, variants: usize) -> Vec<RunCell> {
    let cells = space::cells(space);
    (0..variants)
        .flat_map(|variant| {
            let first = variant * cells.len();
            cells.iter().map(move |&cell| RunCell {
                index: first + cell.index,
                variant,
                cell,
            })
        })
        .collect()
}

/// The study of the run in `path` and the technologies of its list, or its single one.
fn recorded(path: &Path) -> Result<(Study, Vec<Technology>), RunError> {
    let run = read_run(path)?;
    let study: Study = resolved(path, &run, "study")?;
    let technologies = if study.sweep.technologies.is_empty() {
        vec![resolved(path, &run, "technology")?]
    } else {
        resolved(path, &run, "technologies")?
    };
    if technologies.len() != study.sweep.technologies.len().max(1) {
        return Err(damaged(path, "a technology is missing"));
    }
    Ok((study, technologies))
}

fn damaged(path: &Path, reason: &str) -> RunError {
    RunError::Damaged {
        path: path.join("run.json"),
        reason: format!("is damaged: {reason}"),
    }
}

/// The study of the run in `path`, and its variants.
///
/// # Errors
/// [`RunError::Damaged`] when the run's record holds none, or the system's.
pub fn variants_of_run(path: &Path) -> Result<(Study, Vec<Variant>), RunError> {
    let (study, technologies) = recorded(path)?;
    let studies = study.variants();
    // Technology is the outermost list.
    let a_technology = studies.len() / technologies.len();
    let variants = studies.into_iter().enumerate().map(|(i, study)| {
        let technology = technologies[i / a_technology].clone();
        let setup = Setup::new(&study, &technology).map_err(|e| damaged(path, &e.to_string()))?;
        Ok(Variant {
            study,
            technology,
            setup,
        })
    });
    let variants = variants.collect::<Result<_, RunError>>()?;
    Ok((study, variants))
}

/// Study and technology of the variant that a cell of the run in `path` belongs to.
///
/// # Errors
/// As [`variants_of_run`].
pub fn variant_of_cell(path: &Path, cell: usize) -> Result<(Study, Technology), RunError> {
    let (study, mut technologies) = recorded(path)?;
    let space = study
        .space
        .as_ref()
        .ok_or_else(|| damaged(path, "its study has no space"))?;
    let place = cell / space.cells().max(1);
    let mut variants = study.variants();
    if place >= variants.len() {
        return Err(damaged(path, "it has too few cells"));
    }
    let a_technology = variants.len() / technologies.len();
    let technology = technologies.swap_remove(place / a_technology);
    Ok((variants.swap_remove(place), technology))
}
