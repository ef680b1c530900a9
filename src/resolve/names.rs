//! Names that nothing is called by.

use crate::finding::Finding;
pub use crate::finding::suggest::{alike, near};
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
        Some(near) => {
            // A span two bytes longer than its text includes the quotes, which the edit keeps.
            let quoted = (name.span.end - name.span.start) as usize == name.value.len() + 2;
            let sure = alike(&name.value, &near);
            let text = if quoted { format!("\"{near}\"") } else { near };
            finding
                .at(name.span, format!("did you mean `{text}`?"))
                .help(format!("write `{text}`"))
                .fix(name.span, text, sure)
        }
        None => finding.at(name.span, format!("an unknown {kind}")).help(otherwise),
    }
}
