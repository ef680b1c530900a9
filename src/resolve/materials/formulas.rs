//! Formulas with fractions: `Ga0.51In0.49P` to a family and its composition.

use std::sync::Arc;

use crate::finding::Finding;
use crate::materials::alloy::{Composition, Family};
use crate::materials::elements::site;
use crate::materials::formula::{self, FormulaError, Part, Share};
use crate::resolve::materials::{Definition, Library};
use crate::resolve::names;
use crate::resolve::quantities::Scope;
use crate::source::{Span, Spanned};
use crate::units::number;

/// How far a sum of fractions may be from 1.
const TOLERANCE: f64 = 0.001;

/// The family of a formula and the composition it states. `None` where it is wrong, which is
/// reported.
pub(super) fn composition_of(
    library: &mut Library,
    scope: &mut Scope,
    name: &Spanned<String>,
) -> Option<(Arc<Family>, Composition)> {
    let parts = match formula::split(&name.value) {
        Ok(parts) => parts,
        Err(error) => {
            scope.report(unreadable(name, &error, library));
            return None;
        }
    };
    let elements: Vec<String> = parts.iter().flat_map(shares).map(|share| share.element.clone()).collect();
    if let Some(twice) = elements.iter().enumerate().find(|(at, it)| elements[..*at].contains(it)) {
        scope.report(
            Finding::error("formula.composition", format!("{} stands twice in `{}`", twice.1, name.value))
                .at(name.span, "each element has one fraction")
                .help(format!("write {} once, with the sum of its fractions", twice.1)),
        );
        return None;
    }
    let exact = library.of_elements(&elements, scope);
    let found = exact.or_else(|| library.of_more_elements(&elements, scope).map(Definition::Family));
    let family = match found {
        Some(Definition::Family(family)) => family,
        Some(Definition::Compound(compound)) => {
            let own = &compound.material.name;
            scope.report(
                Finding::error(
                    "formula.composition",
                    format!("`{own}` mixes nothing, so `{}` has no fractions", name.value),
                )
                .at(name.span, "one element on each sublattice")
                .help(format!("write `{own}`"))
                .fix(name.span, own.clone(), true),
            );
            return None;
        }
        None => {
            scope.report(no_family(name, &elements, library));
            return None;
        }
    };
    let flat = flatten(scope, name, &parts)?;
    if let Some(finding) = off_pattern(name, &flat, &family) {
        scope.report(finding);
        return None;
    }
    let mut composition = [Vec::new(), Vec::new()];
    for (at, elements) in family.sites.iter().enumerate().filter(|(_, elements)| !elements.is_empty()) {
        let times = family.times(at);
        let per_atom = |share: &Share| Share {
            element: share.element.clone(),
            fraction: share.fraction.map(|fraction| fraction / times),
        };
        let own: Vec<Share> =
            flat.iter().filter(|share| elements.contains(&share.element)).map(per_atom).collect();
        let own: Vec<&Share> = own.iter().collect();
        let fractions = complete(scope, name, &own)?;
        composition[at] = elements
            .iter()
            .map(|element| own.iter().zip(&fractions).find(|(share, _)| share.element == *element))
            .map(|found| found.map_or(0.0, |(_, fraction)| *fraction))
            .collect();
    }
    Some((family, composition))
}

