"""Curves of corrections with few numbers: polynomials with powers of x and 1 - x, and splines.

Which one when: `Polynomial` for a few numbers that say how a correction rises and falls; `Spline` where the
data shall decide between given knots.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats, show
from .curves import At, Curve, Linear

__all__ = ["Polynomial", "Spline"]

#: Highest degree: beyond it the data of a correction decide nothing (common practice, no source).
_MOST = 8
#: Lowest and highest values of free exponents of x and 1 - x.
_RANGES = {"a": (-2.0, 10.0), "b": (0.0, 20.0)}


class Polynomial(Curve):
    """x^a (1-x)^b times a polynomial in x.

    Parameters
    ----------
    degree : int
        0 to 8; the coefficients are the parameters "c0", "c1" ...
    family : {"chebyshev", "plain"}
        T_k(1 - 2x), whose members are almost independent; or x^k.
    a, b : float
        Exponents: fixed, unless named in `free`.
    free : sequence of {"a", "b"}
        Exponents that are parameters as well, from -2 to 10 and 0 to 20, after the coefficients.
    start : array_like, (degree + 1,), optional
        Coefficients that a fit begins with; 0 by default, with a free exponent 1 for c0.

    Raises
    ------
    InputError
        If an argument is wrong.

    Examples
    --------
    >>> line = Polynomial(1, family="plain", b=2.0)
    >>> at = line.on(np.array([0.5]), ["here"])
    >>> at.value(np.array([1.0, 4.0]))
    array([0.75])
    """

    def __init__(
        self,
        degree: int,
        *,
        family: str = "chebyshev",
        a: float = 0.0,
        b: float = 0.0,
        free: Sequence[str] = (),
        start: ArrayLike | None = None,
    ) -> None:
        self.degree = _check.whole("degree", degree, least=0, most=_MOST)
        self.family = _check.choice("family", family, ("chebyshev", "plain"))
        if isinstance(free, str) or not isinstance(free, Sequence):
            _check.refuse("free", free, 'free must be a list of "a" and "b"')
        self.free = tuple(_check.choice("free", name, ("a", "b")) for name in free)
        if len(set(self.free)) != len(self.free):
            _check.refuse("free", self.free, "an exponent stands there twice")
        self.exponents = {"a": _check.real("a", a), "b": _check.real("b", b)}
        first = np.zeros(self.degree + 1)
        first[0] = 1.0 if self.free else 0.0  # at 0 nothing depends on the exponents
        if start is not None:
            first = _check.real_array("start", start, shape=(self.degree + 1,))
        names = [*(f"c{k}" for k in range(self.degree + 1)), *self.free]
        wide = np.full(self.degree + 1, np.inf)
        low = [*-wide, *(_RANGES[name][0] for name in self.free)]
        high = [*wide, *(_RANGES[name][1] for name in self.free)]
        super().__init__(names, [*first, *(self.exponents[name] for name in self.free)], low, high)

    def on(self, x: Floats, place: Sequence[str]) -> At:
        """Return the curve at points."""
        at_one = x >= 1.0
        if at_one.any() and ("b" in self.free or self.exponents["b"] < 0.0):
            where = place[int(np.argmax(at_one))]
            _check.refuse(where, 1.0, "x must lie below 1 for a free or negative power of 1 - x")
        if self.family == "plain":
            matrix = np.asarray(x[:, np.newaxis] ** np.arange(self.degree + 1), dtype=np.float64)
        else:
            matrix = np.asarray(np.polynomial.chebyshev.chebvander(1.0 - 2.0 * x, self.degree))
        if not self.free:
            power = x ** self.exponents["a"] * (1.0 - x) ** self.exponents["b"]
            return Linear(power[:, np.newaxis] * matrix)
        return _Powers(matrix, x, self.exponents, self.free)


class _Powers:
    """A polynomial with free exponents at fixed points."""

    def __init__(self, matrix: Floats, x: Floats, exponents: dict[str, float], free: tuple[str, ...]) -> None:
        self._matrix, self._free, self._count = matrix, free, matrix.shape[1]
        with np.errstate(divide="ignore"):
            self._logs = {"a": np.log(x), "b": np.log1p(-x)}
        held = [name for name in ("a", "b") if name not in free]
        base = {"a": x, "b": 1.0 - x}
        self._held = np.prod([base[name] ** exponents[name] for name in held], axis=0) * np.ones_like(x)

    def _power(self, q: Floats) -> Floats:
        exponent = sum(p * self._logs[name] for name, p in zip(self._free, q[self._count :], strict=True))
        return np.asarray(self._held * np.exp(exponent))

    def value(self, q: Floats) -> Floats:
        """Return the curve, (point,)."""
        return np.asarray(self._power(q) * np.einsum("pk,k->p", self._matrix, q[: self._count]))

    def jacobian(self, q: Floats) -> Floats:
        """Return its derivative, (point, parameter)."""
        value, logs = self.value(q), [self._logs[name] for name in self._free]
        return np.column_stack([self._power(q)[:, np.newaxis] * self._matrix, *(value * log for log in logs)])


class Spline(Curve):
    """A natural cubic spline in x; the parameters are its values at knots, "k0", "k1" ...

    Parameters
    ----------
    knots : array_like, (knot,)
        x in (0, 1], growing, at least 3. Points outside are refused: nothing is extrapolated.
    start : array_like, (knot,), optional
        Values that a fit begins with; 0 by default.

    Raises
    ------
    InputError
        If an argument is wrong.

    Examples
    --------
    >>> Spline([0.1, 0.4, 0.8]).names
    ('k0', 'k1', 'k2')
    """

    def __init__(self, knots: ArrayLike, *, start: ArrayLike | None = None) -> None:
        self.knots = _check.x_values("knots", _check.real_array("knots", knots, ndim=1)).copy()
        if self.knots.size < 3 or (np.diff(self.knots) <= 0.0).any():
            _check.refuse("knots", self.knots.tolist(), "knots must grow, and there must be at least 3")
        size = self.knots.size
        first = np.zeros(size) if start is None else _check.real_array("start", start, shape=(size,))
        super().__init__([f"k{k}" for k in range(size)], first, -np.inf, np.inf)

    def on(self, x: Floats, place: Sequence[str]) -> At:
        """Return the curve at points."""
        from scipy.interpolate import CubicSpline  # type: ignore[import-untyped]

        outside = (x < self.knots[0]) | (x > self.knots[-1])
        if outside.any():
            row = int(np.argmax(outside))
            limits = f"[{show(self.knots[0])}, {show(self.knots[-1])}]"
            _check.refuse(f"{place[row]}: x", x[row], f"the knots of the spline span {limits}")
        return Linear(np.asarray(CubicSpline(self.knots, np.eye(self.knots.size), bc_type="natural")(x)))
