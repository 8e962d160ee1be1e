"""Splitting functions at NNLO: the published parametrisations.

S. Moch, J. Vermaseren, A. Vogt, hep-ph/0403192 eqs. (4.22) to (4.24) (non-singlet) and
A. Vogt, S. Moch, J. Vermaseren, hep-ph/0404111 eqs. (4.32) to (4.35) (singlet), recalled
from memory. The delta terms are the shifted ones which the papers give with the
parametrisation, not the exact ones. Tables: {(power of z, of ln z, of ln(1-z)): factor},
one table for each power of nf.
"""

from __future__ import annotations

import numpy as np
from kernels.second_writing import splitting_lo_nlo
from kernels.second_writing.parts import ZERO, Array, Parts, log_one_minus_z, log_z

Table = dict[tuple[int, int, int], float]
CHANNELS = splitting_lo_nlo.CHANNELS

PLUS_0: Table = {
    (0, 0, 1): 714.1, (0, 0, 0): 1641.1, (1, 0, 0): -3135.0, (2, 0, 0): 243.6,
    (3, 0, 0): -522.1, (0, 1, 1): 563.9, (0, 2, 1): 256.8, (0, 1, 0): 1258.0,
    (0, 2, 0): 294.9, (0, 3, 0): 800 / 27, (0, 4, 0): 128 / 81,
}  # fmt: skip
PLUS_1: Table = {
    (0, 0, 1): -5120 / 81, (0, 0, 0): -197.0, (1, 0, 0): 381.1, (2, 0, 0): 72.94,
    (3, 0, 0): 44.79, (1, 3, 0): -1.497, (0, 1, 1): -56.66, (0, 1, 0): -152.6,
    (0, 2, 0): -2608 / 81, (0, 3, 0): -64 / 27,
}  # fmt: skip
MINUS_0: Table = {
    (0, 0, 1): 714.1, (0, 0, 0): 1860.2, (1, 0, 0): -3505.0, (2, 0, 0): 297.0,
    (3, 0, 0): -433.2, (0, 1, 1): 684.0, (0, 2, 1): 251.2, (0, 1, 0): 1465.2,
    (0, 2, 0): 399.2, (0, 3, 0): 320 / 9, (0, 4, 0): 116 / 81,
}  # fmt: skip
MINUS_1: Table = {
    (0, 0, 1): -5120 / 81, (0, 0, 0): -216.62, (1, 0, 0): 406.5, (2, 0, 0): 77.89,
    (3, 0, 0): 34.76, (1, 3, 0): -1.136, (0, 1, 1): -65.43, (0, 1, 0): -172.69,
    (0, 2, 0): -3216 / 81, (0, 3, 0): -256 / 81,
}  # fmt: skip
SEA_FALLING: Table = {
    (-1, 0, 1): -163.9, (1, 0, 1): -7.208, (0, 0, 0): 151.49, (1, 0, 0): 44.51,
    (2, 0, 0): -43.12, (3, 0, 0): 4.82,
}  # fmt: skip
"""Multiplies 1 - z."""
SEA_REST: Table = {
    (0, 1, 1): -173.1, (0, 2, 1): 46.18, (0, 1, 0): 178.04, (0, 2, 0): 6.892,
    (0, 4, 0): 40 / 27, (0, 3, 0): -80 / 27,
}  # fmt: skip
PS_1: Table = {
    (0, 0, 3): -5.926, (0, 0, 2): -9.751, (0, 0, 1): -72.11, (0, 0, 0): 177.4,
    (1, 0, 0): 392.9, (2, 0, 0): -101.4, (0, 1, 1): -57.04, (0, 1, 0): -661.6,
    (0, 2, 0): 131.4, (0, 3, 0): -400 / 9, (0, 4, 0): 160 / 27, (-1, 0, 0): -506.0,
    (-1, 1, 0): -3584 / 27,
}  # fmt: skip
"""Multiplies 1 - z, as does the next."""
PS_2: Table = {
    (0, 0, 2): 1.778, (0, 0, 1): 5.944, (0, 0, 0): 100.1, (1, 0, 0): -125.2,
    (2, 0, 0): 49.26, (3, 0, 0): -12.59, (0, 1, 1): -1.889, (0, 1, 0): 61.75,
    (0, 2, 0): 17.89, (0, 3, 0): 32 / 27, (-1, 0, 0): 256 / 81,
}  # fmt: skip
QG_1: Table = {
    (0, 0, 4): 100 / 27, (0, 0, 3): -70 / 9, (0, 0, 2): -120.5, (0, 0, 1): 104.42,
    (0, 0, 0): 2522.0, (1, 0, 0): -3316.0, (2, 0, 0): 2126.0, (0, 1, 1): 1823.0,
    (0, 2, 1): -25.22, (1, 3, 0): -252.5, (0, 1, 0): 424.9, (0, 2, 0): 881.5,
    (0, 3, 0): -44 / 3, (0, 4, 0): 536 / 27, (-1, 0, 0): -1268.3, (-1, 1, 0): -896 / 3,
}  # fmt: skip
QG_2: Table = {
    (0, 0, 3): 20 / 27, (0, 0, 2): 200 / 27, (0, 0, 1): -5.496, (0, 0, 0): -252.0,
    (1, 0, 0): 158.0, (2, 0, 0): 145.4, (3, 0, 0): -139.28, (0, 1, 1): -53.09,
    (0, 2, 1): -80.616, (1, 2, 0): -98.07, (1, 3, 0): 11.70, (0, 1, 0): -254.0,
    (0, 2, 0): -90.80, (0, 3, 0): -376 / 27, (0, 4, 0): -16 / 9, (-1, 0, 0): 1112 / 243,
}  # fmt: skip
GQ_0: Table = {
    (0, 0, 4): 400 / 81, (0, 0, 3): 2200 / 27, (0, 0, 2): 606.3, (0, 0, 1): 2193.0,
    (0, 0, 0): -4307.0, (1, 0, 0): 489.3, (2, 0, 0): 1452.0, (3, 0, 0): 146.0,
    (0, 2, 1): -447.3, (1, 2, 0): -972.9, (0, 1, 0): 4033.0, (0, 2, 0): -1794.0,
    (0, 3, 0): 1568 / 9, (0, 4, 0): -4288 / 81, (-1, 0, 0): 6163.1, (-1, 1, 0): 1189.3,
}  # fmt: skip
GQ_1: Table = {
    (0, 0, 3): -400 / 81, (0, 0, 2): -68.069, (0, 0, 1): -296.7, (0, 0, 0): -183.8,
    (1, 0, 0): 33.35, (2, 0, 0): -277.9, (1, 2, 0): 108.6, (0, 1, 1): -49.68,
    (0, 1, 0): 174.8, (0, 2, 0): 20.39, (0, 3, 0): 704 / 81, (0, 4, 0): 128 / 27,
    (-1, 0, 0): -46.41, (-1, 1, 0): 71.082,
}  # fmt: skip
GQ_2: Table = {
    (0, 0, 2): -96 / 27, (-1, 0, 2): 96 / 27, (1, 0, 2): 48 / 27,
    (0, 0, 1): -320 / 27, (-1, 0, 1): 320 / 27, (1, 0, 1): 256 / 27,
    (0, 0, 0): 64 / 27, (-1, 0, 0): -64 / 27, (1, 0, 0): 128 / 27,
}  # fmt: skip
GG_0: Table = {
    (0, 0, 1): 3589.0, (0, 0, 0): -20852.0, (1, 0, 0): 3968.0, (2, 0, 0): -3363.0,
    (3, 0, 0): 4848.0, (0, 1, 1): 7305.0, (0, 2, 1): 8757.0, (0, 1, 0): 274.4,
    (0, 2, 0): -7471.0, (0, 3, 0): 72.0, (0, 4, 0): -144.0, (-1, 0, 0): 14214.0,
    (-1, 1, 0): 2675.8,
}  # fmt: skip
GG_1: Table = {
    (0, 0, 1): -320.0, (0, 0, 0): -350.2, (1, 0, 0): 755.7, (2, 0, 0): -713.8,
    (3, 0, 0): 559.3, (0, 1, 1): 26.15, (0, 2, 1): -808.7, (0, 1, 0): 1541.0,
    (0, 2, 0): 491.3, (0, 3, 0): 832 / 9, (0, 4, 0): 512 / 27, (-1, 0, 0): 182.96,
    (-1, 1, 0): 157.27,
}  # fmt: skip
GG_2: Table = {
    (0, 0, 0): -13.878, (1, 0, 0): 153.4, (2, 0, 0): -187.7, (3, 0, 0): 52.75,
    (0, 1, 1): -115.6, (1, 1, 1): 85.25, (0, 2, 1): -63.23, (0, 1, 0): -3.422,
    (0, 2, 0): 9.680, (0, 3, 0): -32 / 27, (-1, 0, 0): -680 / 243,
}  # fmt: skip


