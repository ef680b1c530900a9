//! Files written: whole or not at all, and only where something changed.

use std::collections::BTreeSet;
use std::fs;
use std::io::{ErrorKind, Write};
use std::path::{Path, PathBuf};
use std::time::Duration;

/// What became of a file.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Wrote {
    /// It has new bytes.
    New,
    /// It had these bytes already and was not touched.
    Same,
}

/// A file or folder that could not be written.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct WriteError {
    pub(crate) path: PathBuf,
    pub(crate) message: String,
}

impl WriteError {
    fn new(path: &Path, why: &std::io::Error) -> Self {
        let message = match why.kind() {
            ErrorKind::PermissionDenied => "permission denied".to_owned(),
            ErrorKind::NotADirectory | ErrorKind::AlreadyExists => "a file is in the way".to_owned(),
            ErrorKind::IsADirectory => "a folder is in the way".to_owned(),
            ErrorKind::StorageFull => "the disk is full".to_owned(),
            ErrorKind::ReadOnlyFilesystem => "the disk is read-only".to_owned(),
            _ => why.to_string(),
        };
        Self { path: path.to_path_buf(), message }
    }
}

/// Writes `bytes` to `path` under a temporary name beside it, then renames: a reader sees the
/// old file or the new one, and an interrupted run leaves the old one.
///
/// # Errors
/// With the path that could not be written and why.
pub(crate) fn write(path: &Path, bytes: &[u8]) -> Result<Wrote, WriteError> {
    #[expect(clippy::disallowed_methods, reason = "compares an output file, which no World knows")]
    if fs::read(path).is_ok_and(|old| old == bytes) {
        return Ok(Wrote::Same);
    }
    let folder = path.parent().filter(|folder| !folder.as_os_str().is_empty());
    if let Some(folder) = folder {
        fs::create_dir_all(folder).map_err(|why| WriteError::new(folder, &why))?;
    }
    put(path, bytes, None)
}

/// As [`write`], for a file that is there: it keeps its permissions, and a link stays a link.
///
/// # Errors
/// With the path that could not be written and why.
pub(crate) fn replace(path: &Path, bytes: &[u8]) -> Result<Wrote, WriteError> {
    let told = |why: std::io::Error| WriteError::new(path, &why);
    let target = fs::canonicalize(path).map_err(told)?;
    let permissions = fs::metadata(&target).map_err(told)?.permissions();
    if permissions.readonly() {
        return Err(told(ErrorKind::PermissionDenied.into()));
    }
    put(&target, bytes, Some(permissions))
}

/// How old what an interrupted run left must be before it is removed: writing takes no such time,
/// so no other run is still at it.
const ABANDONED: Duration = Duration::from_secs(60);

/// Removes what interrupted runs left of `name` in `folder`.
fn sweep(folder: &Path, name: &str) {
    let Ok(entries) = fs::read_dir(folder) else { return };
    for entry in entries.flatten() {
        let found = entry.file_name().to_string_lossy().into_owned();
        let middle = found.strip_prefix(&format!(".{name}.")).and_then(|rest| rest.strip_suffix(".part"));
        let ours = middle.is_some_and(|id| !id.is_empty() && id.bytes().all(|byte| byte.is_ascii_digit()));
        let age = || entry.metadata().ok()?.modified().ok()?.elapsed().ok();
        if ours && age().is_some_and(|age| age > ABANDONED) {
            // What cannot be removed is no fault of this run.
            let _ = fs::remove_file(entry.path());
        }
    }
}

fn put(path: &Path, bytes: &[u8], permissions: Option<fs::Permissions>) -> Result<Wrote, WriteError> {
    let name = path.file_name().map(|name| name.to_string_lossy().into_owned()).unwrap_or_default();
    let folder = path.parent().filter(|folder| !folder.as_os_str().is_empty());
    sweep(folder.unwrap_or(Path::new(".")), &name);
    let temporary = path.with_file_name(format!(".{name}.{}.part", std::process::id()));
    let written = fs::File::create(&temporary)
        .and_then(|mut file| file.write_all(bytes))
        .and_then(|()| permissions.map_or(Ok(()), |it| fs::set_permissions(&temporary, it)))
        .and_then(|()| fs::rename(&temporary, path));
    written.map(|()| Wrote::New).map_err(|why| {
        // The first fault is the one to tell.
        let _ = fs::remove_file(&temporary);
        WriteError::new(path, &why)
    })
}

