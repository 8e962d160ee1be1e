//! Something computed once for each grid and kept for the life of the process.

use crate::error::Result;
use crate::grid::Grid;
use std::collections::HashMap;
use std::sync::{Arc, Mutex, OnceLock, PoisonError};

/// Edges bit by bit, and degrees.
type Key = (Vec<u64>, Vec<usize>);

/// Values by grid.
pub(super) struct Kept<T>(OnceLock<Mutex<HashMap<Key, Arc<T>>>>);

impl<T> Kept<T> {
    /// Nothing yet.
    pub const fn new() -> Self {
        Self(OnceLock::new())
    }

    /// The value of a grid, computed the first time an equal grid asks.
    pub fn of(&self, grid: &Grid, compute: impl FnOnce() -> Result<T>) -> Result<Arc<T>> {
        let key = (grid.edges().iter().map(|edge| edge.to_bits()).collect(), grid.degrees().to_vec());
        let values = self.0.get_or_init(Mutex::default);
        if let Some(value) = values.lock().unwrap_or_else(PoisonError::into_inner).get(&key) {
            return Ok(Arc::clone(value));
        }
        // Computed outside the lock: two threads that ask at once may both compute, and get the same bits.
        let value = Arc::new(compute()?);
        values.lock().unwrap_or_else(PoisonError::into_inner).insert(key, Arc::clone(&value));
        Ok(value)
    }
}
