//! Names that nothing is called by.

use crate::finding::Finding;
pub use crate::finding::suggest::near;
use crate::source::Spanned;

/// A finding for a word that names nothing of `kind`, with the near name and the edit where one
/// is near, else with `otherwise` as the way out.
pub fn unknown<'a>(
    kind: &str,
    name: &Spanned<String>,
    known: impl Iterator<Item = &'a str>,
    otherwise: &str,
) -> Finding {
    let finding = Finding::error("name.unknown", format!("no {kind} is called `{}`", name.value));
    match near(&name.value, known) {
        Some(near) => finding
            .at(name.span, format!("did you mean `{near}`?"))
            .help(format!("write `{near}`"))
            .fix(name.span, near, false),
        None => finding.at(name.span, format!("an unknown {kind}")).help(otherwise),
    }
}
