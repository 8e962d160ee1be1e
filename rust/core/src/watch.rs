//! What long work asks between two pieces: shall I stop? And what it tells: how far it is.

use crate::error::{Error, Result};

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
