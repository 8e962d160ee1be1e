"""Kernels known at real z only, turned into moments at complex N.

A moment is an integral over t = ln(1/z) that diverges left of the kernel's singularities,
where the contours go. Two representations continue it; neither approximates the kernel
at a z that matters by more than rounding, and both have moments known in closed form or
by plain quadrature, so no digit is lost in the continuation:

* `EveryZ`, for small x: quadrature over z > z_0, and z < z_0 as a sum of
  z^(k-1) ln^j z. Cancellations between the two grow like z_0^Re(N), slower than x^-N falls.
* `NearOne`, for large x: (P * f)(x) needs z > x alone, where P is a sum of t^k ln^j t.
  What that sum does at z < x changes nothing.

The coefficients come from least squares on exact values; they are not unique, and need
not be: only the function they make counts. `regular` may hold powers of ln z, ln(1-z) up
to the fourth times functions analytic within |z| < 1 and |1-z| < 1, as all published
kernels do; the fit raises if it is not so.
"""

from __future__ import annotations

from math import lgamma
from typing import Protocol

import numpy as np
from numpy.typing import NDArray
from scipy.special import polygamma, psi

from mellin.contours import LARGEST_U
from mellin.polygamma import derivatives_of_exponential, polygamma as complex_polygamma

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]

LOGARITHMS = 4
SMALLEST_SINGULAR = 3e-16
"""Relative to the largest; what lies below is rounding."""
WORST_FIT = 1e-12
"""Largest misfit accepted, relative to the kernel's size: rounding gives up to 1e-13."""


class Parts(Protocol):
    """A kernel: regular(z, 1-z) + sum_k plus[k] [ln^k(1-z)/(1-z)]_+ + local delta(1-z)."""

    plus: tuple[float, ...]
    local: float

    def regular(self, z: Real, one_minus_z: Real) -> Real:
        """Return the regular part."""
        ...


def _values(parts: Parts, t: Real) -> Real:
    return np.asarray(parts.regular(np.exp(-t), -np.expm1(-t)), dtype=np.float64)


def graded(length: float, panels: int = 45, order: int = 16) -> tuple[Real, Real]:
    """Gauss-Legendre nodes and weights on [0, length], panels halving towards 0."""
    edges = length * np.concatenate(([0.0], 0.5 ** np.arange(panels - 1, -1, -1)))
    x, w = np.polynomial.legendre.leggauss(order)
    half = np.diff(edges)[:, None] / 2
    return ((edges[:-1, None] + half) + half * x).ravel(), (half * w).ravel()


class _Fit:
    """Least squares with columns power^k log^j (k, j in this order), refined once.

    Of the many solutions equal to rounding the one is taken whose coefficients fall
    with k like `decay`^k: large ones that cancel would cost digits in the moments.
    """

    def __init__(self, powers: Real, logs: Real, row_weights: Real, decay: float) -> None:
        self._weights = row_weights
        columns = powers[:, :, None] * logs[:, None, :]
        self._matrix = columns.reshape(len(row_weights), -1) * row_weights[:, None]
        sizes = np.linalg.norm(logs * row_weights[:, None], axis=0)
        fall = decay ** np.arange(powers.shape[1])
        self._scale = np.multiply.outer(1 / fall, sizes).ravel()
        u, s, vt = np.linalg.svd(self._matrix / self._scale, full_matrices=False)
        keep = s > SMALLEST_SINGULAR * s[0]
        self._ut, self._s, self._v = u[:, keep].T, s[keep], vt[keep].T

    def __call__(self, values: Real) -> Real:
        target = values * self._weights
        size = np.max(np.abs(target))
        if size == 0.0:
            return np.zeros(len(self._scale))
        coefficients = np.zeros(len(self._scale))
        for _ in range(2):
            rest = target - self._matrix @ coefficients
            coefficients += self._v @ ((self._ut @ rest) / self._s) / self._scale
        misfit = np.max(np.abs(target - self._matrix @ coefficients)) / size
        if not misfit < WORST_FIT:
            message = f"the kernel is no sum of powers and logarithms: misfit {misfit:.1e}"
            raise ValueError(message)
        return coefficients


