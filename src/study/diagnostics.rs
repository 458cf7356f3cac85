//! What is at fault in a file, where, and how to mend it.

use crate::quantity::QuantityError;
use std::fmt;
use std::path::PathBuf;

/// Where a value stands: in a file, or on the command line.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Origin {
    /// A file, with line and column counted from 1 when they are known.
    File {
        /// The file as the user named it.
        path: PathBuf,
        /// Line and column.
        position: Option<(usize, usize)>,
    },
    /// An argument such as `--set supply=1.0V`.
    Argument(String),
}

impl fmt::Display for Origin {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Origin::File {
                path,
                position: Some((line, _)),
            } => write!(f, "{}:{line}", path.display()),
            Origin::File { path, .. } => write!(f, "{}", path.display()),
            Origin::Argument(text) => write!(f, "{text}"),
        }
    }
}

/// One thing that keeps a file from being used.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Fault {
    /// Where it is.
    pub origin: Origin,
    /// The key, such as `[stage] legs`; empty when the whole file is at fault.
    pub key: String,
    /// What is wrong.
    pub kind: FaultKind,
}

impl Fault {
    /// How to mend it, where that can be said.
    pub fn help(&self) -> Option<String> {
        self.kind.help()
    }
}

/// The message, and a `help:` line where there is one.
impl fmt::Display for Fault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}: ", self.origin)?;
        if !self.key.is_empty() {
            write!(f, "{}: ", self.key)?;
        }
        write!(f, "{}", self.kind)?;
        match self.help() {
            Some(help) => write!(f, "\n  help: {help}"),
            None => Ok(()),
        }
    }
}

impl std::error::Error for Fault {}

/// What is wrong, by kind.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum FaultKind {
    /// The file is not there or may not be read.
    #[error("cannot be read: {reason}")]
    Unreadable {
        /// What the system says.
        reason: String,
    },
    /// The file named by the study is not there or may not be read.
    #[error("read \"{read}\", but {} cannot be read: {reason}", path.display())]
    NoTechnology {
        /// The path as the study has it.
        read: String,
        /// The path that was tried.
        path: PathBuf,
        /// What the system says.
        reason: String,
        /// A file with nearly this name in the same folder.
        nearest: Option<String>,
    },
    /// Too long for a file written by hand.
    #[error("is longer than {limit} bytes, the most a study or technology file may have")]
    TooLong {
        /// The limit, bytes.
        limit: u64,
    },
    /// Not text.
    #[error("is not UTF-8 text: byte {offset} cannot be read")]
    NotUtf8 {
        /// The first byte at fault, from 0.
        offset: usize,
    },
    /// Nothing but space and comments.
    #[error("is empty")]
    Empty,
    /// Not TOML.
    #[error("is not TOML: {message}")]
    Syntax {
        /// What the TOML reader says.
        message: String,
    },
    /// A format of another age.
    #[error("read {read}, allowed {allowed}")]
    Schema {
        /// The value.
        read: String,
        /// The one this program reads.
        allowed: i64,
    },
    /// A key that means nothing here.
    #[error("unknown key; allowed {}", allowed.join(", "))]
    UnknownKey {
        /// The keys that mean something here.
        allowed: Vec<String>,
        /// The one that is spelt nearly so.
        nearest: Option<String>,
    },
    /// A value outside a list of names.
    #[error("read {read}, allowed {}", allowed.join(", "))]
    UnknownName {
        /// The value.
        read: String,
        /// The names.
        allowed: Vec<String>,
        /// The one that is spelt nearly so.
        nearest: Option<String>,
    },
    /// A key that must be there.
    #[error("missing; allowed {allowed}")]
    MissingKey {
        /// What it takes.
        allowed: String,
        /// A line to add.
        example: Option<String>,
    },
    /// Text where a number belongs, a list where one value belongs, and the like.
    #[error("read {read}, allowed {allowed}")]
    WrongType {
        /// The value.
        read: String,
        /// What it takes.
        allowed: String,
    },
    /// A quantity that cannot be read.
    #[error(transparent)]
    Quantity(#[from] QuantityError),
    /// A value no study or process has.
    #[error("read {read}, allowed {allowed}")]
    OutOfRange {
        /// The value.
        read: String,
        /// The interval.
        allowed: String,
    },
    /// Faults that are not told one by one.
    #[error("has {count} more faults; mend those above first")]
    More {
        /// How many.
        count: usize,
    },
    /// A range or a pair of bounds that does not rise.
    #[error("read {low} = {from} and {high} = {to}, allowed \"{low}\" below \"{high}\"")]
    NotRising {
        /// Name of the lower end.
        low: &'static str,
        /// Name of the upper end.
        high: &'static str,
        /// Its lower end.
        from: String,
        /// Its upper end.
        to: String,
    },
    /// A grid of whole numbers that would fall between them.
    #[error("read {steps} steps from {from} to {to}, allowed steps that fall on whole numbers")]
    UnevenSteps {
        /// Lower end.
        from: i64,
        /// Upper end.
        to: i64,
        /// Number of values asked for.
        steps: i64,
    },
    /// The same name twice.
    #[error("read {read} twice, allowed once")]
    Repeated {
        /// The name.
        read: String,
    },
    /// A key that is known but has no meaning with the other choices made.
    #[error("not allowed here: {why}")]
    NotHere {
        /// The choice it clashes with.
        why: &'static str,
        /// The key to write instead.
        instead: Option<&'static str>,
    },
    /// A key that the technology makes necessary.
    #[error("missing; {why}")]
    Needed {
        /// The choice that needs it.
        why: &'static str,
        /// A line to add.
        example: &'static str,
    },
    /// A voltage the devices do not stand.
    #[error("read {read}, allowed at most {rating}, the rating of device \"{device}\"")]
    AboveRating {
        /// The value.
        read: String,
        /// The rating.
        rating: String,
        /// The transistor pair.
        device: String,
    },
    /// A `--set` that is not KEY=VALUE.
    #[error("read {read:?}, allowed KEY=VALUE")]
    NotAnAssignment {
        /// The argument.
        read: String,
    },
    /// A `--set` on a study without a `[design]`.
    #[error("the study has no [design] to change")]
    NoDesign,
}

