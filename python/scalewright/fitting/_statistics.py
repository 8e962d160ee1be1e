"""Statistics of weighted replicas, each with its sampling error.

The sampling error of mean, deviation and correlation is the spread of their influence functions, that is how
much each replica moves them, to first order: nothing is assumed of the distribution. That of a quantile comes
from the binomial spread of its rank.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from .._check import Floats

__all__ = ["Estimate", "correlation", "deviation", "mean", "quantile"]


class Estimate(NamedTuple):
    """A number, or an array of them, with its sampling error.

    Parameters
    ----------
    value, error : float or ndarray
    """

    value: Any
    error: Any


def mean(values: Floats, weights: Floats) -> Estimate:
    """Mean over the first axis; its error is the deviation over the root of the effective number."""
    centre = np.tensordot(weights, values, axes=(0, 0))
    return _estimate(centre, _spread(values - centre, weights))


def deviation(values: Floats, weights: Floats) -> Estimate:
    """Standard deviation over the first axis, with one degree of freedom taken by the mean."""
    away = values - np.tensordot(weights, values, axes=(0, 0))
    size = np.sqrt(np.tensordot(weights, away**2, axes=(0, 0)) / (1.0 - _doubled(weights)))
    influence = np.divide(away**2 - size**2, 2.0 * size, out=np.zeros_like(away), where=size > 0.0)
    return _estimate(size, _spread(influence, weights))


def correlation(one: Floats, other: Floats, weights: Floats) -> Estimate:
    """Correlation over the first axis, element by element; nan where one does not vary."""
    first, second = (_standardised(values, weights) for values in (one, other))
    value = np.tensordot(weights, first * second, axes=(0, 0))
    influence = first * second - 0.5 * value * (first**2 + second**2)
    return _estimate(value, _spread(influence, weights))


def quantile(values: Floats, weights: Floats, level: float) -> Estimate:
    """Quantile over the first axis.

    Each replica stands in the middle of its weight, and between two of them the line is straight. The error
    is nan where that of the rank reaches beyond the first or the last replica: nobody knows how far they lie.
    """
    order = np.argsort(values, axis=0, kind="stable")
    rising = np.take_along_axis(values, order, axis=0).reshape(len(values), -1)
    steps = weights[order].reshape(len(values), -1)
    places = np.cumsum(steps, axis=0) - 0.5 * steps
    half = float(np.sqrt(level * (1.0 - level) * _doubled(weights)))
    at = np.array([level, level - half, level + half])
    found = np.stack(
        [np.interp(at, place, column) for place, column in zip(places.T, rising.T, strict=True)], axis=1
    ).reshape(3, *values.shape[1:])
    known = 1.0 if half <= min(level, 1.0 - level) else np.nan
    return _estimate(found[0], known * 0.5 * (found[2] - found[1]))


def _estimate(value: Any, error: Any) -> Estimate:
    """Return arrays, or plain numbers where there are no axes."""
    if np.ndim(value) == 0:
        return Estimate(float(value), float(error))
    return Estimate(value, error)


def _doubled(weights: Floats) -> float:
    """Return the sum of squared weights: one over the effective number."""
    return float(weights @ weights)


def _spread(influence: Floats, weights: Floats) -> Floats:
    """Return the error that independent replicas leave in a weighted sum."""
    square = np.tensordot(weights**2, influence**2, axes=(0, 0)) / (1.0 - _doubled(weights))
    return np.asarray(np.sqrt(square))


def _standardised(values: Floats, weights: Floats) -> Floats:
    away = values - np.tensordot(weights, values, axes=(0, 0))
    size = np.sqrt(np.tensordot(weights, away**2, axes=(0, 0)))
    return np.divide(away, size, out=np.full_like(away, np.nan), where=size > 0.0)
