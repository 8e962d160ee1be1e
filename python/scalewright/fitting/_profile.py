"""Fits again with one parameter held: what chi-square does when everything else follows."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .. import _check
from .._check import Floats, show
from ._problem import Problem
from ._solve import Solution, solve

__all__ = ["Profile", "Rebuild", "profiled"]

#: Values of theory parameters -> the problem of the map built with them.
Rebuild = Callable[[Mapping[str, float]], Problem]


@dataclass(frozen=True, eq=False)
class Profile:
    """Chi-square against one parameter, all others fitted again.

    Parameters
    ----------
    name : str
    values, chi2 : ndarray, (point,)
        Chi-square of data and priors.
    parameters : ndarray, (point, parameter)
    converged : ndarray of bool, (point,)
    """

    name: str
    values: Floats
    chi2: Floats
    parameters: Floats
    converged: NDArray[np.bool_]


def profiled(problem: Problem, rebuild: Rebuild | None, at: Floats, place: int, values: ArrayLike) -> Profile:
    """Fit again at each of some values of one parameter.

    Parameters
    ----------
    problem : Problem
    rebuild : callable, optional
        With it the map follows a theory parameter that is held.
    at : ndarray, (parameter,)
        Where to begin: the minimum.
    place : int
        The parameter.
    values : array_like, (point,)

    Raises
    ------
    InputError
        If a value lies outside the bounds.
    """
    name, points = problem.names[place], _check.real_array("values", values, ndim=1)
    low, high = problem.low[place], problem.high[place]
    limits = f"{name} must lie in [{show(float(low))}, {show(float(high))}]"
    _check.refuse_where("values", points, (points < low) | (points > high), limits)
    found = [_held(problem, rebuild, at, place, float(point)) for point in points]
    return Profile(
        name, points, np.array([one.total for one in found]),
        np.array([one.parameters for one in found]), np.array([one.converged for one in found]),
    )  # fmt: skip


def _held(problem: Problem, rebuild: Rebuild | None, at: Floats, place: int, value: float) -> Solution:
    """Fit with one parameter held."""
    if rebuild is not None and place >= problem.first_theory:
        theory = dict(zip(problem.reference, at[problem.first_theory :], strict=True))
        theory[problem.names[place]] = value
        problem = rebuild({key: float(number) for key, number in theory.items()})
    return solve(problem, at, held={place: value})