def evaluate(table: Table, z: Array, y: Array) -> Array:
    """Sum a table at z, y = 1 - z."""
    lz, l1 = log_z(z, y), log_one_minus_z(z, y)
    total = np.zeros_like(z)
    for (power, k, m), factor in table.items():
        total += factor * z**power * lz**k * l1**m
    return total


def _quark_nf2(z: Array, y: Array) -> Array:
    """Regular nf^2 part of P_ns^(2)+-, exact: hep-ph/0403192 (4.22)."""
    lz = log_z(z, y)
    bracket = z / y * lz * (1.5 * lz + 5) + 1 + y * (6 + 5.5 * lz + 0.75 * lz**2)
    return 64 / 81 * bracket


def _non_singlet(nf: int, minus: bool) -> Parts:
    zero, one = (MINUS_0, MINUS_1) if minus else (PLUS_0, PLUS_1)
    local_0, local_1 = (1295.470, -173.933) if minus else (1295.384, -173.927)

    def regular(z: Array, y: Array) -> Array:
        linear = evaluate(zero, z, y) + nf * evaluate(one, z, y)
        return linear + nf**2 * _quark_nf2(z, y)

    plus = 1174.898 - 183.187 * nf - 64 / 81 * nf**2
    return Parts(regular, (plus,), local_0 + local_1 * nf + 1.13067 * nf**2)


