//! A user's item under the name of a built-in one: only where it says `replaces`.

use crate::finding::Finding;
use crate::light::BUILTIN;
use crate::materials::library;
use crate::resolve::names;
use crate::resolve::quantities::Scope;
use crate::source::Span;
use crate::syntax::Named;

/// A `material` or an `alloy`.
pub(super) fn chemistry(scope: &mut Scope, item: &Named, is_alloy: bool) {
    let kind = if is_alloy { "alloy" } else { "material" };
    let known: Vec<&str> = library::FILES.iter().map(|(name, _)| *name).chain(["ideal", "direct"]).collect();
    let name = item.name.value.as_str();
    let same = known.iter().copied().find(|known| *known == name);
    // A formula finds its family by elements, in whatever order they are named.
    let same = same.or_else(|| known.iter().copied().find(|known| is_alloy && same_elements(known, name)));
    check(scope, item, kind, (same, &known));
}

/// A `spectrum`.
pub(super) fn spectrum(scope: &mut Scope, item: &Named) {
    let known: Vec<&str> = BUILTIN.iter().map(|(name, _)| *name).chain(["blackbody"]).collect();
    let same = known.iter().copied().find(|known| *known == item.name.value);
    check(scope, item, "spectrum", (same, &known));
}

/// A `condition`: none is built in.
pub(super) fn condition(scope: &mut Scope, item: &Named) {
    check(scope, item, "condition", (None, &[]));
}

fn same_elements(built_in: &str, name: &str) -> bool {
    let sorted = |text: &str| {
        let mut elements = library::family_elements(text)?;
        elements.sort_unstable();
        Some(elements)
    };
    let own = sorted(name);
    own.is_some() && own == sorted(built_in)
}

/// `found` is the built-in thing of that name, and all there are.
fn check(scope: &mut Scope, item: &Named, kind: &str, (found, known): (Option<&str>, &[&str])) {
    let name = &item.name.value;
    match (item.replaces, found) {
        (None, Some(built_in)) => {
            let end = item.name.span.end as usize;
            let behind = Span::new(item.name.span.source, end, end);
            let shown = if built_in == name { String::new() } else { format!(", as `{built_in}`") };
            scope.report(
                Finding::error("name.shadows", format!("`{name}` is built in{shown}"))
                    .at(item.name.span, "a second one of that name")
                    .help(format!(
                        "write `{kind} {name} replaces {{ … }}` to use yours everywhere, or name it `{name}_own`"
                    ))
                    .fix(behind, " replaces", false),
            );
        }
        (Some(replaces), None) => {
            let finding = Finding::error(
                "name.shadows",
                format!("`{name}` replaces nothing: no {kind} of that name is built in"),
            );
            let finding = match names::near(name, known.iter().copied()) {
                Some(near) => finding
                    .at(item.name.span, format!("did you mean `{near}`?"))
                    .help(format!("write `{kind} {near} replaces`, or delete `replaces`"))
                    .fix(item.name.span, near, false),
                None => finding.at(replaces, "nothing to replace").help("delete `replaces`"),
            };
            scope.report(finding);
        }
        (Some(_), Some(built_in)) if built_in != name => {
            scope.report(
                Finding::error("name.shadows", format!("`{name}` is built in as `{built_in}`"))
                    .at(item.name.span, "another order of the same elements")
                    .help(format!("write `{kind} {built_in} replaces {{ … }}`"))
                    .fix(item.name.span, built_in, false),
            );
        }
        (None, None) | (Some(_), Some(_)) => {}
    }
}
