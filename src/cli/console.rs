//! Standard output and standard error: what may be written, how wide, and in colour or not.

use std::io::{ErrorKind, IsTerminal, Write};

use clap::ValueEnum;

use crate::cli::Exit;
use crate::finding::render::{Look, PLAIN_WIDTH};

/// `--color`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub(crate) enum ColorWish {
    /// As the terminal and the environment say
    #[default]
    Auto,
    /// Always
    Always,
    /// Never
    Never,
}

/// One of the two streams.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Stream {
    /// Results.
    Out,
    /// Messages.
    Err,
}

/// The two streams and how to write to them.
pub(crate) struct Console {
    out: Look,
    err: Look,
}

/// The widest a report gets, columns: longer lines are hard to read.
const WIDEST: usize = 110;

impl Console {
    pub(crate) fn new(wish: ColorWish) -> Self {
        let out = std::io::stdout().is_terminal();
        let err = std::io::stderr().is_terminal();
        let width = |size: Option<(terminal_size::Width, terminal_size::Height)>| {
            size.map_or(PLAIN_WIDTH, |(width, _)| usize::from(width.0).clamp(40, WIDEST))
        };
        let wide = |terminal| if terminal { width(terminal_size::terminal_size()) } else { PLAIN_WIDTH };
        let look = |terminal| Look { color: colored(wish, terminal, &environment), width: wide(terminal) };
        Self { out: look(out), err: look(err) }
    }

    /// How a stream wants it.
    pub(crate) fn look(&self, stream: Stream) -> Look {
        match stream {
            Stream::Out => self.out,
            Stream::Err => self.err,
        }
    }

    /// Writes a result. A closed pipe is a reader that has seen enough, not trouble.
    pub(crate) fn result(&self, text: &str) -> Exit {
        self.bytes(text.as_bytes())
    }

    /// As [`Console::result`], for bytes.
    pub(crate) fn bytes(&self, bytes: &[u8]) -> Exit {
        let mut out = std::io::stdout().lock();
        match out.write_all(bytes).and_then(|()| out.flush()) {
            Err(why) if why.kind() != ErrorKind::BrokenPipe => {
                self.trouble(&format!("cannot write to standard output: {why}"), &[])
            }
            _ => Exit::Fine,
        }
    }

    /// Writes a message. Where even that fails there is nobody to tell.
    pub(crate) fn message(&self, text: &str) {
        let mut err = std::io::stderr().lock();
        let _ = err.write_all(text.as_bytes()).and_then(|()| err.flush());
    }

    /// Says what stopped the run, and the ways out.
    pub(crate) fn trouble(&self, text: &str, helps: &[&str]) -> Exit {
        let (on, off) = self.paint(Stream::Err, "\u{1b}[31m");
        let mut message = format!("{on}error:{off} {text}\n");
        let (on, off) = self.paint(Stream::Err, "\u{1b}[36m");
        for help in helps {
            message.push_str(&format!("  {on}help:{off} {help}\n"));
        }
        self.message(&message);
        Exit::Trouble
    }

    /// Escape sequences around a text, empty without colour.
    pub(crate) fn paint(&self, stream: Stream, on: &'static str) -> (&'static str, &'static str) {
        if self.look(stream).color { (on, "\u{1b}[0m") } else { ("", "") }
    }
}

#[expect(clippy::disallowed_methods, reason = "the one place where the environment is read")]
fn environment(name: &str) -> Option<String> {
    std::env::var_os(name).map(|value| value.to_string_lossy().into_owned())
}

/// The flag, then `NO_COLOR` (set and not empty), then `CLICOLOR_FORCE` (set and not `0`), then
/// `CLICOLOR=0` and `TERM=dumb`, then whether it is a terminal.
fn colored(wish: ColorWish, terminal: bool, get: &dyn Fn(&str) -> Option<String>) -> bool {
    let set = |name| get(name).filter(|value| !value.is_empty());
    match wish {
        ColorWish::Always => true,
        ColorWish::Never => false,
        ColorWish::Auto if set("NO_COLOR").is_some() => false,
        ColorWish::Auto if set("CLICOLOR_FORCE").is_some_and(|value| value != "0") => true,
        ColorWish::Auto => {
            terminal
                && set("CLICOLOR").is_none_or(|value| value != "0")
                && set("TERM").is_none_or(|value| value != "dumb")
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_flag_beats_the_environment_and_the_environment_the_terminal() {
        type Row = (ColorWish, bool, &'static [(&'static str, &'static str)], bool);
        let rows: &[Row] = &[
            (ColorWish::Auto, true, &[], true),
            (ColorWish::Auto, false, &[], false),
            (ColorWish::Auto, true, &[("NO_COLOR", "0")], false),
            (ColorWish::Auto, true, &[("NO_COLOR", "")], true),
            (ColorWish::Auto, false, &[("CLICOLOR_FORCE", "1")], true),
            (ColorWish::Auto, false, &[("CLICOLOR_FORCE", "0")], false),
            (ColorWish::Auto, true, &[("CLICOLOR_FORCE", "1"), ("NO_COLOR", "1")], false),
            (ColorWish::Auto, true, &[("TERM", "dumb")], false),
            (ColorWish::Auto, true, &[("CLICOLOR", "0")], false),
            (ColorWish::Always, false, &[("NO_COLOR", "1")], true),
            (ColorWish::Never, true, &[("CLICOLOR_FORCE", "1")], false),
        ];
        for (wish, terminal, set, expected) in rows {
            let get = |name: &str| set.iter().find(|(n, _)| *n == name).map(|(_, v)| (*v).to_owned());
            assert_eq!(colored(*wish, *terminal, &get), *expected, "{wish:?} {terminal} {set:?}");
        }
    }
}
