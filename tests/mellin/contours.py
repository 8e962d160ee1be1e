"""Contours of the inverse Mellin transform, and the transform itself.

x f(x) = 1/(2 pi i) int dN x^(1-N) F(N) along a straight line bent to the left,
N = c + s exp(+-3 i pi/4): the exponential then falls with s whatever F does. One line
serves an interval of u = ln(1/x); c lies near the saddle point, right of every singularity.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise
from typing import ClassVar, Protocol

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]

DIRECTION = np.exp(0.75j * np.pi)
SMALL_X_FROM = 1.5
"""u above which kernels are needed down to z = 0 (see `representations`)."""
LEAST_U, LARGEST_U = 0.03, 21.0
"""ln(1/x) at x = 0.97 and 8e-10: what is served."""
_LARGE_X_EDGES = (SMALL_X_FROM, 0.8, 0.5, 0.3, 0.18, 0.11, 0.065, LEAST_U)
_START_TIMES_U = 8.0
"""The saddle point of x^-N B(N, b+1) is near N = (b+1)/u: lines for b = 3 to 10."""
ORDER = 28
"""Nodes in a panel. 20 leave 1e-12 where the line passes the singularity of ln^4 z at N = 0."""
_REACH = 42.0
"""exp(-42) = 6e-19: where the line may end, for the smallest u it serves."""


class Points(Protocol):
    """Values of N at which moments are wanted; hashable."""

    @property
    def points(self) -> Complex:
        """The values."""
        ...

    @property
    def reaches_small_z(self) -> bool:
        """Whether kernels are needed at every z, not only near z = 1."""
        ...


@dataclass(frozen=True)
class FreePoints:
    """Values of N of one's own choice."""

    values: tuple[complex, ...]
    reaches_small_z: ClassVar[bool] = True

    @property
    def points(self) -> Complex:
        """The values as an array."""
        return np.array(self.values, dtype=np.complex128)


@dataclass(frozen=True)
class Contour:
    """A bent line for least_u <= ln(1/x) <= most_u.

    Attributes
    ----------
    start : float
        Where it leaves the real axis.
    least_u, most_u : float
        Interval of ln(1/x) it serves.
    order : int
        Gauss-Legendre nodes in each panel.
    """

    start: float
    least_u: float
    most_u: float
    order: int = ORDER

    @property
    def reaches_small_z(self) -> bool:
        """Whether kernels are needed at every z, not only near z = 1."""
        return self.least_u >= SMALL_X_FROM

    @cached_property
    def _nodes(self) -> tuple[Real, Real]:
        length = _REACH / (-DIRECTION.real * self.least_u)
        first = 2.0 / self.most_u
        edges = np.concatenate(([0.0], first * 2.0 ** np.arange(40)))
        # not an inch too far: the moments' own rounding grows to the left
        edges = np.append(edges[edges < length], length)
        x, w = np.polynomial.legendre.leggauss(self.order)
        half = np.diff(edges)[:, None] / 2
        s = (edges[:-1, None] + half) + half * x
        return s.ravel(), (half * w).ravel()

    @cached_property
    def points(self) -> Complex:
        """The values of N on the upper half of the line."""
        return self.start + DIRECTION * self._nodes[0]

    def serves(self, u: Real) -> NDArray[np.bool_]:
        """Return which ln(1/x) belong to this line."""
        return (u >= self.least_u) & (u < self.most_u)

    def invert(self, moments: Complex, u: Real) -> Real:
        """Return x f(x) at x = exp(-u) from moments at `points`."""
        kernel = np.exp(np.multiply.outer(u, self.points - 1)) * (DIRECTION * self._nodes[1])
        return (kernel @ moments).imag / np.pi


def contours(start: float, order: int = ORDER) -> tuple[Contour, ...]:
    """Return the lines that serve every x, the one of small x leaving the axis at `start`."""
    small = Contour(start, SMALL_X_FROM, LARGEST_U, order)
    intervals = pairwise(_LARGE_X_EDGES)
    return (small, *(Contour(_START_TIMES_U / m, least, m, order) for m, least in intervals))
