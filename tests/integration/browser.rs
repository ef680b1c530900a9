//! The sheets in a real browser: no text over text, nothing cut, nothing fetched.
//!
//! Needs Chromium. Without one the test says so and passes, unless `BANDLOOM_BROWSER=required`,
//! as in `.ci/run`.

use std::path::{Path, PathBuf};
use std::process::Command;

use super::tool::Place;

const WIDTHS: [u32; 3] = [390, 900, 1400];
const DEMOS: [&str; 3] = ["sandpiper", "kittiwake", "gap_limits"];

/// A page with one of each fault, to see that they are seen.
const PLANTED: &str = "<!DOCTYPE html><body style='margin:3px'><p style='width:3000px'>wide</p>\
    <svg role=img width=200 height=100><title>planted</title>\
    <text x=20 y=50>here</text><text x=22 y=52>there</text><text x=190 y=90>cut off</text></svg>";

fn chromium() -> Option<PathBuf> {
    let path = std::env::var_os("PATH")?;
    std::env::split_paths(&path)
        .flat_map(|folder| ["chromium", "chromium-browser"].map(|name| folder.join(name)))
        .find(|candidate| candidate.is_file())
}

/// Every `sheet.html` below a folder, by the name of its own folder.
fn sheets(folder: &Path) -> Vec<(String, String)> {
    let mut found: Vec<(String, String)> = std::fs::read_dir(folder)
        .expect("built")
        .map(|entry| entry.expect("readable").path())
        .map(|path| {
            let name = path.file_name().expect("named").to_string_lossy().into_owned();
            (name, std::fs::read_to_string(path.join("sheet.html")).expect("written"))
        })
        .collect();
    found.sort();
    found
}

/// JavaScript that can stand inside a `<script>`.
fn script(value: &impl serde::Serialize) -> String {
    serde_json::to_string(value).expect("plain").replace("</", "<\\/").replace("<!--", "<\\!--")
}

#[test]
fn sheets_hold_in_a_browser_at_every_width() {
    let Some(browser) = chromium() else {
        assert!(std::env::var_os("BANDLOOM_BROWSER").is_none(), "no Chromium on the path");
        eprintln!("not looked at: no Chromium on the path");
        return;
    };
    let place = Place::new();
    let stacks = Path::new(env!("CARGO_MANIFEST_DIR")).join("stacks");
    for demo in DEMOS {
        let file = stacks.join(format!("{demo}.stack")).to_string_lossy().into_owned();
        place.run(&["build", "--as", "html", "--into", "sheets", &file]).ends(0);
    }
    let mut sheets = sheets(&place.path("sheets"));
    sheets.push(("planted".into(), PLANTED.into()));
    let inspect = include_str!("../browser/inspect.js");
    let data = format!("const SHEETS = {}, WIDTHS = {};", script(&sheets), script(&WIDTHS));
    place.write(
        "frames.html",
        format!("<!DOCTYPE html><meta charset=utf-8><body><script>{data}\n{inspect}</script>"),
    );
    let shown = Command::new(browser)
        .args(["--headless", "--no-sandbox", "--disable-gpu", "--disable-background-networking"])
        .args(["--no-first-run", "--window-size=1600,1000", "--virtual-time-budget=60000", "--dump-dom"])
        .arg(format!("--user-data-dir={}", place.path("profile").display()))
        .arg(format!("file://{}", place.path("frames.html").display()))
        .output()
        .expect("starts");
    let shown = String::from_utf8_lossy(&shown.stdout);
    let lines = || shown.lines().map(|line| line.trim_start_matches("<pre id=\"out\">"));
    assert!(lines().any(|line| line == "DONE"), "the browser did not come to an end");
    let seen = lines().filter(|line| line.starts_with("SEEN ") && !line.ends_with(": 0 figures")).count();
    assert_eq!(seen, sheets.len() * WIDTHS.len(), "a sheet was not drawn");
    let wrong: Vec<&str> = lines().filter(|line| line.starts_with("WRONG ")).collect();
    let (planted, wrong): (Vec<&str>, Vec<&str>) =
        wrong.into_iter().partition(|line| line.starts_with("WRONG planted "));
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
    for fault in ["over \"there\"", "outside the figure", "wider than the page", "style block"] {
        assert!(planted.iter().any(|line| line.contains(fault)), "`{fault}` is not seen: {planted:?}");
    }
}
