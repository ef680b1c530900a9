use crate::finding::Outcome;
use crate::parse::parse;
use crate::source::{Source, SourceId};
use crate::syntax::{self, Attribute, Item, Statement};

fn read(text: &str) -> Outcome<syntax::File> {
    parse(&Source::new(SourceId(0), "a.stack", text))
}

#[track_caller]
fn sound(text: &str) -> syntax::File {
    let outcome = read(text);
    assert!(outcome.findings.is_empty(), "{:#?}", outcome.findings);
    outcome.value.expect("a sound text has a value")
}

#[test]
fn the_two_junction_example_reads_without_a_finding() {
    let text = include_str!("../../tests/fixtures/parse/two_junctions.stack");
    let file = sound(text);
    assert_eq!(file.items.len(), 3);
    assert_eq!(file.comments.len(), 1);
    let Some(Item::Stack(stack)) = file.items.last() else { panic!("{:?}", file.items.last()) };
    assert_eq!(stack.name.value, "Sandpiper 2J");
    assert!(stack.block.statements.iter().all(|it| !matches!(it, Statement::Invalid(_))));
    println!("{:#?}", stack.block.statements);
    let Some(Statement::Layer(cap)) = stack.block.statements.get(4) else { panic!("the cap is fifth") };
    assert!(matches!(cap.attributes.last(), Some(Attribute::OnlyUnderFingers(_))));
    sound(include_str!("../../tests/fixtures/parse/limit_study.stack"));
}
