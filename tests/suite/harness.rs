//! The harness itself: that it fails where it should.

use libtest_mimic::{Failed, Trial};

use crate::expect::{Stated, compare, read, rewrite};

/// A few trials of the comments' meaning.
pub(crate) fn trials() -> Vec<Trial> {
    vec![
        Trial::test("harness/lines_and_columns", lines_and_columns),
        Trial::test("harness/strict_both_ways", strict_both_ways),
        Trial::test("harness/rewriting_is_reading_backwards", rewriting),
        Trial::test("harness/nonsense_is_told", nonsense),
    ]
}

const TEXT: &str = "\
stack \"A\" {
    //~ error[gap.order] 5-9: `top` is
    //~ warning[unit.unlikely] 12-14:
    base GaAs 3
}
//~ advice[caution.arsenic]: arsenic
";

fn found() -> Vec<Stated> {
    let one = |line, columns, severity: &str, code: &str, message: &str| Stated {
        line,
        columns,
        severity: severity.to_owned(),
        code: code.to_owned(),
        message: message.to_owned(),
    };
    vec![
        one(4, Some((5, 9)), "error", "gap.order", "`top` is narrower than `bottom`"),
        one(4, Some((12, 14)), "warning", "unit.unlikely", "3 of what"),
        one(0, None, "advice", "caution.arsenic", "arsenic is toxic"),
    ]
}

fn check(holds: bool, what: &str) -> Result<(), Failed> {
    if holds { Ok(()) } else { Err(what.into()) }
}

fn lines_and_columns() -> Result<(), Failed> {
    let stated = read(TEXT)?;
    check(stated.iter().map(|one| one.line).eq([4, 4, 0]), "a comment points to the next line that is none")?;
    check(stated[0].columns == Some((5, 9)) && stated[0].message == "`top` is", "columns and message")?;
    compare(&stated, &found())?;
    Ok(())
}

fn strict_both_ways() -> Result<(), Failed> {
    let stated = read(TEXT)?;
    for index in 0..3 {
        let mut less = found();
        less.remove(index);
        check(compare(&stated, &less).is_err(), "one not found must fail")?;
        let mut more = found();
        more.push(more[index].clone());
        check(compare(&stated, &more).is_err(), "one found twice must fail")?;
    }
    let changes: [fn(&mut Stated); 5] = [
        |one| one.line += 1,
        |one| one.columns = Some((5, 10)),
        |one| one.severity = "warning".into(),
        |one| one.code = "gap.equal".into(),
        |one| one.message = "top is".into(),
    ];
    for change in changes {
        let mut other = found();
        change(&mut other[0]);
        check(compare(&stated, &other).is_err(), "one that differs must fail")?;
    }
    Ok(())
}

fn rewriting() -> Result<(), Failed> {
    let fresh = rewrite(TEXT, &found());
    let stated = read(&fresh)?;
    compare(&stated, &found())?;
    check(rewrite(&fresh, &found()) == fresh, "rewriting again changes nothing")?;
    check(fresh.contains("\n    //~ error[gap.order] 5-9: `top` is narrower"), "indented like its line")?;
    let numbers = "//= efficiency 30 % ± 1 % -- a table\nstack \"A\" { }\n";
    check(rewrite(numbers, &[]) == numbers, "numbers are never rewritten")
}

fn nonsense() -> Result<(), Failed> {
    for text in ["//~", "//~ error 3-4: x", "//~ error[a.b] 3: x", "//~ error[a.b] x-y: z", "//~ no colon"] {
        check(read(text).is_err(), text)?;
    }
    Ok(())
}
