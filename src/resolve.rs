//! [`syntax::File`](crate::syntax::File) → [`Design`]: names, units, materials, defaults.
//!
//! Whatever is wrong is reported once, where it stands; everything else is resolved as if it were
//! not there, so that k mistakes give k findings.

use std::collections::HashMap;
use std::path::Path;
use std::sync::Arc;

use crate::design::{Condition, Design};
use crate::finding::{Finding, Outcome};
use crate::light::Spectrum;
use crate::parse;
use crate::resolve::files::Files;
use crate::resolve::load::Items;
use crate::resolve::materials::Library;
use crate::resolve::quantities::Scope;
use crate::resolve::tree::{Body, Expansion};
use crate::source::{Source, SourceId, Sources, Span, Spanned};
use crate::syntax::{Item, Stack};
use crate::world::World;

mod attributes;
mod charts;
mod chemistry;
mod conditions;
pub mod files;
mod fingers;
mod interconnects;
mod junctions;
mod layers;
mod light;
mod like;
mod load;
pub mod materials;
mod measured;
pub mod names;
mod parts;
mod properties;
pub mod quantities;
mod records;
mod requests;
mod season;
mod shadowing;
mod slots;
mod spilled;
mod stack;
mod strain;
mod table;
mod tree;

/// What a run may change from outside the file.
#[derive(Clone, Debug, Default)]
pub struct Overrides {
    /// `--set name=value`, in the order given: the name of a `let` and the text of its value.
    pub set: Vec<(String, String)>,
}

/// Reads `path` and all it uses, and resolves every stack in it.
///
/// Sources read are added to `sources`, so that findings can be shown whichever file they lie in.
pub fn resolve(
    world: &dyn World,
    sources: &mut Sources,
    path: &Path,
    overrides: &Overrides,
) -> Outcome<Vec<Design>> {
    let mut scope = Scope::new();
    let text = match world.text(path) {
        Ok(text) => text,
        Err(error) => {
            let name = Spanned::new(crate::source::shown(path), Span::default());
            let mut finding = files::unreadable(&name, "file", &error);
            finding.primary = None;
            scope.report(finding);
            return Outcome::nothing(scope.take_findings());
        }
    };
    let first = sources.add(path, &text);
    let mut files = Files::new(world, sources);
    let read = load::files(&mut files, &mut scope, first);
    let items = load::items(&mut scope, &read, first);
    set(&mut scope, &mut files, overrides);
    scope.evaluate_file_names();

    let mut library = Library::new();
    for (item, is_alloy) in &items.chemistry {
        if *is_alloy {
            library.add_alloy(&mut scope, &mut files, item);
        } else {
            library.add_material(&mut scope, &mut files, item);
        }
    }
    library.finish(&mut scope);
    let mut resolver = Resolver {
        scope,
        files,
        library,
        items,
        conditions: HashMap::new(),
        spectra: HashMap::new(),
        bodies: HashMap::new(),
        materials: HashMap::new(),
        strained: HashMap::new(),
        conditions_whole: true,
    };
    let designs = resolver.designs(first);
    resolver.library.finish(&mut resolver.scope);
    Outcome::with(designs, resolver.scope.take_findings())
}

/// Everything one run needs to resolve its stacks.
pub(crate) struct Resolver<'a, 's> {
    scope: Scope,
    files: Files<'a>,
    library: Library,
    items: Items<'s>,
    /// Resolved conditions with the sentences for what was assumed.
    conditions: HashMap<&'s str, Option<(Condition, Vec<String>)>>,
    spectra: HashMap<&'s str, Option<Arc<Spectrum>>>,
    bodies: HashMap<&'s str, State<'s>>,
    materials: chemistry::Cache,
    strained: strain::Cache,
    /// Whether every condition of the stack at hand is right.
    conditions_whole: bool,
}