/// A folder name for a stack's name: small letters and digits of any script, everything else
/// one `-`; at most 60 characters; never empty, hidden, or a name that some system reserves.
pub fn slug(name: &str) -> String {
    const RESERVED: [&str; 6] = ["con", "prn", "aux", "nul", "com", "lpt"];
    let mut slug = String::new();
    for c in name.chars().flat_map(char::to_lowercase) {
        if c.is_alphanumeric() {
            slug.push(c);
        } else if !slug.is_empty() && !slug.ends_with('-') {
            slug.push('-');
        }
    }
    let slug: String = slug.chars().take(60).collect();
    let slug = slug.trim_end_matches('-');
    let stem = slug.trim_end_matches(|c: char| c.is_ascii_digit());
    match slug {
        "" => "stack".to_owned(),
        _ if RESERVED.contains(&stem) => format!("stack-{slug}"),
        _ => slug.to_owned(),
    }
}

/// Folder names of one run, each given once.
#[derive(Default)]
pub(crate) struct Slugs(BTreeSet<String>);

impl Slugs {
    /// [`slug`], with a number behind it where the name is taken.
    pub(crate) fn take(&mut self, name: &str) -> String {
        let first = slug(name);
        let numbered = (2..).map(|number| format!("{first}-{number}"));
        let free = std::iter::once(first.clone()).chain(numbered).find(|slug| !self.0.contains(slug));
        let free = free.unwrap_or(first);
        self.0.insert(free.clone());
        free
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_become_folders() {
        let rows = [
            ("Sandpiper 2J", "sandpiper-2j"),
            ("../../etc/passwd", "etc-passwd"),
            ("  .hidden. ", "hidden"),
            ("Größe µ", "größe-μ"),
            ("", "stack"),
            ("///", "stack"),
            ("CON", "stack-con"),
            ("com1", "stack-com1"),
            ("concrete", "concrete"),
            ("a\0b\n<script>", "a-b-script"),
        ];
        for (name, expected) in rows {
            // The micro sign is a letter of its own in Unicode and stays one.
            let expected = expected.replace('μ', "µ");
            assert_eq!(slug(name), expected, "{name:?}");
        }
        assert!(slug(&"long ".repeat(90)).chars().count() <= 60);
    }

    #[test]
    fn equal_names_get_folders_of_their_own() {
        let mut slugs = Slugs::default();
        let taken: Vec<_> = ["A b", "a-B", "a b 2", "a.b"].map(|name| slugs.take(name)).into();
        assert_eq!(taken, ["a-b", "a-b-2", "a-b-2-2", "a-b-3"]);
    }

    #[test]
    fn what_an_interrupted_run_left_is_removed() {
        let folder = tempfile::tempdir().expect("temporary folder");
        let make = |name: &str, seconds: u64| {
            let file = fs::File::create(folder.path().join(name)).expect("a file");
            let made = file.metadata().and_then(|facts| facts.modified()).expect("a time");
            let then = made - Duration::from_secs(seconds);
            file.set_modified(then).expect("a time");
        };
        make(".a.txt.4711.part", 3600);
        make(".a.txt.4712.part", 1);
        make(".b.txt.4711.part", 3600);
        make(".a.txt.notes.part", 3600);
        assert_eq!(write(&folder.path().join("a.txt"), b"one"), Ok(Wrote::New));
        let listing = fs::read_dir(folder.path()).expect("listing");
        let mut left: Vec<String> =
            listing.flatten().map(|entry| entry.file_name().to_string_lossy().into_owned()).collect();
        left.sort();
        assert_eq!(left, [".a.txt.4712.part", ".a.txt.notes.part", ".b.txt.4711.part", "a.txt"]);
    }

    #[test]
    fn a_file_is_replaced_whole_and_only_when_it_changed() {
        let folder = tempfile::tempdir().expect("temporary folder");
        let path = folder.path().join("deep/er/a.txt");
        assert_eq!(write(&path, b"one"), Ok(Wrote::New));
        assert_eq!(write(&path, b"one"), Ok(Wrote::Same));
        assert_eq!(write(&path, b"two"), Ok(Wrote::New));
        let left: Vec<_> = fs::read_dir(folder.path().join("deep/er")).expect("listing").collect();
        assert_eq!(left.len(), 1, "no temporary file stays");
        let blocked = write(&path.join("below.txt"), b"x");
        assert_eq!(blocked.map_err(|error| error.message), Err("a file is in the way".to_owned()));
    }
}
