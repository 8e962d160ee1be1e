"""A client of Dask as an engine: recognised by what it can do, so that nothing of Dask is imported.

Dask restarts a worker that is lost and sends its tasks to another one; `_pool` sees nothing of it.
"""

from __future__ import annotations

from concurrent.futures import Executor
from typing import Any, Protocol

from .. import _check

__all__ = ["Client", "as_executor", "threads"]


class Client(Protocol):
    """What is asked of a client of Dask."""

    def get_executor(self, *, pure: bool) -> Executor:
        """Return an executor that sends tasks to its workers."""
        ...


def as_executor(given: Any) -> Any:
    """Return the executor of a client, and anything else as it is."""
    if isinstance(given, Executor) or not hasattr(given, "get_executor"):
        return given
    # not pure: a task that is sent again must be computed again, not be found among the results of the first
    made = _check.raised("executor", lambda: given.get_executor(pure=False))
    if not isinstance(made, Executor):
        _check.refuse("executor", given, "its get_executor() must return a concurrent.futures.Executor")
    return made


def threads(engine: Any) -> int | None:
    """Return how many tasks the workers behind an executor of Dask do at a time, or None if it is another."""
    count = getattr(getattr(engine, "_client", None), "nthreads", None)
    if not callable(count):
        return None
    try:
        return sum(count().values()) or None
    except Exception:  # it then only looked like one, or its scheduler is gone: the first task will say so
        return None
