//! Chemical formulas as the trade writes them: `Ga0.51In0.49P`, `(Al0.3Ga0.7)0.51In0.49P`.

use crate::materials::elements;

/// One element of a formula and its share of its sublattice, where written.
#[derive(Clone, Debug, PartialEq)]
pub struct Share {
    /// Symbol.
    pub element: String,
    /// `None` where the number is left out.
    pub fraction: Option<f64>,
}

/// What stands side by side in a formula: an element, or a bracket with elements in it.
#[derive(Clone, Debug, PartialEq)]
pub enum Part {
    /// `Ga0.51`
    Element(Share),
    /// `(Al0.3Ga0.7)0.51`
    Bracket {
        /// What is inside.
        shares: Vec<Share>,
        /// What all of it is multiplied by, where written.
        fraction: Option<f64>,
    },
}

/// Why a text is no formula.
#[derive(Clone, Debug, PartialEq)]
pub enum FormulaError {
    /// A symbol that is no element; byte offset and the symbol.
    UnknownElement(usize, String),
    /// Something else than symbols, numbers and brackets stands at this byte offset.
    Unreadable(usize),
}

/// Splits a formula into its parts.
///
/// # Errors
/// A symbol that is no element, or text that has not the shape of a formula.
pub fn split(text: &str) -> Result<Vec<Part>, FormulaError> {
    let mut reader = Reader { text, at: 0 };
    let mut parts = Vec::new();
    while !reader.is_done() {
        if reader.take('(') {
            let mut shares = Vec::new();
            while !reader.take(')') {
                shares.push(reader.share()?);
            }
            if shares.is_empty() {
                return Err(FormulaError::Unreadable(reader.at));
            }
            parts.push(Part::Bracket { shares, fraction: reader.number()? });
        } else {
            parts.push(Part::Element(reader.share()?));
        }
    }
    if parts.is_empty() { Err(FormulaError::Unreadable(0)) } else { Ok(parts) }
}

/// The elements of a formula in order, brackets opened.
pub fn elements(text: &str) -> Option<Vec<String>> {
    let parts = split(text).ok()?;
    let shares = parts.into_iter().flat_map(|part| match part {
        Part::Element(share) => vec![share],
        Part::Bracket { shares, .. } => shares,
    });
    Some(shares.map(|share| share.element).collect())
}

struct Reader<'a> {
    text: &'a str,
    at: usize,
}

impl Reader<'_> {
    fn rest(&self) -> &str {
        &self.text[self.at..]
    }

    fn is_done(&self) -> bool {
        self.rest().is_empty()
    }

    fn take(&mut self, wanted: char) -> bool {
        let found = self.rest().starts_with(wanted);
        if found {
            self.at += wanted.len_utf8();
        }
        found
    }

    fn share(&mut self) -> Result<Share, FormulaError> {
        let start = self.at;
        let rest = self.rest();
        if !rest.starts_with(|c: char| c.is_ascii_uppercase()) {
            return Err(FormulaError::Unreadable(start));
        }
        // The ions of perovskites have two capitals.
        let ion = ["FA", "MA"].into_iter().find(|ion| rest.starts_with(ion));
        let length =
            ion.map_or_else(|| 1 + rest[1..].bytes().take_while(u8::is_ascii_lowercase).count(), str::len);
        let element = rest[..length].to_owned();
        if !elements::is_known(&element) {
            return Err(FormulaError::UnknownElement(start, element));
        }
        self.at += length;
        Ok(Share { element, fraction: self.number()? })
    }

    fn number(&mut self) -> Result<Option<f64>, FormulaError> {
        let rest = self.rest();
        let length = rest.bytes().take_while(|byte| byte.is_ascii_digit() || *byte == b'.').count();
        if length == 0 {
            return Ok(None);
        }
        let value = rest[..length].parse().map_err(|_| FormulaError::Unreadable(self.at))?;
        self.at += length;
        Ok(Some(value))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn share(element: &str, fraction: Option<f64>) -> Share {
        Share { element: element.to_owned(), fraction }
    }

    #[test]
    fn formulas_of_the_trade_are_split() {
        let parts = split("(Al0.3Ga0.7)0.51In0.49P").expect("a formula");
        assert_eq!(
            parts,
            [
                Part::Bracket {
                    shares: vec![share("Al", Some(0.3)), share("Ga", Some(0.7))],
                    fraction: Some(0.51)
                },
                Part::Element(share("In", Some(0.49))),
                Part::Element(share("P", None)),
            ]
        );
        assert_eq!(elements("Cs0.2FA0.8Pb(I0.8Br0.2)3").expect("one"), ["Cs", "FA", "Pb", "I", "Br"]);
        assert_eq!(elements("GaIn0.49P").expect("one"), ["Ga", "In", "P"]);
    }

    #[test]
    fn what_is_no_formula_says_where() {
        assert_eq!(split("Ga0.5Xx0.5P"), Err(FormulaError::UnknownElement(5, "Xx".to_owned())));
        assert_eq!(split("Ga0.5-In"), Err(FormulaError::Unreadable(5)));
        assert_eq!(split("Ga0.5.1In"), Err(FormulaError::Unreadable(2)));
        assert_eq!(split("(Al0.3"), Err(FormulaError::Unreadable(6)));
        assert_eq!(split("()2"), Err(FormulaError::Unreadable(2)));
        assert_eq!(split(""), Err(FormulaError::Unreadable(0)));
    }
}
