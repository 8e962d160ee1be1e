"""A curve of a correction from any function of x and parameters."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats
from .curves import At, Curve

__all__ = ["Function"]

#: Step of a difference of five points, in parts of the parameter or of 1 if that is smaller: the fifth root
#: of rounding balances it against the error h^4.
_STEP = (2.0**-52) ** 0.2


class Function(Curve):
    """Any function ``f(x, parameters)`` of x.

    Parameters
    ----------
    function : callable
        With arrays x (point,) and parameters (parameter,), returning (point,).
    start : array_like, (parameter,)
        Where a fit begins.
    names : sequence of str, optional
        By default "p0", "p1" ...
    bounds : tuple of two array_like, (parameter,), optional
        Lowest and highest values.
    jacobian : callable, optional
        ``f(x, parameters)`` returning (point, parameter). Without it, differences of five points are used;
        their step may reach beyond a bound.

    Raises
    ------
    InputError
        If a function raises, or returns another shape or values that are not finite.

    Notes
    -----
    For more than one process the functions must be importable: defined at the top of a module, no lambda.

    Examples
    --------
    >>> law = Function(lambda x, p: p[0] * np.exp(-p[1] * x), [1.0, 2.0])
    >>> law.on(np.array([0.5]), ["here"]).jacobian(np.array([1.0, 2.0])).round(6)
    array([[ 0.367879, -0.18394 ]])
    """

    def __init__(
        self,
        function: Callable[[Floats, Floats], ArrayLike],
        start: ArrayLike,
        *,
        names: Sequence[str] | None = None,
        bounds: tuple[ArrayLike, ArrayLike] = (-np.inf, np.inf),
        jacobian: Callable[[Floats, Floats], ArrayLike] | None = None,
    ) -> None:
        _check.function("function", function)
        if jacobian is not None:
            _check.function("jacobian", jacobian)
        first = _check.real_array("start", start, ndim=1)
        called = [f"p{k}" for k in range(first.size)] if names is None else list(names)
        if len(called) != first.size or len(set(called)) != first.size:
            _check.refuse("names", names, f"there must be {first.size} different names, one a parameter")
        self._function, self._derivative = function, jacobian
        super().__init__(called, first, *bounds)

    def on(self, x: Floats, place: Sequence[str]) -> At:
        """Return the curve at points."""
        return _Called(self._function, self._derivative, x)


class _Called:
    """A user's function at fixed points."""

    def __init__(self, function: object, derivative: object, x: Floats) -> None:
        self._function, self._derivative, self._x = function, derivative, x

    def value(self, q: Floats) -> Floats:
        """Return the curve, (point,)."""
        return _check.called("function", self._function, self._x.copy(), q.copy(), shape=self._x.shape)

    def jacobian(self, q: Floats) -> Floats:
        """Return its derivative, (point, parameter)."""
        if self._derivative is not None:
            shape = (self._x.size, q.size)
            return _check.called("jacobian", self._derivative, self._x.copy(), q.copy(), shape=shape)
        columns = [self._difference(q, place) for place in range(q.size)]
        return np.stack(columns, axis=1) if columns else np.zeros((self._x.size, 0))

    def _difference(self, q: Floats, place: int) -> Floats:
        step = _STEP * max(abs(q[place]), 1.0)
        total = np.zeros_like(self._x)
        for times, weight in ((-2, 1.0), (-1, -8.0), (1, 8.0), (2, -1.0)):
            moved = q.copy()
            moved[place] += times * step
            total += weight / (12.0 * step) * self.value(moved)
        return total
