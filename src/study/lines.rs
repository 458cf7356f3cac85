//! Where the keys of a file stand.

use super::diagnostics::{Fault, FaultKind, Origin, Warning, WarningKind};
use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

/// Where every key of a file stands, so that later checks can name lines too.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Lines {
    path: PathBuf,
    places: BTreeMap<String, Origin>,
}

impl Lines {
    /// No keys yet.
    pub fn new(path: &Path) -> Lines {
        Lines {
            path: path.to_owned(),
            places: BTreeMap::new(),
        }
    }

    /// Notes a key's line and column, from 1.
    pub fn note(&mut self, key: &str, position: (usize, usize)) {
        let origin = Origin::File {
            path: self.path.clone(),
            position: Some(position),
        };
        self.places.insert(key.to_owned(), origin);
    }

    /// Notes that a key's value came from the command line.
    pub fn note_argument(&mut self, key: &str, argument: &str) {
        let origin = Origin::Argument(argument.to_owned());
        self.places.insert(key.to_owned(), origin);
    }

    /// Where a key such as `[space] supply.to` stands; failing that the key around it, then the section, then the
    /// file.
    pub fn origin(&self, key: &str) -> Origin {
        let mut around = key;
        loop {
            if let Some(origin) = self.places.get(around) {
                return origin.clone();
            }
            // a section lies in nothing but its file
            let end = match around.ends_with(']') {
                true => None,
                false => around.rfind(['.', ' ']),
            };
            let Some(end) = end else {
                return Origin::File {
                    path: self.path.clone(),
                    position: None,
                };
            };
            around = &around[..end];
        }
    }

    /// A fault at a key.
    pub fn fault(&self, key: &str, kind: FaultKind) -> Fault {
        Fault {
            origin: self.origin(key),
            key: key.to_owned(),
            kind,
        }
    }

    /// A warning at a key.
    pub fn warning(&self, key: &str, kind: WarningKind) -> Warning {
        Warning {
            origin: self.origin(key),
            key: key.to_owned(),
            kind,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn law_a_key_without_a_line_takes_the_line_around_it() {
        let mut lines = Lines::new(Path::new("a.toml"));
        lines.note("[space]", (3, 1));
        lines.note("[space] supply", (4, 1));
        let at = |key: &str| lines.origin(key).to_string();
        assert_eq!(at("[space] supply.to"), "a.toml:4");
        assert_eq!(at("[space] turns"), "a.toml:3");
        assert_eq!(at("[design] turns"), "a.toml");
        assert_eq!(at("title"), "a.toml");
    }
}
