//! Files a stack names: always relative to the file that names them, never outside the project.

use std::path::Path;

use crate::finding::Finding;
use crate::resolve::quantities::Scope;
use crate::source::{SourceId, Sources, Spanned};
use crate::world::{ReadError, World, plain};

/// The way to other files.
pub struct Files<'a> {
    world: &'a dyn World,
    /// Every text read so far.
    pub sources: &'a mut Sources,
}

impl<'a> Files<'a> {
    /// Files as `world` gives them.
    pub fn new(world: &'a dyn World, sources: &'a mut Sources) -> Self {
        Self { world, sources }
    }

    /// The path of a file as seen from the folder of the first one.
    pub fn shown(&self, id: SourceId) -> String {
        let first = self.sources.iter().next().and_then(|source| source.path.parent());
        let path = &self.sources.get(id).path;
        let path = first.and_then(|folder| path.strip_prefix(folder).ok()).unwrap_or(path);
        crate::source::shown(path)
    }

    /// The text named by `path` in the file `from`; read once however often it is named.
    ///
    /// `what` is what people call the file: `file`, `spectrum`, `index table`. `None` where it
    /// cannot be had, which is reported.
    pub fn read(
        &mut self,
        scope: &mut Scope,
        from: SourceId,
        path: &Spanned<String>,
        what: &str,
    ) -> Option<SourceId> {
        let written = path.value.as_str();
        if written.trim().is_empty() {
            scope.report(
                Finding::error("use.missing", format!("the name of the {what} is empty"))
                    .at(path.span, "empty")
                    .help(format!("write the path of the {what}, such as `\"parts/tunnels.stack\"`")),
            );
            return None;
        }
        let folder = self.sources.get(from).path.parent().map(Path::to_path_buf).unwrap_or_default();
        let joined = plain(&folder.join(written.replace('\\', "/")));
        if Path::new(written).is_absolute() || written.starts_with(['/', '\\']) {
            scope.report(outside(path, what));
            return None;
        }
        if let Some(known) = self.sources.by_path(&joined) {
            return Some(known.id);
        }
        match self.world.text(&joined) {
            Ok(text) => Some(self.sources.add(joined, &text)),
            Err(ReadError::Outside) => {
                scope.report(outside(path, what));
                None
            }
            Err(error) => {
                scope.report(unreadable(path, what, &error));
                None
            }
        }
    }
}

fn outside(path: &Spanned<String>, what: &str) -> Finding {
    Finding::error("use.outside", format!("`{}` lies outside the project", path.value))
        .at(path.span, format!("a {what} outside the project"))
        .help(format!(
            "copy the {what} into the project and name it relative to this file, such as `\"parts/{}\"`",
            file_name(&path.value)
        ))
}

fn file_name(path: &str) -> &str {
    path.rsplit(['/', '\\'])
        .next()
        .filter(|name| !name.is_empty() && *name != "..")
        .unwrap_or("tunnels.stack")
}

/// A finding for a file that cannot be had.
pub fn unreadable(path: &Spanned<String>, what: &str, error: &ReadError) -> Finding {
    let name = &path.value;
    match error {
        ReadError::Missing => Finding::error("use.missing", format!("there is no {what} `{name}`"))
            .at(path.span, "no such file")
            .help("write the path relative to this file, with forward slashes"),
        ReadError::Directory => Finding::error("use.missing", format!("`{name}` is a folder"))
            .at(path.span, format!("a folder, not a {what}"))
            .help(format!("name one file in it, such as `\"{}/tunnels.stack\"`", name.trim_end_matches('/'))),
        ReadError::Outside => outside(path, what),
        ReadError::TooLarge { size, limit } => {
            Finding::error("use.missing", format!("`{name}` has {size} bytes, and {limit} are read at most"))
                .at(path.span, "too large")
                .help("split it into smaller files")
        }
        ReadError::NotUtf8 { at } => {
            Finding::error("use.missing", format!("`{name}` is not UTF-8 text: byte {at} cannot be read"))
                .at(path.span, "not UTF-8")
                .help("save it as UTF-8")
        }
        ReadError::Other(words) => Finding::error("use.missing", format!("`{name}` cannot be read: {words}"))
            .at(path.span, "cannot be read")
            .help("make the file readable for you"),
    }
}
