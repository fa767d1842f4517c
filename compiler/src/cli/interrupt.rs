//! Ctrl-C and requests to terminate: files in the making are taken away before the process ends.

use std::collections::BTreeSet;
use std::fs;
use std::path::{Path, PathBuf};
use std::sync::{Mutex, MutexGuard, Once, PoisonError};

/// Status of a process that an interrupt ended, by convention 128 and the number of SIGINT.
const INTERRUPTED: i32 = 130;

/// Files that are not complete yet.
static PARTIAL: Mutex<BTreeSet<PathBuf>> = Mutex::new(BTreeSet::new());

static HANDLER: Once = Once::new();

/// The files in the making; while they are held an interrupt waits.
pub(super) struct Partial(MutexGuard<'static, BTreeSet<PathBuf>>);

/// Holds the files in the making, from the first time on with an eye on interrupts.
pub(super) fn partial() -> Partial {
    HANDLER.call_once(|| {
        // Where no handler can be set the files are whole all the same; one in the making may stay.
        let _ = ctrlc::set_handler(|| {
            let files = partial();
            for path in files.0.iter() {
                let _ = fs::remove_file(path);
            }
            std::process::exit(INTERRUPTED);
        });
    });
    Partial(PARTIAL.lock().unwrap_or_else(PoisonError::into_inner))
}

impl Partial {
    /// Adds a file.
    pub(super) fn add(&mut self, path: &Path) {
        self.0.insert(path.to_owned());
    }

    /// Forgets a file: it has its name, or is gone.
    pub(super) fn forget(&mut self, path: &Path) {
        self.0.remove(path);
    }
}
