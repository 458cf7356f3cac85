//! The `widefront` command.

use std::process::ExitCode;

fn main() -> ExitCode {
    widefront::cli::run()
}
