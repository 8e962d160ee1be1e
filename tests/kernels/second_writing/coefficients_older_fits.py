"""Coefficient functions of light quarks at a^2: the earlier parametrisations.

W. van Neerven, A. Vogt, hep-ph/9907472 (non-singlet F2, FL, F3, even and odd moments) and
hep-ph/0006154 (pure singlet and gluon F2, FL). Recalled from memory. F3, and the pure
singlet and gluon parts of FL, have no newer form in use here; the rest is compared with the
newer ones of `coefficients_nnlo.py`.
"""

from __future__ import annotations

import numpy as np
from kernels.second_writing.parts import Array, Parts, log_one_minus_z, log_z

Table = dict[tuple[int, int, int], float]
"""{(power of z, power of ln z, power of ln(1-z)): factor}."""

F2_EVEN: Table = {
    (0, 0, 0): -69.59, (1, 0, 0): -1008.0, (0, 3, 0): -2.835, (0, 2, 0): -17.08,
    (0, 1, 0): 5.986, (0, 0, 3): -17.19, (0, 0, 2): 71.08, (0, 0, 1): -660.7,
    (0, 1, 2): -174.8, (0, 2, 1): 95.09,
}  # fmt: skip
F2_ODD: Table = {
    (0, 0, 0): -84.18, (1, 0, 0): -1010.0, (0, 3, 0): -3.748, (0, 2, 0): -19.56,
    (0, 1, 0): -1.235, (0, 0, 3): -17.19, (0, 0, 2): 71.08, (0, 0, 1): -663.0,
    (0, 1, 2): -192.4, (0, 2, 1): 80.41,
}  # fmt: skip
F2_FLAVOUR: Table = {
    (0, 0, 0): -5.691, (1, 0, 0): -37.91, (0, 2, 0): 2.244, (0, 1, 0): 5.770,
    (0, 0, 2): -1.707, (0, 0, 1): 22.95, (0, 2, 1): 3.036, (0, 1, 1): 17.97,
}  # fmt: skip
F3_EVEN: Table = {
    (0, 0, 0): -242.9, (1, 0, 0): -467.2, (0, 3, 0): -3.049, (0, 2, 0): -30.14,
    (0, 1, 0): -79.14, (0, 0, 3): -15.20, (0, 0, 2): 94.61, (0, 0, 1): -396.1,
    (0, 1, 2): -92.43,
}  # fmt: skip
F3_ODD: Table = {
    (0, 0, 0): -206.1, (1, 0, 0): -576.8, (0, 3, 0): -3.922, (0, 2, 0): -33.31,
    (0, 1, 0): -67.60, (0, 0, 3): -15.20, (0, 0, 2): 94.61, (0, 0, 1): -409.6,
    (0, 1, 2): -147.9,
}  # fmt: skip
F3_FLAVOUR: Table = {
    (0, 0, 0): -6.337, (1, 0, 0): -14.97, (0, 2, 0): 2.207, (0, 1, 0): 8.683,
    (0, 0, 3): 0.042, (0, 0, 2): -0.808, (0, 0, 1): 25.00, (0, 1, 1): 9.684,
}  # fmt: skip
FL_EVEN: Table = {
    (0, 0, 0): -40.41, (1, 0, 0): 97.48, (1, 2, 0): 26.56, (0, 2, 0): -0.031,
    (0, 1, 0): -14.85, (0, 0, 2): 13.62, (0, 0, 1): -55.79, (0, 1, 1): -150.5,
}  # fmt: skip
FL_ODD: Table = {
    (0, 0, 0): -52.27, (1, 0, 0): 100.8, (1, 2, 0): 23.29, (0, 2, 0): -0.043,
    (0, 1, 0): -22.21, (0, 0, 2): 13.30, (0, 0, 1): -59.12, (0, 1, 1): -141.7,
}  # fmt: skip
FL_FLAVOUR: Table = {
    (1, 0, 1): 96 / 27, (1, 1, 0): -192 / 27, (1, 0, 0): -400 / 27, (0, 0, 0): 96 / 27,
}  # fmt: skip
PLUS = ((188.64, -31.105, -61.3333, 14.2222), (6.3489, -8.5926, 1.77778, 0.0))
TABLES = {
    ("F2", "ns+"): (F2_EVEN, F2_FLAVOUR, -338.531 + 0.485, 46.844 - 0.0035),
    ("F2", "ns-"): (F2_ODD, F2_FLAVOUR, -338.531 + 0.537, 46.844 - 0.0035),
    ("F3", "ns+"): (F3_EVEN, F3_FLAVOUR, -338.531 - 0.152, 46.844 + 0.013),
    ("F3", "ns-"): (F3_ODD, F3_FLAVOUR, -338.531 - 0.104, 46.844 + 0.013),
    ("FL", "ns+"): (FL_EVEN, FL_FLAVOUR, -0.164, 0.0),
    ("FL", "ns-"): (FL_ODD, FL_FLAVOUR, -0.150, 0.0),
}
"""Regular part of nf^0 and nf^1, delta(1-z) of nf^0 and nf^1 with the shifts of the papers."""


