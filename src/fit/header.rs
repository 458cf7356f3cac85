//! The header of a table: which column holds what, in which unit.

use super::table::Kind;
use crate::study::{FaultKind, nearest};

/// What a column holds.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Column {
    /// Name of the transistor pair.
    Device,
    /// `nmos` or `pmos`.
    Polarity,
    /// `gate_to_source_drain` or `gate_to_all`.
    Terminals,
    /// A name for a junction structure.
    Structure,
    /// Gate width, m.
    Width,
    /// Gate length, m.
    Length,
    /// Temperature, K.
    Temperature,
    /// Gate to source, V.
    GateVoltage,
    /// Drain to source, V.
    DrainVoltage,
    /// Body to drain, reverse, V.
    ReverseVoltage,
    /// Drain current, A.
    Current,
    /// F.
    Capacitance,
    /// Junction area, m².
    Area,
    /// Junction perimeter, m.
    Perimeter,
}

use Column::*;

/// Endings of a column's name with their factors to SI.
type Units = &'static [(&'static str, f64)];

/// Every column's name, and the units it takes: ending of the name, factor to SI.
const COLUMNS: [(Column, &str, Units); 14] = [
    (Device, "device", &[("", 1.0)]),
    (Polarity, "polarity", &[("", 1.0)]),
    (Terminals, "terminals", &[("", 1.0)]),
    (Structure, "structure", &[("", 1.0)]),
    (Width, "width", LENGTHS),
    (Length, "length", LENGTHS),
    (
        Temperature,
        "temperature",
        &[("k", 1.0), ("degc", 1.0), ("c", 1.0)],
    ),
    (GateVoltage, "v_gs", VOLTAGES),
    (DrainVoltage, "v_ds", VOLTAGES),
    (ReverseVoltage, "v_reverse", VOLTAGES),
    (
        Current,
        "i_d",
        &[
            ("", 1.0),
            ("a", 1.0),
            ("ma", 1e-3),
            ("ua", 1e-6),
            ("na", 1e-9),
            ("pa", 1e-12),
        ],
    ),
    (
        Capacitance,
        "capacitance",
        &[("f", 1.0), ("nf", 1e-9), ("pf", 1e-12), ("ff", 1e-15)],
    ),
    (Area, "area", &[("m2", 1.0), ("mm2", 1e-6), ("um2", 1e-12)]),
    (Perimeter, "perimeter", LENGTHS),
];
const LENGTHS: Units = &[("m", 1.0), ("mm", 1e-3), ("um", 1e-6), ("nm", 1e-9)];
/// Volts go without saying, as in most tables of curves.
const VOLTAGES: Units = &[("", 1.0), ("v", 1.0), ("mv", 1e-3)];

impl Column {
    /// Name without its unit.
    pub fn name(self) -> &'static str {
        let found = COLUMNS.iter().find(|(column, ..)| *column == self);
        found.map_or("", |(_, name, _)| name)
    }
}

/// One column of a table.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Field {
    /// What it holds.
    pub column: Column,
    /// Factor to SI.
    pub factor: f64,
    /// Added after the factor: degrees Celsius.
    pub offset: f64,
}

/// Columns that each kind of table must have, the currents' last: an off table has no gate voltage.
const KINDS: [(Kind, &[Column]); 4] = [
    (
        Kind::Junction,
        &[
            Device,
            Polarity,
            Area,
            Perimeter,
            Temperature,
            ReverseVoltage,
            Capacitance,
        ],
    ),
    (
        Kind::Gate,
        &[
            Device,
            Polarity,
            Width,
            Length,
            Temperature,
            GateVoltage,
            Terminals,
            Capacitance,
        ],
    ),
    (
        Kind::Current,
        &[
            Device,
            Polarity,
            Width,
            Length,
            Temperature,
            GateVoltage,
            DrainVoltage,
            Current,
        ],
    ),
    (
        Kind::Off,
        &[
            Device,
            Polarity,
            Width,
            Length,
            Temperature,
            DrainVoltage,
            Current,
        ],
    ),
];

