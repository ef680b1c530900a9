//! `bandloom why`: the page of a finding.

use clap::Args;

use crate::cli::Exit;
use crate::cli::console::{Console, Stream};
use crate::finding::suggest::near;
use crate::why::{PAGES, page, summary};

const EXAMPLES: &str = "\
Examples:
  bandloom why                    every code, a line each
  bandloom why gap.order          one page
  bandloom why gap                every code of a family";

/// Show the page of a finding: what it reports, why it matters, an example, its cure
#[derive(Args, Clone, Debug)]
#[command(before_help = EXAMPLES, help_template = super::TEMPLATE)]
pub(crate) struct Why {
    /// The code, as in `error: gap.order`; a family; nothing for all
    code: Option<String>,
}

/// Runs the command: the page on standard output.
pub(crate) fn run(command: &Why, console: &Console) -> Exit {
    let width = console.look(Stream::Out).width;
    let Some(asked) = &command.code else {
        return console.result(&list(width, |_| true));
    };
    // What a report shows may be pasted whole.
    let code = asked
        .trim()
        .trim_start_matches("error:")
        .trim_start_matches("warning:")
        .trim_start_matches("advice:");
    let code = code.trim().trim_matches('`').to_lowercase();
    if let Some(page) = page(&code) {
        return console.result(&reflowed(page, width));
    }
    let family = format!("{}.", code.trim_end_matches('.'));
    let members = list(width, |known| known.starts_with(&family));
    if !members.is_empty() {
        return console.result(&members);
    }
    let help = match near(&code, PAGES.iter().map(|(known, _)| *known)) {
        Some(known) => format!("`bandloom why {known}` is the nearest"),
        None => "`bandloom why` lists every code".to_owned(),
    };
    console.trouble(&format!("`{asked}` is no code of a finding"), &[&help])
}

/// The page with its paragraphs broken to `width`; headings, tables and code stay as they are.
fn reflowed(page: &str, width: usize) -> String {
    let mut text = String::new();
    let mut used = 0;
    let mut code = false;
    for line in page.lines() {
        let fence = line.starts_with("```");
        if fence || code || line.is_empty() || line.starts_with(['#', '|']) {
            text.push_str(if used > 0 { "\n" } else { "" });
            text.push_str(line);
            text.push('\n');
            used = 0;
            code ^= fence;
            continue;
        }
        if used > 0 && line.starts_with("- ") {
            text.push('\n');
            used = 0;
        }
        for word in line.split_whitespace() {
            let length = word.chars().count();
            if used > 0 && used + 1 + length > width.max(40) {
                text.push('\n');
                used = 0;
            }
            if used > 0 {
                text.push(' ');
                used += 1;
            }
            text.push_str(word);
            used += length;
        }
    }
    if used > 0 {
        text.push('\n');
    }
    text
}

/// One line a code, cut to `width`.
fn list(width: usize, keep: impl Fn(&str) -> bool) -> String {
    let column = PAGES.iter().map(|(code, _)| code.len()).max().unwrap_or(0);
    let room = width.saturating_sub(column + 2).max(20);
    let mut text = String::new();
    for (code, page) in PAGES.iter().filter(|(code, _)| keep(code)) {
        let summary = summary(page);
        let cut: String = if summary.chars().count() <= room {
            summary
        } else {
            let kept: String = summary.chars().take(room - 1).collect();
            // Not in the middle of a word.
            let end = kept.rfind(' ').unwrap_or(kept.len());
            kept[..end].trim_end_matches([',', ':', ';']).to_owned() + "…"
        };
        text.push_str(&format!("{code:column$}  {cut}\n"));
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn pages_keep_their_words_and_code_at_any_width() {
        for (code, page) in PAGES {
            let shown = reflowed(page, 60);
            let words = |text: &str| text.split_whitespace().map(str::to_owned).collect::<Vec<_>>();
            assert_eq!(words(page), words(&shown), "{code}");
            let stacks = |text: &str| -> Vec<String> {
                text.split("```").skip(1).step_by(2).map(str::to_owned).collect()
            };
            assert_eq!(stacks(page), stacks(&shown), "{code}");
            let prose = shown.split("```").step_by(2).flat_map(str::lines);
            for line in prose.filter(|line| !line.starts_with(['#', '|']) && line.contains(' ')) {
                assert!(line.chars().count() <= 60, "{code}: {line}");
            }
        }
    }
}
