//! `bandloom check --apply`: puts certain cures into the files and says what it did.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use crate::cli::Exit;
use crate::cli::console::Console;
use crate::cli::output::replace;
use crate::compile::Compiled;
use crate::finding::Finding;
use crate::finding::apply::applied;
use crate::source::{Source, shown};

/// What one round did.
pub(crate) struct Round {
    /// How many cures went into files.
    pub(crate) done: usize,
    pub(crate) exit: Exit,
}

/// Applies every certain cure of `all` to the files on disk, and tells each on standard error.
pub(crate) fn apply(all: &[Compiled], console: &Console) -> Round {
    // One file may be read through several others: then its findings are the same.
    let mut by_file: BTreeMap<PathBuf, (&Source, Vec<&Finding>)> = BTreeMap::new();
    for compiled in all {
        for finding in compiled.findings.iter() {
            let Some(fix) = finding.fix.as_ref().filter(|fix| fix.safe) else { continue };
            let source = compiled.sources.get(fix.span.source);
            by_file.entry(source.path.clone()).or_insert_with(|| (source, Vec::new())).1.push(finding);
        }
    }
    let mut round = Round { done: 0, exit: Exit::Fine };
    for (path, (source, findings)) in by_file {
        match one_file(&path, source, &findings, console) {
            Ok(done) => round.done += done,
            Err(exit) => round.exit = round.exit.max(exit),
        }
    }
    round
}

fn one_file(path: &Path, source: &Source, findings: &[&Finding], console: &Console) -> Result<usize, Exit> {
    let name = shown(path);
    #[expect(clippy::disallowed_methods, reason = "compares the file that is about to be replaced")]
    let now = std::fs::read(path).ok().and_then(|bytes| String::from_utf8(bytes).ok());
    let (mark, body) = match &now {
        Some(text) => match text.strip_prefix('\u{feff}') {
            Some(body) => ("\u{feff}", body),
            None => ("", text.as_str()),
        },
        None => ("", ""),
    };
    if now.is_none() || body != &*source.text {
        let text = format!("`{name}` is not the text that was checked, so nothing was applied to it");
        return Err(console.trouble(&text, &["save it, and run `check --apply` on the file itself"]));
    }
    let out = applied(body, findings.iter().copied());
    let line = |finding: &Finding| {
        finding.fix.as_ref().map_or(0, |fix| source.position(fix.span.start as usize).line)
    };
    for finding in &out.refused {
        console.message(&format!(
            "{name}:{}: left alone, as its cure overlaps another: {}\n",
            line(finding),
            finding.message
        ));
    }
    if out.done.is_empty() {
        return Ok(0);
    }
    if let Err(why) = replace(path, (mark.to_owned() + &out.text).as_bytes()) {
        let text = format!("cannot write `{}`: {}", shown(&why.path), why.message);
        return Err(console.trouble(&text, &["check the file and its permissions"]));
    }
    for finding in &out.done {
        let Some(fix) = &finding.fix else { continue };
        let (old, new) = (source.slice(fix.span).trim(), fix.replacement.trim());
        let did = if new.is_empty() { format!("removed `{old}`") } else { format!("`{old}` is now `{new}`") };
        console.message(&format!("{name}:{}: {did} ({})\n", line(finding), finding.code));
    }
    Ok(out.done.len())
}
