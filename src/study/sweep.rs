//! Studies that list several technologies, devices, stacks, legs, frequencies or temperatures: the product of the lists.

use super::read::StudyFile;
use super::resolved::Study;
use serde::{Deserialize, Serialize};
use std::path::PathBuf;

/// What a study lists several of. A list is empty where the study gives one value.
#[derive(Debug, Clone, Default, PartialEq, Serialize, Deserialize)]
#[serde(default)]
pub struct Sweep {
    /// Technology files, resolved against the study's folder.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub technologies: Vec<PathBuf>,
    /// Transistor pairs.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub devices: Vec<String>,
    /// Devices a side.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub stacks: Vec<u32>,
    /// Output legs.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub legs: Vec<u32>,
    /// Carriers, Hz.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub frequencies_hz: Vec<f64>,
    /// Junction temperatures, K.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub temperatures_k: Vec<f64>,
}

/// What may be listed; the overall front can be taken for each value of some of them.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Listed {
    /// `technology`
    Technology,
    /// `[stage] device`
    Device,
    /// `[stage] stack`
    Stack,
    /// `[stage] legs`
    Legs,
    /// `[signal] frequency`
    Frequency,
    /// `temperature`
    Temperature,
}

/// Names as `[search] fronts_by` has them.
pub const LISTED: [(&str, Listed); 6] = [
    ("technology", Listed::Technology),
    ("device", Listed::Device),
    ("stack", Listed::Stack),
    ("legs", Listed::Legs),
    ("frequency", Listed::Frequency),
    ("temperature", Listed::Temperature),
];

impl Sweep {
    /// True when nothing is listed.
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }

    /// Which are listed.
    pub fn listed(&self) -> Vec<Listed> {
        let given = [
            !self.technologies.is_empty(),
            !self.devices.is_empty(),
            !self.stacks.is_empty(),
            !self.legs.is_empty(),
            !self.frequencies_hz.is_empty(),
            !self.temperatures_k.is_empty(),
        ];
        let named = LISTED.iter().zip(given).filter(|(_, given)| *given);
        named.map(|((_, listed), _)| *listed).collect()
    }

    /// Variants: the product of the lists' lengths.
    pub fn variants(&self) -> usize {
        [
            self.technologies.len(),
            self.devices.len(),
            self.stacks.len(),
            self.legs.len(),
            self.frequencies_hz.len(),
            self.temperatures_k.len(),
        ]
        .iter()
        .map(|n| n.max(&1))
        .product()
    }
}

/// One study for each value of a list; as it is where the list is empty.
fn each<T: Clone>(studies: Vec<Study>, list: &[T], set: fn(&mut Study, T)) -> Vec<Study> {
    if list.is_empty() {
        return studies;
    }
    studies
        .into_iter()
        .flat_map(|study| {
            list.iter().map(move |value| {
                let mut one = study.clone();
                set(&mut one, value.clone());
                one
            })
        })
        .collect()
}

impl Study {
    /// Every combination of what is listed, each a study that lists nothing: technology outermost, then device, stack,
    /// legs, frequency, temperature. One, the study itself, where nothing is listed.
    pub fn variants(&self) -> Vec<Self> {
        let single = Self {
            sweep: Sweep::default(),
            ..self.clone()
        };
        let s = &self.sweep;
        let mut studies = each(vec![single], &s.technologies, |v, t| v.technology = t);
        studies = each(studies, &s.devices, |v, d| v.stage.device = d);
        studies = each(studies, &s.stacks, |v, n| v.stage.stack = n);
        studies = each(studies, &s.legs, |v, n| v.stage.legs = n);
        studies = each(studies, &s.frequencies_hz, |v, f| v.frequency_hz = f);
        each(studies, &s.temperatures_k, |v, t| v.temperature_k = t)
    }
}

impl StudyFile {
    /// The file once for every variant of its study.
    pub fn variants(&self) -> Vec<Self> {
        self.study
            .variants()
            .into_iter()
            .map(|study| {
                let listed = &self.study.sweep.technologies;
                let place = listed.iter().position(|t| *t == study.technology);
                let written = place.map_or(&self.technology_as_written, |i| {
                    &self.technologies_as_written[i]
                });
                Self {
                    technology_as_written: written.clone(),
                    study,
                    ..self.clone()
                }
            })
            .collect()
    }
}

#[cfg(test)]
mod tests {
    use crate::study::read_str;
    use std::path::Path;

    const STUDY: &str = include_str!("../../tests/studies/good/plain.toml");

    #[test]
    fn law_variants_are_the_product_in_order() {
        let text = STUDY
            .replacen(
                "frequency = \"2.45 GHz\"",
                "frequency = [\"0.9 GHz\", \"2.45 GHz\"]",
                1,
            )
            .replacen("legs = 1", "legs = [1, 2]", 1);
        let study = read_str(&text, Path::new("a.toml")).unwrap().study;
        assert_eq!(study.sweep.variants(), 4);
        let variants: Vec<(u32, f64)> = study
            .variants()
            .iter()
            .map(|v| (v.stage.legs, v.frequency_hz))
            .collect();
        assert_eq!(variants, [(1, 0.9e9), (1, 2.45e9), (2, 0.9e9), (2, 2.45e9)]);
        let single = read_str(STUDY, Path::new("a.toml")).unwrap().study;
        assert_eq!(single.variants(), std::slice::from_ref(&single));
    }

    #[test]
    fn law_lists_refuse_what_a_single_value_does_and_what_is_listed_twice() {
        for (list, reason) in [
            ("[]", "an empty list"),
            ("[1, 1]", "twice"),
            ("[1, 3]", "read 3"),
            ("[1, \"two\"]", "two"),
        ] {
            let text = STUDY.replacen("legs = 1", &format!("legs = {list}"), 1);
            let faults = read_str(&text, Path::new("a.toml"))
                .unwrap_err()
                .to_string();
            assert!(
                faults.contains("legs") && faults.contains(reason),
                "{faults}"
            );
        }
    }
}
