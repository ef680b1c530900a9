//! The pages behind the codes: what a finding reports, why it matters, an example, its cure.
//!
//! Each page stands in `src/why/<code>.md` under fixed headings; the tests run its *Example*,
//! which must give exactly that code, and its *Instead*, which must give none.

/// Every code with its page, in alphabetical order.
pub const PAGES: &[(&str, &str)] = &[];

/// The page of `code`.
pub fn page(code: &str) -> Option<&'static str> {
    PAGES.iter().find(|(name, _)| *name == code).map(|(_, text)| *text)
}
