"""Charm made by charged current at a^1, exact in m^2/Q^2 with a massless light quark.

T. Gottschalk, Phys. Rev. D23 (1981) 56, as corrected in the appendix of M. Glück,
S. Kretzer, E. Reya, hep-ph/9603304, eqs. (A2) to (A8) and tables I and II; recalled from
memory. With lambda = Q^2/(Q^2 + m^2), xi = x/lambda and s the light density (with CKM
factor), F1, F2/(2 xi) and F3/2 are each

    s(xi) + a int_xi^1 dz/z [C_q(z, lambda) s(xi/z) + C_g(z, lambda) g(xi/z)],

g the gluon density with the same CKM factor; for an anti-charm quark C_g of F3 turns its
sign. FL = F2 - 2 x F1. MS-bar with three light flavours at mu_f.
"""

from __future__ import annotations

import mpmath
import numpy as np
from kernels.second_writing.parts import (
    CF,
    TR,
    ZETA2,
    Array,
    Parts,
    log_one_minus_z,
    log_z,
)
from kernels.second_writing.splitting_lo_nlo import splitting


def _k_a(lam: float) -> float:
    return (1 - lam) / lam * float(np.log1p(-lam))


def _b1(sf: str, z: Array) -> Array:
    table = {"F1": 1 - 4 * z + z**2, "F2": 2 - 2 * z**2 - 2 / z, "F3": -1 - z**2}
    return table[sf]


def _b2(sf: str, z: Array) -> Array:
    table = {"F1": z - z**2, "F2": 2 / z - 1 - z, "F3": 1 - z}
    return table[sf]


def charm_quark(sf: str, lam: float, log: float = 0.0) -> Parts:
    """C_q at log = ln((Q^2 + m^2)/mu_f^2).

    Every plus distribution of the paper is brought to those of `Parts`: with kappa =
    lambda/(1-lambda), ln(1 - lambda z) = ln(1-lambda) + ln(1 + kappa (1-z)), and the second
    logarithm over 1-z is regular with the integral -Li2(-kappa).
    """
    if sf not in ("F1", "F2", "F3"):
        raise ValueError(f"structure function {sf!r} is none of 'F1', 'F2', 'F3'")
    kappa, at_one = lam / (1 - lam), float(np.log1p(-lam))
    lowest = splitting(0, "ns+", 0)

    def regular(z: Array, y: Array) -> Array:
        lz, l1 = log_z(z, y), log_one_minus_z(z, y)
        gap = 1 - lam + lam * y
        # (1+z^2) [f/(1-z)]_+ = 2 [f/(1-z)]_+ - (1+z) f, the first part kept in `plus`
        total = -(1 + z**2) * (lz + np.log1p(kappa * y)) / y
        total -= (1 + z) * (2 * l1 - at_one)
        total += (_b1(sf, z) + 2) / y + _b2(sf, z) / gap + y / (2 * gap**2)
        return 2 * CF * total + log * lowest.regular(z, y)

    local = -(4 + 1 / (2 * lam) + 2 * ZETA2 + (1 + 3 * lam) / (2 * lam) * _k_a(lam))
    local += _k_a(lam) if sf == "F2" else 0.0
    local -= 2 * float(mpmath.polylog(2, -kappa))
    local += (at_one + lam) / (2 * lam**2)
    plus = (2 * CF * (-2 * at_one - 2) + log * lowest.plus[0], 8 * CF)
    return Parts(regular, plus, 2 * CF * local + log * lowest.local)


def _gluon_terms(sf: str, z: Array, lam: float) -> tuple[Array, Array, Array, Array]:
    """C_1 to C_4 of table II."""
    light, one = 1 - lam, np.ones_like(z)
    if sf == "F1":
        return (4 - 4 * light) * one, light * z / (1 - lam * z) - 1, 2 * one, -4 * one
    if sf == "F2":
        first = (8 - 18 * light + 12 * light**2) * one
        return first, light / (1 - lam * z) - 1, 6 * lam * one, -12 * lam * one
    return 2 * light * one, 0 * one, -2 * (1 - z), 2 * one


def charm_gluon(sf: str, lam: float, log: float = 0.0) -> Parts:
    """C_g at log = ln((Q^2 + m^2)/mu_f^2), charm quark."""
    if sf not in ("F1", "F2", "F3"):
        raise ValueError(f"structure function {sf!r} is none of 'F1', 'F2', 'F3'")
    sign = -1.0 if sf == "F3" else 1.0

    def regular(z: Array, y: Array) -> Array:
        lz, l1 = log_z(z, y), log_one_minus_z(z, y)
        gap = 1 - lam + lam * y
        heavy = np.log(gap / (1 - lam)) - lz
        split = TR * (z**2 + y**2)
        c1, c2, c3, c4 = _gluon_terms(sf, z, lam)
        total = split * (sign * heavy + log + 2 * l1 - np.log(gap) - lz)
        total += c1 * z * y + c2 + (1 - lam) * z * heavy * (c3 + lam * z * c4)
        return 2 * total

    return Parts(regular, (), 0.0)
