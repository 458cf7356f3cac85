//! `--set KEY=VALUE`: one value of `[design]` changed from the command line.

use super::diagnostics::{Fault, FaultKind, Faults, Origin};
use super::read::StudyFile;
use super::resolved::Design;
use super::spelling::nearest;
use super::variables::*;
use crate::quantity::excerpt;

/// Keys of `[design]`, in the order of the file.
pub const DESIGN_KEYS: [&str; 11] = [
    "supply",
    "loaded_q",
    "nmos_width",
    "width_ratio",
    "turns",
    "trace",
    "diameter",
    "resistance",
    "reactance",
    "dead_time",
    "stages",
];

/// Changes one value of `[design]`: `supply=1.0V`, as the file would hold it, quotes optional.
pub fn set_design(file: &mut StudyFile, assignment: &str) -> Result<(), Faults> {
    let argument = format!("--set {}", excerpt(assignment).escape_debug());
    let fault = |key: &str, kind| {
        Faults::from(Fault {
            origin: Origin::Argument(argument.clone()),
            key: key.to_owned(),
            kind,
        })
    };
    let Some((key, value)) = assignment.split_once('=') else {
        let read = excerpt(assignment);
        return Err(fault("", FaultKind::NotAnAssignment { read }));
    };
    let key = key.trim();
    if !DESIGN_KEYS.contains(&key) {
        let allowed = DESIGN_KEYS.map(str::to_owned).to_vec();
        let nearest = nearest(key, DESIGN_KEYS);
        return Err(fault("", FaultKind::UnknownKey { allowed, nearest }));
    }
    let place = format!("[design] {key}");
    let Some(design) = file.study.design.as_mut() else {
        return Err(fault("", FaultKind::NoDesign));
    };
    change(design, key, value).map_err(|kind| fault(&place, kind))?;
    file.lines.note_argument(&place, &argument);
    Ok(())
}

fn change(design: &mut Design, key: &str, value: &str) -> Result<(), FaultKind> {
    match key {
        "supply" => design.supply_v = SUPPLY.read_text(value)?,
        "loaded_q" => design.loaded_q = LOADED_Q.read_text(value)?,
        "nmos_width" => design.nmos_width_m = NMOS_WIDTH.read_text(value)?,
        "width_ratio" => design.width_ratio = WIDTH_RATIO.read_text(value)?,
        "turns" => design.turns = Some(TURNS.read_text(value)? as u32),
        "trace" => design.trace_m = Some(TRACE.read_text(value)?),
        "diameter" => design.diameter_m = Some(DIAMETER.read_text(value)?),
        "resistance" => design.resistance_ohm = Some(RESISTANCE.read_text(value)?),
        "reactance" => design.reactance = REACTANCE.read_text(value)?,
        "dead_time" => design.dead_time = DEAD_TIME.read_text(value)?,
        _ => design.stages = STAGES.read_text(value)? as u32,
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::study::read_str;
    use std::path::Path;

    const STUDY: &str = include_str!("../../tests/studies/good/plain.toml");

    fn file(text: &str) -> StudyFile {
        read_str(text, Path::new("a.toml")).unwrap()
    }

    #[test]
    fn law_a_set_value_reads_as_in_the_file() {
        let mut changed = file(STUDY);
        for assignment in [
            "supply=1.0V",
            "loaded_q = 3",
            "nmos_width='0.5 mm'",
            "width_ratio=1.5",
            "turns=3",
            "trace=\"20 um\"",
            "diameter=300um",
            "resistance=4 ohm",
            "reactance=0",
            "dead_time=0.1",
            "stages=6",
        ] {
            set_design(&mut changed, assignment).unwrap();
        }
        let expected = Design {
            supply_v: 1.0,
            loaded_q: 3.0,
            nmos_width_m: 5e-4,
            width_ratio: 1.5,
            turns: Some(3),
            trace_m: Some(2e-5),
            diameter_m: Some(3e-4),
            resistance_ohm: Some(4.0),
            reactance: 0.0,
            dead_time: 0.1,
            stages: 6,
        };
        assert_eq!(changed.study.design, Some(expected));
        let origin = changed.lines.origin("[design] supply").to_string();
        assert_eq!(origin, "--set supply=1.0V");
    }

    #[test]
    fn law_every_design_key_can_be_set() {
        for key in DESIGN_KEYS {
            let error = set_design(&mut file(STUDY), &format!("{key}=?")).unwrap_err();
            let start = format!("--set {key}=?: [design] {key}: read ");
            assert!(error.to_string().starts_with(&start), "{error}");
        }
    }

    #[test]
    fn law_a_faulty_set_says_how_to_mend_it() {
        let design = STUDY.find("[design]").unwrap();
        for (text, assignment, message) in [
            (
                STUDY,
                "supply",
                "--set supply: read \"supply\", allowed KEY=VALUE\n  help: for example --set supply=1.0V",
            ),
            (
                STUDY,
                "suply=1 V",
                "--set suply=1 V: unknown key; allowed supply, loaded_q, nmos_width, width_ratio, turns, trace, diameter, resistance, reactance, dead_time, stages\n  help: did you mean supply?",
            ),
            (
                STUDY,
                "supply=1",
                "--set supply=1: [design] supply: read \"1\", which has no unit; allowed a voltage such as \"1.2 V\"\n  help: write the unit inside the quotes, as in \"1.2 V\"",
            ),
            (
                STUDY,
                "turns=2.5",
                "--set turns=2.5: [design] turns: read 2.5, allowed a whole number, 1 to 20",
            ),
            (
                STUDY,
                "dead_time=0.6",
                "--set dead_time=0.6: [design] dead_time: read 0.6, allowed at least 0, less than 0.5",
            ),
            (
                STUDY,
                "loaded_q=four",
                "--set loaded_q=four: [design] loaded_q: read four, allowed a number, more than 0, at most 100",
            ),
            (
                &STUDY[..design],
                "supply=1 V",
                "--set supply=1 V: the study has no [design] to change\n  help: add a [design] section to the study",
            ),
        ] {
            let error = set_design(&mut file(text), assignment).unwrap_err();
            assert_eq!(error.to_string(), message);
        }
    }
}
