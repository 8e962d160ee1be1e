"""Polygamma functions of complex argument (scipy has complex digamma only)."""

from __future__ import annotations

from math import factorial

import numpy as np
from numpy.typing import NDArray
from scipy.special import bernoulli, psi

Complex = NDArray[np.complex128]

_SHIFT = 40
"""Upward steps before the asymptotic series is used: its terms fall by (k / pi |N|)^2."""
_TERMS = 12
_FAR = 30.0
_BERNOULLI = bernoulli(2 * _TERMS)


def _asymptotic(order: int, n: Complex) -> Complex:
    """Abramowitz and Stegun 6.4.11."""
    total = factorial(order - 1) / n**order + factorial(order) / (2 * n ** (order + 1))
    for k in range(1, _TERMS + 1):
        weight = _BERNOULLI[2 * k] * factorial(2 * k + order - 1) / factorial(2 * k)
        total = total + weight / n ** (2 * k + order)
    return (-1) ** (order + 1) * total


def polygamma(order: int, n: Complex) -> Complex:
    """Return psi^(order)(n) for |arg n| up to 3 pi/4, away from the poles."""
    if order == 0:
        return np.asarray(psi(n))
    near = np.abs(n) < _FAR
    result = _asymptotic(order, np.where(near, n + _SHIFT, n))
    # psi^(m)(n) = psi^(m)(n+1) - (-1)^m m!/n^(m+1), A. and S. 6.4.6
    step = (-1) ** order * factorial(order)
    lower = sum(1 / np.where(near, n + i, 1.0) ** (order + 1) for i in range(_SHIFT))
    return np.where(near, result - step * lower, result)


def derivatives_of_exponential(derivatives: list[Complex]) -> list[Complex]:
    """Derivatives 0 .. len of exp(g) at a point with g = 0, from g', g'', ... there."""
    values = [np.ones_like(derivatives[0])]
    for j in range(1, len(derivatives) + 1):
        total = np.zeros_like(values[0])
        binomial = 1
        for i in range(j):
            total = total + binomial * derivatives[i] * values[j - 1 - i]
            binomial = binomial * (j - 1 - i) // (i + 1)
        values.append(total)
    return values
