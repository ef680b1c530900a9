use super::*;

/// Pieces that open, close, quote, comment or end something.
const PIECES: &[&str] = &[
    "(",
    ")",
    "[",
    "]",
    "{",
    "}",
    "\"",
    "\\",
    "//",
    "/",
    "\n",
    ";",
    ",",
    ":",
    "=",
    "..",
    "±",
    "+-",
    "-",
    "µ",
    "²",
    "°C",
    " ",
    "\t",
    "\r\n",
    "1e",
    "0,7",
    "stack \"A\" {",
    "junction",
    "base GaAs 3 um",
    "free",
    "min(",
    "with In",
    "\u{0}",
    "\u{feff}",
    "\u{a0}",
    "é",
    "😀",
    "stack",
    "\nstack ",
    "a.b",
    "place x(",
    "n 2e18 /cm3",
];

/// Comments as a second, slower reader sees them: the first `//` of a line outside quotes.
fn comments(text: &str) -> Vec<String> {
    let mut found = Vec::new();
    for line in text.split('\n') {
        let (mut quoted, mut escaped) = (false, false);
        for (at, c) in line.char_indices() {
            match c {
                _ if escaped => escaped = false,
                '\\' if quoted => escaped = true,
                '"' => quoted = !quoted,
                '/' if !quoted && line[at..].starts_with("//") => {
                    found.push(line[at..].trim_end().to_owned());
                    break;
                }
                _ => {}
            }
        }
    }
    found
}

fn check(text: &str) -> Result<(), TestCaseError> {
    let source = source(text);
    let outcome = parse(&source);
    let lies_within = |span: Span| {
        let range = span.range();
        range.end <= source.text.len()
            && source.text.is_char_boundary(range.start)
            && source.text.is_char_boundary(range.end)
    };
    for finding in outcome.findings.iter() {
        let places = finding.primary.iter().chain(&finding.secondary).map(|label| label.span);
        for span in places.chain(finding.fix.iter().map(|fix| fix.span)) {
            prop_assert!(lies_within(span), "{:?} of {:?}", span, finding);
        }
        prop_assert!(!finding.message.contains("Rule") && !finding.helps.is_empty(), "{:?}", finding);
    }
    let Some(file) = outcome.value else { return Ok(()) };
    let written: Vec<String> = file.comments.iter().map(|comment| comment.value.clone()).collect();
    prop_assert_eq!(written, comments(&source.text));
    // Every span of the tree, found in its printed form rather than by a second walk of its types.
    let printed = format!("{:?}", file.items);
    for piece in printed.split("start: ").skip(1) {
        let mut numbers = piece.split(|c: char| !c.is_ascii_digit()).filter(|text| !text.is_empty());
        let mut next = || numbers.next().and_then(|digits| digits.parse().ok()).unwrap_or(usize::MAX);
        let (start, end) = (next(), next());
        prop_assert!(start <= end && end <= source.text.len(), "{}..{}", start, end);
        prop_assert!(source.text.is_char_boundary(start) && source.text.is_char_boundary(end));
    }
    let invalid = printed.contains("Invalid(");
    prop_assert!(!invalid || !outcome.findings.is_empty(), "something is invalid and nobody was told");
    Ok(())
}

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::with_cases(200) })]

    #[test]
    fn any_pieces_read_to_an_end(pieces in proptest::collection::vec(0..PIECES.len(), 0..60)) {
        let text: String = pieces.into_iter().map(|piece| PIECES[piece]).collect();
        check(&text)?;
    }

    #[test]
    fn any_text_reads_to_an_end(text in "\\PC{0,80}") {
        check(&text)?;
    }

    #[test]
    fn random_edits_of_a_sound_file_read_to_an_end(
        edits in proptest::collection::vec((0.0..1.0_f64, 0..12_usize, 0..PIECES.len()), 1..6)
    ) {
        let mut text = TWO_JUNCTIONS.to_owned();
        for (place, removed, piece) in edits {
            let boundary = |mut at: usize| {
                while !text.is_char_boundary(at) {
                    at -= 1;
                }
                at
            };
            let start = boundary((place * text.len() as f64) as usize);
            let end = boundary((start + removed).min(text.len())).max(start);
            text.replace_range(start..end, PIECES[piece]);
        }
        check(&text)?;
    }

    #[test]
    fn one_bad_line_in_a_sound_file_is_one_finding(line in 5..12_usize, junk in "[@$&|~\\]]{1,6}") {
        let mut lines: Vec<&str> = TWO_JUNCTIONS.lines().collect();
        // Between two statements of the stack's own body.
        let line = lines.iter().position(|it| it.contains("growth")).expect("in the example") + line % 3;
        lines.insert(line, &junk);
        let findings = read(&lines.join("\n")).findings;
        prop_assert_eq!(codes(&findings), vec!["syntax.unexpected"]);
        let place = findings.0[0].primary.as_ref().map(|label| label.span.start);
        let start = lines[..line].iter().map(|it| it.len() + 1).sum::<usize>();
        prop_assert_eq!(place, Some(start as u32));
    }
}