/// Reads a header: the kind of table and its fields in their order.
pub fn read(header: &[String]) -> Result<(Kind, Vec<Field>), (String, FaultKind)> {
    let mut fields: Vec<Field> = Vec::new();
    for written in header {
        let field = field(written)?;
        if fields.iter().any(|other| other.column == field.column) {
            let read = format!("the column {}", field.column.name());
            return Err((written.clone(), FaultKind::Repeated { read }));
        }
        fields.push(field);
    }
    let has = |column: Column| fields.iter().any(|field| field.column == column);
    // the kind is told by the columns no other kind has
    let kind = match (
        has(ReverseVoltage) || has(Area),
        has(Capacitance),
        has(GateVoltage),
    ) {
        (true, _, _) => Kind::Junction,
        (false, true, _) => Kind::Gate,
        (false, false, true) => Kind::Current,
        (false, false, false) => Kind::Off,
    };
    let needed = KINDS
        .iter()
        .find(|(of, _)| *of == kind)
        .map_or(&[][..], |(_, needed)| needed);
    if let Some(missing) = needed.iter().find(|column| !has(**column)) {
        let names: Vec<&str> = needed.iter().map(|column| column.name()).collect();
        let allowed = format!(
            "a table of {} has the columns {}",
            kind.noun(),
            names.join(", ")
        );
        let key = missing.name().to_owned();
        return Err((
            key,
            FaultKind::MissingKey {
                allowed,
                example: example(*missing),
            },
        ));
    }
    let extra = |field: &&Field| !needed.contains(&field.column) && field.column != Structure;
    if let Some(field) = fields.iter().find(extra) {
        let allowed = needed
            .iter()
            .map(|column| column.name().to_owned())
            .collect();
        let key = field.column.name().to_owned();
        return Err((
            key,
            FaultKind::UnknownKey {
                allowed,
                nearest: None,
            },
        ));
    }
    Ok((kind, fields))
}

fn example(column: Column) -> Option<String> {
    let (_, name, units) = COLUMNS.iter().find(|(other, ..)| *other == column)?;
    let unit = units.first().map_or("", |(unit, _)| unit);
    let text = if unit.is_empty() {
        (*name).to_owned()
    } else {
        format!("{name}_{unit}")
    };
    Some(format!("a column {text}"))
}

fn field(written: &str) -> Result<Field, (String, FaultKind)> {
    let lower = written.to_lowercase();
    for (column, name, units) in COLUMNS {
        let Some(rest) = lower.strip_prefix(name) else {
            continue;
        };
        let unit = match rest {
            "" => "",
            _ => match rest.strip_prefix('_') {
                Some(unit) => unit,
                None => continue,
            },
        };
        let Some((_, factor)) = units.iter().find(|(known, _)| *known == unit) else {
            let listed: Vec<String> = units
                .iter()
                .map(|(unit, _)| {
                    if unit.is_empty() {
                        name.to_owned()
                    } else {
                        format!("{name}_{unit}")
                    }
                })
                .collect();
            let read = format!("{written:?}");
            return Err((
                written.to_owned(),
                FaultKind::WrongType {
                    read,
                    allowed: listed.join(", "),
                },
            ));
        };
        let celsius = column == Temperature && unit != "k";
        let offset = if celsius { 273.15 } else { 0.0 };
        return Ok(Field {
            column,
            factor: *factor,
            offset,
        });
    }
    let names = || COLUMNS.iter().map(|(_, name, _)| *name);
    let kind = FaultKind::UnknownKey {
        allowed: names().map(str::to_owned).collect(),
        nearest: nearest(&lower, names()),
    };
    Err((written.to_owned(), kind))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn header(text: &str) -> Result<(Kind, Vec<Field>), (String, FaultKind)> {
        read(&text.split(',').map(str::to_owned).collect::<Vec<_>>())
    }

    #[test]
    fn law_the_kind_follows_from_the_columns_in_any_order() {
        let kinds = [
            (
                "i_d,v_ds,v_gs,temperature_k,length_nm,width_um,polarity,device",
                Kind::Current,
            ),
            (
                "device,polarity,width_m,length_m,temperature_degc,v_ds,i_d_pA",
                Kind::Off,
            ),
            (
                "device,polarity,width_m,length_m,temperature_k,v_gs,terminals,capacitance_f",
                Kind::Gate,
            ),
            (
                "device,polarity,structure,area_m2,perimeter_m,temperature_k,v_reverse,capacitance_f",
                Kind::Junction,
            ),
        ];
        for (text, kind) in kinds {
            assert_eq!(header(text).map(|(kind, _)| kind), Ok(kind), "{text}");
        }
    }

    #[test]
    fn law_a_header_at_fault_names_its_column() {
        let faults = [
            (
                "device,polarity,width_m,length_m,temperature_k,v_gs,i_d",
                "v_ds",
            ),
            (
                "device,polarity,width_m,width_um,length_m,temperature_k,v_gs,v_ds,i_d",
                "width_um",
            ),
            (
                "device,polarity,width,length_m,temperature_k,v_gs,v_ds,i_d",
                "width",
            ),
            (
                "device,polarity,width_m,length_m,temperature_f,v_gs,v_ds,i_d",
                "temperature_f",
            ),
            (
                "device,polarity,width_m,length_m,temperature_k,v_gs,v_ds,i_d,v_bs",
                "v_bs",
            ),
        ];
        for (text, column) in faults {
            assert_eq!(
                header(text).map_err(|(key, _)| key),
                Err(column.to_owned()),
                "{text}"
            );
        }
    }
}
