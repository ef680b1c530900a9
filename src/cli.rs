//! The command line: one file per command. Only this room, [`crate::watch`] and
//! [`crate::world::disk`] know of the disk, the clock, the environment and the terminal.

use std::ffi::OsString;
use std::process::ExitCode;

use clap::{Parser, Subcommand};

mod apply;
mod build;
mod check;
mod console;
mod findings;
mod input;
mod materials;
mod output;
mod summary;
mod watch;
mod why;

pub use output::slug;

use console::{ColorWish, Console};

/// How a run ends.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(crate) enum Exit {
    /// Nothing found that fails a run.
    Fine,
    /// An error was found or a `require` failed; under `--strict` also a warning.
    Found,
    /// Usage, input or output trouble.
    Trouble,
}

impl From<Exit> for ExitCode {
    fn from(exit: Exit) -> Self {
        Self::from(match exit {
            Exit::Fine => 0,
            Exit::Found => 1,
            Exit::Trouble => 2,
        })
    }
}

const EXAMPLES: &str = "\
Examples:
  bandloom check stacks/sandpiper.stack    what is wrong, and the way out
  bandloom build stacks/sandpiper.stack    design sheet, into design-sheets/
  bandloom watch stacks/sandpiper.stack    the same at every save
  bandloom build a.stack --set d=650nm --as json --into -
  bandloom why lattice.mismatch            what a finding means";

const TEMPLATE: &str = "{about-with-newline}\n{before-help}{usage-heading} {usage}\n\n{all-args}{after-help}";

/// Reads descriptions of multi-junction solar cells, checks them, and writes their design sheets.
#[derive(Parser)]
#[command(
    name = "bandloom",
    version,
    before_help = EXAMPLES,
    help_template = TEMPLATE,
    after_help = "Exit codes: 0 nothing found, 1 errors found or a requirement failed, 2 usage, input or output trouble.",
    max_term_width = 100,
    disable_help_subcommand = true,
)]
struct Arguments {
    /// Colour: always, never, or as the terminal and the environment say
    #[arg(
        long,
        global = true,
        value_enum,
        default_value_t,
        value_name = "auto|always|never",
        hide_possible_values = true
    )]
    color: ColorWish,
    #[command(subcommand)]
    command: Command,
}

#[derive(Subcommand)]
enum Command {
    /// Read, resolve and evaluate stack files, and report what is wrong with them
    Check(check::Check),
    /// Check, evaluate, and write the design sheets and the numbers
    Build(build::Build),
    /// Build, then again at every save
    Watch(watch::Watch),
    /// Show the page of a finding: what it reports, why it matters, an example, its cure
    Why(why::Why),
    /// Show what the material library holds
    Materials(materials::Materials),
}

/// Runs the command line and returns its exit code: 0 nothing found, 1 findings of error level,
/// 2 usage, input or output trouble.
pub fn run(arguments: impl IntoIterator<Item = OsString>) -> ExitCode {
    let arguments = match Arguments::try_parse_from(arguments) {
        Ok(arguments) => arguments,
        Err(stop) => {
            // Help and version come this way too, with code 0. A closed pipe is not trouble.
            let _ = stop.print();
            return ExitCode::from(u8::try_from(stop.exit_code()).unwrap_or(2));
        }
    };
    let console = Console::new(arguments.color);
    let exit = match arguments.command {
        Command::Check(command) => check::run(&command, &console),
        Command::Build(command) => build::run(&command, &console),
        Command::Watch(command) => watch::run(&command, &console),
        Command::Why(command) => why::run(&command, &console),
        Command::Materials(command) => materials::run(&command, &console),
    };
    exit.into()
}
