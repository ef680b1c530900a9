use super::*;
use crate::parse::{build, grammar, pieces, recover};

fn long_text() -> String {
    let demo = include_str!("../../../stacks/kittiwake.stack");
    demo.repeat(2 * pieces::LONG / demo.len() + 1)
}

#[test]
fn a_long_text_means_the_same_in_pieces() {
    let source = Source::new(SourceId(0), "long.stack", &long_text());
    let scan = recover::scan(&source);
    let in_pieces = pieces::items(&source, &scan).expect("long and sound");
    let mut findings = Findings::new();
    let whole = grammar::read(&source.text).expect("sound");
    let whole = build::items((&source, 0), whole, &scan, &mut findings);
    assert!(findings.is_empty());
    assert_eq!(in_pieces, whole);
}

#[test]
fn a_mistake_in_a_long_text_is_told_as_in_a_short_one() {
    let text = long_text();
    let middle = text[text.len() / 2..].find("3.2 um").expect("planted") + text.len() / 2;
    let wrong = format!("{}= {}", &text[..middle], &text[middle..]);
    let source = Source::new(SourceId(0), "long.stack", &wrong);
    assert!(pieces::items(&source, &recover::scan(&source)).is_none());
    let findings = parse(&source).findings;
    assert_eq!(findings.0.len(), 1, "{findings:?}");
    let place = findings.0[0].primary.as_ref().expect("placed").span;
    assert_eq!(source.position(place.start as usize).line, source.position(middle).line);
}