/// Numbers that do not fit the formula unit of a family: lead with 0.9, halogens that sum to 1
/// where 3 are due. Sublattices of one atom are seen to elsewhere.
fn off_pattern(name: &Spanned<String>, flat: &[Share], family: &Family) -> Option<Finding> {
    let text = &name.value;
    for own in family.pattern() {
        let count = own.fraction.unwrap_or(1.0);
        let Some((site, _)) = family.position(&own.element) else {
            let stated = flat.iter().find(|share| share.element == own.element)?.fraction.unwrap_or(1.0);
            if (stated - count).abs() > TOLERANCE {
                let whole = family.label(&family.corner());
                return Some(
                    Finding::error(
                        "formula.composition",
                        format!("`{text}` has {} of {}, not {}", number(stated), own.element, number(count)),
                    )
                    .at(part_span(name, &own.element), "data are of the whole number")
                    .help(format!("write `{}` as in `{whole}`", own.element)),
                );
            }
            continue;
        };
        let on_site: Vec<&Share> =
            flat.iter().filter(|share| family.sites[site].contains(&share.element)).collect();
        let sum: f64 = on_site.iter().filter_map(|share| share.fraction).sum();
        let open = on_site.iter().any(|share| share.fraction.is_none());
        let wrong =
            if open { sum > count * (1.0 + TOLERANCE) } else { (sum / count - 1.0).abs() > TOLERANCE };
        if count == 1.0 || !wrong {
            continue;
        }
        let elements: Vec<&str> = on_site.iter().map(|share| share.element.as_str()).collect();
        let shown = number((sum * 1e6).round() / 1e6);
        let inside: Vec<String> = on_site
            .iter()
            .map(|share| {
                format!(
                    "{}{}",
                    share.element,
                    number(((share.fraction.unwrap_or(0.0) / sum) * 1e3).round() / 1e3)
                )
            })
            .collect();
        let help = match inside.as_slice() {
            [_] => format!("write `{}{}`", elements[0], number(count)),
            _ => format!("write `({}){}`", inside.concat(), number(count)),
        };
        return Some(
            Finding::error(
                "formula.sum",
                format!(
                    "the numbers of {} in `{text}` sum to {shown}, not {}",
                    elements.join(", "),
                    number(count)
                ),
            )
            .at(name.span, format!("{} are due", number(count)))
            .help(help),
        );
    }
    None
}

fn shares(part: &Part) -> &[Share] {
    match part {
        Part::Element(share) => std::slice::from_ref(share),
        Part::Bracket { shares, .. } => shares,
    }
}

/// Opens brackets: fractions inside sum to 1 and are multiplied by what stands after them. A
/// bracket without a number is completed from the rest of its sublattice.
fn flatten(scope: &mut Scope, name: &Spanned<String>, parts: &[Part]) -> Option<Vec<Share>> {
    let mut flat = Vec::new();
    for part in parts {
        match part {
            Part::Element(share) => flat.push(share.clone()),
            Part::Bracket { shares, fraction } => {
                let all: Vec<&Share> = shares.iter().collect();
                let inner = complete(scope, name, &all)?;
                let outer = match fraction {
                    Some(fraction) => *fraction,
                    None => left_for(parts, shares)?,
                };
                let opened = shares.iter().zip(inner).map(|(share, inner)| Share {
                    element: share.element.clone(),
                    fraction: Some(inner * outer),
                });
                flat.extend(opened);
            }
        }
    }
    Some(flat)
}

/// What the other elements of the same sublattice leave for a bracket.
fn left_for(parts: &[Part], bracket: &[Share]) -> Option<f64> {
    let own = site(&bracket.first()?.element);
    let others = parts.iter().filter_map(|part| match part {
        Part::Element(share) if site(&share.element) == own => share.fraction,
        _ => None,
    });
    Some((1.0 - others.sum::<f64>()).clamp(0.0, 1.0))
}

/// The fractions of one sublattice or bracket, one of which may be left out.
fn complete(scope: &mut Scope, name: &Spanned<String>, shares: &[&Share]) -> Option<Vec<f64>> {
    let text = &name.value;
    for share in shares {
        let Some(fraction) = share.fraction else { continue };
        if !(0.0..=1.0).contains(&fraction) {
            scope.report(
                Finding::error(
                    "formula.composition",
                    format!("the fraction of {} in `{text}` is {}", share.element, number(fraction)),
                )
                .at(part_span(name, &share.element), "outside 0 to 1")
                .help(outside_help(text, share, shares)),
            );
            return None;
        }
    }
    let open = shares.iter().filter(|share| share.fraction.is_none()).count();
    let sum: f64 = shares.iter().filter_map(|share| share.fraction).sum();
    if open > 1 {
        let names: Vec<&str> = shares
            .iter()
            .filter(|share| share.fraction.is_none())
            .map(|share| share.element.as_str())
            .collect();
        scope.report(
            Finding::error(
                "formula.composition",
                format!("`{text}` leaves the fractions of {} open", names.join(" and ")),
            )
            .at(name.span, "only one of them may be left out")
            .help(format!("write the fraction of {} as well", names[0])),
        );
        return None;
    }
    let over = sum > 1.0 + TOLERANCE;
    if over || (open == 0 && sum < 1.0 - TOLERANCE) {
        scope.report(wrong_sum(name, shares, sum));
        return None;
    }
    let left = (1.0 - sum).max(0.0);
    // A rounded sum within the tolerance is brought to 1 exactly.
    let scale = if open == 0 && sum > 0.0 { 1.0 / sum } else { 1.0 };
    Some(shares.iter().map(|share| share.fraction.map_or(left, |fraction| fraction * scale)).collect())
}

