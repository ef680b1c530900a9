//! `bandloom materials`: what the library holds.

use clap::Args;

use crate::cli::Exit;
use crate::cli::console::Console;

/// Show what the material library holds
#[derive(Args, Clone, Debug)]
pub(crate) struct Materials {
    /// Names or formulas; nothing for the whole list
    #[arg(value_name = "NAME")]
    names: Vec<String>,
}

/// Runs the command.
pub(crate) fn run(_command: &Materials, console: &Console) -> Exit {
    console.trouble("`bandloom materials` is not there yet", &[])
}
