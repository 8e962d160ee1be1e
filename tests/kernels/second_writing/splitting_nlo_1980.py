"""The NLO splitting functions once more, in the form of 1980.

G. Curci, W. Furmanski, R. Petronzio, Nucl. Phys. B175 (1980) 27 (non-singlet) and
W. Furmanski, R. Petronzio, Phys. Lett. 97B (1980) 437 (singlet); recalled from memory.
Regular functions for z < 1 only, without delta terms: a pointwise check of the other form.
"""

from __future__ import annotations

import numpy as np
from kernels.second_writing.parts import CA, CF, TR, Array
from kernels.second_writing.polylogs import li2_negative

PI2 = np.pi**2


def _s2(x: Array) -> Array:
    log = np.log(x)
    return -2 * li2_negative(x) + log**2 / 2 - 2 * log * np.log1p(x) - PI2 / 6


def _non_singlet(x: Array, nf: int, sign: int) -> Array:
    lx, l1 = np.log(x), np.log1p(-x)
    p, p_neg = (1 + x**2) / (1 - x), (1 + x**2) / (1 + x)
    cf2 = -(2 * lx * l1 + 1.5 * lx) * p - (1.5 + 3.5 * x) * lx
    cf2 += -0.5 * (1 + x) * lx**2 - 5 * (1 - x)
    cfca = (lx**2 / 2 + 11 / 6 * lx + 67 / 18 - PI2 / 6) * p + (1 + x) * lx + 20 / 3 * (1 - x)
    light = -(2 / 3 * lx + 10 / 9) * p - 4 / 3 * (1 - x)
    anti = 2 * p_neg * _s2(x) + 2 * (1 + x) * lx + 4 * (1 - x)
    total = CF**2 * cf2 + CF * CA * cfca + CF * TR * nf * light
    return total + sign * CF * (CF - CA / 2) * anti


def _pure_singlet(x: Array, nf: int) -> Array:
    lx = np.log(x)
    shape = 20 / 9 / x - 2 + 6 * x - 56 / 9 * x**2
    shape += (1 + 5 * x + 8 / 3 * x**2) * lx - (1 + x) * lx**2
    return 2 * CF * TR * nf * shape


def _quark_from_gluon(x: Array, nf: int) -> Array:
    lx, l1 = np.log(x), np.log1p(-x)
    ratio = l1 - lx
    p, p_neg = x**2 + (1 - x) ** 2, x**2 + (1 + x) ** 2
    cf = 4 - 9 * x - (1 - 4 * x) * lx - (1 - 2 * x) * lx**2 + 4 * l1
    cf += (2 * ratio**2 - 4 * ratio - 2 * PI2 / 3 + 10) * p
    ca = 182 / 9 + 14 / 9 * x + 40 / 9 / x + (136 / 3 * x - 38 / 3) * lx
    ca += -4 * l1 - (2 + 8 * x) * lx**2 + 2 * p_neg * _s2(x)
    ca += (-(lx**2) + 44 / 3 * lx - 2 * l1**2 + 4 * l1 + PI2 / 3 - 218 / 9) * p
    return nf * TR * (CF * cf + CA * ca)


def _gluon_from_quark(x: Array, nf: int) -> Array:
    lx, l1 = np.log(x), np.log1p(-x)
    p, p_neg = (1 + (1 - x) ** 2) / x, -(1 + (1 + x) ** 2) / x
    cf = -5 / 2 - 7 / 2 * x + (2 + 7 / 2 * x) * lx - (1 - x / 2) * lx**2
    cf += -2 * x * l1 - (3 * l1 + l1**2) * p
    ca = 28 / 9 + 65 / 18 * x + 44 / 9 * x**2 - (12 + 5 * x + 8 / 3 * x**2) * lx
    ca += (4 + x) * lx**2 + 2 * x * l1 + _s2(x) * p_neg
    ca += (1 / 2 - 2 * lx * l1 + lx**2 / 2 + 11 / 3 * l1 + l1**2 - PI2 / 6) * p
    light = -4 / 3 * x - (20 / 9 + 4 / 3 * l1) * p
    return CF * (CF * cf + CA * ca + TR * nf * light)


def _gluon_from_gluon(x: Array, nf: int) -> Array:
    lx, l1 = np.log(x), np.log1p(-x)
    p = 1 / (1 - x) + 1 / x - 2 + x * (1 - x)
    p_neg = 1 / (1 + x) - 1 / x - 2 - x * (1 + x)
    cf = -16 + 8 * x + 20 / 3 * x**2 + 4 / 3 / x - (6 + 10 * x) * lx - (2 + 2 * x) * lx**2
    light = 2 - 2 * x + 26 / 9 * (x**2 - 1 / x) - 4 / 3 * (1 + x) * lx - 20 / 9 * p
    ca = 27 / 2 * (1 - x) + 67 / 9 * (x**2 - 1 / x)
    ca += -(25 / 3 - 11 / 3 * x + 44 / 3 * x**2) * lx + 4 * (1 + x) * lx**2
    ca += 2 * p_neg * _s2(x) + (67 / 9 - 4 * lx * l1 + lx**2 - PI2 / 3) * p
    return TR * nf * (CF * cf + CA * light) + CA**2 * ca


def below_one(channel: str, x: Array, nf: int) -> Array:
    """P^(1)(x) for 0 < x < 1, a-normalised (the papers use alpha_s/(2 pi))."""
    if channel in ("ns+", "ns-"):
        return 4 * _non_singlet(x, nf, 1 if channel == "ns+" else -1)
    singlet = {
        "pure singlet": _pure_singlet,
        "qg": _quark_from_gluon,
        "gq": _gluon_from_quark,
        "gg": _gluon_from_gluon,
    }
    return 4 * singlet[channel](x, nf)
