"""The constant parts (L = 0) of the a^2 matching matrices.

M. Buza, Y. Matiounine, J. Smith, W. L. van Neerven, hep-ph/9612398 eqs. (B.1) to (B.7),
for a pole mass and a = a^(nl+1); compact form of A_Hg^(2): A. Vogt, hep-ph/0408244
eq. (3.5). Recalled from memory.
"""

from __future__ import annotations

import numpy as np
from kernels.second_writing.parts import (
    CA,
    CF,
    TR,
    ZETA2,
    ZETA3,
    Array,
    Parts,
    log_one_minus_z,
    log_z,
)
from kernels.second_writing.polylogs import (
    li2,
    li2_negative,
    li3,
    li3_negative,
    s12,
    s12_negative,
)


def quark_from_quark() -> Parts:
    """A_qq,H^NS,(2): (B.4)."""

    def regular(z: Array, y: Array) -> Array:
        lz = log_z(z, y)
        logs = (1 + z**2) / y * (2 / 3 * lz**2 + 20 / 9 * lz)
        return CF * TR * (logs + 8 / 3 * y * lz + 44 / 27 - 268 / 27 * z)

    local = -8 / 3 * ZETA3 + 40 / 9 * ZETA2 + 73 / 18
    return Parts(regular, (CF * TR * 224 / 27,), CF * TR * local)


def gluon_from_quark() -> Parts:
    """A_gq,H^(2): (B.5)."""

    def regular(z: Array, y: Array) -> Array:
        l1 = log_one_minus_z(z, y)
        shape = 4 / 3 * (2 / z - 2 + z) * l1**2 + 8 / 9 * (10 / z - 10 + 8 * z) * l1
        return CF * TR * (shape + (448 / z - 448 + 344 * z) / 27)

    return Parts(regular, (), 0.0)


def gluon_from_gluon() -> Parts:
    """A_gg,H^(2): (B.7)."""

    def regular(z: Array, y: Array) -> Array:
        lz, l1 = log_z(z, y), log_one_minus_z(z, y)
        cf = 4 / 3 * (1 + z) * lz**3 + (6 + 10 * z) * lz**2 + (32 + 48 * z) * lz
        cf += -8 / z + 80 - 48 * z - 24 * z**2
        ca = 4 / 3 * (1 + z) * lz**2 + (52 + 88 * z) / 9 * lz - 4 / 3 * z * l1
        ca += (556 / z - 628 + 548 * z - 700 * z**2) / 27
        return TR * (CF * cf + CA * ca)

    return Parts(regular, (CA * TR * 224 / 27,), TR * (-15 * CF + 10 / 9 * CA))


def heavy_from_quark() -> Parts:
    """A_Hq^PS,(2), h + hbar: (B.1)."""

    def regular(z: Array, y: Array) -> Array:
        lz = log_z(z, y)
        li2_y = li2(y, z)
        inverse = 32 / 3 / z + 8 - 8 * z - 32 / 3 * z**2
        shape = (1 + z) * (32 * s12(y, z) + 16 * lz * li2_y - 16 * ZETA2 * lz - 4 / 3 * lz**3)
        shape += inverse * (li2_y - ZETA2) + (2 + 10 * z + 16 / 3 * z**2) * lz**2
        shape += -(56 / 3 + 88 / 3 * z + 448 / 9 * z**2) * lz
        shape += -448 / 27 / z - 4 / 3 - 124 / 3 * z + 1600 / 27 * z**2
        return CF * TR * shape

    return Parts(regular, (), 0.0)


def _heavy_from_gluon_cf(z: Array, y: Array) -> Array:
    lz, l1 = log_z(z, y), log_one_minus_z(z, y)
    li2_y, s12_y = li2(y, z), s12(y, z)
    p = 8 * ZETA3 + 4 / 3 * l1**3 - 8 * l1 * li2_y + 8 * ZETA2 * lz - 4 * lz * l1**2
    p += 2 / 3 * lz**3 - 8 * lz * li2_y + 8 * li3(y, z) - 24 * s12_y
    square = -16 * ZETA2 * lz + 4 / 3 * lz**3 + 16 * lz * li2_y + 32 * s12_y
    shape = (1 - 2 * z + 2 * z**2) * p + z**2 * square
    shape += -(4 + 96 * z - 64 * z**2) * li2_y - (4 - 48 * z + 40 * z**2) * ZETA2
    shape += -(8 + 48 * z - 24 * z**2) * lz * l1 + (4 + 8 * z - 12 * z**2) * l1**2
    shape += -(1 + 12 * z - 20 * z**2) * lz**2 - (52 * z - 48 * z**2) * l1
    return shape - (16 + 18 * z + 48 * z**2) * lz + 26 - 82 * z + 80 * z**2


def _heavy_from_gluon_ca(z: Array, y: Array) -> Array:
    lz, l1, lp = log_z(z, y), log_one_minus_z(z, y), np.log1p(z)
    li2_y, li2_n = li2(y, z), li2_negative(z)
    p = -4 / 3 * l1**3 + 8 * l1 * li2_y - 8 * li3(y, z)
    p_neg = -8 * ZETA2 * lp - 16 * lp * li2_n - 8 * lz * lp**2 + 4 * lz**2 * lp
    p_neg += 8 * lz * li2_n - 8 * li3_negative(z) - 16 * s12_negative(z)
    shape = (1 - 2 * z + 2 * z**2) * p + (1 + 2 * z + 2 * z**2) * p_neg
    shape += (16 + 64 * z) * (2 * s12(y, z) + lz * li2_y) - (4 + 8 * z) / 3 * lz**3
    shape += (8 - 32 * z + 16 * z**2) * ZETA3 - (16 + 64 * z) * ZETA2 * lz
    shape += (16 * z + 16 * z**2) * (li2_n + lz * lp)
    shape += (32 / 3 / z + 12 + 64 * z - 272 / 3 * z**2) * li2_y
    shape += -(12 + 48 * z - 260 / 3 * z**2 + 32 / 3 / z) * ZETA2
    shape += -4 * z**2 * lz * l1 - (2 + 8 * z - 10 * z**2) * l1**2
    shape += (2 + 8 * z + 46 / 3 * z**2) * lz**2 + (4 + 16 * z - 16 * z**2) * l1
    shape += -(56 / 3 + 172 / 3 * z + 1600 / 9 * z**2) * lz
    return shape - 448 / 27 / z - 4 / 3 - 628 / 3 * z + 6352 / 27 * z**2


def heavy_from_gluon() -> Parts:
    """A_Hg^S,(2), h + hbar, exact: (B.3)."""

    def regular(z: Array, y: Array) -> Array:
        return TR * (CF * _heavy_from_gluon_cf(z, y) + CA * _heavy_from_gluon_ca(z, y))

    return Parts(regular, (), 0.0)


def heavy_from_gluon_compact() -> Parts:
    """A_Hg^(2) by the parametrisation of hep-ph/0408244 (3.5), with its delta term."""

    def regular(z: Array, y: Array) -> Array:
        lz, l1 = log_z(z, y), log_one_minus_z(z, y)
        ends = -24.89 / z - 187.8 + 249.6 * z - 146.8 * lz**2 * l1
        logs = -1.556 * lz**3 - 3.292 * lz**2 - 93.68 * lz
        return ends + logs - 1.111 * l1**3 - 0.400 * l1**2 - 2.770 * l1

    return Parts(regular, (), -0.006)
