//! A handful of designs that span the overall front, to be shown side by side.

use crate::evaluate::Figures;
use crate::run::records::DesignRecord;

/// One of them.
#[derive(Debug, Clone)]
pub struct Chosen<'a> {
    /// Its id.
    pub id: &'a str,
    /// Its figures.
    pub figures: &'a Figures,
    /// Carrier of its variant, Hz; none outside sweeps.
    pub carrier_hz: Option<f64>,
    /// What it was chosen for.
    pub why: String,
}

impl Chosen<'_> {
    /// Two lines: what it was chosen for, then id and output power.
    pub fn lines(&self) -> [String; 2] {
        [
            self.why.clone(),
            format!("{}, {:.1} dBm", self.id, self.figures.output_power_dbm),
        ]
    }
}

/// The most efficient, the smallest, the one of most output power, and the most efficient from a quarter, half and three quarters of the
/// way up the front's output powers (dBm) on; each design once, output power rising.
pub fn chosen(designs: &[DesignRecord]) -> Vec<Chosen<'_>> {
    let carrier_hz = |d: &DesignRecord| d.variant.as_ref().map(|v| v.frequency_hz);
    let known: Vec<(&str, &Figures, Option<f64>)> = designs
        .iter()
        .filter_map(|d| Some((d.id.as_str(), d.evaluation.figures.as_ref()?, carrier_hz(d))))
        .collect();
    let power = |f: &Figures| f.output_power_dbm;
    let low = known.iter().map(|d| power(d.1)).fold(f64::MAX, f64::min);
    let high = known.iter().map(|d| power(d.1)).fold(f64::MIN, f64::max);
    let best = |score: &dyn Fn(&Figures) -> f64, from_dbm: f64| {
        let fit = known.iter().filter(|d| power(d.1) >= from_dbm);
        fit.max_by(|a, b| {
            // Of equal scores the first.
            score(a.1).total_cmp(&score(b.1)).then(b.0.cmp(a.0))
        })
    };
    let efficiency = |f: &Figures| f.efficiency;
    let mut picks = vec![
        (best(&efficiency, low), "most efficient".to_owned()),
        (best(&|f| -f.area_m2, low), "smallest".to_owned()),
        (best(&power, low), "most power".to_owned()),
    ];
    for quarter in 1..4 {
        let from_dbm = low + 0.25 * f64::from(quarter) * (high - low);
        let why = format!("best from {from_dbm:.1} dBm");
        picks.push((best(&efficiency, from_dbm), why));
    }
    let mut list: Vec<Chosen<'_>> = Vec::new();
    for (found, why) in picks {
        if let Some(&(id, figures, carrier_hz)) = found
            && !list.iter().any(|c| c.id == id)
        {
            list.push(Chosen {
                id,
                figures,
                carrier_hz,
                why,
            });
        }
    }
    list.sort_by(|a, b| power(a.figures).total_cmp(&power(b.figures)));
    list
}
