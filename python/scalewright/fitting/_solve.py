"""Least squares within bounds, and how far from the minimum it ended.

scipy's trust-region method (M. Branch, T. Coleman, Y. Li, SIAM J. Sci. Comput. 21 (1999) 1) keeps to the
inside of the bounds; afterwards parameters that press against a bound are put on it, and damped linear steps
bring the others to the minimum. That it is one is judged here, not taken from the method's own report.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from .._check import Floats, Integers
from ._problem import Problem

__all__ = ["BLIND", "Solution", "scaled", "solve"]

Callback = Callable[[int, float, Floats], object]

#: Singular values below this part of the largest, parameters in units of their own effect, are taken for
#: zero: their squares drown in rounding.
BLIND = 1e-8

#: A minimum is one if a linear step would lower chi-square by less than this: a thousandth of an error each.
CONVERGED = 1e-6

#: Distance from a bound, in units of a parameter's own effect, within which a push puts it on the bound.
_NEAR = 1e-3
#: Chi-square within this of the minimum puts parameters within 1e-10 of their errors: no further steps.
_THERE = 1e-20
#: Damping, added to squares of singular values between 0 and about the number of parameters.
_FIRST, _LEAST, _MOST = 1e-6, 1e-8, 1e6
#: Chi-square is known to some roundings only.
_ROUNDING = 1e-14
#: Steps that no longer gain this factor, at a distance that counts for a minimum, have reached rounding.
_GAIN = 0.9
#: Where scipy hands over: it creeps along curved valleys, in which damped steps do better.
_SCIPY_TOLERANCE = 1e-8
#: Evaluations that are left for steps of our own, even where the search has used what was allowed.
_AT_LEAST = 10


@dataclass
class Solution:
    """Where a minimisation ended.

    Parameters
    ----------
    parameters : ndarray, (parameter,)
    residuals : ndarray, (residual,)
    jacobian : ndarray, (residual, parameter)
    at_low, at_high, held : ndarray of bool, (parameter,)
        On a bound and pressed against it; held by the caller.
    distance : float
        By how much a linear step from here would lower chi-square.
    stopped : str
        Why it ended early; empty if it did not.
    residual_calls, jacobian_calls : int
    """

    parameters: Floats
    residuals: Floats
    jacobian: Floats
    at_low: Any
    at_high: Any
    held: Any
    distance: float
    stopped: str
    residual_calls: int
    jacobian_calls: int

    @property
    def total(self) -> float:
        """Chi-square of data and priors."""
        return float(self.residuals @ self.residuals)

    @property
    def free(self) -> Integers:
        """Places of the parameters that neither lie on a bound nor are held."""
        return np.flatnonzero(~(self.at_low | self.at_high | self.held))

    @property
    def converged(self) -> bool:
        """Whether this is a minimum."""
        return bool(np.isfinite(self.total)) and self.distance < CONVERGED


class _Stop(Exception):
    """Leave scipy."""


@dataclass
class _Counted:
    """Residuals and Jacobian of the parameters that are not held, counting calls, remembering the best."""

    problem: Problem
    base: Floats
    moving: Integers
    shift: Floats | None
    callback: Callback | None
    residual_calls: int = 0
    jacobian_calls: int = 0
    best: tuple[float, Floats] | None = field(default=None)
    last: tuple[Floats, Floats] | None = field(default=None)  # where the last Jacobian was, and what it was

    def whole(self, moving: Floats) -> Floats:
        """Return all parameters."""
        result = self.base.copy()
        result[self.moving] = moving
        return result

    def residuals(self, moving: Floats) -> Floats:
        self.residual_calls += 1
        result = self.problem.residuals(self.whole(moving), self.shift)
        with np.errstate(over="ignore"):
            total = float(result @ result)
        if np.isfinite(total) and (self.best is None or total < self.best[0]):
            self.best = (total, np.array(moving))
        return result

    def jacobian(self, moving: Floats) -> Floats:
        self.jacobian_calls += 1
        if self.callback is not None and self.best is not None:
            try:
                self.callback(self.jacobian_calls, self.best[0], self.whole(self.best[1]))
            except StopIteration:
                raise _Stop from None
        whole = self.problem.jacobian(self.whole(moving))
        self.last = (np.array(moving), whole)
        return np.ascontiguousarray(whole[:, self.moving])

    def known(self, moving: Floats) -> Floats:
        """Return the Jacobian by all parameters, computed again only if the last one was elsewhere."""
        if self.last is None or (self.last[0] != moving).any():
            self.jacobian(moving)
        assert self.last is not None
        return self.last[1]


def solve(
    problem: Problem,
    start: Floats,
    *,
    held: Mapping[int, float] | None = None,
    shift: Floats | None = None,
    evaluations: int | None = None,
    callback: Callback | None = None,
) -> Solution:
    """Minimise the sum of squares of the residuals.

    Parameters
    ----------
    problem : Problem
    start : ndarray, (parameter,)
    held : mapping, optional
        Places of parameters that do not move -> values.
    shift : ndarray, (residual,), optional
        Added to the residuals.
    evaluations : int, optional
        Of residuals, at most; by default 100 a parameter.
    callback : callable, optional
        ``f(step, chi2, parameters)`` at each step; StopIteration ends the search with the best so far.

    Returns
    -------
    Solution
    """
    base = np.array(start)
    for index, value in (held or {}).items():
        base[index] = value
    is_held = np.zeros(base.size, dtype=bool)
    is_held[list(held or {})] = True
    moving = np.flatnonzero(~is_held)
    counted = _Counted(problem, base, moving, shift, callback)
    budget = 100 * moving.size if evaluations is None else evaluations
    stopped, now = "", base[moving]
    if moving.size:
        stopped, now = _search(counted, problem, moving, budget)
    counted.callback = None
    rest = counted.residual_calls if stopped else max(budget, counted.residual_calls + _AT_LEAST)
    place, later = _finished(counted, now, problem.low[moving], problem.high[moving], rest)
    at_low, at_high = np.zeros(base.size, dtype=bool), np.zeros(base.size, dtype=bool)
    at_low[moving], at_high[moving] = place.at_low, place.at_high
    return Solution(
        counted.whole(place.now), place.residuals, counted.known(place.now), at_low, at_high, is_held,
        place.distance, stopped or later, counted.residual_calls, counted.jacobian_calls,
    )  # fmt: skip


def _search(counted: _Counted, problem: Problem, moving: Integers, budget: int) -> tuple[str, Floats]:
    """Let scipy find the minimum; return why it ended early, and where it is."""
    from scipy.optimize import least_squares  # type: ignore[import-untyped]

    try:
        found = least_squares(
            counted.residuals, counted.base[moving], counted.jacobian,
            bounds=(problem.low[moving], problem.high[moving]), method="trf", x_scale="jac",
            ftol=_SCIPY_TOLERANCE, xtol=_SCIPY_TOLERANCE, gtol=None, max_nfev=budget,
        )  # fmt: skip
    except _Stop:
        return "stopped by the callback", _best(counted)
    if found.status == 0:
        return _stopped_after(counted), _best(counted)
    return "", np.asarray(found.x)


def _stopped_after(counted: _Counted) -> str:
    return f"stopped after {counted.residual_calls} evaluations"


def _best(counted: _Counted) -> Floats:
    assert counted.best is not None  # residuals come before the first Jacobian
    return counted.best[1]


@dataclass
class _Place:
    """Where the search stands, and what is seen from there."""

    now: Floats
    residuals: Floats
    jacobian: Floats
    at_low: Any
    at_high: Any
    move: Callable[[float], Floats]
    distance: float

    @property
    def total(self) -> float:
        return float(self.residuals @ self.residuals)


def _finished(counted: _Counted, now: Floats, low: Floats, high: Floats, budget: int) -> tuple[_Place, str]:
    """Put on bounds what presses against them, and take damped linear steps with the others.

    Damping as H. Nielsen, Damping parameter in Marquardt's method, Technical University of Denmark 1999.
    """
    place = _seen(counted, now, low, high, counted.residuals(now))
    damping, growth, last = 0.0, 2.0, np.inf
    while place.distance >= _THERE:
        if place.distance < CONVERGED and place.distance > _GAIN * last:
            return place, ""
        if counted.residual_calls >= budget:
            return place, _stopped_after(counted)
        there = np.clip(place.now + place.move(damping), low, high)
        residuals = counted.residuals(there)
        with np.errstate(over="ignore", invalid="ignore"):
            here = float(residuals @ residuals)
        # near the minimum chi-square says nothing any more; further away it must fall
        slack = _ROUNDING * place.total if place.distance < CONVERGED else 0.0
        if np.isfinite(here) and (here < place.total or here <= place.total + slack):
            expected = place.total - float(
                ((place.residuals + place.jacobian @ (there - place.now)) ** 2).sum()
            )
            gain = min(max((place.total - here) / expected, 0.0), 1.0) if expected > 0.0 else 0.0
            damping *= max(0.1, 1.0 - (2.0 * gain - 1.0) ** 3)
            damping, growth, last = (damping if damping > _LEAST else 0.0), 2.0, place.distance
            place = _seen(counted, there, low, high, residuals)
        else:
            damping, growth = (damping * growth if damping > 0.0 else _FIRST), 2.0 * growth
            if damping > _MOST:
                return place, ""
    return place, ""


def _seen(counted: _Counted, now: Floats, low: Floats, high: Floats, residuals: Floats) -> _Place:
    """Look at a place: what presses on a bound goes there, and the linear problem of the others is solved."""
    jacobian = counted.known(now)[:, counted.moving]
    snapped, at_low, at_high = _pressed(now, low, high, residuals, jacobian)
    if (snapped != now).any():
        now = snapped
        residuals, jacobian = counted.residuals(now), counted.known(now)[:, counted.moving]
        _, at_low, at_high = _pressed(now, low, high, residuals, jacobian)
    move, distance = _linear(residuals, jacobian, ~(at_low | at_high))
    return _Place(now, residuals, jacobian, at_low, at_high, move, distance)


def _pressed(
    now: Floats, low: Floats, high: Floats, residuals: Floats, jacobian: Floats
) -> tuple[Floats, Any, Any]:
    """Return parameters with those near a bound and pressed against it put on it, and which these are."""
    slope = jacobian.T @ residuals
    size = np.linalg.norm(jacobian, axis=0)
    near = np.divide(_NEAR, size, out=np.zeros_like(size), where=size > 0.0)
    at_low = (now - low <= near) & (slope > 0.0)
    at_high = (high - now <= near) & (slope < 0.0)
    return np.where(at_low, low, np.where(at_high, high, now)), at_low, at_high


def _linear(residuals: Floats, jacobian: Floats, free: Any) -> tuple[Callable[[float], Floats], float]:
    """Return the step along what is seen for any damping, and by how much that of none lowers chi-square."""
    if not free.any():
        return lambda damping: np.zeros(free.size), 0.0
    left, values, right, size = scaled(jacobian[:, free])
    seen = values > BLIND * values[0] if values[0] > 0.0 else np.zeros(values.size, dtype=bool)
    along = left[:, seen].T @ residuals

    def move(damping: float) -> Floats:
        result = np.zeros(free.size)
        result[free] = -(right[seen].T @ (along * values[seen] / (values[seen] ** 2 + damping))) / size
        return result

    return move, float(along @ along)


def scaled(jacobian: Floats) -> tuple[Floats, Floats, Floats, Floats]:
    """Return the singular value decomposition with columns of length one, and their lengths (1 for zero)."""
    size = np.linalg.norm(jacobian, axis=0)
    size = np.where(size > 0.0, size, 1.0)
    left, values, right = np.linalg.svd(jacobian / size, full_matrices=False)
    return left, values, right, size
