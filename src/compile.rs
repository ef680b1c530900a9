//! The whole pipeline for one file: read, resolve, check, evaluate, check again, accept.
//!
//! The command line, watch mode and the tests all call [`compile`], so that what a test sees is
//! what a user sees.

use std::path::{Path, PathBuf};

use rayon::prelude::*;

use crate::check::{self, Accepted, Settled};
use crate::design::Design;
use crate::evaluate;
use crate::finding::{Findings, Severity};
use crate::resolve::{self, Overrides};
use crate::results::Results;
use crate::source::{Sources, portable};
use crate::world::{ReadError, World};

/// What a run may be told.
#[derive(Clone, Debug, Default)]
pub struct Options {
    /// `--set name=value`.
    pub overrides: Overrides,
    /// Leaves evaluation out, and with it every rule that needs figures.
    pub no_evaluation: bool,
}

/// One stack of a file.
#[derive(Clone, Debug)]
pub struct Stack {
    /// What it means.
    pub design: Design,
    /// Its figures; `None` where errors or the options stood before evaluation.
    pub results: Option<Results>,
    /// What was found in it, in the order shown, without those accepted.
    pub findings: Findings,
    /// What was found and accepted, with the reason.
    pub accepted: Vec<Accepted>,
    /// What became of each `accept` of the whole file.
    pub of_file: Vec<Settled>,
}

/// Everything that came of one file.
#[derive(Clone, Debug)]
pub struct Compiled {
    /// The file, as given.
    pub path: PathBuf,
    /// Every text read.
    pub sources: Sources,
    /// In the order of the file.
    pub stacks: Vec<Stack>,
    /// Everything found, in the order shown, without those accepted.
    pub findings: Findings,
    /// Why the file itself could not be read; then there is nothing else.
    pub unreadable: Option<ReadError>,
    /// Whether evaluation was asked for.
    pub evaluated: bool,
}

impl Compiled {
    /// Whether something was to be evaluated, was not, and nothing says why: a fault of the
    /// program, which must not pass for success.
    pub fn unexplained(&self) -> bool {
        let missing = self.stacks.is_empty() || self.stacks.iter().any(|stack| stack.results.is_none());
        self.evaluated && self.unreadable.is_none() && missing && self.findings.is_empty()
    }

    /// Whether the run counts as failed: an error was found, or a warning under `strict`.
    pub fn failed(&self, strict: bool) -> bool {
        self.findings.has_errors() || (strict && self.findings.count(Severity::Warning) > 0)
    }
}

/// Runs `path` through the pipeline.
///
/// A stack is evaluated when nothing of error level was found in it, nor in text it shares with
/// the other stacks of the file.
pub fn compile(world: &dyn World, path: &Path, options: &Options) -> Compiled {
    let mut compiled = Compiled {
        path: path.to_path_buf(),
        sources: Sources::default(),
        stacks: Vec::new(),
        findings: Findings::new(),
        unreadable: None,
        evaluated: !options.no_evaluation,
    };
    if let Err(why) = world.text(path) {
        compiled.unreadable = Some(why);
        return compiled;
    }
    let resolved = resolve::resolve(world, &mut compiled.sources, path, &options.overrides);
    let designs = resolved.value.unwrap_or_default();
    let (own, shared) = by_stack(&designs, resolved.findings);
    let blocked = shared.has_errors();
    compiled.findings.extend(shared);

    let source = portable(path);
    let no_evaluation = blocked || options.no_evaluation;
    // Collected in the order of the file, whatever the number of threads.
    let work: Vec<(Design, Findings)> = designs.into_iter().zip(own).collect();
    compiled.stacks =
        work.into_par_iter().map(|(design, early)| finish(design, early, &source, no_evaluation)).collect();
    let settled: Vec<(&Design, &[Settled])> =
        compiled.stacks.iter().map(|stack| (&stack.design, stack.of_file.as_slice())).collect();
    compiled.findings.extend(check::unused_in_file(&settled));
    for stack in &compiled.stacks {
        compiled.findings.extend(stack.findings.clone());
    }
    compiled.findings = compiled.findings.sorted();
    compiled
}

/// Checks, evaluates where nothing stands against it, checks again with figures, and accepts.
fn finish(design: Design, early: Findings, source: &str, no_evaluation: bool) -> Stack {
    let mut before = early;
    let mut checked = check::check(&design, None, before.clone());
    let mut results = None;
    // A stack made like another may inherit a layer whose fault was reported over there.
    let hole = design.layers.iter().any(|layer| layer.material.is_none());
    if !(no_evaluation || hole || checked.findings.has_errors()) {
        let evaluated = evaluate::evaluate(&design, source);
        results = evaluated.value;
        // Nothing is judged by it; only reports show it.
        if let Some(results) = &mut results {
            results.bands = evaluate::bands::band_diagram(&design);
        }
        before.extend(evaluated.findings);
        checked = check::check(&design, results.as_ref(), before);
    }
    let check::Checked { findings, accepted, of_file } = checked;
    Stack { design, results, findings: findings.sorted(), accepted, of_file }
}

/// Sorts findings of the shared passes to the stack whose text they lie in; the rest is shared.
fn by_stack(designs: &[Design], findings: Findings) -> (Vec<Findings>, Findings) {
    let mut own = vec![Findings::new(); designs.len()];
    let mut shared = Findings::new();
    for finding in findings.0 {
        let place = finding.primary.as_ref().map(|label| label.span);
        let home = place.and_then(|place| designs.iter().position(|design| design.span.contains(place)));
        match home {
            Some(index) => own[index].push(finding),
            None => shared.push(finding),
        }
    }
    (own, shared)
}
