"""Many independent tasks through any executor: none lost when workers die, a silent engine named.

Which engine when: this process for a few replicas; a pool of our own on one machine; an executor of the
user's, such as ``distributed.Client.get_executor()``, on more. A function that makes an executor lets us
replace one that broke.
"""

from __future__ import annotations

import contextlib
import multiprocessing
import os
import signal
from collections import deque
from collections.abc import Callable, Generator, Iterator, Sequence
from concurrent.futures import (
    FIRST_COMPLETED,
    BrokenExecutor,
    CancelledError,
    Executor,
    Future,
    ProcessPoolExecutor,
    wait,
)
from typing import Any, Protocol, TypeAlias

from .. import _check
from ..errors import InputError, ScalewrightError
from ._journal import Outcome
from ._parcel import Missing, Parcel, Ticket, content

__all__ = ["Engine", "Work", "computed"]

Engine: TypeAlias = Executor | Callable[[], Executor] | None

#: Engines that broke one after another without a single result in between, at most.
_BREAKS = 3
#: Tasks in flight for each worker: one computed, one waiting.
_AHEAD = 2
#: Names of exceptions by which engines that we do not import say that a worker was lost.
_LOST = ("KilledWorker", "TerminatedWorkerError", "CommClosedError")


class Work(Protocol):
    """What is computed for each index."""

    def replica(self, index: int) -> Outcome:
        """Compute one."""
        ...


def computed(
    work: Work, indices: Sequence[int], *, executor: Engine, workers: int, chunk: int, limit: float
) -> Generator[list[Outcome], None, None]:
    """Compute each index once, in whatever order.

    Parameters
    ----------
    work : Work
        Can be pickled, unless it stays in this process.
    indices : sequence of int
    executor : Executor, callable or None
        None: this process for one worker, or a pool of our own.
    workers : int
        Of our own pool; of another one, how many it is thought to have.
    chunk : int
        Indices a task.
    limit : float
        Seconds within which some task must end.

    Yields
    ------
    list of Outcome

    Raises
    ------
    InputError
        If the work cannot be sent.
    ScalewrightError
        If the engine breaks again and again, or says nothing for `limit` seconds.
    """
    if executor is None and workers == 1:
        for index in indices:
            yield [work.replica(index)]
        return
    chunks = [list(indices[start : start + chunk]) for start in range(0, len(indices), chunk)]
    with Parcel(work) as parcel:
        run = _Run(parcel, chunks, executor, workers, limit)
        try:
            yield from run.results()
        finally:
            run.end()


