"""Many fits to pseudo-data: the spread of the results is the uncertainty.

Replica i depends on the inputs and on (seed, i) alone: neither the number of workers, nor the order in which
they finish, nor a kill and a new start change a bit of it.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from contextlib import closing
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats
from .._corrected.bound import Correction
from .._progress import Progress, watcher
from ..errors import InputError, ScalewrightError
from ..files.whole import PathLike
from ._central import of_data
from ._dask import Client, as_executor, threads
from ._journal import Journal, Outcome
from ._neglected import notes as neglected
from ._problem import Map, Problem, Theory
from ._shape import Shape
from ._solve import solve
from ._stopping import Stopping
from .chi_square import ChiSquare
from .ensemble import Ensemble
from .least_squares import fit, starting

if TYPE_CHECKING:
    from ._pool import Engine

__all__ = ["fit_replicas"]

#: Tasks for each worker, so that none waits long for the last.
_TASKS = 16
_LARGEST_CHUNK = 50


def fit_replicas(
    fmap: Map,
    chi2: ChiSquare,
    shape: Shape,
    *,
    replicas: int,
    seed: int,
    start: ArrayLike | Mapping[str, float] | None = None,
    theory: Theory = (),
    priors: Mapping[str, tuple[float, float]] | None = None,
    rebuild: Callable[[Mapping[str, float]], Map] | None = None,
    executor: Engine | Client = None,
    workers: int | None = None,
    chunk: int | None = None,
    journal: PathLike | None = None,
    progress: Progress = False,
    evaluations: int | None = None,
    corrections: Sequence[Correction] | Correction = (),
    validation: float = 0.0,
    patience: int = 5,
    limit: float = 3600.0,
) -> Ensemble:
    """Fit a shape to many sets of pseudo-data drawn from the full error model.

    Parameters
    ----------
    fmap : ForwardMap
    chi2 : ChiSquare
        Pseudo-data are drawn around its measurements, from the errors of these and from its covariance of the
        theory (as in arXiv:1906.10698, recalled from memory); its covariance serves all replicas.
    shape : Shape
    replicas : int
        How many in all, those of the journal included.
    seed : int
        Replica i draws from ``numpy.random.SeedSequence(seed, spawn_key=(i,))``.
    start, theory, priors, corrections, evaluations
        As for `fit`. By default each replica starts from the best fit to the data; with `validation` from the
        start of the shape. The values of priors are drawn, like data. Without `validation` the data
        themselves are fitted too, and `Ensemble.notes` says if that fit has not converged, or which
        directions the data do not see: the spread of replicas along these is no uncertainty.
    rebuild : callable, optional
        As for `fit`: the data are fitted first with maps built anew until theory parameters settle, and all
        replicas start there, with the last map. It moves to first order in each of them; `Ensemble.notes`
        says by how much the neglected curvature of the map would move a fit one uncertainty away. Without
        `rebuild` theory parameters move to first order from those of `fmap`, however far that is.
    executor : Executor, callable that makes one, or Dask client, optional
        By default a pool of processes of our own. For several machines a ``distributed.Client``, or its
        ``get_executor()``: Dask replaces workers that are lost.
    workers : int, optional
        Processes of our own pool; 1 stays in this process. By default all processors, or, for another
        executor, as many as it says it has.
    chunk : int, optional
        Replicas a task.
    journal : path-like, optional
        File to which each result is appended; a run that finds some there computes what is missing.
    progress : bool or callable
        True for a line on a terminal; a callable takes (done, total).
    validation : float
        Part of the residuals, drawn for each replica, that is not fitted; the fit stops where it is described
        best. For shapes with more freedom than the data need.
    patience : int
        Steps without a better validation after which a fit stops.
    limit : float
        Seconds within which some task must end.

    Returns
    -------
    Ensemble
        Of the fits that converged; the others are listed in `Ensemble.failed`.

    Raises
    ------
    InputError
        As `fit`; if the shape cannot be sent to other processes; if `rebuild` meets `validation`.
    StoreError
        If the journal is of another fit or cannot be written; what was computed before is in it.
    ScalewrightError
        If workers die again and again, nothing comes back within `limit`, all fits failed, or with `rebuild`
        that to the data did.

    Notes
    -----
    Bits are equal for any number of workers that run with the same number of BLAS threads as this process.
    For many workers set OPENBLAS_NUM_THREADS=1, or its like, before Python starts; Dask sets it for its own.

    Workers of one machine map one file with all that replicas have in common; a worker that does not see the
    file gets its bytes with its first tasks, and keeps them.

    Examples
    --------
    >>> import scalewright as sw
    >>> from types import SimpleNamespace
    >>> from scalewright.fitting.shapes import FunctionShape
    >>> grid = sw.ChebyshevGrid(x_min=1e-4)
    >>> x = [0.05, 0.1, 0.2, 0.4]
    >>> table = sw.Measurements.from_columns(
    ...     {"title": "Run 1", "measures": "F2", "exchange": "photon", "uncertainty": [
    ...         {"column": "stat", "given_in": "value", "scales_with": "nothing"}]},
    ...     {"x": x, "q2": [2.0] * 4, "value": [0.42, 0.37, 0.29, 0.15], "stat": [0.01] * 4})
    >>> fmap = SimpleNamespace(
    ...     matrix=4 / 9 * grid.cardinals(x)[:, None], flavours=(2,), grid=grid, start_q2=2.0, start_nf=3)
    >>> law = FunctionShape(
    ...     grid, [2], lambda x, p: p[0] * (1 - x) ** p[1], [1.0, 2.0], names=["norm", "fall"])
    >>> ensemble = fit_replicas(fmap, sw.ChiSquare(table), law, replicas=100, seed=7, workers=1)
    >>> fall = ensemble.mean("fall")
    >>> abs(fall.value - 2.22) < 0.05, round(fall.error, 3)
    (True, 0.013)
    """
    count = _check.whole("replicas", replicas, least=1, most=10**7)
    if not isinstance(chi2, ChiSquare):
        _check.refuse("chi2", chi2, f"chi2 must be a ChiSquare, not {type(chi2).__name__}")
    stopping = Stopping.of(validation, patience)
    notes: tuple[str, ...] = ()
    if rebuild is not None:
        if stopping is not None:
            raise InputError("rebuild: there is no fit to all data to settle on with validation")
        central = fit(fmap, chi2, shape, start=start, theory=theory, priors=priors, rebuild=rebuild,
                      corrections=corrections, evaluations=evaluations)  # fmt: skip
        if not central.converged:
            raise ScalewrightError(f"rebuild: the fit to the data has {central.status[0]}")
        problem, begin = central._problem, central.parameters
        notes = (*of_data(problem, central._solution), *neglected(central, chi2))
    else:
        problem = Problem(
            fmap, chi2, shape, theory, priors, corrections=corrections, compressed=stopping is None
        )
        if stopping is None:
            problem.check_enough()
        begin = starting(problem, start)
        if stopping is None:
            begin, notes = _central(problem, begin, evaluations, start is not None)
    work = _Work(problem, chi2, _check.whole("seed", seed, least=0), begin, evaluations, stopping)
    engine: Engine = as_executor(executor)
    size = _workers(engine, workers)
    limit = _check.real("limit", limit, above=0.0)
    if chunk is None:
        chunk = min(_LARGEST_CHUNK, max(1, count // (_TASKS * size)))
    chunk = _check.whole("chunk", chunk, least=1)
    report = watcher(progress, "replicas")
    options: dict[str, Any] = {"executor": engine, "workers": size, "chunk": chunk, "limit": limit}
    if journal is None:
        outcomes = _all(work, count, {}, None, report, options)
    else:
        with Journal(journal, work.described()) as book:
            work.begin = np.array(book.fit["start"])
            outcomes = _all(work, count, book.outcomes, book, report, options)
    return _gathered(problem, [outcomes[index] for index in range(count)], work.seed, notes)


def _central(
    problem: Problem, begin: Floats, evaluations: int | None, is_given: bool
) -> tuple[Floats, tuple[str, ...]]:
    """Fit the data themselves; return where replicas begin, and what is to be known of them."""
    try:
        first = solve(problem, begin, evaluations=evaluations)
    except Exception as error:  # a shape may raise anything
        if not is_given:
            raise
        return begin, (f"WARNING: the fit to the data themselves: {type(error).__name__}: {error}",)
    return first.parameters if first.converged and not is_given else begin, of_data(problem, first)


class _Work:
    """All that replicas have in common."""

    def __init__(
        self, problem: Problem, chi2: ChiSquare, seed: int, begin: Floats, evaluations: int | None,
        stopping: Stopping | None,
    ) -> None:  # fmt: skip
        self._problem, self._chi2, self.seed = problem.compact(), chi2, seed
        self.begin, self._evaluations, self._stopping = begin, evaluations, stopping
        self._at_start = problem.prediction(begin)
        self._theory_root: Floats | None = None
        if chi2._theory is not None:
            values, vectors = np.linalg.eigh(chi2._theory)
            seen = values > 16.0 * values.size * np.finfo(float).eps * values[-1]  # the others are rounding
            # the symmetric root: no other is the same wherever a run goes on
            self._theory_root = (vectors[:, seen] * np.sqrt(values[seen])) @ vectors[:, seen].T

    def replica(self, index: int) -> Outcome:
        """Draw and fit one replica; what goes wrong becomes its reason."""
        rng = np.random.default_rng(np.random.SeedSequence(self.seed, spawn_key=(index,)))
        measured, problem = self._chi2.measurements, self._problem
        values = self._drawn(rng)
        moved = problem.shift(self._chi2.whiten(values - measured.value))
        shift = np.concatenate([moved, -rng.normal(size=len(problem.priors))])
        try:
            if self._stopping is None:
                found = solve(problem, self.begin, shift=shift, evaluations=self._evaluations)
                reason = (
                    "" if found.converged else f"not converged: {found.stopped or 'steps no longer help'}"
                )
                at, steps = found.parameters, found.jacobian_calls
            else:
                at, steps, reason = self._stopping.fitted(problem, self.begin, shift, rng, self._evaluations)
            own, data = problem.residuals(at, shift), problem.residuals(at)[: problem.rows]
            chi2, chi2_data = float(own @ own), float(data @ data)
            if not np.isfinite(chi2):
                reason = reason or "chi-square is not finite"
        except Exception as error:  # a shape may raise anything; the other replicas go on
            reason, at = f"{type(error).__name__}: {error}", np.full(len(problem.names), np.nan)
            chi2, chi2_data, steps = np.nan, np.nan, 0
        return Outcome(index, at, chi2, chi2_data, steps, int((values < 0.0).sum()), reason)

    def _drawn(self, rng: np.random.Generator) -> Floats:
        """Return pseudo-data, (datum,)."""
        values = self._chi2.measurements.pseudo_data(rng).values
        if self._theory_root is None:
            return values
        # what chi-square forgives, replicas must vary: else they spread less than it says
        return np.asarray(values + self._theory_root @ rng.normal(size=values.size))

    def described(self) -> dict[str, Any]:
        """Say which fit this is, for the journal."""
        problem = self._problem
        return {
            "seed": self.seed,
            "names": list(problem.names),
            "start": self.begin.tolist(),
            "values": self._chi2.measurements.value.tolist(),
            "errors": np.sqrt(np.diagonal(self._chi2.covariance)).tolist(),
            "prediction": self._at_start.tolist(),
            **self._fingerprint(),
            "bounds": [[_finite(v) for v in side] for side in (problem.low, problem.high)],
            "priors": [[name, *pair] for name, pair in problem.priors.items()],
            "evaluations": self._evaluations,
            "stopping": None if self._stopping is None else self._stopping.described(),
        }

    def _fingerprint(self) -> dict[str, Any]:
        """Say what values, errors and prediction leave open: the rest of error model and shape."""
        slopes = self._problem.jacobian(self.begin)
        return {
            "pseudo-data": self._drawn(np.random.default_rng(0)).tolist(),
            "derivative": np.linalg.norm(slopes, axis=0).tolist(),
        }


def _all(
    work: _Work, count: int, known: Mapping[int, Outcome], book: Journal | None, report: Any,
    options: dict[str, Any],
) -> dict[int, Outcome]:  # fmt: skip
    """Return all replicas: those known, and those computed now."""
    from ._pool import computed  # only here: it loads the machinery of processes

    found = {index: outcome for index, outcome in known.items() if index < count}
    missing = [index for index in range(count) if index not in found]
    if report is not None:
        report(len(found), count)
    if not missing:
        return found
    with closing(computed(work, missing, **options)) as parts:  # workers end with an error here, too
        for outcomes in parts:
            if book is not None:
                book.append(outcomes)
            found.update((outcome.index, outcome) for outcome in outcomes)
            if report is not None:
                report(len(found), count)
    return found


def _gathered(
    problem: Problem, outcomes: list[Outcome], seed: int, notes: tuple[str, ...]
) -> Ensemble:  # fmt: skip
    """Return the ensemble of what converged."""
    good = [outcome for outcome in outcomes if not outcome.reason]
    failed = {outcome.index: outcome.reason for outcome in outcomes if outcome.reason}
    if not good:
        first = next(iter(failed.items()))
        raise ScalewrightError(f"all {len(failed)} replicas failed; replica {first[0]}: {first[1]}")
    parameters = np.stack([outcome.parameters for outcome in good])
    of_shape = parameters[:, : len(problem.shape.names)]
    return Ensemble(
        problem.shape.densities(of_shape, q2=problem.q2, nf=problem.nf),
        parameters=parameters, names=problem.names, index=[outcome.index for outcome in good],
        chi2=[outcome.chi2 for outcome in good], chi2_data=[outcome.chi2_data for outcome in good],
        data=problem.count, failed=failed, seed=seed,
        negative=sum(outcome.negative for outcome in outcomes), notes=notes,
    )  # fmt: skip


def _workers(executor: Engine, workers: int | None) -> int:
    """Return how many workers there are, or are thought to be."""
    from ._pool import processors

    if executor is not None and not callable(executor) and not hasattr(executor, "submit"):
        _check.refuse("executor", executor, "executor must be an Executor, or a function that makes one")
    if workers is not None:
        return _check.whole("workers", workers, least=1, most=10**5)
    said = getattr(executor, "_max_workers", None) or threads(executor)
    return said if isinstance(said, int) and said > 0 else processors()


def _finite(value: float) -> float | str:
    """Return a number as JSON knows it."""
    return float(value) if np.isfinite(value) else repr(float(value))
