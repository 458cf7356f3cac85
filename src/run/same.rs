//! Whether a folder holds the run that is asked for.

use super::RunError;
use super::records::RunRecord;
use serde_json::Value;
use std::path::Path;

/// Refuses to go on with a run of something else, and says what differs.
pub(super) fn same_run(path: &Path, there: &Value, here: &RunRecord) -> Result<(), RunError> {
    let mut differences = Vec::new();
    let here_value = serde_json::to_value(here).map_err(|e| RunError::Damaged {
        path: path.join("run.json"),
        reason: e.to_string(),
    })?;
    if there["version"] != here_value["version"] {
        differences.push(format!(
            "program version {} (this is {})",
            there["version"], here_value["version"]
        ));
    }
    for (what, hash) in [("study", "study_hash"), ("technology", "technology_hash")] {
        if there[hash] != here_value[hash] {
            let place = first_difference(what, &there[what], &here_value[what]);
            differences.push(format!(
                "another {what}{}",
                place.map_or(String::new(), |p| format!(" ({p})"))
            ));
        }
    }
    if there["part"] != here_value["part"] {
        differences.push(format!(
            "part {} (this is {})",
            there["part"], here_value["part"]
        ));
    }
    if differences.is_empty() {
        Ok(())
    } else {
        Err(RunError::Different {
            path: path.to_owned(),
            differences: differences.join(", "),
        })
    }
}

fn first_difference(path: &str, a: &Value, b: &Value) -> Option<String> {
    match (a, b) {
        (Value::Object(x), Value::Object(y)) => x
            .iter()
            .filter(|(key, _)| path != "study" || key.as_str() != "technology")
            .find_map(|(key, value)| {
                first_difference(
                    &format!("{path}.{key}"),
                    value,
                    y.get(key).unwrap_or(&Value::Null),
                )
            })
            .or_else(|| {
                let extra = y.keys().find(|k| !x.contains_key(*k))?;
                Some(format!("{path}.{extra} is new"))
            }),
        _ if a == b => None,
        _ => Some(format!("{path} was {a}, is {b}")),
    }
}
