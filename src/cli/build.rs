//! `bandloom build`: design sheets and numbers, one folder a stack.

use std::path::{Path, PathBuf};

use clap::Args;

use crate::cli::Exit;
use crate::cli::console::{Console, Stream};
use crate::cli::findings::Telling;
use crate::cli::input::{Entry, Input};
use crate::cli::output::{Slugs, WriteError, write};
use crate::cli::summary::{summary, unbuilt};
use crate::compile::{Compiled, Options, Stack};
use crate::finding::json::{Entry as Row, Place};
use crate::report::{
    AcceptedRow, FindingRow, FixRow, Format, OutputFile, ReportError, ReportInput, Templates, render,
};
use crate::source::{portable, shown};
use crate::world::disk::Disk;
use crate::world::{ReadError, World};

const EXAMPLES: &str = "\
Examples:
  bandloom build stacks/sandpiper.stack
  bandloom build stacks/*.stack --into sheets --as html,json
  bandloom build design.stack --set d=650nm --as json --into - > numbers.json";

/// Check, evaluate, and write the design sheets and the numbers
#[derive(Args, Clone, Debug)]
#[command(before_help = EXAMPLES, help_template = super::TEMPLATE)]
pub(crate) struct Build {
    #[command(flatten)]
    pub(crate) input: Input,
    #[command(flatten)]
    pub(crate) telling: Telling,
    #[command(flatten)]
    pub(crate) sheets: Sheets,
}

/// What is written, and where.
#[derive(Args, Clone, Debug)]
pub(crate) struct Sheets {
    /// Folder for the sheets, one folder a stack in it; `-` is standard output, for one format
    #[arg(long, value_name = "DIR", default_value = "design-sheets")]
    pub(crate) into: PathBuf,
    /// What to write
    #[arg(
        long = "as",
        value_name = "html,md,json,csv",
        value_delimiter = ',',
        default_value = "html,md,json,csv",
        hide_default_value = true,
        value_parser = format
    )]
    pub(crate) formats: Vec<Format>,
    /// Only this stack, by name; repeatable
    #[arg(long, value_name = "NAME")]
    pub(crate) stack: Vec<String>,
    /// Folder whose templates stand in for the built-in ones of the same name
    #[arg(long, value_name = "DIR")]
    pub(crate) templates: Option<PathBuf>,
}

fn format(word: &str) -> Result<Format, String> {
    Format::of_word(word.trim()).ok_or_else(|| {
        let known: Vec<&str> = Format::ALL.iter().map(|(_, word)| *word).collect();
        format!("write one or more of {}", known.join(", "))
    })
}

/// Runs the command: findings on standard error, a summary or the one document on standard
/// output.
pub(crate) fn run(command: &Build, console: &Console) -> Exit {
    if let Some(misuse) = command.input.misuse() {
        return console.trouble(misuse, &["leave it out, or read from `-`"]);
    }
    let entries = command.input.open(console);
    let options = command.input.options();
    let (templates, templates_exit) = command.sheets.templates(console);
    let round = build(&entries, &options, &command.sheets, &templates.replaced);
    let exit = tell(&round, &command.telling, console).max(templates_exit);
    if !command.sheets.to_standard_output() {
        return exit.max(console.result(&round.text(console)));
    }
    let mut documents = round.stacks.iter().flat_map(|built| &built.files);
    match (documents.next(), documents.next()) {
        (Some(document), None) => exit.max(console.bytes(&document.bytes)),
        (None, _) => exit,
        (Some(_), Some(_)) => console.trouble(
            "standard output takes one document, this would be more",
            &["name one format and one stack, as in `--as json --stack \"Sandpiper 2J\"`"],
        ),
    }
}

/// One stack that was evaluated.
pub(crate) struct Built {
    /// Its place in [`Round::compiled`]: file, stack.
    pub(crate) at: (usize, usize),
    /// Its folder.
    pub(crate) folder: PathBuf,
    pub(crate) files: Vec<OutputFile>,
    /// Whether every file could be written, or nothing was to be written.
    pub(crate) is_written: bool,
}

/// Everything that one run made.
pub(crate) struct Round {
    pub(crate) compiled: Vec<Compiled>,
    pub(crate) stacks: Vec<Built>,
    pub(crate) broken_templates: Vec<ReportError>,
    pub(crate) unwritten: Vec<WriteError>,
    /// Names given by `--stack` that no file holds.
    pub(crate) unknown_stacks: Vec<String>,
}

/// Compiles every entry and writes what could be evaluated. Nothing is written before
/// everything is made.
pub(crate) fn build(entries: &[Entry], options: &Options, sheets: &Sheets, templates: &Templates) -> Round {
    let compiled: Vec<Compiled> = entries.iter().map(|entry| entry.compile(options)).collect();
    let mut round = Round {
        stacks: Vec::new(),
        broken_templates: Vec::new(),
        unwritten: Vec::new(),
        unknown_stacks: Vec::new(),
        compiled: Vec::new(),
    };
    let mut slugs = Slugs::default();
    for (file, compiled) in compiled.iter().enumerate() {
        for (index, stack) in compiled.stacks.iter().enumerate() {
            // A folder is taken also by a stack that was not evaluated, so that one mistake does
            // not move the sheets of the others.
            let folder = sheets.into.join(slugs.take(&stack.design.name.value));
            if !sheets.wants(stack) {
                continue;
            }
            match sheet(compiled, stack, &sheets.formats, templates) {
                Ok(files) if files.is_empty() => {}
                Ok(files) => round.stacks.push(Built { at: (file, index), folder, files, is_written: true }),
                Err(why) if round.broken_templates.contains(&why) => {}
                Err(why) => round.broken_templates.push(why),
            }
        }
    }
    let named = |name: &&String| {
        !compiled.iter().flat_map(|file| &file.stacks).any(|stack| stack.design.name.value == **name)
    };
    if compiled.iter().all(|file| file.unreadable.is_none() && !file.stacks.is_empty()) {
        round.unknown_stacks = sheets.stack.iter().filter(named).cloned().collect();
    }
    if !sheets.to_standard_output() {
        for built in &mut round.stacks {
            for file in &built.files {
                if let Err(why) = write(&built.folder.join(&file.name), &file.bytes) {
                    round.unwritten.push(why);
                    built.is_written = false;
                    break;
                }
            }
        }
    }
    round.compiled = compiled;
    round
}

/// Says what was found and what went wrong.
pub(crate) fn tell(round: &Round, telling: &Telling, console: &Console) -> Exit {
    let mut exit = telling.exit(&round.compiled, console);
    exit = exit.max(telling.write(&round.compiled, console));
    console.message(&telling.text(&round.compiled, console, Stream::Err));
    for why in &round.broken_templates {
        exit = exit.max(console.trouble(&why.to_string(), &[]));
    }
    for why in &round.unwritten {
        let text = format!("cannot write `{}`: {}", shown(&why.path), why.message);
        exit = exit.max(console.trouble(&text, &["name another folder with `--into`"]));
    }
    for name in &round.unknown_stacks {
        let names: Vec<String> = round
            .compiled
            .iter()
            .flat_map(|file| &file.stacks)
            .map(|stack| format!("`{}`", stack.design.name.value))
            .collect();
        let help = format!("write one of {}", names.join(", "));
        exit = exit.max(console.trouble(&format!("no stack is called `{name}`"), &[&help]));
    }
    exit
}

impl Round {
    /// A few lines for each stack, for people.
    pub(crate) fn text(&self, console: &Console) -> String {
        let mut text = String::new();
        for (file, compiled) in self.compiled.iter().enumerate() {
            for (index, stack) in compiled.stacks.iter().enumerate() {
                let built = self.stacks.iter().find(|built| built.at == (file, index));
                match (built, &stack.results) {
                    (Some(built), Some(results)) => {
                        text.push_str(&summary(stack, results, built, console.look(Stream::Out)));
                    }
                    (None, None) => text.push_str(&unbuilt(stack)),
                    _ => {}
                }
            }
        }
        text
    }
}

impl Sheets {
    /// Whether the one document goes to standard output.
    pub(crate) fn to_standard_output(&self) -> bool {
        self.into.as_os_str() == "-"
    }

    fn wants(&self, stack: &Stack) -> bool {
        self.stack.is_empty() || self.stack.contains(&stack.design.name.value)
    }

    /// The user's templates, with the world they were read from.
    pub(crate) fn templates(&self, console: &Console) -> (UserTemplates, Exit) {
        let mut user = UserTemplates::default();
        let Some(folder) = &self.templates else { return (user, Exit::Fine) };
        let world = Disk::below(folder);
        let mut exit = Exit::Fine;
        for (name, _) in Templates::built_in() {
            match world.text(&folder.join(name)) {
                Ok(text) => user.replaced.replaced.push(((*name).to_owned(), text.to_string())),
                Err(ReadError::Missing) => {}
                Err(why) => {
                    let path = shown(&folder.join(name));
                    exit = console.trouble(&format!("cannot read `{path}`: {}", why.worded()), &[]);
                }
            }
        }
        if user.replaced.replaced.is_empty() && exit == Exit::Fine {
            let text = format!("`{}` holds no template", shown(folder));
            let names: Vec<String> = Templates::built_in().iter().map(|(n, _)| format!("`{n}`")).collect();
            exit = console.trouble(&text, &[&format!("name one like a built-in one: {}", names.join(", "))]);
        }
        user.world = Some(world);
        (user, exit)
    }
}

/// Templates of the user's own.
#[derive(Default)]
pub(crate) struct UserTemplates {
    pub(crate) replaced: Templates,
    /// What they were read from.
    pub(crate) world: Option<Disk>,
}

/// The files of one stack; none where it was not evaluated.
fn sheet(
    compiled: &Compiled,
    stack: &Stack,
    formats: &[Format],
    templates: &Templates,
) -> Result<Vec<OutputFile>, ReportError> {
    let Some(results) = &stack.results else { return Ok(Vec::new()) };
    let row = |finding| finding_row(Row::of(finding, &compiled.sources));
    let findings: Vec<FindingRow> = stack.findings.iter().map(row).collect();
    let accepted: Vec<AcceptedRow> = stack
        .accepted
        .iter()
        .map(|accepted| AcceptedRow { finding: row(&accepted.finding), reason: accepted.because.clone() })
        .collect();
    let input = ReportInput { design: &stack.design, results, findings: &findings, accepted: &accepted };
    render(&input, formats, templates)
}

fn finding_row(row: Row) -> FindingRow {
    let place = row.place.as_ref();
    FindingRow {
        code: row.code.to_owned(),
        severity: row.severity.to_owned(),
        message: row.message,
        file: place.map(|place| portable(Path::new(&place.file))),
        line: place.map(|place| place.line),
        column: place.map(|place| place.column),
        end_line: place.map(|place| place.end_line),
        end_column: place.map(|place| place.end_column),
        help: row.help,
        fix: row.fix.map(|fix| {
            let Place { file, line, column, end_line, end_column, .. } = fix.place;
            let file = portable(Path::new(&file));
            let (replacement, safe) = (fix.replacement, fix.safe);
            FixRow { file, line, column, end_line, end_column, replacement, safe }
        }),
    }
}

/// The folder as a person would open it.
pub(crate) fn file_in(built: &Built, name: &str) -> String {
    shown(&Path::new(&built.folder).join(name))
}
