use std::time::{Duration, Instant};

use super::*;

/// Runs `work` where little stack is left, as in a thread of an editor.
fn on_small_stack<T: Send + 'static>(work: impl FnOnce() -> T + Send + 'static) -> T {
    let thread = std::thread::Builder::new().stack_size(512 * 1024).spawn(work).expect("a thread starts");
    thread.join().expect("the work neither panics nor overflows")
}

#[test]
fn ten_thousand_brackets_are_a_finding() {
    for open in ["(", "[", "{", "x {\n", "min(", "let x = (", "\"a\" { (", "-(", "junction a { layer b (\n"] {
        let text = open.repeat(10_000);
        let findings = on_small_stack(move || read(&text).findings);
        assert!(findings.has_errors(), "{open}");
        assert!(findings.0.len() <= 10_000, "{open}");
    }
    let deep = format!("let x = {}1{}", "(".repeat(10_000), ")".repeat(10_000));
    assert_eq!(codes(&on_small_stack(move || read(&deep).findings)), ["syntax.limit"]);
}

#[test]
fn the_deepest_text_that_is_read_fits_a_small_stack() {
    let blocks = format!("{}{}", "repeat 2 {\n".repeat(NESTING_LIMIT), "}\n".repeat(NESTING_LIMIT));
    let half = NESTING_LIMIT / 2;
    let both = format!(
        "{}let x = {}1{}\n{}",
        "a {\n".repeat(half),
        "min(2, -(".repeat(half / 2),
        "))".repeat(half / 2),
        "}\n".repeat(half)
    );
    let brackets = format!("let x = {}1{}", "-(".repeat(NESTING_LIMIT), ")".repeat(NESTING_LIMIT));
    for text in [blocks, both, brackets] {
        let shown = text.clone();
        let findings = on_small_stack(move || {
            let outcome = read(&text);
            drop(outcome.value.clone());
            outcome.findings
        });
        assert!(findings.is_empty(), "{shown}\n{findings:#?}");
    }
    let deeper = "a {\n".repeat(NESTING_LIMIT + 1);
    assert_eq!(codes(&read(&deeper).findings), ["syntax.limit"]);
}

#[test]
fn long_expressions_are_capped_and_short_ones_fit_a_small_stack() {
    for sign in [" + 1", " ^ 1", " * -1", " - - 1"] {
        let signs = sign.matches(['+', '^', '*', '-']).count();
        let most = format!("let x = 1{}", sign.repeat(OPERATOR_LIMIT / signs));
        let more = format!("let x = 1{}", sign.repeat(OPERATOR_LIMIT / signs + 1));
        let whole = on_small_stack(move || read(&most).findings);
        assert!(whole.is_empty(), "{sign}: {whole:#?}");
        let outcome = on_small_stack(move || read(&more));
        assert_eq!(codes(&outcome.findings), ["syntax.limit"], "{sign}");
        assert!(matches!(outcome.value.expect("a value").items.as_slice(), [Item::Invalid(_)]));
    }
    // Signs in brackets count too, else depth times length would be too much for the stack.
    let nested = format!("let x = 1{}{}", " + (1".repeat(60), " + 1".repeat(500) + &")".repeat(60));
    assert_eq!(codes(&on_small_stack(move || read(&nested).findings)), ["syntax.limit"]);
}

#[test]
fn a_text_that_is_too_large_is_refused_before_it_is_read() {
    let text = "a b\n".repeat(SIZE_LIMIT / 4 + 1);
    let outcome = read(&text);
    assert_eq!(codes(&outcome.findings), ["syntax.limit"]);
    assert!(outcome.value.is_none());
}

#[test]
fn a_number_beyond_the_largest_is_a_finding() {
    let outcome = read("let x = 1e999 nm\n");
    assert_eq!(codes(&outcome.findings), ["syntax.number"]);
    assert!(matches!(outcome.value.expect("a value").items.as_slice(), [Item::Invalid(_)]));
}

#[test]
fn open_brackets_cost_no_more_than_their_number() {
    // The time of an exponential reader doubles with each bracket: 40 of them would never end.
    let started = Instant::now();
    for open in ["(", "[", "place x(", "min(", "base (", "\"", "x(\n", "-(", "(A", "(a,", "free ("] {
        for count in [10, 40, 63] {
            let _ = read(&format!("stack \"A\" {{\n    note {}\n}}\n", open.repeat(count)));
            let _ = read(&format!("let x = {}\n", open.repeat(count)));
            let _ = read(&open.repeat(count));
        }
    }
    assert!(started.elapsed() < Duration::from_secs(20), "{:?}", started.elapsed());
}

#[test]
fn many_slips_take_time_in_proportion() {
    let text = format!("stack \"A\" {{\n{}}}\n", "    requir efficiency: 28 % @ (\n".repeat(5_000));
    let started = Instant::now();
    assert_eq!(read(&text).findings.0.len(), 5_000);
    assert!(started.elapsed() < Duration::from_secs(20), "{:?}", started.elapsed());
}
