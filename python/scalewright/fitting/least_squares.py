"""One fit: the parameters of a shape, and of the theory if asked for, that bring predictions to the data."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats
from .._corrected.bound import Correction
from ..errors import InputError
from ._problem import Distance, Map, Problem, Theory
from ._result import BlindDirection, FitResult, Profile
from ._settling import NotSettledError, Settling
from ._shape import Shape
from ._solve import Callback, Solution, solve
from ._starts import lowest, said, searched

__all__ = ["BlindDirection", "FitResult", "NotSettledError", "Profile", "fit"]

#: The map is built anew until theory parameters lie within this part of their uncertainty of its own, or so
#: often.
_CLOSE, _REBUILDS = 0.01, 10


def fit(
    fmap: Map,
    chi2: Distance,
    shape: Shape,
    *,
    start: ArrayLike | Mapping[str, float] | None = None,
    theory: Theory = (),
    priors: Mapping[str, tuple[float, float]] | None = None,
    corrections: Sequence[Correction] | Correction = (),
    rebuild: Callable[[Mapping[str, float]], Map] | None = None,
    delta_chi2: float = 1.0,
    evaluations: int | None = None,
    callback: Callback | None = None,
    starts: int = 1,
) -> FitResult:
    """Fit a shape to data by least squares with exact derivatives.

    Parameters
    ----------
    fmap : ForwardMap
        From densities to predictions.
    chi2 : ChiSquare
        From predictions to whitened residuals.
    shape : Shape
        See `scalewright.fitting.shapes`.
    start : array_like, (parameter,), or mapping, optional
        Where to begin, theory parameters last, or name -> value; by default where the shape and the map say.
    theory : sequence of {"alpha_s", "charm", "bottom"}, or mapping
        Theory parameters to fit as well; a mapping says the value that the map was built with, for a map that
        does not say it itself.
    priors : mapping
        Name -> (value, standard deviation), besides those of the shape.
    corrections : sequence of Correction
        Higher twist, deuteron and nuclear factors, see `scalewright.corrections`; their parameters are fitted
        as well.
    rebuild : callable, optional
        ``f({"alpha_s": value, ...})`` returning the map for other theory parameters. With it the fit is
        repeated until they lie within 0.01 of their uncertainty of those of the map; without it their effect
        is of first order.
    delta_chi2 : float
        Rise of chi-square that uncertainties stand for: the square of the tolerance.
    evaluations : int, optional
        Of residuals at most, in each repetition; by default 100 a parameter.
    callback : callable, optional
        ``f(step, chi2, parameters)`` at each step; StopIteration ends the search with the best so far.
    starts : int
        Searches: the others begin around where the first has ended, and the lowest minimum is returned; where
        they ended is said in `status`. Chi-square may have several minima where data leave much open.

    Returns
    -------
    FitResult
        Read `status` first.

    Raises
    ------
    InputError
        If the parts do not fit each other, there are more parameters than data and priors, or a start lies
        outside its bounds or where chi-square is not finite.
    NotSettledError
        An `InputError`: if theory parameters have not settled after 10 maps, or `rebuild` raises. The last
        fit is its attribute `result`.

    Notes
    -----
    Minimised with `scipy.optimize.least_squares`; the result is then checked, and brought to the minimum, by
    linear steps of our own. Uncertainties are those of the second derivatives of chi-square at the minimum,
    from differences of its exact gradient.

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
    >>> fmap = SimpleNamespace(  # what is measured is x u(x), times 4/9
    ...     matrix=4 / 9 * grid.cardinals(x)[:, None], flavours=(2,), grid=grid, start_q2=2.0, start_nf=3)
    >>> law = FunctionShape(
    ...     grid, [2], lambda x, p: p[0] * (1 - x) ** p[1], [1.0, 2.0], names=["norm", "fall"])
    >>> result = fit(fmap, sw.ChiSquare(table), law)
    >>> result.converged, round(result.value("fall"), 2), round(result.error("fall"), 2)
    (True, 2.22, 0.14)
    """
    delta_chi2 = _check.real("delta_chi2", delta_chi2, above=0.0)
    if evaluations is not None:
        evaluations = _check.whole("evaluations", evaluations, least=1)
    for name, function in (("rebuild", rebuild), ("callback", callback)):
        if function is not None:
            _check.function(name, function)
    starts = _check.whole("starts", starts, least=1, most=10**6)
    problem = Problem(fmap, chi2, shape, theory, priors, corrections=corrections)
    problem.check_enough()
    begin = starting(problem, start)
    again = None if rebuild is None else _Rebuilder(rebuild, chi2, shape, priors, corrections)
    search = _Search(again, delta_chi2, evaluations, callback)
    problem, solution = first = search.settled(problem, begin)
    if starts > 1:
        found = searched(first, starts, search.settled)
        problem, solution = lowest(found)
        problem.notes = (*problem.notes, said(found))
    return FitResult(problem, solution, delta_chi2, search.rebuilt, again)


class _Search:
    """The search for a minimum, with maps built anew until theory parameters settle."""

    def __init__(
        self, again: _Rebuilder | None, delta_chi2: float, evaluations: int | None, callback: Callback | None
    ) -> None:
        self._again, self._delta_chi2 = again, delta_chi2
        self._options: Any = {"evaluations": evaluations, "callback": callback}
        self.rebuilt = 0

    def settled(self, problem: Problem, begin: Floats) -> tuple[Problem, Solution]:
        """Return the last problem, and its minimum."""
        solution = solve(problem, begin, **self._options)
        most, settling = self.rebuilt + _REBUILDS, Settling()
        while self._again is not None and _is_far(problem, solution):
            last = FitResult(problem, solution, self._delta_chi2, self.rebuilt, self._again)
            if self.rebuilt == most:
                moved = _check.show_all(problem.reference)
                raise NotSettledError(f"rebuild: {moved} has not settled after {_REBUILDS} maps", last)
            begin = np.array(solution.parameters)
            found = begin[problem.first_theory :] = settling.next(*_moves(problem, solution))
            try:
                problem = self._again(dict(zip(problem.reference, found.tolist(), strict=True)))
            except InputError as error:
                # a map that cannot be built is not asked for second derivatives, either
                last = FitResult(problem, solution, self._delta_chi2, self.rebuilt, None)
                raise NotSettledError(str(error), last) from error
            solution = solve(problem, begin, **self._options)
            self.rebuilt += 1
        return problem, solution


class _Rebuilder:
    """The problem of a fit, for other theory parameters."""

    def __init__(self, rebuild: Any, chi2: Distance, shape: Shape, priors: Any, corrections: Any) -> None:
        self._rebuild, self._chi2, self._shape, self._priors = rebuild, chi2, shape, priors
        self._corrections = corrections

    def __call__(self, at: Mapping[str, float]) -> Problem:
        fmap = _check.raised("rebuild", self._rebuild, dict(at))
        own = self._corrections
        return Problem(fmap, self._chi2, self._shape, dict(at), self._priors, corrections=own)


def starting(problem: Problem, start: Any) -> Floats:
    """Return where to begin, checked against the bounds; chi-square must be finite there."""
    begin = np.array(problem.start)
    if isinstance(start, Mapping):
        for name, value in start.items():
            if name not in problem.names:
                near = _check.nearest(name, problem.names)
                _check.refuse("start", name, f"there is no free parameter of this name{near}")
            begin[problem.names.index(name)] = _check.real(f"start[{name}]", value)
    elif start is not None:
        begin = np.array(_check.real_array("start", start, shape=(len(problem.names),)))
    for name, value, low, high in zip(problem.names, begin, problem.low, problem.high, strict=True):
        if not low <= value <= high:
            limits = f"must lie in [{_check.show(float(low))}, {_check.show(float(high))}]"
            _check.refuse(f"start[{name}]", float(value), limits)
    with np.errstate(over="ignore", invalid="ignore"):
        residuals = problem.residuals(begin)
        if not np.isfinite(residuals @ residuals):
            raise InputError("start: chi-square is not finite there: begin nearer to the data")
    return begin


def _is_far(problem: Problem, solution: Solution) -> bool:
    """Say whether theory parameters lie further from those of the map than a small part of their error."""
    if not problem.reference:
        return False
    at, found, errors = _moves(problem, solution)
    return bool((abs(found - at) > _CLOSE * errors).any())


def _moves(problem: Problem, solution: Solution) -> tuple[Floats, Floats, Floats]:
    """Return theory parameters of the map, of the fit, and their uncertainties to first order."""
    first = problem.first_theory
    inverse = np.linalg.pinv(solution.jacobian.T @ solution.jacobian, hermitian=True)
    errors = np.sqrt(np.maximum(np.diagonal(inverse)[first:], 0.0))
    return problem.start[first:], solution.parameters[first:], np.where(errors > 0.0, errors, 1.0)
