"""Coefficient functions of light quarks at a^2: the published parametrisations.

F2, even moments, and singlet: J. Vermaseren, A. Vogt, S. Moch, hep-ph/0504242 eqs. (4.8) to (4.10).
FL, even moments, and singlet: S. Moch, J. Vermaseren, A. Vogt, hep-ph/0411112 eqs. (4) to (6).
F3, and odd moments of all: W. van Neerven, A. Vogt, hep-ph/9907472, whose sum rules hold
better than those of the newer even moments less the difference even - odd, arXiv:0708.3731
(S. Moch, M. Rogal, A. Vogt), which stands in `DIFFERENCE` as a check.
Numbers and equation numbers recalled from memory; compared in the tests with each other,
with sum rules and with exact moments. Tables: {(power of z, of ln z, of ln(1-z)): factor}.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from kernels.second_writing import coefficients_older_fits as older
from kernels.second_writing.coefficients_older_fits import Table, evaluate
from kernels.second_writing.parts import ZERO, Array, Parts, log_one_minus_z, log_z

Shape = Callable[[Array, Array], Array]

NS2_0: Table = {
    (0, 0, 3): -17.74, (0, 0, 2): 72.24, (0, 0, 1): -628.8, (0, 0, 0): -181.0,
    (1, 0, 0): -806.7, (1, 4, 0): 0.719, (0, 2, 1): 37.75, (0, 1, 2): -147.1,
    (0, 1, 0): -28.384, (0, 2, 0): -20.70, (0, 3, 0): -80 / 27,
}  # fmt: skip
NS2_1: Table = {
    (0, 0, 2): -1.500, (0, 0, 1): 24.87, (0, 0, 0): -7.8109, (1, 0, 0): -17.82,
    (2, 0, 0): -12.97, (1, 3, 0): -0.185, (0, 1, 1): 8.113, (0, 1, 0): 16 / 3,
    (0, 2, 0): 20 / 9,
}  # fmt: skip
NS2_PLUS = ((188.641, -31.1052, -184 / 3, 128 / 9), (6.34888, -232 / 27, 16 / 9))
NS2_LOCAL = (-338.513, 46.8531)

NSL_0: Table = {
    (1, 0, 2): 128 / 9, (1, 0, 1): -46.50, (0, 1, 1): -84.094, (0, 0, 0): -37.338,
    (1, 0, 0): 89.53, (2, 0, 0): 33.82, (1, 1, 0): 32.90, (1, 2, 0): 18.41,
    (0, 1, 0): -128 / 9,
}  # fmt: skip
NSL_1: Table = {
    (1, 0, 1): 96 / 27, (1, 1, 0): -192 / 27, (1, 0, 0): -400 / 27, (0, 0, 0): 96 / 27,
}  # fmt: skip
NSL_LOCAL = -0.012


def _difference_f2(z: Array, y: Array) -> Array:
    """ns+ minus ns- of F2: arXiv:0708.3731 eq. (3.9)."""
    lz = log_z(z, y)
    smooth = -9.1587 - 57.70 * z + 72.29 * z**2 - 5.689 * z**3
    logs = -z * lz * (68.804 + 24.40 * lz + 2.958 * lz**2) + 0.249 * lz
    return (smooth + logs + 8 / 9 * lz**2 * (2 + lz)) * y


def _difference_fl(z: Array, y: Array) -> Array:
    """ns+ minus ns- of FL: arXiv:0708.3731 eq. (3.10)."""
    lz = log_z(z, y)
    smooth = 10.663 - 5.248 * z - 7.500 * z**2 + 0.823 * z**3
    logs = z * lz * (11.10 + 2.225 * lz - 0.128 * lz**2) + 64 / 9 * lz
    return (smooth + logs) * y**2


def _difference_f3(z: Array, y: Array) -> Array:
    """ns+ minus ns- of F3: arXiv:0708.3731 eq. (3.11)."""
    lz = log_z(z, y)
    smooth = -29.65 + 116.05 * z - 71.74 * z**2 - 16.18 * z**3
    logs = z * lz * (14.60 + 69.90 * z - 0.378 * lz**2) - 8.560 * lz
    return (smooth + logs + 8 / 9 * lz**2 * (4 + lz)) * y


DIFFERENCE = {
    "F2": Parts(_difference_f2, (), 0.0),
    "FL": Parts(_difference_fl, (), 0.0),
    "F3": Parts(_difference_f3, (), 0.0),
}


def _even_f2(nf: int) -> Parts:
    plus = np.array(NS2_PLUS[0])
    plus[:3] += nf * np.array(NS2_PLUS[1])

    def regular(z: Array, y: Array) -> Array:
        return evaluate(NS2_0, z, y) + nf * evaluate(NS2_1, z, y)

    return Parts(regular, tuple(plus), NS2_LOCAL[0] + nf * NS2_LOCAL[1])


def _even_fl(nf: int) -> Parts:
    def regular(z: Array, y: Array) -> Array:
        return evaluate(NSL_0, z, y) + nf * evaluate(NSL_1, z, y)

    return Parts(regular, (), NSL_LOCAL)


def _pure_singlet_f2(z: Array, y: Array) -> Array:
    """hep-ph/0504242 (4.9), one flavour."""
    lz, l1 = log_z(z, y), log_one_minus_z(z, y)
    total = (8 / 3 * l1**2 - 32 / 3 * l1 + 9.8937) * y
    total += (9.57 - 13.41 * z + 0.08 * l1**3) * y**2
    total += 5.667 * z * lz**3 - lz**2 * l1 * (20.26 - 33.93 * z)
    total += 43.36 * y * lz - 1.053 * lz**2 + 40 / 9 * lz**3
    return total + 5.2903 * y**2 / z


def _gluon_f2(z: Array, y: Array) -> Array:
    """hep-ph/0504242 (4.10), one flavour."""
    lz, l1 = log_z(z, y), log_one_minus_z(z, y)
    total = 58 / 9 * l1**3 - 24 * l1**2 - 34.88 * l1 + 30.586
    total += -(25.08 + 760.3 * z + 29.65 * l1**3) * y + 1204 * z * lz**2
    total += lz * l1 * (293.8 + 711.2 * z + 1043 * lz)
    total += 115.6 * lz - 7.109 * lz**2 + 70 / 9 * lz**3
    return total + 11.9033 * y / z


def _of_flavours(shape: Shape, nf: int) -> Parts:
    def regular(z: Array, y: Array) -> Array:
        return nf * shape(z, y)

    return Parts(regular, (), 0.0)


SINGLET = {
    ("F2", "pure singlet"): _pure_singlet_f2,
    ("F2", "gluon"): _gluon_f2,
    ("FL", "pure singlet"): older.pure_singlet_fl,
    ("FL", "gluon"): older.gluon_fl,
}


def nnlo(sf: str, name: str, nf: int) -> Parts:
    """Coefficient of a^2 at mu_r = mu_f = Q."""
    if name in ("pure singlet", "gluon"):
        shape = SINGLET.get((sf, name))
        return ZERO if shape is None else _of_flavours(shape, nf)
    if sf == "F3" or name == "ns-":
        return older.non_singlet(sf, name, nf)
    return _even_f2(nf) if sf == "F2" else _even_fl(nf)
