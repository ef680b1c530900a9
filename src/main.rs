//! The `bandloom` command.

use std::process::ExitCode;

fn main() -> ExitCode {
    bandloom::cli::run(std::env::args_os())
}
