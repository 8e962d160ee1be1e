"""Mellin convolutions in closed form: powers of z with each other and with 1/(1-z)_+.

Enough to derive the L^2 terms of the matching matrices from the LO splitting functions
instead of writing them down. A polynomial is {(power of z, power of ln z): factor}.
"""

from __future__ import annotations

from collections import defaultdict

import numpy as np
from kernels.second_writing.parts import Array, log_one_minus_z, log_z

Powers = dict[int, float]
Polynomial = dict[tuple[int, int], float]


def powers_with_powers(first: Powers, second: Powers) -> Polynomial:
    """int_z^1 dy/y f(y) g(z/y): z^p * z^q = (z^q - z^p)/(p - q), or -z^p ln z if p = q."""
    result: Polynomial = defaultdict(float)
    for p, a in first.items():
        for q, b in second.items():
            if p == q:
                result[p, 1] -= a * b
            else:
                result[q, 0] += a * b / (p - q)
                result[p, 0] -= a * b / (p - q)
    return dict(result)


def plus_with_powers(second: Powers) -> Polynomial:
    """int_z^1 dy/y [1/(1-y)]_+ g(z/y) without its term g(z) ln(1-z); powers q >= 0.

    z^q int_z^1 dy (y^(-q-1) - 1)/(1-y) = z^q (-ln z + sum_{j=1}^q (z^-j - 1)/j).
    """
    result: Polynomial = defaultdict(float)
    for q, b in second.items():
        if q < 0:
            raise ValueError(f"power {q} of z is negative")
        result[q, 1] -= b
        for j in range(1, q + 1):
            result[q - j, 0] += b / j
            result[q, 0] -= b / j
    return dict(result)


def evaluate(polynomial: Polynomial, z: Array, y: Array) -> Array:
    """Sum a polynomial at z, y = 1 - z."""
    lz = log_z(z, y)
    total = np.zeros_like(z)
    for (p, k), factor in polynomial.items():
        total += factor * z**p * lz**k
    return total


def evaluate_powers(powers: Powers, z: Array, y: Array) -> Array:
    """Sum powers of z."""
    return evaluate({(p, 0): factor for p, factor in powers.items()}, z, y)


def plus_logarithm(second: Powers, z: Array, y: Array) -> Array:
    """Give the term g(z) ln(1-z) which `plus_with_powers` leaves out."""
    return evaluate_powers(second, z, y) * log_one_minus_z(z, y)
