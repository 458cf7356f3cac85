//! Printed values, each with its source, against what the program computes; the table of them in DEVELOPERS.md.

#[path = "../common/mod.rs"]
mod common;

mod class_d;
mod drivers;
mod inductors;
mod matching;
mod practice;
mod sets;
mod soft_switching;
mod transistors;

/// How far a value may be from the printed one.
#[derive(Debug, Clone, Copy)]
pub enum Within {
    /// A fraction of the printed value.
    Fraction(f64),
    /// In the printed value's unit.
    Units(f64),
}

/// Values of one source and ours: a line of the table.
#[derive(Debug)]
pub struct Line {
    /// What, over which arguments, in which unit.
    pub quantity: String,
    /// Author, year; whether from memory.
    pub source: &'static str,
    /// As printed, and ours.
    pub values: Vec<(&'static str, f64)>,
    /// The tolerance and with it the way differences are told.
    pub within: Within,
}

impl Line {
    fn difference(&self, (printed, ours): &(&str, f64)) -> f64 {
        let value: f64 = printed.parse().unwrap();
        match self.within {
            Within::Fraction(_) => (ours / value - 1.0).abs(),
            Within::Units(_) => (ours - value).abs(),
        }
    }

    fn largest_difference(&self) -> f64 {
        let differences = self.values.iter().map(|v| self.difference(v));
        differences.fold(0.0, f64::max)
    }

    /// Fails when a value is further from the printed one than the tolerance, or is no number.
    pub fn check(&self) {
        let (Within::Fraction(most) | Within::Units(most)) = self.within;
        assert!(!self.values.is_empty(), "{}", self.quantity);
        for value in &self.values {
            assert!(
                self.difference(value) <= most,
                "{}: {value:?} differ by {:.2e}, {most:.1e} is allowed",
                self.quantity,
                self.difference(value)
            );
        }
    }

    /// The line in Markdown, ours with the printed decimals.
    fn show(&self) -> String {
        let printed: Vec<&str> = self.values.iter().map(|(p, _)| *p).collect();
        let ours: Vec<String> = self
            .values
            .iter()
            .map(|(p, o)| format!("{o:.*}", p.split_once('.').map_or(0, |(_, d)| d.len())))
            .collect();
        let largest = self.largest_difference();
        let difference = match self.within {
            Within::Fraction(_) if largest < 1e-6 => "below 0.0001 %".to_owned(),
            Within::Fraction(_) => format!("{:.2} %", Rounded(100.0 * largest)),
            Within::Units(_) => format!("{:.2}", Rounded(largest)),
        };
        let (quantity, source) = (&self.quantity, self.source);
        let (printed, ours) = (printed.join(", "), ours.join(", "));
        format!("| {quantity} | {source} | {printed} | {ours} | {difference} |")
    }
}

/// A number to as many significant digits as the precision says.
struct Rounded(f64);

impl std::fmt::Display for Rounded {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        let digits = f.precision().unwrap_or(1) as i32;
        if self.0 == 0.0 {
            return f.write_str("0");
        }
        let decimals = (digits - 1 - self.0.abs().log10().floor() as i32).max(0) as usize;
        write!(f, "{:.decimals$}", self.0)
    }
}

fn table() -> String {
    let lines = [
        class_d::lines(),
        soft_switching::lines(),
        drivers::lines(),
        matching::lines(),
        inductors::lines(),
        transistors::lines(),
        sets::lines(),
    ];
    let mut text = String::from(
        "| quantity | source | printed | ours | largest difference |\n| --- | --- | --- | --- | --- |\n",
    );
    for line in lines.iter().flatten() {
        text += &line.show();
        text.push('\n');
    }
    text
}

/// `cargo test --test published -- --nocapture table` prints the table; DEVELOPERS.md holds it.
#[test]
fn regress_table_of_the_developers_notes() {
    let table = table();
    println!("{table}");
    let notes = include_str!("../../DEVELOPERS.md");
    assert!(
        notes.contains(&table),
        "DEVELOPERS.md holds another table of published values than the one printed by this test"
    );
}
