//! Build, then again at every save.
//!
//! What is watched is what the last build asked for, found or missing, by folder: editors save
//! by renaming, truncating or deleting, and a watch on a file would follow the old one. Events
//! only wake the loop; whether to build is decided by the content.

use std::panic::{AssertUnwindSafe, catch_unwind};
use std::time::{Duration, Instant};

mod bell;
mod seen;

use bell::Bell;
pub(crate) use seen::stacks_in;
pub use seen::{Mark, Seen};

/// How to watch.
#[derive(Clone, Copy, Debug)]
pub struct Rhythm {
    /// Look at the files this often instead of waiting for the system's events.
    pub poll: Option<Duration>,
    /// How long it has to be quiet before a build.
    pub quiet: Duration,
    /// How long noise may put a build off.
    pub patience: Duration,
}

impl Default for Rhythm {
    fn default() -> Self {
        Self { poll: None, quiet: Duration::from_millis(20), patience: Duration::from_millis(500) }
    }
}

/// How often the files are looked at where events should come, in case they do not (network and
/// container mounts).
const SLOW_LOOK: Duration = Duration::from_secs(1);
/// How long a file may be away or empty between two steps of a save.
const HALF_SAVED: Duration = Duration::from_millis(150);

/// Calls `build` at once and after every change of what it read. `build` returns what it read;
/// `tell` gets what the loop itself has to say. Ends when `build` returns `None`.
///
/// A build that panics is told and does not end the loop.
pub fn watch(rhythm: Rhythm, mut build: impl FnMut() -> Option<Seen>, mut tell: impl FnMut(&str)) {
    let mut bell = Bell::new(rhythm.poll);
    if let Some(why) = bell.trouble() {
        tell(&format!("the system's file events are not to be had ({why}); looking at the files instead"));
    }
    let mut seen = Seen::default();
    loop {
        match catch_unwind(AssertUnwindSafe(&mut build)) {
            Ok(Some(fresh)) => seen = fresh,
            Ok(None) => return,
            Err(_) => tell("the build broke off, which is a fault of bandloom; waiting for the next change"),
        }
        bell.listen(&seen.folders());
        // What changed while it was built is seen here, before the first wait. A file caught
        // between two steps of a save may be the same as before in the end.
        loop {
            while !seen.changed() {
                bell.wait(rhythm.poll.unwrap_or(SLOW_LOOK), |path| seen.concerns(path));
            }
            settle(&bell, &seen, rhythm);
            if seen.changed() {
                break;
            }
        }
    }
}

/// Waits until no event came for the quiet period, and a file that is empty or away has had time
/// to come back.
fn settle(bell: &Bell, seen: &Seen, rhythm: Rhythm) {
    let start = Instant::now();
    let calm = || {
        while start.elapsed() < rhythm.patience && bell.rings_within(rhythm.quiet, |path| seen.concerns(path))
        {
        }
    };
    calm();
    while start.elapsed() < HALF_SAVED && seen.half_saved() {
        bell.rings_within(rhythm.quiet, |path| seen.concerns(path));
        calm();
    }
}
