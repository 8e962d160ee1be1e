"""Functions of x with parameters, and their exact derivative: what corrections are made of."""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Mapping, Sequence
from typing import Protocol

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats, show

__all__ = ["At", "Curve", "Linear"]


class At(Protocol):
    """A curve at fixed points."""

    def value(self, q: Floats) -> Floats:
        """Return the curve, (point,)."""
        ...

    def jacobian(self, q: Floats) -> Floats:
        """Return its derivative, (point, parameter)."""
        ...


class Curve(ABC):
    """A function of x with parameters.

    Attributes
    ----------
    names : tuple of str
        Of the parameters.
    start, low, high : ndarray, (parameter,)
        Where a fit begins, lowest and highest values.
    """

    def __init__(self, names: Sequence[str], start: ArrayLike, low: ArrayLike, high: ArrayLike) -> None:
        self.names = tuple(names)
        self.start, self.low, self.high = (
            np.array(np.broadcast_to(np.asarray(side, dtype=np.float64), (len(self.names),)))
            for side in (start, low, high)
        )
        for name, value, least, most in zip(self.names, self.start, self.low, self.high, strict=True):
            if not least <= value <= most:
                _check.refuse(f"start[{name}]", float(value), f"must lie in [{show(least)}, {show(most)}]")

    @abstractmethod
    def on(self, x: Floats, place: Sequence[str]) -> At:
        """Return the curve at points x, (point,); `place` says where each stands, for messages."""

    def restricted(
        self,
        *,
        fixed: Sequence[str] | Mapping[str, float] = (),
        bounds: Mapping[str, tuple[float, float]] | None = None,
    ) -> Curve:
        """Return the curve with some parameters fixed or bounded.

        Parameters
        ----------
        fixed : sequence of names, or mapping
            Parameters that do not move: from their start, or at the values given.
        bounds : mapping
            Name -> (lowest, highest).

        Returns
        -------
        Curve

        Raises
        ------
        InputError
            If a name is unknown or fixed as well, or a value lies outside its bounds.

        Examples
        --------
        >>> from scalewright.corrections import Spline
        >>> Spline([0.1, 0.4, 0.8]).restricted(fixed={"k2": 0.0}).names
        ('k0', 'k1')
        """
        return _Restricted(self, fixed, bounds or {})


class _Restricted(Curve):
    """A curve with some parameters of another fixed or bounded."""

    def __init__(
        self,
        curve: Curve,
        fixed: Sequence[str] | Mapping[str, float],
        bounds: Mapping[str, tuple[float, float]],
    ) -> None:
        if isinstance(fixed, str) or not isinstance(fixed, Sequence | Mapping):
            _check.refuse("fixed", fixed, "fixed must be a list of names, or map names to values")
        held = list(fixed)
        for option, names in (("fixed", held), ("bounds", list(bounds))):
            for name in names:
                if name not in curve.names:
                    known = f"{_check.show_all(curve.names)}{_check.nearest(name, curve.names)}"
                    _check.refuse(option, name, f"no parameter of this name; there are {known}")
                if option == "bounds" and name in held:
                    _check.refuse(option, name, "the parameter is fixed")
        self._curve, self._all = curve, curve.start.copy()
        if isinstance(fixed, Mapping):
            for name, value in fixed.items():
                self._all[curve.names.index(name)] = _check.real(f"fixed[{name}]", value)
        self._free = [place for place, name in enumerate(curve.names) if name not in held]
        low, high = curve.low.copy(), curve.high.copy()
        for name, pair in bounds.items():
            place = curve.names.index(name)
            low[place], high[place] = _two(f"bounds[{name}]", pair)
        names = [curve.names[place] for place in self._free]
        super().__init__(names, self._all[self._free], low[self._free], high[self._free])

    def on(self, x: Floats, place: Sequence[str]) -> At:
        """Return the curve at points."""
        return _Held(self._curve.on(x, place), self._all, self._free)


def _two(name: str, given: object) -> tuple[float, float]:
    """Return two numbers, infinite ones allowed."""
    try:
        array = np.asarray(given, dtype=np.float64)
    except (TypeError, ValueError):
        array = np.zeros(0)
    if array.shape != (2,) or np.isnan(array).any():
        _check.refuse(name, given, "must be two numbers")
    return float(array[0]), float(array[1])


class _Held:
    """A curve at fixed points with some of its parameters held."""

    def __init__(self, at: At, every: Floats, free: list[int]) -> None:
        self._at, self._all, self._free = at, every, free

    def _full(self, q: Floats) -> Floats:
        full = self._all.copy()
        full[self._free] = q
        return full

    def value(self, q: Floats) -> Floats:
        """Return the curve, (point,)."""
        return self._at.value(self._full(q))

    def jacobian(self, q: Floats) -> Floats:
        """Return its derivative, (point, parameter)."""
        return self._at.jacobian(self._full(q))[:, self._free]


class Linear:
    """A curve at fixed points that is linear in its parameters: matrix (point, parameter) times them."""

    def __init__(self, matrix: Floats) -> None:
        self._matrix = matrix

    def value(self, q: Floats) -> Floats:
        """Return the curve, (point,)."""
        return np.asarray(np.einsum("pk,k->p", self._matrix, q))

    def jacobian(self, q: Floats) -> Floats:
        """Return its derivative, (point, parameter)."""
        return self._matrix