def evaluate(table: Table, z: Array, y: Array) -> Array:
    """Sum a table at z, y = 1 - z."""
    lz, l1 = log_z(z, y), log_one_minus_z(z, y)
    total = np.zeros_like(z)
    for (p, j, k), factor in table.items():
        total += factor * z**p * lz**j * l1**k
    return total


def add(first: Parts, second: Parts, factor: float) -> Parts:
    """first + factor * second."""
    size = max(len(first.plus), len(second.plus))
    plus = np.zeros(size)
    plus[: len(first.plus)] += first.plus
    plus[: len(second.plus)] += factor * np.array(second.plus)

    def regular(z: Array, y: Array) -> Array:
        return first.regular(z, y) + factor * second.regular(z, y)

    return Parts(regular, tuple(plus), first.local + factor * second.local)


def non_singlet(sf: str, name: str, nf: int) -> Parts:
    """a^2, "ns+" even and "ns-" odd moments: hep-ph/9907472."""
    zero, flavour, local_0, local_1 = TABLES[sf, name]
    plus = () if sf == "FL" else tuple(a + nf * b for a, b in zip(*PLUS, strict=True))

    def regular(z: Array, y: Array) -> Array:
        return evaluate(zero, z, y) + nf * evaluate(flavour, z, y)

    return Parts(regular, plus, local_0 + nf * local_1)


def pure_singlet_fl(z: Array, y: Array) -> Array:
    """hep-ph/0006154 (11), also hep-ph/0411112 (5), one flavour."""
    lz, l1 = log_z(z, y), log_one_minus_z(z, y)
    total = (15.94 - 5.212 * z) * y**2 * l1 + (0.421 + 1.520 * z) * lz**2
    return total + 28.09 * y * lz - (2.370 / z - 19.27) * y**3


def gluon_fl(z: Array, y: Array) -> Array:
    """hep-ph/0006154 (12), also hep-ph/0411112 (6), one flavour."""
    lz, l1 = log_z(z, y), log_one_minus_z(z, y)
    total = (94.74 - 49.20 * z) * y * l1**2 + 864.8 * y * l1 + 1161 * z * l1 * lz
    return total + 60.06 * z * lz**2 + 39.66 * y * lz - 5.333 * y / z


def pure_singlet_f2(z: Array, y: Array) -> Array:
    """hep-ph/0006154 (9), one flavour."""
    lz, l1 = log_z(z, y), log_one_minus_z(z, y)
    total = 5.290 * y / z + 4.310 * lz**3 - 2.086 * lz**2 + 39.78 * lz
    return total - 0.101 * y * l1**3 - (24.75 - 13.80 * z) * lz**2 * l1 + 30.23 * lz * l1


def gluon_f2(z: Array, y: Array) -> Array:
    """hep-ph/0006154 (10) without its -0.28 delta(1-z), one flavour."""
    lz, l1 = log_z(z, y), log_one_minus_z(z, y)
    total = (11.90 + 1494 * l1) / z + 5.319 * lz**3 - 59.48 * lz**2 - 284.8 * lz + 392.4
    total += -1483 * l1 + (6.445 + 209.4 * y) * l1**3 - 24.00 * l1**2
    return total - 724.1 * lz**2 * l1 - 871.8 * lz * l1**2


GLUON_F2_LOCAL = -0.28