fn outside_help(text: &str, share: &Share, shares: &[&Share]) -> String {
    let fraction = share.fraction.unwrap_or(0.0);
    // Nobody means 1.2 %, but 51 % is often written as 51.
    if (2.0..=100.0).contains(&fraction) {
        let meant = number(fraction / 100.0);
        return format!("write `{}{meant}` if {} % was meant", share.element, number(fraction));
    }
    let others: f64 =
        shares.iter().filter(|other| other.element != share.element).filter_map(|other| other.fraction).sum();
    if (0.0..1.0).contains(&others) && others > 0.0 {
        return format!("write `{}{}` in `{text}`", share.element, number(rounded(1.0 - others)));
    }
    format!("write a fraction from 0 to 1, such as `{}0.5`", share.element)
}

/// Fractions that do not sum to 1: the last one gives way.
fn wrong_sum(name: &Spanned<String>, shares: &[&Share], sum: f64) -> Finding {
    let text = &name.value;
    let list: Vec<&str> = shares.iter().map(|share| share.element.as_str()).collect();
    let finding = Finding::error(
        "formula.sum",
        format!("the fractions of {} in `{text}` sum to {}, not 1", list.join(", "), number(rounded(sum))),
    );
    let written = |share: &Share| format!("{}{}", share.element, number(share.fraction.unwrap_or(0.0)));
    let finding = finding.at(name.span, format!("{} = {}", sum_text(shares), number(rounded(sum))));
    let Some(last) = shares.iter().rev().find(|share| share.fraction.is_some()) else { return finding };
    let others = sum - last.fraction.unwrap_or(0.0);
    if !(0.0..=1.0).contains(&others) || others == 0.0 {
        return finding.help(format!("write fractions of {} that sum to 1", list.join(", ")));
    }
    let mended = format!("{}{}", last.element, number(rounded(1.0 - others)));
    match find(text, &written(last)) {
        Some(at) => {
            let whole = format!("{}{mended}{}", &text[..at], &text[at + written(last).len()..]);
            finding.help(format!("write `{whole}`")).fix(name.span, whole, false)
        }
        None => finding.help(format!("write `{mended}`")),
    }
}

fn sum_text(shares: &[&Share]) -> String {
    let parts: Vec<String> = shares.iter().filter_map(|share| share.fraction).map(number).collect();
    parts.join(" + ")
}

/// Digits of a sum of decimals without the noise of binary fractions.
fn rounded(value: f64) -> f64 {
    (value * 1e6).round() / 1e6
}

fn find(text: &str, part: &str) -> Option<usize> {
    text.find(part)
}

/// Where an element stands in a formula.
fn part_span(name: &Spanned<String>, element: &str) -> Span {
    match name.value.find(element) {
        Some(at) => {
            let start = name.span.start as usize + at;
            let digits = name.value[at + element.len()..]
                .bytes()
                .take_while(|byte| byte.is_ascii_digit() || *byte == b'.')
                .count();
            Span::new(name.span.source, start, start + element.len() + digits)
        }
        None => name.span,
    }
}

