//! The system's file events, reduced to a bell: something at this path.

use std::collections::BTreeSet;
use std::path::{Path, PathBuf};
use std::sync::mpsc::{Receiver, RecvTimeoutError, channel};
use std::time::{Duration, Instant};

use notify::{Event, EventKind, RecommendedWatcher, RecursiveMode, Watcher};

/// Rings when something happens in the folders listened to.
pub(super) struct Bell {
    watcher: Option<RecommendedWatcher>,
    events: Receiver<notify::Result<Event>>,
    listening: BTreeSet<PathBuf>,
    trouble: Option<String>,
}

impl Bell {
    /// With `poll` nothing rings, and waiting is only waiting.
    pub(super) fn new(poll: Option<Duration>) -> Self {
        let (sender, events) = channel();
        let made = match poll {
            Some(_) => Ok(None),
            None => notify::recommended_watcher(move |event| {
                // The loop has ended where nobody receives.
                let _ = sender.send(event);
            })
            .map(Some),
        };
        let (watcher, trouble) = match made {
            Ok(watcher) => (watcher, None),
            Err(why) => (None, Some(why.to_string())),
        };
        Self { watcher, events, listening: BTreeSet::new(), trouble }
    }

    /// Why there are no events, if there are none.
    pub(super) fn trouble(&self) -> Option<&str> {
        self.trouble.as_deref()
    }

    /// Listens to exactly these folders, not to those below them.
    pub(super) fn listen(&mut self, folders: &BTreeSet<PathBuf>) {
        let Some(watcher) = &mut self.watcher else { return };
        for gone in self.listening.difference(folders) {
            // A folder that was removed is no longer listened to anyway.
            let _ = watcher.unwatch(gone);
        }
        let mut listening = BTreeSet::new();
        for folder in folders {
            // One removed and made again has to be listened to anew: it is asked for every time.
            // Where that fails, the slow look finds the change.
            if watcher.watch(folder, RecursiveMode::NonRecursive).is_ok() {
                listening.insert(folder.clone());
            }
        }
        self.listening = listening;
    }

    /// Waits for a ring, at most `most`.
    pub(super) fn wait(&self, most: Duration, concerns: impl Fn(&Path) -> bool) {
        self.rings_within(most, concerns);
    }

    /// Whether it rings for a path that `concerns` within `time`.
    pub(super) fn rings_within(&self, time: Duration, concerns: impl Fn(&Path) -> bool) -> bool {
        let end = Instant::now() + time;
        loop {
            let left = end.saturating_duration_since(Instant::now());
            match self.events.recv_timeout(left) {
                Ok(event) if rings(&event, &concerns) => return true,
                Ok(_) => {}
                Err(RecvTimeoutError::Timeout) => return false,
                Err(RecvTimeoutError::Disconnected) => {
                    std::thread::sleep(left);
                    return false;
                }
            }
        }
    }
}

fn rings(event: &notify::Result<Event>, concerns: &impl Fn(&Path) -> bool) -> bool {
    match event {
        // A build reads its files: those events would feed the loop with itself.
        Ok(event) if matches!(event.kind, EventKind::Access(_)) => false,
        Ok(event) => event.paths.is_empty() || event.paths.iter().any(|path| concerns(path)),
        // Events were lost: look.
        Err(_) => true,
    }
}
