"""Moments of splitting functions and matching elements on the contours, each taken once."""

from __future__ import annotations

from functools import lru_cache
from typing import Any, Protocol

import numpy as np
from numpy.typing import NDArray

from mellin.contours import Points
from mellin.representations import EveryZ, NearOne, Parts, plus_moments

Complex = NDArray[np.complex128]
HIGHEST_PLUS = 3


class Kernels(Protocol):
    """The kernels as functions of z: all that is shared with what is tested."""

    def splitting(self, order: int, channel: str, nf: int) -> Parts:
        """Coefficient of a^(order+1) of a splitting function."""
        ...

    def matching(self, order: int, element: str, power_of_L: int, kind: str, form: str) -> Parts:
        """Coefficient of a^order L^power of a matching element across a threshold."""
        ...


class _OnContour:
    """What all kernels share on one contour."""

    def __init__(self, contour: Points, representation: EveryZ | NearOne) -> None:
        self.regular = representation.matrix(contour.points)
        self.plus = plus_moments(contour.points, HIGHEST_PLUS)


class KernelMoments:
    """Cache of the moments of one provider of kernels."""

    def __init__(self, kernels: Kernels) -> None:
        self._kernels = kernels
        self._contours: dict[Points, _OnContour] = {}
        self._parts: dict[tuple[Any, ...], Parts] = {}
        self._vectors: dict[tuple[Any, ...], NDArray[np.float64]] = {}
        self._moments: dict[tuple[Any, ...], Complex] = {}
        self._representations = {True: EveryZ(), False: NearOne()}

    def splitting(self, contour: Points, order: int, channel: str, nf: int) -> Complex:
        """Return moments at `contour.points`, shape (n,)."""
        return self._at(contour, ("splitting", order, channel, nf))

    def matching(
        self, contour: Points, order: int, element: str, power: int, kind: str, form: str
    ) -> Complex:
        """Return moments at `contour.points`, shape (n,)."""
        return self._at(contour, ("matching", order, element, power, kind, form))

    def _at(self, contour: Points, name: tuple[Any, ...]) -> Complex:
        key = (contour, *name)
        if key not in self._moments:
            self._moments[key] = self._compute(contour, name)
        return self._moments[key]

    def _compute(self, contour: Points, name: tuple[Any, ...]) -> Complex:
        if name not in self._parts:
            self._parts[name] = getattr(self._kernels, name[0])(*name[1:])
        parts, near = self._parts[name], not contour.reaches_small_z
        representation = self._representations[not near]
        if (near, *name) not in self._vectors:
            self._vectors[near, *name] = representation.vector(parts)
        if contour not in self._contours:
            self._contours[contour] = _OnContour(contour, representation)
        shared = self._contours[contour]
        total = shared.regular @ self._vectors[near, *name] + parts.local
        for k, coefficient in enumerate(parts.plus):
            total = total + coefficient * shared.plus[k]
        return total


@lru_cache(maxsize=4)
def moments_of(kernels: Kernels) -> KernelMoments:
    """Return the cache that all solutions with these kernels share."""
    return KernelMoments(kernels)