def _sea(nf: int) -> Parts:
    def regular(z: Array, y: Array) -> Array:
        return nf * (y * evaluate(SEA_FALLING, z, y) + evaluate(SEA_REST, z, y))

    return Parts(regular, (), 0.0)


def _pure_singlet(nf: int) -> Parts:
    def regular(z: Array, y: Array) -> Array:
        return nf * y * (evaluate(PS_1, z, y) + nf * evaluate(PS_2, z, y))

    return Parts(regular, (), 0.0)


def _polynomial(nf: int, tables: tuple[Table, Table, Table]) -> Parts:
    def regular(z: Array, y: Array) -> Array:
        zero, one, two = (evaluate(t, z, y) for t in tables)
        return zero + nf * (one + nf * two)

    return Parts(regular, (), 0.0)


def _gluon_from_gluon(nf: int) -> Parts:
    plus = 2643.521 - 412.172 * nf - 16 / 9 * nf**2
    local = 4425.894 - 528.723 * nf + 6.4630 * nf**2
    return Parts(_polynomial(nf, (GG_0, GG_1, GG_2)).regular, (plus,), local)


def nnlo(channel: str, nf: int) -> Parts:
    """P^(2)."""
    if channel in ("ns+", "ns-"):
        return _non_singlet(nf, minus=channel == "ns-")
    if channel == "qg":
        return _polynomial(nf, ({}, QG_1, QG_2))
    if channel == "gq":
        return _polynomial(nf, (GQ_0, GQ_1, GQ_2))
    others = {"ns-sea": _sea, "pure singlet": _pure_singlet, "gg": _gluon_from_gluon}
    return others[channel](nf) if channel in others else ZERO


def splitting(order: int, channel: str, nf: int) -> Parts:
    """Splitting function of a^(order + 1), order 0, 1 or 2.

    Raises
    ------
    ValueError
        Unknown channel, or another order.
    """
    if order != 2:
        return splitting_lo_nlo.splitting(order, channel, nf)
    if channel not in CHANNELS:
        raise ValueError(f"channel {channel!r} is none of {CHANNELS}")
    return nnlo(channel, nf)
