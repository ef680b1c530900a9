//! What a build read, with a mark of each content, so that a change is a change of content.

use std::collections::{BTreeMap, BTreeSet};
use std::hash::{DefaultHasher, Hash, Hasher};
use std::io::Read;
use std::path::{Path, PathBuf};

use crate::world::{World, plain};

/// A path's content, told apart from any other.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Mark {
    /// Nothing there, or nothing that can be read.
    Away,
    /// A file: its length and a hash of its bytes.
    File(u64, u64),
    /// A folder: a hash of the names of the stack files in it.
    Folder(u64),
}

/// The most that is hashed of one file, bytes: what is larger is not read by a build either.
const LIMIT: u64 = 64 * 1024 * 1024;

impl Mark {
    /// The mark of what lies at `path` now.
    pub fn now(path: &Path) -> Self {
        if path.is_dir() {
            return Self::Folder(listing(path));
        }
        let mut bytes = Vec::new();
        match std::fs::File::open(path).and_then(|file| file.take(LIMIT).read_to_end(&mut bytes)) {
            Ok(_) => Self::of(&bytes),
            Err(_) => Self::Away,
        }
    }

    /// The mark of a file with these bytes.
    pub fn of(bytes: &[u8]) -> Self {
        let mut hasher = DefaultHasher::new();
        bytes.hash(&mut hasher);
        Self::File(bytes.len() as u64, hasher.finish())
    }
}

/// The stack files right in a folder, sorted.
pub(crate) fn stacks_in(folder: &Path) -> Vec<PathBuf> {
    let entries = std::fs::read_dir(folder).into_iter().flatten();
    let paths = entries.filter_map(|entry| Some(entry.ok()?.path()));
    let stacks: BTreeSet<PathBuf> =
        paths.filter(|path| path.extension().is_some_and(|e| e == "stack") && !path.is_dir()).collect();
    stacks.into_iter().collect()
}

fn listing(folder: &Path) -> u64 {
    let mut hasher = DefaultHasher::new();
    stacks_in(folder).hash(&mut hasher);
    hasher.finish()
}

/// Every path a build asked for, with the mark of what it got.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Seen {
    marks: BTreeMap<PathBuf, Mark>,
}

impl Seen {
    /// Adds `path` with what lies there now.
    pub fn look(&mut self, path: PathBuf) {
        let mark = Mark::now(&path);
        self.marks.insert(plain(&path), mark);
    }

    /// Adds everything `world` was asked for, with the text it gave: not what lies there now,
    /// which may have changed since.
    pub fn add(&mut self, world: &dyn World) {
        for path in world.asked() {
            match world.text(&path) {
                Ok(text) => {
                    self.marks.insert(plain(&path), Mark::of(text.as_bytes()));
                }
                // What could not be read as text is marked by its bytes, whatever they are.
                Err(_) => self.look(path),
            }
        }
    }

    /// Whether anything is different now.
    pub fn changed(&self) -> bool {
        self.marks.iter().any(|(path, mark)| Mark::now(path) != *mark)
    }

    /// Whether a file that had content is empty or away.
    pub fn half_saved(&self) -> bool {
        self.marks.iter().any(|(path, mark)| {
            matches!(mark, Mark::File(length, _) if *length > 0)
                && matches!(Mark::now(path), Mark::Away | Mark::File(0, _))
        })
    }

    /// Whether an event at `path`, as the system names it, may concern a file seen.
    pub fn concerns(&self, path: &Path) -> bool {
        let Some(name) = path.file_name() else { return true };
        self.marks.keys().any(|seen| {
            seen.file_name() == Some(name)
                || seen.iter().any(|part| part == name)
                || (path.extension().is_some_and(|e| e == "stack") && seen.is_dir())
        })
    }

    /// The folders to watch: each file's own, and where a link leads; a folder that is not there
    /// is watched for by the nearest one above it.
    pub fn folders(&self) -> BTreeSet<PathBuf> {
        let mut folders = BTreeSet::new();
        for path in self.marks.keys() {
            if path.is_dir() {
                folders.extend(path.canonicalize().ok());
            }
            folders.extend(path.ancestors().skip(1).find_map(existing));
            if let Ok(real) = path.canonicalize() {
                folders.extend(real.parent().map(Path::to_path_buf));
            }
        }
        folders
    }
}

fn existing(folder: &Path) -> Option<PathBuf> {
    let folder = if folder.as_os_str().is_empty() { Path::new(".") } else { folder };
    folder.canonicalize().ok().filter(|folder| folder.is_dir())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::world::disk::Disk;

    #[expect(clippy::disallowed_methods, reason = "a test prepares its files")]
    fn write(path: &Path, text: &str) {
        std::fs::write(path, text).expect("file");
    }

    #[test]
    fn a_change_is_a_change_of_content() {
        let folder = tempfile::tempdir().expect("temporary folder");
        let (here, gone) = (folder.path().join("a.stack"), folder.path().join("sub/b.stack"));
        write(&here, "one");
        let disk = Disk::below(folder.path());
        let _ = (disk.text(&here), disk.text(&gone));
        let mut seen = Seen::default();
        seen.add(&disk);
        assert!(!seen.changed());
        write(&here, "one");
        assert!(!seen.changed(), "the same bytes again");
        write(&here, "");
        assert!(seen.changed() && seen.half_saved());
        write(&here, "one");
        std::fs::create_dir(folder.path().join("sub")).expect("folder");
        assert!(!seen.changed());
        write(&gone, "now");
        assert!(seen.changed() && !seen.half_saved(), "what was missing has come");
    }

    #[test]
    fn what_was_read_counts_not_what_lies_there_since() {
        let folder = tempfile::tempdir().expect("temporary folder");
        let path = folder.path().join("a.stack");
        write(&path, "one");
        let disk = Disk::below(folder.path());
        let _ = disk.text(&path);
        write(&path, "two");
        let mut seen = Seen::default();
        seen.add(&disk);
        assert!(seen.changed());
    }

    #[test]
    fn folders_of_missing_files_are_watched_from_above() {
        let folder = tempfile::tempdir().expect("temporary folder");
        let root = folder.path().canonicalize().expect("exists");
        let mut seen = Seen::default();
        seen.look(root.join("not/there/a.stack"));
        assert_eq!(seen.folders(), BTreeSet::from([root.clone()]));
        assert!(seen.concerns(&root.join("not")), "the first folder on the way to it");
        assert!(!seen.concerns(&root.join("sheet.html")));
    }
}
