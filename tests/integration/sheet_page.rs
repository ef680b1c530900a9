//! The sheet as a page: well formed, complete in itself, readable by everyone, safe with any
//! name.

use std::collections::BTreeSet;

use sha2::{Digest, Sha256};

use super::sheet_cases::{cases, every_case, hostile};

/// Name, attributes, whether it closes.
type Element = (String, Vec<(String, String)>, bool);

/// Elements of HTML or SVG in order: name, attributes, whether it closes. Fails on what is not
/// well formed: a stray `<`, an attribute without quotes, an unknown entity.
fn elements(text: &str) -> Vec<Element> {
    let mut out = Vec::new();
    let mut rest = text;
    while let Some(at) = rest.find('<') {
        for entity in rest[..at].split('&').skip(1) {
            let name = entity.split(';').next().unwrap_or("");
            let known = ["amp", "lt", "gt", "quot", "#39"].contains(&name);
            assert!(known, "entity `&{}`", entity.chars().take(12).collect::<String>());
        }
        rest = &rest[at + 1..];
        if let Some(after) = rest.strip_prefix("style>") {
            let end = after.find("</style>").expect("the style block ends");
            out.push(("style".into(), Vec::new(), false));
            out.push(("style".into(), Vec::new(), true));
            rest = &after[end + 8..];
            continue;
        }
        let end = rest.find('>').expect("every tag ends");
        let tag = &rest[..end];
        rest = &rest[end + 1..];
        if tag.starts_with("!DOCTYPE") {
            continue;
        }
        let closes = tag.starts_with('/');
        let body = tag.trim_start_matches('/').trim_end_matches('/');
        let (name, mut attributes_text) = body.split_once([' ', '\n']).unwrap_or((body, ""));
        assert!(name.chars().all(|c| c.is_ascii_alphanumeric()) && !name.is_empty(), "tag `{tag}`");
        let mut attributes = Vec::new();
        while let Some((key, value)) = attributes_text.trim_start().split_once("=\"") {
            let (value, after) = value.split_once('"').expect("quoted");
            assert!(!key.contains(['"', '<', '\'']), "attribute `{key}` of `{tag}`");
            attributes.push((key.to_string(), value.to_string()));
            attributes_text = after;
        }
        assert!(attributes_text.trim().is_empty(), "`{attributes_text}` in `{tag}`");
        let empty = tag.ends_with('/') || ["meta", "br", "img"].contains(&name);
        out.push((name.to_string(), attributes, closes));
        if empty && !closes {
            out.push((name.to_string(), Vec::new(), true));
        }
    }
    out
}

fn assert_balanced(what: &str, text: &str) {
    let mut open: Vec<String> = Vec::new();
    for (name, _, closes) in elements(text) {
        if closes {
            assert_eq!(open.pop().as_deref(), Some(name.as_str()), "{what}");
        } else {
            open.push(name);
        }
    }
    assert!(open.is_empty(), "{what}: {open:?} stay open");
}

#[test]
fn every_page_and_figure_is_well_formed() {
    for case in every_case() {
        for file in case.files.iter().filter(|f| f.name.ends_with(".html") || f.name.ends_with(".svg")) {
            let text = String::from_utf8(file.bytes.clone()).expect("UTF-8");
            assert_balanced(&format!("{} of {}", file.name, case.name), &text);
        }
    }
}

#[test]
fn nothing_is_fetched_and_nothing_runs() {
    for case in every_case() {
        let html = case.text("sheet.html");
        for (name, attributes, _) in elements(&html) {
            assert!(
                !["script", "link", "iframe", "object", "embed", "img", "base", "form"]
                    .contains(&name.as_str())
            );
            for (key, value) in attributes {
                assert!(!key.starts_with("on") && key != "style" && key != "src", "{name} {key}");
                assert!(key != "href" || value.starts_with('#'), "{value}");
            }
        }
        assert!(!html.contains("url(") && !html.contains("@import"), "{}", case.name);
        for file in case.files.iter().filter(|f| f.name.ends_with(".svg")) {
            let text = String::from_utf8_lossy(&file.bytes).into_owned();
            for banned in ["<script", "<image", "<use", "href", "url(", "@import", "var(", "<pattern"] {
                assert!(!text.contains(banned), "{banned} in {}", file.name);
            }
        }
    }
}

/// RFC 4648.
fn from_base64(text: &str) -> Vec<u8> {
    let value = |c: u8| match c {
        b'A'..=b'Z' => c - b'A',
        b'a'..=b'z' => c - b'a' + 26,
        b'0'..=b'9' => c - b'0' + 52,
        b'+' => 62,
        _ => 63,
    };
    let mut out = Vec::new();
    for four in text.trim_end_matches('=').as_bytes().chunks(4) {
        let word =
            four.iter().fold(0u32, |word, c| word << 6 | u32::from(value(*c))) << (6 * (4 - four.len()));
        out.extend(&word.to_be_bytes()[1..four.len()]);
    }
    out
}