class _Run:
    """The tasks of one run: waiting, in flight."""

    def __init__(
        self, parcel: Parcel, chunks: list[list[int]], executor: Engine, workers: int, limit: float
    ) -> None:
        self._parcel, self._limit, self._window = parcel, limit, _AHEAD * workers
        self._waiting: deque[tuple[Ticket, list[int]]] = deque((parcel.ticket, one) for one in chunks)
        self._flying: dict[Future[Any], list[int]] = {}
        self._workers, self._given = workers, executor
        self._owned = not isinstance(executor, Executor)
        self._engine = self._made()
        self._breaks = 0

    def results(self) -> Iterator[list[Outcome]]:
        """Yield results as they come."""
        while self._waiting or self._flying:
            lost = not self._fill()
            if not lost:
                done, _ = wait(self._flying, timeout=self._limit, return_when=FIRST_COMPLETED)
                if not done:
                    waited = f"no result within {_check.show(self._limit)} s"
                    raise ScalewrightError(
                        f"executor {self._name}: {waited} while computing replicas {self._in_flight()}"
                    )
                for future in done:
                    found = self._taken(future)
                    lost = lost or found is None
                    if found:
                        self._breaks = 0
                        yield found
            if lost:
                self._replace()

    def end(self) -> None:
        """Let go of what is still in flight, and of an engine of our own."""
        for future in self._flying:
            future.cancel()
        if self._owned and not self._flying:
            self._engine.shutdown(wait=True)
        elif self._owned:
            _dismiss(self._engine)

    def _fill(self) -> bool:
        """Submit what fits; return whether the engine takes it."""
        while self._waiting and len(self._flying) < self._window:
            ticket, indices = self._waiting[0]
            try:
                future = self._engine.submit(_task, ticket, indices)
            except Exception as error:
                if not self._owned:
                    raise self._broken(error) from error
                if not isinstance(error, BrokenExecutor | RuntimeError):
                    raise
                return False
            self._waiting.popleft()
            self._flying[future] = indices
        return True

    def _taken(self, future: Future[Any]) -> list[Outcome] | None:
        """Return the results of a task; [] if it must be sent again; None if its worker was lost."""
        indices = self._flying[future]
        try:
            result = future.result()
        except (BrokenExecutor, CancelledError):
            return None  # stays in flight, and is put back with all the others
        except Exception as error:
            if type(error).__name__ in _LOST:
                return None
            raise InputError(f"executor {self._name}: {type(error).__name__}: {error}") from error
        del self._flying[future]
        if isinstance(result, Missing):
            self._waiting.appendleft((self._parcel.with_bytes(), indices))
            return []
        return list(result)

    def _replace(self) -> None:
        """Put back what was in flight and make a new engine."""
        self._breaks += 1
        flying = self._in_flight()
        if self._breaks >= _BREAKS:
            raise ScalewrightError(
                f"executor {self._name}: workers died {self._breaks} times without a result, the last time "
                f"with replicas {flying}; a script must start its work under "
                'if __name__ == "__main__"'
            )
        for future, indices in self._flying.items():
            future.cancel()
            self._waiting.appendleft((self._parcel.ticket, indices))
        self._flying.clear()
        if self._owned:
            _dismiss(self._engine)
            self._engine = self._made()

    def _made(self) -> Executor:
        if isinstance(self._given, Executor):
            return self._given
        if self._given is None:
            context = multiprocessing.get_context("spawn")  # a fork would copy locked locks
            return ProcessPoolExecutor(self._workers, mp_context=context, initializer=_begin)
        made = _check.raised("executor", self._given)
        if not isinstance(made, Executor):
            _check.refuse("executor", made, "the function must return a concurrent.futures.Executor")
        return made

    def _broken(self, error: Exception) -> ScalewrightError:
        return ScalewrightError(
            f"executor {self._name} takes no more work: {error}; give a function that makes "
            "an executor, so that it can be replaced"
        )

    @property
    def _name(self) -> str:
        return type(self._engine).__name__

    def _in_flight(self) -> str:
        return _check.show_all(sorted(index for indices in self._flying.values() for index in indices))


def _task(ticket: Ticket, indices: list[int]) -> list[Outcome] | Missing:
    """Compute some replicas in a worker."""
    unread = ""
    try:
        work = content(ticket)
    except Exception as error:
        unread = f"{type(error).__name__}: {error}"
    # As words, and outside of the handler: an exception that cannot be read elsewhere would end the engine,
    # and some engines send what an exception came from as well.
    if unread:
        raise InputError(f"shape cannot be read in a worker: {unread}")
    if isinstance(work, Missing):
        return work
    return [work.replica(index) for index in indices]


def _begin() -> None:
    """Leave Ctrl-C to the process that asked for the work."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)


def _dismiss(engine: Executor) -> None:
    """End an engine without waiting for its tasks."""
    processes = list((getattr(engine, "_processes", None) or {}).values())
    engine.shutdown(wait=False, cancel_futures=True)
    # Workers would first finish what they are at. When one is lost the engine itself ends the others, and it
    # alone knows which of them still live: a signal to a process that is gone could meet another one.
    for process in processes:
        with contextlib.suppress(Exception):
            if process.is_alive():
                process.terminate()
                break
    for process in processes:
        with contextlib.suppress(Exception):
            process.join(5.0)


def processors() -> int:
    """Return the number of processors that this process may use."""
    try:
        return len(os.sched_getaffinity(0))
    except AttributeError:  # not on macOS and Windows
        return os.cpu_count() or 1
