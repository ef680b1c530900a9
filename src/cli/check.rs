//! `bandloom check`: reads, resolves, evaluates, and reports what was found.

use clap::Args;

use crate::cli::Exit;
use crate::cli::apply::apply;
use crate::cli::console::{Console, Stream};
use crate::cli::findings::{Telling, counted};
use crate::cli::input::Input;
use crate::compile::{Compiled, Options};
use crate::finding::format::Format;
use crate::source::shown;

const EXAMPLES: &str = "\
Examples:
  bandloom check stacks/*.stack
  bandloom check design.stack --format json
  bandloom check design.stack --output sarif=a.sarif --output junit=a.xml
  bandloom check design.stack --apply      put in the cures that are certain
  git show HEAD:stacks/sandpiper.stack | bandloom check -";

/// Read, resolve and evaluate stack files, and report what is wrong with them
#[derive(Args, Clone, Debug)]
#[command(before_help = EXAMPLES, help_template = super::TEMPLATE)]
pub(crate) struct Check {
    #[command(flatten)]
    input: Input,
    #[command(flatten)]
    telling: Telling,
    /// Leave evaluation out, and with it the rules that need figures
    #[arg(long = "static")]
    no_evaluation: bool,
    /// Put the cures that are certain into the files, say which, and check again
    #[arg(long)]
    apply: bool,
}

/// A cure may uncover another slip; more often than this the cures feed each other.
const MOST_ROUNDS: usize = 8;

/// Runs the command: findings on standard output.
pub(crate) fn run(command: &Check, console: &Console) -> Exit {
    if let Some(misuse) = command.input.misuse() {
        return console.trouble(misuse, &["leave it out, or read from `-`"]);
    }
    if command.apply && command.input.files.iter().any(|file| file.as_os_str() == "-") {
        return console.trouble("`--apply` has no file to write what comes from `-` to", &["name the file"]);
    }
    let options = Options { no_evaluation: command.no_evaluation, ..command.input.options() };
    let compile = || -> Vec<Compiled> {
        command.input.open(console).iter().map(|entry| entry.compile(&options)).collect()
    };
    let mut all = compile();
    let mut exit = Exit::Fine;
    for _ in 0..if command.apply { MOST_ROUNDS } else { 0 } {
        let round = apply(&all, console);
        exit = exit.max(round.exit);
        if round.done == 0 {
            break;
        }
        all = compile();
    }
    let mut text = command.telling.text(&all, console, Stream::Out);
    if matches!(command.telling.format, Format::Human | Format::Narrated) {
        for compiled in all.iter().filter(|compiled| compiled.unreadable.is_none()) {
            text.push_str(&closing(compiled, command.no_evaluation));
        }
    }
    let exit = exit.max(command.telling.exit(&all, console)).max(command.telling.write(&all, console));
    exit.max(console.result(&text))
}

/// `3 errors in estuary.stack; nothing was evaluated`
fn closing(compiled: &Compiled, no_evaluation: bool) -> String {
    let evaluated = compiled.stacks.iter().filter(|stack| stack.results.is_some()).count();
    let conditions: usize =
        compiled.stacks.iter().filter_map(|stack| Some(stack.results.as_ref()?.conditions.len())).sum();
    let accepted: usize = compiled.stacks.iter().map(|stack| stack.accepted.len()).sum();
    let plural = |count: usize, word: &str| {
        if count == 1 { format!("1 {word}") } else { format!("{count} {word}s") }
    };
    let mut line = format!("{} in {}", counted(compiled), shown(&compiled.path));
    if accepted > 0 {
        line.push_str(&format!(", {accepted} accepted"));
    }
    line.push_str("; ");
    if no_evaluation {
        line.push_str("evaluation left out");
    } else if evaluated == 0 {
        line.push_str("nothing was evaluated");
    } else {
        let all = compiled.stacks.len();
        let of = if evaluated < all { format!(" of {all}") } else { String::new() };
        let stacks = if evaluated == 1 && of.is_empty() {
            "1 stack".to_owned()
        } else {
            format!("{evaluated}{of} stacks")
        };
        line.push_str(&format!("{stacks} evaluated under {}", plural(conditions, "condition")));
    }
    line.push('\n');
    line
}
