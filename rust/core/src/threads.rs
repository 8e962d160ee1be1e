//! Our own pool of threads.
//!
//! Never the global pool, which belongs to the user; and one pool for each process, since threads do not survive
//! a fork: a child finds no pool under its own process id and makes a new one.

use rayon::prelude::*;
use std::collections::HashMap;
use std::sync::atomic::{AtomicUsize, Ordering};
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

/// What `work` makes of every task, in the order of the tasks; the most costly ones are begun first, and whichever
/// thread of the current pool is free takes the next.
///
/// # Errors
/// The first of the order of tasks that `work` returned.
pub fn costly_first<T: Sync, R: Send, E: Send>(
    tasks: &[T],
    cost: impl Fn(&T) -> usize,
    work: impl Fn(&T) -> Result<R, E> + Sync,
) -> Result<Vec<R>, E> {
    let mut order: Vec<usize> = (0..tasks.len()).collect();
    order.sort_by_key(|&index| std::cmp::Reverse(cost(&tasks[index])));
    let next = AtomicUsize::new(0);
    let take = || order.get(next.fetch_add(1, Ordering::Relaxed)).copied();
    let workers = rayon::current_num_threads().min(tasks.len());
    let mut done: Vec<(usize, Result<R, E>)> = (0..workers)
        .into_par_iter()
        .with_max_len(1)
        .flat_map_iter(|_| std::iter::from_fn(take).map(|index| (index, work(&tasks[index]))).collect::<Vec<_>>())
        .collect();
    done.sort_by_key(|(index, _)| *index);
    done.into_iter().map(|(_, result)| result).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn results_keep_the_order_of_the_tasks() {
        let tasks: Vec<usize> = (0..50).collect();
        let made = within(2, || costly_first(&tasks, |task| task * 7919 % 13, |task| Ok::<_, ()>(task * task)));
        assert_eq!(made.unwrap(), tasks.iter().map(|task| task * task).collect::<Vec<_>>());
        let refused =
            within(2, || costly_first(&tasks, |task| *task, |&task| if task > 20 { Err(task) } else { Ok(()) }));
        assert_eq!(refused.unwrap_err(), 21);
    }
}
