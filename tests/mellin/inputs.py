"""Densities x f = sum A x^a (1-x)^b, as functions of x and as moments."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import loggamma

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
Moments = Callable[[Complex], Complex]


@dataclass(frozen=True)
class Density:
    """x f(x) = sum over terms (A, a, b) of A x^a (1-x)^b."""

    terms: tuple[tuple[float, float, float], ...]

    def __call__(self, x: Real) -> Real:
        """Return x f(x)."""
        x = np.asarray(x, dtype=np.float64)
        return sum((A * x**a * (1 - x) ** b for A, a, b in self.terms), np.zeros_like(x))

    def moments(self, n: Complex) -> Complex:
        """Return int_0^1 dx x^(n-1) f(x) = sum A B(n - 1 + a, b + 1)."""
        n = np.asarray(n, dtype=np.complex128)
        total = np.zeros_like(n)
        for A, a, b in self.terms:
            p = n - 1 + a
            total = total + A * np.exp(loggamma(p) + loggamma(b + 1) - loggamma(p + b + 1))
        return total

    def scaled(self, factor: float) -> Density:
        """Return the density times a number."""
        return Density(tuple((factor * A, a, b) for A, a, b in self.terms))

    def __add__(self, other: Density) -> Density:
        return Density(self.terms + other.terms)


def shaped(normalisation: float, a: float, b: float, root: float = 0.0, slope: float = 0.0) -> Density:
    """Return x f = A x^a (1-x)^b (1 + root sqrt(x) + slope x)."""
    parts = ((1.0, a), (root, a + 0.5), (slope, a + 1.0))
    return Density(tuple((normalisation * c, e, b) for c, e in parts if c != 0.0))


def beta_moments(normalisation: float, a: float, b: float, root: float = 0.0, slope: float = 0.0) -> Moments:
    """Return the moments of `shaped` as a callable of complex N."""
    return shaped(normalisation, a, b, root, slope).moments
