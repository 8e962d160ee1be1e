"""Densities across a heavy-quark threshold at one scale: M. Buza et al., hep-ph/9612398.

Coupling and logarithm: a = a^(nl+1)(mu_thr^2), L = ln(mu_thr^2/m^2). Order k of the theory
keeps a^k; an intrinsic heavy density has no a^2 here. Downwards is the exact inverse.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from mellin.contours import Points
from mellin.flavours import State
from mellin.kernel_moments import KernelMoments

Complex = NDArray[np.complex128]

_ABSENT = frozenset(
    {
        ("heavy<-heavy", 2),
        ("gluon<-heavy", 2),
        ("heavy<-quark", 1),
        ("gluon<-quark", 1),
        ("quark<-quark", 1),
    }
)
"""Not known, or zero, at that order."""


@dataclass(frozen=True)
class Threshold:
    """One crossing between `lower_nf` and one flavour more."""

    lower_nf: int
    order: int
    a: float
    log: float
    kind: str
    form: str

    def cross(self, state: State, kernels: KernelMoments, contour: Points, *, up: bool) -> State:
        """Return the state on the other side."""
        light, heavy = slice(0, self.lower_nf), self.lower_nf
        non_singlet = 1 + self._element(kernels, contour, "quark<-quark")
        intrinsic = 1 + self._element(kernels, contour, "heavy<-heavy")
        matrix = self._singlet(kernels, contour, non_singlet, intrinsic)
        before = np.stack((state.gluon, state.plus[light].sum(axis=0), state.plus[heavy]), axis=1)[:, :, None]
        after = (matrix @ before if up else np.linalg.solve(matrix, before))[:, :, 0]
        plus, minus = state.plus.copy(), state.minus.copy()
        factor = non_singlet if up else 1 / non_singlet
        plus[light] *= factor
        minus[light] *= factor
        plus[heavy] = after[:, 2]
        minus[heavy] *= intrinsic if up else 1 / intrinsic
        return State(plus, minus, after[:, 0])

    def _element(self, kernels: KernelMoments, contour: Points, name: str) -> Complex:
        total = np.zeros_like(contour.points)
        for order in range(1, self.order + 1):
            if (name, order) in _ABSENT:
                continue
            for power in range(order + 1):
                if power and self.log == 0.0:
                    continue
                weight = self.a**order * self.log**power
                total = total + weight * kernels.matching(contour, order, name, power, self.kind, self.form)
        return total

    def _singlet(
        self, kernels: KernelMoments, contour: Points, non_singlet: Complex, intrinsic: Complex
    ) -> Complex:
        """Matrix on (g, sum of light q + qbar, h + hbar), shape (n, 3, 3)."""
        matrix = np.zeros((len(contour.points), 3, 3), dtype=np.complex128)
        matrix[:, 0, 0] = 1 + self._element(kernels, contour, "gluon<-gluon")
        matrix[:, 0, 1] = self._element(kernels, contour, "gluon<-quark")
        matrix[:, 0, 2] = self._element(kernels, contour, "gluon<-heavy")
        matrix[:, 1, 1] = non_singlet
        matrix[:, 2, 0] = self._element(kernels, contour, "heavy<-gluon")
        matrix[:, 2, 1] = self._element(kernels, contour, "heavy<-quark")
        matrix[:, 2, 2] = intrinsic
        return matrix
