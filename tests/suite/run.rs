//! One text through the pipeline, as far as its stage goes.

use std::path::Path;

use bandloom::compile::{Options, compile};
use bandloom::design::Design;
use bandloom::finding::Findings;
use bandloom::parse::parse;
use bandloom::resolve::{Overrides, resolve};
use bandloom::results::Results;
use bandloom::source::Sources;
use bandloom::source::shown;
use bandloom::world::World;

/// How far a fixture goes.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Stage {
    /// Parsing alone.
    Parse,
    /// Parsing and resolving.
    Resolve,
    /// The whole pipeline.
    Check,
}

/// What came out.
pub(crate) struct Ran {
    pub(crate) sources: Sources,
    pub(crate) stacks: Vec<(Design, Option<Results>)>,
    pub(crate) findings: Findings,
}

/// Runs `path`, which must be readable.
pub(crate) fn run(world: &dyn World, path: &Path, stage: Stage) -> Result<Ran, String> {
    match stage {
        Stage::Parse => {
            let text = world.text(path).map_err(|why| format!("{}: {}", shown(path), why.worded()))?;
            let mut sources = Sources::default();
            let id = sources.add(path, &text);
            let findings = parse(sources.get(id)).findings.sorted();
            Ok(Ran { sources, stacks: Vec::new(), findings })
        }
        Stage::Resolve => {
            let mut sources = Sources::default();
            let outcome = resolve(world, &mut sources, path, &Overrides::default());
            let stacks = outcome.value.unwrap_or_default().into_iter().map(|design| (design, None)).collect();
            Ok(Ran { sources, stacks, findings: outcome.findings.sorted() })
        }
        Stage::Check => {
            let compiled = compile(world, path, &Options::default());
            if let Some(why) = compiled.unreadable {
                return Err(format!("{}: {}", shown(path), why.worded()));
            }
            let stacks = compiled.stacks.into_iter().map(|stack| (stack.design, stack.results)).collect();
            Ok(Ran { sources: compiled.sources, stacks, findings: compiled.findings })
        }
    }
}
