//! The whole pipeline for one file: read, resolve, check, evaluate, check again, accept.
//!
//! The command line, watch mode and the tests all call [`compile`], so that what a test sees is
//! what a user sees.

use std::path::{Path, PathBuf};

use crate::check;
use crate::design::{Accept, Design};
use crate::evaluate;
use crate::finding::{Finding, Findings, Severity};
use crate::resolve::{self, Overrides};
use crate::results::Results;
use crate::source::{Sources, Span};
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
}

/// A finding that an `accept` silenced.
#[derive(Clone, Debug, PartialEq)]
pub struct Accepted {
    /// The finding.
    pub finding: Finding,
    /// The reason given.
    pub because: String,
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
}

impl Compiled {
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
    };
    if let Err(why) = world.text(path) {
        compiled.unreadable = Some(why);
        return compiled;
    }
    let resolved = resolve::resolve(world, &mut compiled.sources, path, &options.overrides);
    let designs = resolved.value.unwrap_or_default();
    let (mut own, shared) = by_stack(&designs, resolved.findings);
    let blocked = shared.has_errors();
    compiled.findings.extend(shared);

    let source = shown(path);
    for (design, early) in designs.into_iter().zip(own.drain(..)) {
        let stack = finish(design, early, &source, blocked || options.no_evaluation);
        compiled.findings.extend(stack.findings.clone());
        compiled.stacks.push(stack);
    }
    compiled.findings = compiled.findings.sorted();
    compiled
}

/// A path as shown to people and written to files: as given, with forward slashes.
pub fn shown(path: &Path) -> String {
    path.to_string_lossy().replace('\\', "/")
}

/// Checks, evaluates where nothing stands against it, checks again with figures, and accepts.
fn finish(design: Design, early: Findings, source: &str, no_evaluation: bool) -> Stack {
    let mut used = Use::new(&design);
    // An error of an earlier pass left a hole in the design: it cannot be accepted away.
    let (errors, milder): (Vec<_>, Vec<_>) =
        early.0.into_iter().partition(|finding| finding.severity == Severity::Error);
    let mut findings = Findings(errors);
    findings.extend(used.accept(&design, Findings(milder)));

    let checked = used.accept(&design, check::check(&design, None));
    let mut results = None;
    if no_evaluation || findings.has_errors() || checked.has_errors() {
        findings.extend(checked);
    } else {
        let evaluated = evaluate::evaluate(&design, source);
        results = evaluated.value;
        findings.extend(used.accept(&design, evaluated.findings));
        match &results {
            Some(results) => {
                findings.extend(used.accept(&design, check::check(&design, Some(results))));
            }
            None => findings.extend(checked),
        }
    }
    let mut accepted = used.accepted;
    let mut kept = Vec::new();
    for one in accepted.drain(..) {
        if !kept.contains(&one) {
            kept.push(one);
        }
    }
    Stack { design, results, findings: findings.sorted(), accepted: kept }
}

/// Sorts findings of the shared passes to the stack whose text they lie in; the rest is shared.
fn by_stack(designs: &[Design], findings: Findings) -> (Vec<Findings>, Findings) {
    let mut own = vec![Findings::new(); designs.len()];
    let mut shared = Findings::new();
    for finding in findings.0 {
        let place = finding.primary.as_ref().map(|label| label.span);
        let home = place.and_then(|place| designs.iter().position(|design| inside(place, design.span)));
        match home {
            Some(index) => own[index].push(finding),
            None => shared.push(finding),
        }
    }
    (own, shared)
}

fn inside(inner: Span, outer: Span) -> bool {
    inner.source == outer.source && outer.start <= inner.start && inner.end <= outer.end
}

/// The `accept`s of one stack at work.
struct Use {
    accepts: Vec<Accept>,
    accepted: Vec<Accepted>,
}

impl Use {
    fn new(design: &Design) -> Self {
        // Without a reason it silences nothing; that has been reported.
        let accepts = design.accepts.iter().filter(|accept| accept.because.is_some()).cloned().collect();
        Self { accepts, accepted: Vec::new() }
    }

    /// Takes out what is accepted.
    fn accept(&mut self, design: &Design, findings: Findings) -> Findings {
        let mut kept = Findings::new();
        for finding in findings.0 {
            let by = self.accepts.iter().find(|accept| covers(design, accept, &finding));
            match by.and_then(|accept| accept.because.as_ref()) {
                Some(because) => {
                    self.accepted.push(Accepted { finding, because: because.value.clone() });
                }
                None => kept.push(finding),
            }
        }
        kept
    }
}

/// Whether `accept` speaks of `finding`: the same code and, where a path is given, a place in it.
fn covers(design: &Design, accept: &Accept, finding: &Finding) -> bool {
    if accept.code.value != finding.code {
        return false;
    }
    let Some(on) = &accept.on else {
        return true;
    };
    let Some(primary) = &finding.primary else {
        return false;
    };
    let path = on.value.as_str();
    let under =
        |name: &str| name == path || name.strip_prefix(path).is_some_and(|rest| rest.starts_with('.'));
    let layers = design.layers.iter().filter(|layer| under(&layer.path)).map(|layer| layer.spans.statement);
    let junctions = design.junctions.iter().filter(|j| under(&j.name.value)).map(|j| j.span);
    let interconnects = design.interconnects.iter().filter(|i| under(&i.name.value)).map(|i| i.span);
    layers.chain(junctions).chain(interconnects).any(|span| inside(primary.span, span))
}
