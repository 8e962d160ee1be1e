"""Searches for the same minimum from several places: chi-square may have more than one."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TypeAlias

import numpy as np

from .._check import Floats
from ._problem import Problem
from ._result import FitResult
from ._solve import Solution

__all__ = ["around", "lowest", "said", "searched"]

Found: TypeAlias = tuple[Problem, Solution]

#: Starts lie so many uncertainties around a fit.
_SPREAD = 2.0
#: Searches whose chi-squares differ by less have found one minimum: each is known to 1e-6, and to about 1e-4
#: where maps are built anew until theory parameters lie within 0.01 of an uncertainty.
SAME = 1e-2
#: Minima that are told.
_TOLD = 4


def around(result: FitResult, count: int, rng: np.random.Generator) -> list[Floats]:
    """Return starts a few uncertainties around a fit, inside the bounds, (parameter,) each.

    Parameters
    ----------
    result : FitResult
        Where an uncertainty is not known, what a parameter does to the residuals by itself stands for it.
    count : int
    rng : numpy.random.Generator
    """
    problem = result._problem
    effect = np.linalg.norm(result._solution.jacobian, axis=0)
    own = np.divide(1.0, effect, out=np.zeros_like(effect), where=effect > 0.0)
    size = np.where(np.isfinite(result.errors), result.errors, own)
    found = []
    for _ in range(count):
        moved = result.parameters + _SPREAD * size * rng.normal(size=size.size)
        # not on a bound, where a search would have to leave it first
        inside = np.clip(moved, problem.low + 0.01 * size, problem.high - 0.01 * size)
        found.append(np.clip(inside, problem.low, problem.high))
    return found


def searched(first: Found, starts: int, settled: Callable[[Problem, Floats], Found]) -> list[Found | None]:
    """Return the first search and those from starts around it; None where one gave no fit.

    The same every time: the starts are drawn from a fixed seed.

    Parameters
    ----------
    first : problem and solution
    starts : int
    settled : callable
        From a problem and where to begin to the last problem and its minimum.
    """
    result = FitResult(*first, 1.0, 0, None)
    found: list[Found | None] = [first]
    for begin in around(result, starts - 1, np.random.default_rng(0)):
        try:
            found.append(settled(first[0], begin))
        except (ValueError, ArithmeticError):  # no chi-square there, or theory parameters run away
            found.append(None)
    return found


def lowest(found: Sequence[Found | None]) -> Found:
    """Return the lowest minimum; the first search if none has converged, or none is lower."""
    first = found[0]
    assert first is not None
    good = [one for one in found if one is not None and one[1].converged]
    if not good:
        return first
    best = min(good, key=lambda one: one[1].total)
    return first if first[1].converged and first[1].total < best[1].total + SAME else best


def said(found: Sequence[Found | None]) -> str:
    """Say where the searches ended."""
    best = lowest(found)[1].total
    rises = sorted(one[1].total - best for one in found if one is not None and one[1].converged)
    lost = len(found) - len(rises)
    tail = f"; {lost} did not converge" if lost else ""
    here = sum(rise < SAME for rise in rises)
    above: list[list[float]] = []
    for rise in rises[here:]:
        if above and rise - above[-1][-1] < SAME:
            above[-1].append(rise)
        else:
            above.append([rise])
    if not above:
        return f"from {len(found)} starts: {here} end at this minimum{tail}"
    told = ", ".join(f"{group[0]:.3g} ({len(group)})" for group in above[:_TOLD])
    more = ", ..." if len(above) > _TOLD else ""
    others = f"others at minima whose chi-square is higher by {told}{more}"
    return (
        f"WARNING: from {len(found)} starts: {here} end at this minimum, {others}{tail}: "
        "uncertainties know of this one alone"
    )
