//! Our own pool of threads.
//!
//! Never the global pool, which belongs to the user; and one pool for each process, since threads do not survive
//! a fork: a child finds no pool under its own process id and makes a new one.

use std::collections::HashMap;
use std::sync::{Arc, Mutex, OnceLock, PoisonError};

type Pools = Mutex<HashMap<(u32, usize), Arc<rayon::ThreadPool>>>;

/// Runs `work` with `threads` threads (0: as many as the machine offers); parallel iterators inside use them.
///
/// Where the system refuses new threads, the work runs on the threads of the caller's pool.
pub fn within<R: Send>(threads: usize, work: impl FnOnce() -> R + Send) -> R {
    static POOLS: OnceLock<Pools> = OnceLock::new();
    let threads = match threads {
        0 => std::thread::available_parallelism().map_or(1, std::num::NonZero::get),
        some => some,
    };
    let key = (std::process::id(), threads);
    let pool = {
        let mut pools = POOLS.get_or_init(Pools::default).lock().unwrap_or_else(PoisonError::into_inner);
        match pools.get(&key) {
            Some(pool) => Some(Arc::clone(pool)),
            None => rayon::ThreadPoolBuilder::new().num_threads(threads).build().ok().map(|pool| {
                let pool = Arc::new(pool);
                pools.insert(key, Arc::clone(&pool));
                pool
            }),
        }
    };
    match pool {
        Some(pool) => pool.install(work),
        None => work(),
    }
}
