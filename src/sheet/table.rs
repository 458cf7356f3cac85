//! The sheet as a table: one figure a line, named like the JSON.

use super::records::Sheet;
use serde_json::Value;

/// `figure,value`, names joined by dots, SI; what does not exist is empty.
///
/// # Errors
/// The writer's.
pub fn csv(sheet: &Sheet) -> Result<Vec<u8>, csv::Error> {
    let json = serde_json::to_value(sheet).map_err(std::io::Error::other)?;
    let mut rows = Vec::new();
    flatten(&json, String::new(), &mut rows);
    let mut writer = csv::Writer::from_writer(Vec::new());
    writer.write_record(["figure", "value"])?;
    for (name, value) in rows {
        writer.write_record([name, value])?;
    }
    writer.into_inner().map_err(|e| e.into_error().into())
}

fn flatten(value: &Value, name: String, rows: &mut Vec<(String, String)>) {
    let inside = |key: &str| {
        if name.is_empty() {
            key.to_owned()
        } else {
            format!("{name}.{key}")
        }
    };
    match value {
        Value::Object(map) => {
            for (key, inner) in map {
                flatten(inner, inside(key), rows);
            }
        }
        Value::Array(items) => {
            for (place, inner) in items.iter().enumerate() {
                flatten(inner, inside(&(place + 1).to_string()), rows);
            }
        }
        Value::Null => rows.push((name, String::new())),
        Value::String(text) => rows.push((name, text.clone())),
        other => rows.push((name, other.to_string())),
    }
}
