//! The program as tests of run folders start it.

use std::path::Path;
use std::process::{Command, Stdio};

/// The study whose search takes seconds.
pub const STUDY: &str = concat!(env!("CARGO_MANIFEST_DIR"), "/configs/studies/quick.toml");

/// A quiet search, nothing on standard output. Two threads, so that its four cells do not all end at once.
pub fn search(study: &Path, out: &Path, resume: bool) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_widefront"));
    command
        .arg("search")
        .arg(study)
        .args(["--quiet", "--threads", "2", "--out"])
        .arg(out)
        .stdout(Stdio::null());
    if resume {
        command.arg("--resume");
    }
    command
}
