//! What is wrong with an input file: where, what was read, what is allowed, how to mend it.

use std::fmt;

/// One fault of an input.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Fault {
    /// The file as the user named it.
    pub file: String,
    /// Line, from 1; absent where the fault is the whole file's.
    pub line: Option<usize>,
    /// Where in the file, `[stage] legs`; empty for the whole file.
    pub key: String,
    /// What was read.
    pub read: String,
    /// What is allowed.
    pub allowed: String,
    /// How to mend it, where more can be said.
    pub help: Option<String>,
}

impl fmt::Display for Fault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}", self.file)?;
        if let Some(line) = self.line {
            write!(f, ":{line}")?;
        }
        write!(f, ": ")?;
        if !self.key.is_empty() {
            write!(f, "{}: ", self.key)?;
        }
        write!(f, "read {}; allowed: {}", self.read, self.allowed)?;
        if let Some(help) = &self.help {
            write!(f, "\n  help: {help}")?;
        }
        Ok(())
    }
}

/// All faults found in one input, in the order of their lines.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Faults(pub Vec<Fault>);

impl fmt::Display for Faults {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (index, fault) in self.0.iter().enumerate() {
            if index > 0 {
                writeln!(f)?;
            }
            write!(f, "{fault}")?;
        }
        Ok(())
    }
}

impl std::error::Error for Faults {}

impl From<Fault> for Faults {
    fn from(fault: Fault) -> Self {
        Self(vec![fault])
    }
}

/// `did you mean "…"?` for the known name nearest to `read`, if one is near.
pub fn nearest<'a>(read: &str, known: impl IntoIterator<Item = &'a str>) -> Option<String> {
    /// Longer names are not spelling mistakes of any of ours.
    const LONGEST: usize = 60;
    if read.chars().count() > LONGEST {
        return None;
    }
    known
        .into_iter()
        .map(|name| (distance(read, name), name))
        .filter(|&(d, name)| d <= 1 + name.chars().count() / 3)
        .min()
        .map(|(_, name)| format!("did you mean \"{name}\"?"))
}

/// Edit distance of Levenshtein (1966).
fn distance(a: &str, b: &str) -> usize {
    let b: Vec<char> = b.chars().collect();
    let mut row: Vec<usize> = (0..=b.len()).collect();
    for (i, x) in a.chars().enumerate() {
        let mut diagonal = row[0];
        row[0] = i + 1;
        for (k, y) in b.iter().enumerate() {
            let substituted = diagonal + usize::from(x != *y);
            diagonal = row[k + 1];
            row[k + 1] = substituted.min(row[k] + 1).min(diagonal + 1);
        }
    }
    row[b.len()]
}

/// `a, b or c` with each in quotes.
pub fn one_of<'a>(names: impl IntoIterator<Item = &'a str>) -> String {
    let quoted: Vec<String> = names.into_iter().map(|n| format!("\"{n}\"")).collect();
    match quoted.split_last() {
        Some((last, rest)) if !rest.is_empty() => format!("{} or {last}", rest.join(", ")),
        Some((last, _)) => last.clone(),
        None => "nothing".into(),
    }
}
