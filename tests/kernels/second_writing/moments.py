"""Mellin moments of `Parts` by Gauss-Legendre quadrature in logarithms.

The lower half of [0, 1] is integrated in ln(1/z), the upper half in ln(1/(1-z)), each on
panels of fixed width: powers of ln z and ln(1-z) become polynomials times exponentials.
"""

from __future__ import annotations

import numpy as np
from kernels.second_writing.parts import Array, Parts

_RANGE = 90.0
"""exp(-90) ln^5: what is cut off stays below 1e-29."""


def _nodes() -> tuple[Array, Array, Array]:
    x, w = np.polynomial.legendre.leggauss(20)
    edges = np.linspace(np.log(2.0), _RANGE, 46)
    half = np.diff(edges)[:, None] / 2
    t = ((edges[:-1, None] + half) + half * x).ravel()
    small, weight = np.exp(-t), (half * w).ravel() * np.exp(-t)
    z = np.concatenate((small, -np.expm1(-t)))
    one_minus_z = np.concatenate((-np.expm1(-t), small))
    return z, one_minus_z, np.concatenate((weight, weight))


Z, ONE_MINUS_Z, WEIGHT = _nodes()
_LOG_Z = np.where(Z < 0.5, np.log(Z), np.log1p(-np.minimum(ONE_MINUS_Z, 0.5)))


def moment(parts: Parts, n: float) -> float:
    """int_0^1 dz z^(n-1) P(z)."""
    total = float(np.sum(WEIGHT * np.exp((n - 1) * _LOG_Z) * parts.regular(Z, ONE_MINUS_Z)))
    loss = np.expm1((n - 1) * _LOG_Z) / ONE_MINUS_Z
    log1 = np.where(Z < 0.5, np.log1p(-np.minimum(Z, 0.5)), np.log(ONE_MINUS_Z))
    for k, coefficient in enumerate(parts.plus):
        total += coefficient * float(np.sum(WEIGHT * loss * log1**k))
    return total + parts.local
