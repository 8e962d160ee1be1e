"""Corrections on the rows of a map: factors and additions as functions of parameters, with derivative.

    row = F(q) (map row . f) + A(q),   F = product of factors, A = sum of additions,

each factor 1 + weight * curve(x; q), or a known factor + shifts . q, on the rows it is for. The map stays
linear in the densities f, and is not touched.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, Protocol

import numpy as np

from .. import _check
from .._check import Floats, Integers
from ..errors import InputError
from .curves import At

__all__ = ["Bound", "Correction", "Part"]


@dataclass(frozen=True, eq=False)
class Part:
    """One correction on the rows it is for.

    Parameters
    ----------
    rows : ndarray of int, (row,)
        Which rows.
    is_factor : bool
        Whether it multiplies; else it is added.
    base, weight : ndarray, (row,)
        The part is base + weight * curve.
    curve : At
        At the x of these rows.
    """

    rows: Integers
    is_factor: bool
    base: Floats
    weight: Floats
    curve: At

    def value(self, q: Floats) -> Floats:
        """Return the factor or what is added, (row,)."""
        return self.base + self.weight * self.curve.value(q)

    def jacobian(self, q: Floats) -> Floats:
        """Return its derivative, (row, parameter)."""
        return self.weight[:, np.newaxis] * self.curve.jacobian(q)


class Correction(Protocol):
    """What `Bound` asks of a correction."""

    targets: tuple[str, ...]
    corrects_target: bool

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the parameters, unlike those of other corrections."""
        ...

    @property
    def limits(self) -> tuple[Floats, Floats, Floats]:
        """Start, lowest and highest values, (parameter,) each."""
        ...

    @property
    def priors(self) -> dict[str, tuple[float, float]]:
        """Name -> (value, standard deviation)."""
        ...

    def on(self, points: Any, weights: Floats) -> Part:
        """Return it on the rows of a map."""
        ...


class Bound:
    """Corrections on all rows of a map.

    Parameters
    ----------
    corrections : sequence of Correction
    fmap : ForwardMap
        Or anything with `points` and `weights` like it.

    Attributes
    ----------
    names : tuple of str
        Of all parameters.
    start, low, high : ndarray, (parameter,)
    priors : dict
        Name -> (value, standard deviation).

    Raises
    ------
    InputError
        If something is no correction, two have a parameter of one name, or one is for no row.
    """

    def __init__(self, corrections: Sequence[Correction] | Correction, fmap: Any) -> None:
        given = checked(corrections)
        self.names = tuple(name for one in given for name in one.names)
        for place, name in enumerate(self.names):
            if name in self.names[:place]:
                _check.refuse("corrections", name, "two have a parameter of this name: give one a `name`")
        sides = [one.limits for one in given]
        self.start, self.low, self.high = (
            np.concatenate([np.zeros(0), *(side[k] for side in sides)]) for k in range(3)
        )
        self.priors = {name: pair for one in given for name, pair in one.priors.items()}
        self.parts: list[Part] = []
        self.count = 0
        if given:
            points, weights = getattr(fmap, "points", None), getattr(fmap, "weights", None)
            if points is None or weights is None:
                raise InputError("corrections: the map does not say what its rows are")
            self.count = len(points.x)
            self.parts = [one.on(points, weights) for one in given]
        ends = np.cumsum([len(one.names) for one in given], dtype=int)
        self._own = [slice(end - len(one.names), end) for one, end in zip(given, ends.tolist(), strict=True)]

    def corrected(self, rows: Floats, q: Floats) -> Floats:
        """Return corrected rows, (..., row), of plain ones."""
        if not self.parts:
            return rows
        factor, addition = self.values(q)
        return rows * factor + addition

    def values(self, q: Floats) -> tuple[Floats, Floats]:
        """Return the product of the factors and the sum of the additions, (row,) each."""
        factor, addition = np.ones(self.count), np.zeros(self.count)
        for part, own in zip(self.parts, self._own, strict=True):
            value = part.value(q[own])
            if part.is_factor:
                factor[part.rows] *= value
            else:
                addition[part.rows] += value
        return factor, addition

    def jacobian(self, rows: Floats, q: Floats) -> Floats:
        """Return the derivative of `corrected`, (row, parameter), of plain rows (row,)."""
        result = np.zeros((self.count, q.size))
        values = [part.value(q[own]) for part, own in zip(self.parts, self._own, strict=True)]
        for place, (part, own) in enumerate(zip(self.parts, self._own, strict=True)):
            slope = part.jacobian(q[own])
            if part.is_factor:
                others = rows.copy()  # times all other factors: not by a division, one may be 0
                for number, other in enumerate(self.parts):
                    if number != place and other.is_factor:
                        others[other.rows] *= values[number]
                slope = others[part.rows, np.newaxis] * slope
            result[part.rows, own] = slope
        return result


def checked(corrections: Any) -> list[Any]:
    """Return a list of corrections; one stands for itself."""
    given = list(corrections) if isinstance(corrections, list | tuple) else [corrections]
    for place, one in enumerate(given):
        if not (hasattr(one, "on") and hasattr(one, "limits") and hasattr(one, "priors")):
            _check.refuse("corrections", one, "must be HigherTwist, TargetFactor or KnownFactor", index=place)
    return given
