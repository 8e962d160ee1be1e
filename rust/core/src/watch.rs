//! What long work asks between two pieces: shall I stop? And what it tells: how far it is.

use crate::error::{Error, Result};
use std::sync::atomic::{AtomicUsize, Ordering};

/// Somebody who watches long work. The core has no signal handling of its own.
pub trait Watch: Sync {
    /// Whether the work should stop.
    fn stop(&self) -> bool {
        false
    }

    /// Told that `done` of `total` pieces are finished; may be called from any thread.
    fn progress(&self, _done: usize, _total: usize) {}

    /// [`Error::Interrupted`] where the work should stop.
    ///
    /// # Errors
    /// [`Error::Interrupted`].
    fn check(&self) -> Result<()> {
        if self.stop() { Err(Error::Interrupted) } else { Ok(()) }
    }
}

/// Nobody watches.
pub struct Unwatched;

impl Watch for Unwatched {}

/// A part of some work: of `parts` equal parts this is number `part`.
pub struct Stage<'a> {
    whole: &'a dyn Watch,
    part: usize,
    parts: usize,
    done: AtomicUsize,
}

/// Progress is told in this many pieces.
const PIECES: usize = 1000;

impl<'a> Stage<'a> {
    /// Part `part` of `parts`.
    pub fn new(whole: &'a dyn Watch, part: usize, parts: usize) -> Self {
        Self { whole, part, parts, done: AtomicUsize::new(0) }
    }

    /// Told that one of `total` pieces is finished.
    pub fn one_of(&self, total: usize) {
        self.progress(self.done.fetch_add(1, Ordering::Relaxed) + 1, total);
    }
}

impl Watch for Stage<'_> {
    fn stop(&self) -> bool {
        self.whole.stop()
    }

    fn progress(&self, done: usize, total: usize) {
        self.whole.progress((self.part * PIECES + done * PIECES / total.max(1)) / self.parts, PIECES);
    }
}
