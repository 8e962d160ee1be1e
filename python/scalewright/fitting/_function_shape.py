"""A shape from any function of x and parameters."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats
from ..grid import ChebyshevGrid
from ._shape import Shape

__all__ = ["FunctionShape"]

#: Step of a difference in parts of the parameter, or of 1 if that is smaller: the fifth root of the rounding
#: error balances it against the error h^4 of five points.
_STEP = (2.0**-52) ** 0.2


class FunctionShape(Shape):
    """A shape from a function ``f(x, parameters)`` that returns x f(x).

    Parameters
    ----------
    grid : ChebyshevGrid
        Where x lives.
    flavours : sequence of int
        PDG numbers.
    function : callable
        ``f(x, parameters)`` with arrays x (node,) and parameters (parameter,), returning (flavour, node); one
        flavour may return (node,).
    start : array_like, (parameter,)
        Where a fit begins.
    names : sequence of str, optional
        By default "p0", "p1" ...
    bounds : tuple of two array_like, (parameter,), optional
        Lowest and highest values; the function is not called outside.
    jacobian : callable, optional
        ``f(x, parameters)`` returning (parameter, flavour, node). Without it, differences of five points are
        used: their error is about 1e-12 of the change of the function over a parameter's own size. Closer to
        a bound than their step the points move inwards, and the error grows to 1e-10.

    Raises
    ------
    InputError
        If a function raises, or returns another shape or values that are not finite.

    Notes
    -----
    For more than one process the functions must be importable: defined at the top of a module, no lambda.

    Examples
    --------
    >>> import scalewright as sw
    >>> grid = sw.ChebyshevGrid(x_min=1e-4)
    >>> gluon = FunctionShape(grid, [21], lambda x, p: p[0] * x ** p[1] * (1 - x) ** 5, start=[3.0, -0.1])
    >>> gluon([2.0, 0.0]).shape == (1, grid.nodes)
    True
    """

    def __init__(
        self,
        grid: ChebyshevGrid,
        flavours: Sequence[int],
        function: Callable[[Floats, Floats], ArrayLike],
        start: ArrayLike,
        *,
        names: Sequence[str] | None = None,
        bounds: tuple[ArrayLike, ArrayLike] | None = None,
        jacobian: Callable[[Floats, Floats], ArrayLike] | None = None,
    ) -> None:
        numbers = _check.partons("flavours", flavours)
        _check.function("function", function)
        if jacobian is not None:
            _check.function("jacobian", jacobian)
        begin = _check.real_array("start", start, ndim=1)
        called = [f"p{place}" for place in range(begin.size)] if names is None else list(names)
        if len(called) != begin.size or not all(isinstance(name, str) for name in called):
            _check.refuse("names", names, f"there must be {begin.size} names, one a parameter")
        sides: Any = (-np.inf, np.inf) if bounds is None else bounds
        low, high = (np.array(np.broadcast_to(np.asarray(side, float), begin.shape)) for side in sides)
        self._function, self._derivative = function, jacobian
        super().__init__(grid, numbers, called, begin, (low, high))
        self.exact_jacobian = jacobian is not None

    def __call__(self, parameters: ArrayLike) -> Floats:
        """Return x f(x) at the nodes, (flavour, node)."""
        return self._at(self._given(parameters))

    def jacobian(self, parameters: ArrayLike) -> Floats:
        """Return the derivative, (parameter, flavour, node)."""
        given = self._given(parameters)
        if self._derivative is not None:
            shape = (given.size, *self._shape)
            return _check.called("jacobian", self._derivative, self._x(), given.copy(), shape=shape)
        return np.stack([self._difference(given, place) for place in range(given.size)])

    def _x(self) -> Floats:
        return np.array(self.grid.x)

    def _at(self, given: Floats) -> Floats:
        result = _check.raised("function", self._function, self._x(), given.copy())
        array = _check.real_array("value of function", result)
        if array.shape == (self.grid.nodes,) and len(self.flavours) == 1:
            array = array[np.newaxis]
        if array.shape != self._shape:
            _check.refuse("value of function", array, f"the shape must be {self._shape}, (flavour, node)")
        return array

    def _difference(self, given: Floats, place: int) -> Floats:
        """Return the derivative by one parameter from five points within the bounds."""
        low, high = self.bounds[0][place], self.bounds[1][place]
        step = min(_STEP * max(abs(given[place]), 1.0), (high - low) / 8.0)
        centre = min(max(given[place], low + 2.0 * step), high - 2.0 * step)
        nodes = centre + step * np.arange(-2.0, 3.0)
        total, middle = np.zeros(self._shape), self._at(given)
        for node, weight in zip(nodes, _weights(nodes, float(given[place])), strict=True):
            moved = given.copy()
            moved[place] = node
            total += weight * (self._at(moved) - middle)  # exactly 0 for what does not change
        return total


def _weights(nodes: Floats, at: float) -> Floats:
    """Return the weights of the derivative at one place of the polynomial through the nodes."""
    scale = float(nodes[1] - nodes[0])
    powers = np.arange(nodes.size)[:, None]
    system = ((nodes - at) / scale) ** powers
    wanted = np.zeros(nodes.size)
    wanted[1] = 1.0 / scale
    return np.asarray(np.linalg.solve(system, wanted))
