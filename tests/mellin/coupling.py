"""The running coupling a = alpha_s/(4 pi), solved exactly, across thresholds.

da/d ln mu^2 = -beta0 a^2 - beta1 a^3 - beta2 a^4; beta2 of O. Tarasov, A. Vladimirov,
A. Zharkov (1980). Decoupling of K. Chetyrkin, B. Kniehl, M. Steinhauser, hep-ph/9706430;
n loops of running go with n-1 loops of decoupling. Constants recalled from memory.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import log, pi

import numpy as np
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

_CONSTANT = {"pole": 14.0 / 3.0, "msbar": -22.0 / 9.0}
"""Two-loop decoupling at mu = M, and at mu = m(m)."""


def betas(nf: int, loops: int) -> tuple[float, float, float]:
    """Return beta0, beta1, beta2, zero from `loops` on."""
    b = (11 - 2 * nf / 3, 102 - 38 * nf / 3, 2857 / 2 - 5033 * nf / 18 + 325 * nf**2 / 54)
    return tuple(v if k < loops else 0.0 for k, v in enumerate(b))  # type: ignore[return-value]


@dataclass(frozen=True)
class Coupling:
    """alpha_s at `q2` (a renormalisation scale) with `nf` flavours, and all that follows.

    `kappa` is mu_r^2/mu_f^2: the number of flavours changes where mu_f crosses a threshold.
    """

    alpha_s: float
    q2: float
    nf: int
    masses: Sequence[float]
    kind: str
    thresholds: Sequence[float]
    loops: int
    kappa: float

    def at(self, muf2: float, nf: int) -> float:
        """Return a with nf flavours at mu_r^2 = kappa mu_f^2."""
        return self.at_renormalisation_scale(self.kappa * muf2, nf)

    def at_renormalisation_scale(self, mur2: float, nf: int) -> float:
        """Return a with nf flavours at mu_r^2."""
        a, scale, flavours = self.alpha_s / (4 * pi), self.q2, self.nf
        while flavours != nf:
            upwards = nf > flavours
            lower = flavours if upwards else flavours - 1
            there = self.kappa * self.thresholds[lower - 3]
            a = self.run(a, scale, there, flavours)
            a = self._up(a, lower, there) if upwards else self._down(a, lower, there)
            scale, flavours = there, flavours + (1 if upwards else -1)
        return self.run(a, scale, mur2, nf)

    def run(self, a: float, from_mu2: float, to_mu2: float, nf: int) -> float:
        """Run at fixed nf, in y = 1/a: dy/d ln mu^2 = beta0 + beta1/y + beta2/y^2."""
        if from_mu2 == to_mu2:
            return a
        b0, b1, b2 = betas(nf, self.loops)
        result = solve_ivp(
            lambda _, y: b0 + (b1 + b2 / y) / y,
            (0.0, log(to_mu2 / from_mu2)),
            [1 / a],
            method="DOP853",
            rtol=1e-13,
            atol=1e-13,
        )
        if not result.success or not np.all(result.y > 0):
            message = f"the coupling does not exist from {from_mu2} to {to_mu2} GeV^2"
            raise ValueError(message)
        return float(1 / result.y[0, -1])

    def _up(self, a: float, lower_nf: int, mur2: float) -> float:
        logarithm = log(mur2 / self.masses[lower_nf - 3] ** 2)
        first = 2 * logarithm / 3 if self.loops > 1 else 0.0
        second = _CONSTANT[self.kind] + 38 * logarithm / 3 + 4 * logarithm**2 / 9
        if self.loops < 3:
            second = 0.0
        return a * (1 + a * first + a**2 * second)

    def _down(self, a: float, lower_nf: int, mur2: float) -> float:
        """Invert `_up` exactly."""
        return float(brentq(lambda b: self._up(b, lower_nf, mur2) - a, a / 3, 3 * a, xtol=1e-17, rtol=1e-15))
