"""Li2, Li3 and S12 of the arguments 1-z, z and -z with 0 < z < 1.

Power series for arguments up to 1/2, and the reflection, duplication and inversion
relations of L. Lewin, "Polylogarithms and Associated Functions" (1981), chapters 1 and 6,
elsewhere. Compared with mpmath in the tests.
"""

from __future__ import annotations

import numpy as np
from kernels.second_writing.parts import ZETA2, ZETA3, Array, log_one_minus_z, log_z

TERMS = 60
"""(1/2)^60 < 1e-18: the series are exact to rounding."""

_N = np.arange(1, TERMS + 1, dtype=float)
_S1_BEFORE = np.concatenate(([0.0], np.cumsum(1.0 / _N)[:-1]))
_LI2 = 1.0 / _N**2
_LI3 = 1.0 / _N**3
_S12 = _S1_BEFORE / _N**2


def _series(y: Array, coefficients: Array) -> Array:
    """Sum c_n y^n from n = 1 by Horner's rule."""
    total = np.zeros_like(y)
    for c in coefficients[::-1]:
        total = (total + c) * y
    return total


def _by_half(y: Array, one_minus_y: Array, coefficients: Array, reflected: Array) -> Array:
    """Take the series below 1/2 and the reflected form above."""
    small = one_minus_y >= 0.5
    return np.where(small, _series(np.where(small, y, 0.0), coefficients), reflected)


def _small(y: Array) -> Array:
    return np.where(y < 0.5, y, 0.5)


def li2(y: Array, one_minus_y: Array) -> Array:
    """Li2(y), 0 < y < 1."""
    w = _small(one_minus_y)
    logs = log_z(y, one_minus_y) * log_one_minus_z(y, one_minus_y)
    return _by_half(y, one_minus_y, _LI2, ZETA2 - logs - _series(w, _LI2))


def s12(y: Array, one_minus_y: Array) -> Array:
    """S12(y) = 1/2 int_0^y dt ln^2(1-t)/t, 0 < y < 1."""
    w = _small(one_minus_y)
    lw, ly = log_one_minus_z(y, one_minus_y), log_z(y, one_minus_y)
    reflected = ZETA3 - _series(w, _LI3) + lw * _series(w, _LI2) + 0.5 * ly * lw**2
    return _by_half(y, one_minus_y, _S12, reflected)


def li3(y: Array, one_minus_y: Array) -> Array:
    """Li3(y), 0 < y < 1.

    Above 1/2 by Li3(y) + Li3(1-y) + Li3(1-1/y) = zeta3 + ln^3 y/6 + zeta2 ln y
    - ln^2 y ln(1-y)/2, with 1 - 1/y = -(1-y)/y in [-1, 0].
    """
    w = _small(one_minus_y)
    lw, ly = log_one_minus_z(y, one_minus_y), log_z(y, one_minus_y)
    third = _minus_li3_of_landen(w)
    reflected = ZETA3 + ly**3 / 6.0 + ZETA2 * ly - 0.5 * ly**2 * lw - _series(w, _LI3) + third
    return _by_half(y, one_minus_y, _LI3, reflected)


def _minus_li3_of_landen(w: Array) -> Array:
    """-Li3(-w/(1-w)) for 0 <= w <= 1/2, as a convergent series in w.

    d/dw Li3(u(w)) = Li2(u) u'/u with u = -w/(1-w), u'/u = 1/w + 1/(1-w), and Landen's
    Li2(u) = -Li2(w) - ln^2(1-w)/2, gives -Li3(u) = S12(w) + Li3(w)
    + int_0^w dt (Li2(t) + ln^2(1-t)/2)/(1-t).
    """
    inner = _LI2 + np.concatenate(([0.0], (_S1_BEFORE / _N)[1:]))
    cauchy = np.cumsum(inner)
    last = np.concatenate(([0.0], cauchy[:-1])) / _N
    return _series(w, _S12 + _LI3 + last)


def li2_negative(z: Array) -> Array:
    """Li2(-z), 0 < z < 1, by Landen's relation."""
    w = z / (1.0 + z)
    return -_series(w, _LI2) - 0.5 * np.log1p(z) ** 2


def li3_negative(z: Array) -> Array:
    """Li3(-z), 0 < z < 1."""
    return -_minus_li3_of_landen(z / (1.0 + z))


def s12_negative(z: Array) -> Array:
    """S12(-z), 0 < z < 1: substitute w = 1/(1+t) in 1/2 int_0^z dt ln^2(1+t)/t."""
    return _series(z / (1.0 + z), _S12) + np.log1p(z) ** 3 / 6.0