class EveryZ:
    """Quadrature for t < t_0, e^t sum_kj c_kj e^(-k (t - t_0)) t^j beyond."""

    SPLIT = 0.8
    POWERS = 20
    DECAY = 0.6
    """z_0 = exp(-0.8) = 0.45 over the distance 1 of the next singularity, rounded up."""

    def __init__(self) -> None:
        self._t, self._weights = graded(self.SPLIT)
        # dense where the powers of z differ, and as far down as any x needs
        angle = (np.arange(500) + 0.5) * np.pi / 1000
        self._far = self.SPLIT + (LARGEST_U + 5.0) * (1 - np.cos(angle)) ** 2
        self._fits: dict[tuple[int, int], _Fit] = {}

    def _fit(self, first: int, growth: int) -> _Fit:
        if (first, growth) not in self._fits:
            k = np.arange(self.POWERS - first)
            powers = np.exp(-np.multiply.outer(self._far - self.SPLIT, k))
            logs = self._far[:, None] ** np.arange(LOGARITHMS + 1)
            self._fits[first, growth] = _Fit(powers, logs, self._far**-growth, self.DECAY)
        return self._fits[first, growth]

    def vector(self, parts: Parts) -> Real:
        """Return the regular part as coefficients that `matrix` multiplies."""
        values = _values(parts, self._far)
        largest = np.max(np.abs(values[self._far < 3.0]))
        # without 1/z, P and not z P is fitted: its relative accuracy at small z is
        # needed, for non-singlet densities are small there too
        first = 1 if abs(values[-1]) < 1e7 * largest else 0
        leading = values if first else values * np.exp(-self._far)
        growth = _power_of_growth(self._far, leading)
        far = self._fit(first, growth)(leading) * np.exp(-first * self.SPLIT)
        padding = np.zeros(first * (LOGARITHMS + 1))
        return np.concatenate((_values(parts, self._t), padding, far))

    def matrix(self, n: Complex) -> Complex:
        """Return the rows that turn a vector into moments at n."""
        near = np.exp(-np.multiply.outer(n, self._t)) * self._weights
        s = np.add.outer(n, np.arange(self.POWERS) - 1.0)
        lead = np.exp(-(n - 1) * self.SPLIT)[:, None]
        far = [lead / s]
        for j in range(1, LOGARITHMS + 1):  # int e^(-s t) t^j dt by parts
            far.append((lead * self.SPLIT**j + j * far[-1]) / s)
        return np.concatenate((near, np.stack(far, axis=2).reshape(len(n), -1)), axis=1)


def _power_of_growth(t: Real, values: Real) -> int:
    """Return the power of t that levels the values, for the weights of the fit."""
    last, early = abs(values[-1]), np.max(np.abs(values[t < 3.0]))
    if last == 0.0 or early == 0.0:
        return 0
    return int(np.clip(np.rint(np.log(last / early) / np.log(t[-1] / 2.0)), 0, LOGARITHMS))


class NearOne:
    """sum_kj c_kj (t/T)^k ln^j(t/T), right for t < T only."""

    LENGTH = 1.6
    POWERS = 20
    DECAY = 0.6
    """T over the distance pi of the singularity of ln(1+z), rounded up."""

    def __init__(self) -> None:
        angle = (np.arange(400) + 0.5) * np.pi / 400
        bulk = self.LENGTH * (1 - np.cos(angle)) / 2
        # towards t = 0 the logarithms differ by decades of t, not by t; what is divided
        # by 1-z there has a rounding error like 1/t, and little weight in any integral
        self._t = np.sort(np.concatenate((bulk, self.LENGTH * np.logspace(-11, -5, 45))))
        tau = self._t / self.LENGTH
        powers = tau[:, None] ** np.arange(self.POWERS)
        logs = np.log(tau)[:, None] ** np.arange(LOGARITHMS + 1)
        self._fit = _Fit(powers, logs, tau / (tau + 0.01), self.DECAY)

    def vector(self, parts: Parts) -> Real:
        """Return the regular part as coefficients that `matrix` multiplies."""
        return self._fit(_values(parts, self._t))

    def matrix(self, n: Complex) -> Complex:
        """Return the rows that turn a vector into moments at n.

        int_0^inf dt e^(-N t) (t/T)^(k+e) = T Gamma(k+1+e) / (N T)^(k+1+e), of which the
        j-th derivative in e at 0 is taken.
        """
        log_s = np.log(n * self.LENGTH)
        columns = []
        for k in range(self.POWERS):
            slopes = [psi(k + 1.0) - log_s]
            slopes += [polygamma(m, k + 1.0) + 0 * log_s for m in range(1, LOGARITHMS)]
            lead = self.LENGTH * np.exp(lgamma(k + 1.0) - (k + 1) * log_s)
            columns += [lead * d for d in derivatives_of_exponential(slopes)]
        return np.stack(columns, axis=1)


def plus_moments(n: Complex, highest: int) -> list[Complex]:
    """Return int_0^1 dz (z^(n-1) - 1) ln^k(1-z)/(1-z) for k = 0 .. highest.

    From int_0^1 dz (z^(n-1) - 1) (1-z)^(e-1) = [G(n) G(1+e) / G(n+e) - 1] / e, G = Gamma.
    """
    slopes = [
        complex_polygamma(m, np.ones(1, complex))[0] - complex_polygamma(m, n) for m in range(highest + 1)
    ]
    derivatives = derivatives_of_exponential(slopes)
    return [derivatives[k + 1] / (k + 1) for k in range(highest + 1)]