/// Content Security Policy Level 3, 6.7.2.3: the hash is of the style element's whole text.
#[test]
fn the_policy_admits_the_style_block_and_nothing_else() {
    for case in every_case() {
        let html = case.text("sheet.html");
        let policy =
            html.split("http-equiv=\"Content-Security-Policy\" content=\"").nth(1).expect("a policy");
        let policy = policy.split('"').next().expect("quoted");
        assert!(policy.starts_with("default-src 'none'; style-src 'sha256-"), "{policy}");
        assert!(!policy.contains("unsafe"));
        let hash = policy.split("sha256-").nth(1).and_then(|rest| rest.split('\'').next()).expect("a hash");
        let style =
            html.split("<style>").nth(1).and_then(|rest| rest.split("</style>").next()).expect("a style");
        assert_eq!(from_base64(hash), Sha256::digest(style.as_bytes()).to_vec(), "{}", case.name);
        assert_eq!(html.matches("<style").count(), 1);
    }
}

#[test]
fn every_figure_has_a_name_a_description_and_its_numbers() {
    for case in every_case() {
        let html = case.text("sheet.html");
        let mut ids = BTreeSet::new();
        for (name, attributes, _) in elements(&html) {
            let get = |key: &str| attributes.iter().find(|(k, _)| k == key).map(|(_, v)| v.as_str());
            if let Some(id) = get("id") {
                assert!(ids.insert(id.to_string()), "two of id `{id}` in {}", case.name);
            }
            if name == "svg" && get("aria-hidden").is_none() && !attributes.is_empty() {
                assert_eq!(get("role"), Some("img"));
                let named: Vec<&str> = get("aria-labelledby").expect("labelled").split(' ').collect();
                assert_eq!(named.len(), 2);
                for id in named {
                    assert!(html.contains(&format!(" id=\"{id}\">")), "{id}");
                }
            }
            if name == "th" && !attributes.is_empty() {
                assert!(get("scope").is_some(), "a heading without scope in {}", case.name);
            }
        }
        for figure in case.sheet().figures() {
            assert!(!figure.title.is_empty() && figure.desc.len() > 40, "{}", figure.title);
            assert!(figure.data.groups.iter().any(|g| !g.rows.is_empty()), "{} has no table", figure.title);
            assert!(html.contains(&format!("<summary>Fig. {} as a table</summary>", figure.number)));
        }
        assert_eq!(html.matches("<table").count(), html.matches("<caption>").count());
    }
}

#[test]
fn headings_stand_in_order_and_sections_too() {
    for case in every_case() {
        let html = case.text("sheet.html");
        let levels: Vec<u32> = elements(&html)
            .into_iter()
            .filter(|(name, _, closes)| !closes && name.len() == 2 && name.starts_with('h'))
            .filter_map(|(name, _, _)| name[1..].parse().ok())
            .collect();
        assert_eq!(levels.first(), Some(&1));
        assert_eq!(levels.iter().filter(|level| **level == 1).count(), 1);
        assert!(levels.windows(2).all(|pair| pair[1] <= pair[0] + 1), "{levels:?}");
        let wanted = [
            "verdict",
            "figures",
            "stack",
            "findings",
            "layers",
            "light",
            "curves",
            "ledger",
            "conditions",
            "models",
            "cautions",
            "sources",
            "signed",
        ];
        let places: Vec<usize> = wanted
            .iter()
            .map(|id| {
                html.find(&format!("<section id=\"{id}\""))
                    .unwrap_or_else(|| panic!("no {id} in {}", case.name))
            })
            .collect();
        assert!(places.is_sorted(), "{places:?}");
    }
}

#[test]
fn hostile_names_are_words_everywhere() {
    for case in cases("a<b>|`c`.stack", &hostile()) {
        for file in &case.files {
            let text = String::from_utf8(file.bytes.clone()).expect("UTF-8");
            if file.name.ends_with(".json") || file.name.ends_with(".csv") {
                continue;
            }
            for banned in ["<script", "<img", "<b>|", "</style><", "\u{202e}", "\u{2066}"] {
                assert!(!text.contains(banned), "{banned} in {}", file.name);
            }
            if file.name == "sheet.md" {
                // Every row of a table has as many cells as its head.
                let mut width = None;
                for line in text.lines() {
                    if !line.starts_with('|') {
                        width = None;
                        continue;
                    }
                    let bars = line.replace("\\|", "").matches('|').count();
                    assert_eq!(*width.get_or_insert(bars), bars, "{line}");
                }
                assert!(
                    !text.contains("**bold**")
                        && !text.contains("[a](b)")
                        && !text.contains("https://example")
                        && !text.contains(" @all")
                );
            }
        }
    }
}