fn unreadable(name: &Spanned<String>, error: &FormulaError, library: &Library) -> Finding {
    let text = &name.value;
    let (at, length, message, label) = match error {
        FormulaError::UnknownElement(at, symbol) => {
            (*at, symbol.len(), format!("`{symbol}` in `{text}` is no element"), "no chemical symbol")
        }
        FormulaError::Unreadable(at) => {
            let length = text.get(*at..).and_then(|rest| rest.chars().next()).map_or(0, char::len_utf8);
            (*at, length, format!("`{text}` cannot be read as a formula"), "neither a symbol nor a fraction")
        }
    };
    let start = name.span.start as usize + at;
    let finding = Finding::error("formula.unknown-element", message)
        .at(Span::new(name.span.source, start, start + length), label);
    let meant = letters_mended(text, library).or_else(|| match error {
        FormulaError::UnknownElement(at, symbol) => look_alike(text, symbol, *at, library),
        FormulaError::Unreadable(_) => None,
    });
    match meant {
        Some(meant) => {
            let sure = names::alike(text, &meant);
            finding.help(format!("write `{meant}`")).fix(name.span, meant, sure)
        }
        None => finding.help("write chemical symbols and fractions, such as `Ga0.51In0.49P`"),
    }
}

/// The formula with letters and digits that look alike put right: `A10.3Ga0.7As`, `Ga0.5ln0.5P`,
/// `GaO.5In0.5P`.
fn letters_mended(text: &str, library: &Library) -> Option<String> {
    const ALIKE: &[(&str, &str)] =
        &[("A1", "Al"), ("AI", "Al"), ("ln", "In"), ("1n", "In"), ("lN", "In"), ("O.", "0.")];
    let mended = ALIKE.iter().fold(text.to_owned(), |text, (wrong, right)| text.replace(wrong, right));
    (mended != text && is_known(&mended, library)).then_some(mended)
}

fn is_known(formula: &str, library: &Library) -> bool {
    let Some(mut own) = formula::elements(formula) else { return false };
    own.sort_unstable();
    library.names().into_iter().any(|name| {
        formula::elements(name).is_some_and(|mut other| {
            other.sort_unstable();
            other == own
        })
    })
}

/// The formula with the stray symbol replaced by the element that makes it a known family.
fn look_alike(text: &str, symbol: &str, at: usize, library: &Library) -> Option<String> {
    const MOST: &[&str] = &["Al", "Ga", "In", "As", "Sb", "Si", "Ge"];
    let similar = |element: &&&str| {
        let (a, b) = (element.to_lowercase(), symbol.to_lowercase());
        a.len() == b.len() && a.bytes().zip(b.bytes()).filter(|(x, y)| x != y).count() <= 1
    };
    let mended = |element: &&str| format!("{}{element}{}", &text[..at], &text[at + symbol.len()..]);
    MOST.iter().filter(similar).map(mended).find(|mended| is_known(mended, library))
}

fn no_family(name: &Spanned<String>, elements: &[String], library: &Library) -> Finding {
    let text = &name.value;
    let mut list: Vec<&str> = elements.iter().map(String::as_str).collect();
    list.dedup();
    let finding = Finding::error(
        "name.unknown",
        format!("no alloy of {} is known, so `{text}` has no data", list.join(", ")),
    )
    .at(name.span, "no family of these elements");
    // A sublattice forgotten: `In0.53Ga0.47`.
    for missing in ["As", "P", "Sb"] {
        let whole = format!("{text}{missing}");
        if !list.contains(&missing) && is_known(&whole, library) {
            return finding.help(format!("write `{whole}` if that was meant"));
        }
    }
    let shared = |known: &&str| {
        let own = formula::elements(known).unwrap_or_default();
        own.len() > 2 && own.iter().filter(|element| list.contains(&element.as_str())).count() >= 2
    };
    let near: Vec<&str> = library.names().into_iter().filter(shared).take(5).collect();
    if near.is_empty() {
        return finding.help("define its family with `alloy`; `bandloom materials` lists those built in");
    }
    finding.help(format!("define its family with `alloy`, or use one of {}", near.join(", ")))
}
