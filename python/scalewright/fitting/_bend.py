"""How a map bends with theory parameters: what first derivatives leave out of the curvature of chi-square.

In a fit the map moves to first order in alpha_s and masses. The second derivative of chi-square with respect
to them has besides, in proportion to the residuals, the second derivative of the map: from gradients of maps
built anew on both sides of the minimum, each of which is exact.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping

import numpy as np

from .._check import Floats
from ._problem import Problem

__all__ = ["map_curvature"]

#: Four-point differences: steps in standard deviations, and what the gradients there are multiplied with.
#: All else held fixed a standard deviation is a long way: gradients are far from linear over it. Steps of
#: 0.005 to 0.04 of one gave the same to 2e-6 in a fit of six parameters and alpha_s; the error is h^4.
_STEP = 0.02
_WEIGHTS = {1.0: 8.0 / 12.0, -1.0: -8.0 / 12.0, 2.0: -1.0 / 12.0, -2.0: 1.0 / 12.0}


def map_curvature(
    problem: Problem,
    parameters: Floats,
    errors: Floats,
    rebuild: Callable[[Mapping[str, float]], Problem],
) -> Floats:
    """Return what is to be added to half the second derivatives, (theory parameter, theory parameter).

    Parameters
    ----------
    problem : Problem
    parameters : ndarray, (parameter,)
        The minimum; parameters of the theory stand last.
    errors : ndarray, (theory parameter,)
        Standard deviations, which set the step; where one is zero or not finite nothing is added.
    rebuild : callable
        Values of the theory parameters by name -> problem of the map built with them.
    """
    names = list(problem.reference)
    first = parameters.size - len(names)

    def anew(moved: Floats) -> Problem:
        return rebuild(dict(zip(names, moved[first:].tolist(), strict=True)))

    # not the map of the fit, which is a little away: what is left is the small difference of large numbers
    centre = anew(parameters)
    result = np.zeros((len(names), len(names)))
    for place, error in enumerate(errors):
        step = _STEP * float(error)
        if not np.isfinite(step) or step <= 0.0 or parameters[first + place] <= 2.0 * step:
            continue
        for times, weight in _WEIGHTS.items():
            moved = parameters.copy()
            moved[first + place] += times * step
            change = _gradient(anew(moved), moved) - _gradient(centre, moved)
            result[:, place] += weight * change[first:] / step
    return 0.5 * (result + result.T)


def _gradient(problem: Problem, parameters: Floats) -> Floats:
    """Return half the derivative of chi-square, (parameter,)."""
    return np.asarray(problem.jacobian(parameters).T @ problem.residuals(parameters))
