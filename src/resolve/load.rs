//! Every file of a run and the items in them, by name.

use std::collections::HashMap;

use crate::finding::Finding;
use crate::parse;
use crate::resolve::files::Files;
use crate::resolve::quantities::Scope;
use crate::resolve::{names, properties, shadowing};
use crate::source::{SourceId, Span, Spanned};
use crate::syntax::{self, Item, Named, Part, Stack};

/// Files a chain of `use` may be deep.
const DEEPEST: usize = 64;

/// Reads `first` and all it uses. Used files come before those that use them.
pub(super) fn files(files: &mut Files<'_>, scope: &mut Scope, first: SourceId) -> Vec<syntax::File> {
    let mut visit = Visit { chain: Vec::new(), done: HashMap::new(), read: Vec::new() };
    visit.file(files, scope, first);
    visit.read
}

struct Visit {
    chain: Vec<SourceId>,
    done: HashMap<SourceId, ()>,
    read: Vec<syntax::File>,
}

impl Visit {
    fn file(&mut self, files: &mut Files<'_>, scope: &mut Scope, id: SourceId) {
        let outcome = parse::parse(files.sources.get(id));
        scope.extend(outcome.findings);
        let Some(file) = outcome.value else { return };
        self.chain.push(id);
        for item in &file.items {
            let Item::Use(used) = item else { continue };
            let Some(target) = files.read(scope, id, &used.path, "file") else { continue };
            if let Some(from) = self.chain.iter().position(|known| *known == target) {
                let way: Vec<String> = self.chain[from..]
                    .iter()
                    .chain([&target])
                    .map(|id| format!("`{}`", files.shown(*id)))
                    .collect();
                scope.report(
                    Finding::error(
                        "use.cycle",
                        format!("files use each other in a circle: {}", way.join(" → ")),
                    )
                    .at(used.path.span, "leads back")
                    .help("move what both need into a third file, and use that one from both"),
                );
            } else if self.chain.len() >= DEEPEST {
                scope.report(
                    Finding::error("use.cycle", format!("files use each other {DEEPEST} deep"))
                        .at(used.path.span, "one more")
                        .help("use the files you need from the first file"),
                );
            } else if self.done.insert(target, ()).is_none() {
                self.file(files, scope, target);
            }
        }
        self.chain.pop();
        self.read.push(file);
    }
}

/// The items of all files, by name; of two with one name the first counts.
#[derive(Default)]
pub(super) struct Items<'s> {
    pub(super) conditions: Table<'s, Named>,
    pub(super) spectra: Table<'s, Named>,
    pub(super) materials: Table<'s, Named>,
    pub(super) parts: Table<'s, Part>,
    pub(super) stacks: Table<'s, Stack>,
    /// Materials and alloys in order, with whether they are an alloy.
    pub(super) chemistry: Vec<(&'s Named, bool)>,
    /// `accept` and `limit` outside of every stack: for all of the file.
    pub(super) for_all: Vec<&'s syntax::Statement>,
}

/// Items of one kind: in order, and by name.
pub(super) struct Table<'s, T> {
    pub(super) all: Vec<&'s T>,
    pub(super) by_name: HashMap<&'s str, usize>,
}

impl<T> Default for Table<'_, T> {
    fn default() -> Self {
        Self { all: Vec::new(), by_name: HashMap::new() }
    }
}

impl<'s, T> Table<'s, T> {
    pub(super) fn get(&self, name: &str) -> Option<&'s T> {
        self.by_name.get(name).map(|at| self.all[*at])
    }

    /// Adds an item, or reports that its name is taken.
    fn add(
        &mut self,
        scope: &mut Scope,
        kind: &str,
        item: &'s T,
        name: impl Fn(&'s T) -> &'s Spanned<String>,
    ) -> bool {
        let own = name(item);
        if let Some(at) = self.by_name.get(own.value.as_str()) {
            let first = name(self.all[*at]).span;
            report_duplicate(scope, kind, own, first);
            return false;
        }
        self.by_name.insert(&own.value, self.all.len());
        self.all.push(item);
        true
    }
}

/// Two things of one name.
pub(super) fn report_duplicate(scope: &mut Scope, kind: &str, second: &Spanned<String>, first: Span) {
    let name = &second.value;
    let quoted = if kind == "stack" { format!("\"{name} 2\"") } else { format!("`{name}_2`") };
    scope.report(
        Finding::error("name.duplicate", format!("two {} are called `{name}`", plural(kind)))
            .at(second.span, "the second of that name")
            .beside(first, "the first")
            .help(format!("give one of them another name, such as {quoted}")),
    );
}

fn plural(kind: &str) -> String {
    if kind == "spectrum" { "spectra".to_owned() } else { format!("{kind}s") }
}

/// Words that open an item.
const ITEMS: &[&str] = &["alloy", "condition", "let", "material", "part", "spectrum", "stack", "use"];

/// Sorts the items of `files` and binds the file-level names. What holds for every stack is taken
/// from `first` only, the file whose stacks are resolved.
pub(super) fn items<'s>(scope: &mut Scope, files: &'s [syntax::File], first: SourceId) -> Items<'s> {
    let mut items = Items::default();
    for item in files.iter().flat_map(|file| &file.items) {
        match item {
            Item::Use(_) | Item::Invalid(_) => {}
            Item::Let(it) => scope.define(&it.name, &it.value),
            Item::Condition(it) => {
                shadowing::condition(scope, it);
                items.conditions.add(scope, "condition", it, |it| &it.name);
            }
            Item::Spectrum(it) => {
                shadowing::spectrum(scope, it);
                items.spectra.add(scope, "spectrum", it, |it| &it.name);
            }
            Item::Material(it) | Item::Alloy(it) => {
                shadowing::chemistry(scope, it, matches!(item, Item::Alloy(_)));
                if items.materials.add(scope, "material", it, |it| &it.name) {
                    items.chemistry.push((it, matches!(item, Item::Alloy(_))));
                }
            }
            Item::Part(it) => {
                items.parts.add(scope, "part", it, |it| &it.name);
            }
            Item::Stack(it) => {
                items.stacks.add(scope, "stack", it, |it| &it.name);
            }
            Item::Stray(statement) => match statement {
                syntax::Statement::Accept(syntax::Accept { span, .. })
                | syntax::Statement::Limit(syntax::Limit { span, .. })
                    if span.source == first =>
                {
                    items.for_all.push(statement);
                }
                other => stray(scope, other),
            },
        }
    }
    items
}

fn stray(scope: &mut Scope, statement: &syntax::Statement) {
    match statement {
        syntax::Statement::Property(property) => {
            match names::near(&property.name.value, ITEMS.iter().copied()) {
                Some(near) => scope.report(
                    Finding::error(
                        "name.unknown",
                        format!("`{}` opens no item of a file", property.name.value),
                    )
                    .at(property.name.span, format!("did you mean `{near}`?"))
                    .help(format!("write `{near}`"))
                    .fix(
                        property.name.span,
                        near.clone(),
                        names::alike(&property.name.value, &near),
                    ),
                ),
                None => scope.report(
                    Finding::error(
                        "structure.nesting",
                        format!("`{}` stands outside of every block", property.name.value),
                    )
                    .at(property.name.span, "no item of a file")
                    .help("move it into a `stack` or a `condition`"),
                ),
            }
        }
        other => properties::misplaced(scope, other, "a file by itself"),
    }
}