/// A stack's body with its parts put in, and the frame of its own names.
enum State<'s> {
    Working,
    Done(Option<(Body<'s>, usize)>),
}

impl<'s> Resolver<'_, 's> {
    /// The designs of the stacks in `first`; stacks of used files serve `like` only.
    fn designs(&mut self, first: SourceId) -> Vec<Design> {
        for item in self.items.conditions.all.clone() {
            self.condition(&item.name.value);
        }
        for item in self.items.spectra.all.clone() {
            self.spectrum(item);
        }
        let own: Vec<&'s Stack> =
            self.items.stacks.all.iter().copied().filter(|stack| stack.span.source == first).collect();
        if own.is_empty() {
            self.no_stack(first);
        }
        own.into_iter()
            .filter_map(|stack| {
                let (body, frame) = self.body(stack)?;
                Some(stack::design(self, stack, &body, frame))
            })
            .collect()
    }

    fn no_stack(&mut self, first: SourceId) {
        let source = self.files.sources.get(first);
        let text = source.text.clone();
        if text.trim().is_empty() {
            self.scope.report(
                Finding::error("structure.empty", "the file is empty")
                    .at(Span::new(first, 0, 0), "nothing here")
                    .help("write a stack: `stack \"First\" { … }`"),
            );
            return;
        }
        // Where something could not be read, the stack may well be in there.
        if self.scope.has_errors() {
            return;
        }
        let end = text.trim_end().len();
        self.scope.report(
            Finding::error("structure.empty", "the file holds no stack")
                .at(Span::new(first, end, end), "the end of the file")
                .help("write a stack: `stack \"First\" { … }`"),
        );
    }

    /// A stack's body, with what it is made like underneath it; worked out once.
    fn body(&mut self, stack: &'s Stack) -> Option<(Body<'s>, usize)> {
        match self.bodies.get(stack.name.value.as_str()) {
            Some(State::Done(known)) => return known.clone(),
            Some(State::Working) => {
                let like = stack.like.as_ref().unwrap_or(&stack.name);
                self.scope.report(
                    Finding::error("name.cycle", format!("stack `{}` is made like itself", stack.name.value))
                        .at(like.span, "leads back")
                        .help("write the layers out in one of the stacks"),
                );
                return None;
            }
            None => {}
        }
        self.bodies.insert(&stack.name.value, State::Working);
        let body = self.made(stack);
        self.bodies.insert(&stack.name.value, State::Done(body.clone()));
        body
    }

    fn made(&mut self, stack: &'s Stack) -> Option<(Body<'s>, usize)> {
        let base = match &stack.like {
            None => None,
            Some(like) => {
                let Some(other) = self.items.stacks.get(&like.value) else {
                    let known = self.items.stacks.all.iter().map(|it| it.name.value.as_str());
                    let known = known.filter(|name| *name != stack.name.value);
                    let finding = names::unknown("stack", like, known, "name a stack of this file");
                    self.scope.report(finding);
                    return None;
                };
                Some(self.body(other)?)
            }
        };
        let outer = match &base {
            Some((_, frame)) => {
                let here = self.scope.enter(*frame);
                self.scope.open();
                here
            }
            None => self.scope.open(),
        };
        let frame = self.scope.here();
        let mut expansion = Expansion {
            scope: &mut self.scope,
            items: &self.items,
            sources: self.files.sources,
            placing: Vec::new(),
            layers: 0,
            too_many: false,
        };
        let body = match base {
            Some((base, _)) => like::derive(&mut expansion, base, &stack.block),
            None => expansion.body(&stack.block),
        };
        self.scope.close(outer);
        Some((body, frame))
    }

    /// The text of a span, for people.
    fn text(&self, span: Span) -> String {
        self.files.sources.get(span.source).slice(span).trim().to_owned()
    }
}

/// Puts `--set` values in force. An unknown name is an error: a run that silently ignored one
/// would answer another question than the one asked.
fn set(scope: &mut Scope, files: &mut Files<'_>, overrides: &Overrides) {
    for (name, text) in &overrides.set {
        let line = format!("let {name} = {text}");
        let id = files.sources.add(format!("--set {name}"), &line);
        let outcome = parse::parse(files.sources.get(id));
        let item = outcome.value.and_then(|file| match <[Item; 1]>::try_from(file.items) {
            Ok([Item::Let(item)]) => Some(item),
            _ => None,
        });
        if !outcome.findings.is_empty() {
            scope.extend(outcome.findings);
            continue;
        }
        let Some(item) = item else {
            let whole = Source::new(id, "", &line).span();
            scope.report(
                Finding::error("value.missing", format!("`{name}={text}` cannot be set"))
                    .at(whole, "not a name and a value")
                    .help("write `--set d=\"700 nm\"`"),
            );
            continue;
        };
        if !scope.override_name(name, item.value) {
            let known = scope.file_names();
            let mut finding = names::unknown(
                "`let`",
                &item.name,
                known.iter().map(String::as_str),
                &match known.first() {
                    Some(first) => format!("set one that the file states, such as `{first}`"),
                    None => format!("state `let {name} = {text}` in the file first"),
                },
            );
            finding.message = format!("no `let` is called `{name}`, so it cannot be set");
            scope.report(finding);
        }
    }
}

#[cfg(test)]
mod tests;
