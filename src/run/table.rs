//! Records as CSV: columns named like the JSON, nested names joined by a dot, what does not exist empty.

use super::RunError;
use serde::Serialize;
use serde_json::Value;
use std::path::Path;

/// The rows as CSV text with a header of the first row's names.
pub fn csv<T: Serialize>(name: &Path, rows: &[T]) -> Result<Vec<u8>, RunError> {
    let damaged = |reason: String| RunError::Damaged {
        path: name.to_owned(),
        reason: format!("cannot be written as CSV: {reason}"),
    };
    let mut writer = csv::Writer::from_writer(Vec::new());
    for (index, row) in rows.iter().enumerate() {
        let value = serde_json::to_value(row).map_err(|e| damaged(e.to_string()))?;
        let mut fields = Vec::new();
        flatten("", &value, &mut fields);
        if index == 0 {
            writer
                .write_record(fields.iter().map(|f| &f.0))
                .map_err(|e| damaged(e.to_string()))?;
        }
        writer
            .write_record(fields.iter().map(|f| &f.1))
            .map_err(|e| damaged(e.to_string()))?;
    }
    writer.into_inner().map_err(|e| damaged(e.to_string()))
}

fn flatten(prefix: &str, value: &Value, fields: &mut Vec<(String, String)>) {
    match value {
        Value::Object(map) => {
            for (key, inner) in map {
                let name = if prefix.is_empty() {
                    key.clone()
                } else {
                    format!("{prefix}.{key}")
                };
                flatten(&name, inner, fields);
            }
        }
        Value::Null => fields.push((prefix.into(), String::new())),
        Value::String(s) => fields.push((prefix.into(), s.clone())),
        Value::Array(items) => {
            let joined: Vec<String> = items
                .iter()
                .map(|i| i.as_str().map_or_else(|| i.to_string(), str::to_owned))
                .collect();
            fields.push((prefix.into(), joined.join(";")));
        }
        other => fields.push((prefix.into(), other.to_string())),
    }
}
