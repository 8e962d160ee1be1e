"""Exact Mellin moments of coefficient functions, to compare with their z-space forms.

a^1: W. Bardeen, A. Buras, D. Duke, T. Muta, Phys. Rev. D18 (1978) 3998, for any integer N.
a^2: S. Larin, P. Nogueira, T. van Ritbergen, J. Vermaseren, hep-ph/9605317, even N.
Soft-gluon and 1/z constants of a^2: E. Zijlstra, W. van Neerven, Nucl. Phys. B383 (1992)
525. All recalled from memory.
"""

from __future__ import annotations

from kernels.second_writing.anomalous_dimensions import harmonic_sum
from kernels.second_writing.parts import CA, CF, TR, ZETA2, ZETA3, Array, log_one_minus_z, log_z
from kernels.second_writing.polylogs import li2


def quark_nlo(sf: str, n: int) -> float:
    """int z^(n-1) C_ns^(1)."""
    if sf == "FL":
        return 4 * CF / (n + 1)
    s1, s2 = harmonic_sum(1, n), harmonic_sum(2, n)
    total = 2 * s1**2 - 2 * s2 + 3 * s1 - 2 * s1 / (n * (n + 1))
    total += 3 / n + 4 / (n + 1) + 2 / n**2 - 9
    if sf == "F3":
        total -= (4 * n + 2) / (n * (n + 1))
    return CF * total


def gluon_nlo(sf: str, n: int) -> float:
    """int z^(n-1) C_g^(1), one flavour."""
    if sf == "FL":
        return 16 * TR / ((n + 1) * (n + 2))
    split = (n**2 + n + 2) / (n * (n + 1) * (n + 2))
    total = 4 / (n + 1) - 4 / (n + 2) + 1 / n**2
    return 4 * TR * (total - split * (1 + harmonic_sum(1, n)))


NON_SINGLET_NNLO = {
    ("F2", 2): (17.69376589, -5.333333333),
    ("F2", 4): (142.3434719, -16.98791358),
    ("F2", 6): (302.398735, -28.01302),
    ("FL", 2): (56.75530152, -4.543209877),
}
"""nf^0 and nf^1 of even moments at a^2."""
GLUON_F2_NNLO_2 = -8.918338961
"""N = 2, one flavour."""

SOFT_0 = (
    CF**2 * (51 / 2 + 36 * ZETA2 - 8 * ZETA3) + CF * CA * (-3155 / 54 + 44 / 3 * ZETA2 + 40 * ZETA3),
    CF**2 * (-27 - 32 * ZETA2) + CF * CA * (367 / 9 - 8 * ZETA2),
    -18 * CF**2 - 22 / 3 * CF * CA,
    8 * CF**2,
)
"""Factors of [ln^k(1-z)/(1-z)]_+ at a^2, nf^0."""
SOFT_1 = (CF * (247 / 27 - 8 / 3 * ZETA2), -58 / 9 * CF, 4 / 3 * CF, 0.0)
"""The same, nf^1."""
LOCAL = (
    CF**2 * (331 / 8 + 69 * ZETA2 - 78 * ZETA3 + 6 * ZETA2**2)
    + CF * CA * (-5465 / 72 - 251 / 3 * ZETA2 + 140 / 3 * ZETA3 + 71 / 5 * ZETA2**2),
    CF * (457 / 36 + 38 / 3 * ZETA2 + 4 / 3 * ZETA3),
)
"""Exact factors of delta(1-z) at a^2, nf^0 and nf^1."""
INVERSE_F2 = 344 / 27 - 16 / 3 * ZETA2
"""Factor of nf CF/z (pure singlet) and nf CA/z (gluon) in F2 at a^2."""
INVERSE_FL = -16 / 9
"""The same in FL."""


def pure_singlet_fl(z: Array, y: Array) -> Array:
    """Exact pure singlet part of FL at a^2, one flavour: the same source."""
    lz, l1 = log_z(z, y), log_one_minus_z(z, y)
    total = 3 * (1 - 2 * z - 2 * z**2) * y * l1 + 9 * z**2 * (li2(z, y) + lz**2 - ZETA2)
    total += 9 * z * (1 - z - 2 * z**2) * lz - 9 * z**2 * y - y**3
    return 16 * CF / (9 * z) * total
