//! The only way to run the core: GIL released, Ctrl-C polled, progress told, panics caught.

use crate::errors::{exception, internal};
use pyo3::prelude::*;
use scalewright_core::error::Result as CoreResult;
use scalewright_core::threads::within;
use scalewright_core::watch::Watch;
use std::sync::atomic::{AtomicBool, AtomicUsize, Ordering};
use std::sync::mpsc::{RecvTimeoutError, channel};
use std::time::Duration;

/// How often Python's signals are looked at.
const POLL: Duration = Duration::from_millis(40);

/// What the working threads and the waiting one tell each other.
#[derive(Default)]
struct Shared {
    stop: AtomicBool,
    done: AtomicUsize,
    total: AtomicUsize,
}

impl Watch for Shared {
    fn stop(&self) -> bool {
        self.stop.load(Ordering::Relaxed)
    }

    fn progress(&self, done: usize, total: usize) {
        self.done.store(done, Ordering::Relaxed);
        self.total.store(total, Ordering::Relaxed);
    }
}

/// Runs `work` on `threads` threads (0: all) while this thread looks after signals and progress.
pub fn run<R: Send>(
    py: Python<'_>,
    threads: usize,
    progress: Option<&Py<PyAny>>,
    work: impl FnOnce(&dyn Watch) -> CoreResult<R> + Send,
) -> PyResult<R> {
    let shared = Shared::default();
    let mut interrupted: Option<PyErr> = None;
    let outcome = py.detach(|| {
        std::thread::scope(|scope| {
            let (finished, wait) = channel::<()>();
            let watch = &shared;
            let worker = scope.spawn(move || {
                // Dropped on return and on panic: either wakes the waiting thread.
                let _finished = finished;
                within(threads, || work(watch))
            });
            while matches!(wait.recv_timeout(POLL), Err(RecvTimeoutError::Timeout)) {
                if let Err(error) = Python::attach(|py| look_after(py, &shared, progress)) {
                    shared.stop.store(true, Ordering::Relaxed);
                    interrupted.get_or_insert(error);
                }
            }
            worker.join()
        })
    });
    if let Some(error) = interrupted {
        return Err(error);
    }
    match outcome {
        Ok(Ok(value)) => {
            if let Some(progress) = progress {
                let total = shared.total.load(Ordering::Relaxed);
                progress.call1(py, (total, total))?;
            }
            Ok(value)
        }
        Ok(Err(error)) => Err(exception(py, &error)),
        Err(panic) => {
            let message = panic.downcast_ref::<String>().map(String::as_str);
            let message = message.or_else(|| panic.downcast_ref::<&str>().copied()).unwrap_or("unknown");
            Err(internal(py, message))
        }
    }
}

fn look_after(py: Python<'_>, shared: &Shared, progress: Option<&Py<PyAny>>) -> PyResult<()> {
    py.check_signals()?;
    if let Some(progress) = progress {
        progress.call1(py, (shared.done.load(Ordering::Relaxed), shared.total.load(Ordering::Relaxed)))?;
    }
    Ok(())
}