impl FaultKind {
    /// How to mend it, where that can be said.
    pub fn help(&self) -> Option<String> {
        match self {
            FaultKind::NoTechnology { nearest, .. } => {
                let near = nearest
                    .as_ref()
                    .map(|name| format!("; did you mean {name}?"));
                let near = near.unwrap_or_default();
                Some(format!(
                    "the path is taken from the study's own folder{near}"
                ))
            }
            FaultKind::NotUtf8 { .. } => Some("save the file as UTF-8 text".to_owned()),
            FaultKind::Schema { allowed, .. } => Some(format!(
                "this program reads schema = {allowed}; write the file for it"
            )),
            FaultKind::UnknownKey { nearest, .. } | FaultKind::UnknownName { nearest, .. } => {
                nearest.as_ref().map(|key| format!("did you mean {key}?"))
            }
            FaultKind::MissingKey { example, .. } => {
                example.as_ref().map(|example| format!("add {example}"))
            }
            FaultKind::Quantity(error) => error.help(),
            FaultKind::NotRising {
                low,
                high,
                from,
                to,
            } if from == to => Some(format!(
                "for one value write it alone, without {low} and {high}"
            )),
            FaultKind::NotHere { instead, .. } => Some(match instead {
                Some(key) => format!("remove it, and give {key}"),
                None => "remove it".to_owned(),
            }),
            FaultKind::Needed { example, .. } => Some(format!("add {example}")),
            FaultKind::NotAnAssignment { .. } => Some("for example --set supply=1.0V".to_owned()),
            FaultKind::NoDesign => Some("add a [design] section to the study".to_owned()),
            _ => None,
        }
    }
}

/// Every fault of a file, in the order of its lines; never empty.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Faults(Vec<Fault>);

impl Faults {
    /// The faults, first line first; `None` when there are none.
    pub fn new(mut faults: Vec<Fault>) -> Option<Faults> {
        faults.sort_by_key(|fault| match fault.origin {
            Origin::File { position, .. } => position,
            Origin::Argument(_) => None,
        });
        (!faults.is_empty()).then_some(Faults(faults))
    }

    /// One more, after the others.
    pub(crate) fn then(mut self, fault: Fault) -> Faults {
        self.0.push(fault);
        self
    }

    /// The faults one by one.
    pub fn iter(&self) -> std::slice::Iter<'_, Fault> {
        self.0.iter()
    }
}

impl From<Fault> for Faults {
    fn from(fault: Fault) -> Self {
        Faults(vec![fault])
    }
}

impl fmt::Display for Faults {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (place, fault) in self.0.iter().enumerate() {
            if place > 0 {
                writeln!(f)?;
            }
            write!(f, "{fault}")?;
        }
        Ok(())
    }
}

impl std::error::Error for Faults {}

/// Something that can be used, but may not be meant.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Warning {
    /// Where it is.
    pub origin: Origin,
    /// The key, such as `[driver] swing`; empty for the whole file.
    pub key: String,
    /// What may not be meant.
    pub kind: WarningKind,
}

impl fmt::Display for Warning {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}: warning: ", self.origin)?;
        if !self.key.is_empty() {
            write!(f, "{}: ", self.key)?;
        }
        write!(f, "{}", self.kind)
    }
}

/// What may not be meant, by kind.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum WarningKind {
    /// Neither a space to search nor a design to evaluate.
    #[error("has neither [space] nor [design]: it can be checked, but not searched or evaluated")]
    NothingToDo,
    /// A driver swing that a stacked leg does not use.
    #[error("not used: the drivers of a stacked leg swing half its supply")]
    SwingUnused,
    /// Supplies that the devices do not stand.
    #[error(
        "designs above {limit} (device \"{device}\", {stack} in a stack) break the limit supply_rating"
    )]
    AboveSupplyRating {
        /// The highest supply.
        limit: String,
        /// The transistor pair.
        device: String,
        /// Devices in a stack.
        stack: u32,
    },
    /// A temperature coefficient of the sign that transistors do not have.
    #[error(
        "read {read}; thresholds and mobilities fall with temperature, so a value below 0 is expected"
    )]
    RisesWithTemperature {
        /// The value.
        read: String,
    },
}
