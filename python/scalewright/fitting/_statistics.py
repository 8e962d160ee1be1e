"""Statistics of weighted replicas, each with its sampling error.

The sampling error of mean, deviation and correlation is the spread of their influence functions, that is how
much each replica moves them, to first order: nothing is assumed of the distribution. That of a quantile comes
from the binomial spread of its rank.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any, NamedTuple

import numpy as np

from .._check import Floats

__all__ = ["Estimate", "correlation", "correlation_matrix", "deviation", "mean", "quantile", "quantiles"]

#: Numbers that are looked at together: 16 MB, and a few times that for what is made of them.
_ELEMENTS = 2**21


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

    def of(part: Floats) -> tuple[Floats, Floats]:
        centre = weights @ part
        return centre, _spread(part - centre, weights)

    return _in_parts(of, values)


def deviation(values: Floats, weights: Floats) -> Estimate:
    """Standard deviation over the first axis, with one degree of freedom taken by the mean."""

    def of(part: Floats) -> tuple[Floats, Floats]:
        away = (part - weights @ part) ** 2
        size = np.sqrt(weights @ away / (1.0 - _doubled(weights)))
        away -= size**2
        influence = np.divide(away, 2.0 * size, out=np.zeros_like(away), where=size > 0.0)
        return size, _spread(influence, weights)

    return _in_parts(of, values)


def correlation(one: Floats, other: Floats, weights: Floats) -> Estimate:
    """Correlation over the first axis, element by element; nan where one does not vary."""
    first, second = (_standardised(values, weights) for values in (one, other))
    value = np.tensordot(weights, first * second, axes=(0, 0))
    influence = first * second - 0.5 * value * (first**2 + second**2)
    return _estimate(value, _spread(influence, weights))


def correlation_matrix(one: Floats, other: Floats, weights: Floats) -> Estimate:
    """Correlation of all elements of one with all of the other, (one ..., other ...).

    The square of the influence s t - r (s^2 + t^2)/2 is summed over replicas as a polynomial in r: products
    of matrices, and no array over replicas and both quantities. Terms cancel where |r| is near 1: the error
    is then good to 1e-8 only.
    """
    first, second = (_standardised(values.reshape(len(values), -1), weights) for values in (one, other))
    value = (first * weights[:, None]).T @ second
    square = weights[:, None] ** 2

    def sums(a: int, b: int) -> Floats:
        return np.asarray((first**a * square).T @ second**b)

    with np.errstate(invalid="ignore"):
        total = sums(2, 2) - value * (sums(3, 1) + sums(1, 3))
        total += 0.25 * value**2 * (sums(4, 0) + 2.0 * sums(2, 2) + sums(0, 4))
    error = np.sqrt(np.maximum(total, 0.0) / (1.0 - _doubled(weights)))
    shape = (*one.shape[1:], *other.shape[1:])
    return _estimate(value.reshape(shape), error.reshape(shape))


def quantile(values: Floats, weights: Floats, level: float) -> Estimate:
    """Quantile over the first axis."""
    return quantiles(values, weights, [level])[0]


def quantiles(values: Floats, weights: Floats, levels: Sequence[float]) -> list[Estimate]:
    """Quantiles over the first axis.

    Each replica stands in the middle of its weight, and between two of them the line is straight. The error
    is nan where that of the rank reaches beyond the first or the last replica: nobody knows how far they lie.
    """
    at, inside = [], []
    for level in levels:
        half = float(np.sqrt(level * (1.0 - level) * _doubled(weights)))
        at += [level, level - half, level + half]
        inside.append(half <= min(level, 1.0 - level))

    def of(part: Floats) -> tuple[Floats, ...]:
        order = np.argsort(part, axis=0, kind="stable")
        rising = np.take_along_axis(part, order, axis=0)
        steps = weights[order]
        places = np.cumsum(steps, axis=0) - 0.5 * steps
        found = [np.interp(at, place, column) for place, column in zip(places.T, rising.T, strict=True)]
        return tuple(np.reshape(found, (-1, len(at))).T)

    flat = _parts(of, values)
    made = zip(*[iter(flat)] * 3, strict=True)
    return [
        _estimate(low, (0.5 if known else np.nan) * (top - bottom))
        for known, (low, bottom, top) in zip(inside, made, strict=True)
    ]


def _parts(of: Callable[[Floats], tuple[Floats, ...]], values: Floats) -> list[Any]:
    """Apply a function of (replica, element) to some elements at a time, so that memory stays bounded."""
    flat = values.reshape(len(values), -1)
    width = max(1, _ELEMENTS // max(1, len(values)))
    made = [of(flat[:, start : start + width]) for start in range(0, flat.shape[1], width)]
    made = made or [of(flat)]
    return [np.concatenate(column).reshape(values.shape[1:]) for column in zip(*made, strict=True)]


def _in_parts(of: Callable[[Floats], tuple[Floats, ...]], values: Floats) -> Estimate:
    value, error = _parts(of, values)
    return _estimate(value, error)


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
