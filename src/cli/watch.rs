//! `bandloom watch`: build, then again at every save.

use std::path::PathBuf;
use std::time::{Duration, Instant};

use clap::Args;

use crate::cli::Exit;
use crate::cli::build::{Sheets, build, tell};
use crate::cli::console::{Console, Stream};
use crate::cli::findings::{Telling, counted};
use crate::cli::input::{Entry, Input};
use crate::source::shown;
use crate::watch::{Rhythm, Seen, stacks_in, watch};

const EXAMPLES: &str = "\
Examples:
  bandloom watch stacks/sandpiper.stack
  bandloom watch stacks/                    every stack file in a folder
  bandloom watch design.stack --poll 500    where the system sends no events";

/// Build, then again at every save
#[derive(Args, Clone, Debug)]
#[command(before_help = EXAMPLES, help_template = super::TEMPLATE)]
pub(crate) struct Watch {
    #[command(flatten)]
    input: Input,
    #[command(flatten)]
    telling: Telling,
    #[command(flatten)]
    sheets: Sheets,
    /// Look at the files every MS milliseconds instead of waiting for the system's events
    #[arg(long, value_name = "MS", num_args = 0..=1, default_missing_value = "300",
          value_parser = clap::value_parser!(u64).range(10..=60_000))]
    poll: Option<u64>,
    /// Build once and end
    #[arg(long)]
    once: bool,
}

/// Runs the command; it ends with Ctrl-C, or after the first build with `--once`.
pub(crate) fn run(command: &Watch, console: &Console) -> Exit {
    if command.input.files.iter().any(|file| file.as_os_str() == "-") {
        return console.trouble("standard input cannot be watched", &["name a file"]);
    }
    if let Some(misuse) = command.input.misuse() {
        return console.trouble(misuse, &["leave it out"]);
    }
    if command.sheets.to_standard_output() {
        return console.trouble("`watch` writes files", &["name a folder with `--into`"]);
    }
    let rhythm = Rhythm { poll: command.poll.map(Duration::from_millis), ..Rhythm::default() };
    let mut last = Exit::Fine;
    let round = || {
        let (exit, seen) = round(command, console);
        last = exit;
        (!command.once).then_some(seen)
    };
    watch(rhythm, round, |note| console.message(&format!("{note}\n")));
    last
}

/// One build, told.
fn round(command: &Watch, console: &Console) -> (Exit, Seen) {
    let start = Instant::now();
    let (entries, mut seen) = entries(&command.input.files);
    let (templates, trouble) = command.sheets.templates(console);
    let round = build(&entries, &command.input.options(), &command.sheets, &templates.replaced);
    let spent = start.elapsed();
    for entry in &entries {
        seen.add(entry.world.as_ref());
    }
    if let Some(world) = &templates.world {
        seen.add(world);
    }
    let exit = tell(&round, &command.telling, console).max(trouble);
    let exit = exit.max(console.result(&round.text(console)));

    let (on, off) = console.paint(
        Stream::Err,
        match exit {
            Exit::Fine => "\u{1b}[32m",
            Exit::Found => "\u{1b}[33m",
            Exit::Trouble => "\u{1b}[31m",
        },
    );
    let files: Vec<String> = round
        .compiled
        .iter()
        .map(|compiled| match &compiled.unreadable {
            Some(why) => format!("{}: {}", shown(&compiled.path), why.worded()),
            None => format!("{}: {}", shown(&compiled.path), counted(compiled)),
        })
        .collect();
    let files = if files.is_empty() { "no stack file there".to_owned() } else { files.join("; ") };
    let wait = if command.once { "" } else { "; waiting for a change, Ctrl-C ends" };
    let milliseconds = (spent.as_secs_f64() * 1e3).ceil();
    console.message(&format!("{on}[{milliseconds} ms]{off} {files}{wait}\n"));
    (exit, seen)
}

/// The files named, and those in the folders named, listed anew each time.
fn entries(paths: &[PathBuf]) -> (Vec<Entry>, Seen) {
    let mut seen = Seen::default();
    let mut files: Vec<PathBuf> = Vec::new();
    for path in paths {
        if path.is_dir() {
            seen.look(path.clone());
            files.extend(stacks_in(path));
        } else {
            files.push(path.clone());
        }
    }
    let mut unique: Vec<PathBuf> = Vec::new();
    for file in files {
        if !unique.contains(&file) {
            unique.push(file);
        }
    }
    (unique.iter().map(|file| Entry::on_disk(file)).collect(), seen)
}
