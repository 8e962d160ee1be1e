"""Coefficient functions of light quarks at a^0 and a^1, exact.

G. Altarelli, R. Ellis, G. Martinelli, Nucl. Phys. B157 (1979) 461, in whose form the quark
part of F2 is one plus distribution of logarithms of (1-z)/z; F3 and FL differ from it by
polynomials. W. Bardeen et al., Phys. Rev. D18 (1978) 3998 has the same as moments, in
`coefficient_moments.py`. Recalled from memory.
"""

from __future__ import annotations

from kernels.second_writing.parts import (
    CF,
    TR,
    ZERO,
    ZETA2,
    Array,
    Parts,
    log_one_minus_z,
    log_z,
    nothing,
)

NON_SINGLET = ("ns+", "ns-")


def lo(sf: str, name: str) -> Parts:
    """delta(1-z) for the quarks in F2 and F3, nothing for FL."""
    return Parts(nothing, (), 1.0) if name in NON_SINGLET and sf != "FL" else ZERO


def _quark_f2(z: Array, y: Array) -> Array:
    """What 2 CF [(1+z^2)/(1-z) (ln((1-z)/z) - 3/4) + (9+5z)/4]_+ leaves beside plus terms.

    (1+z^2)/(1-z) = 2/(1-z) - (1+z): the first belongs to the plus terms with ln(1-z) and
    -3/4, and is regular with ln z.
    """
    ratio = log_one_minus_z(z, y) - log_z(z, y) - 0.75
    return 2 * CF * ((9 + 5 * z) / 4 - (1 + z) * ratio - 2 * log_z(z, y) / y)


def _quark_longitudinal(z: Array) -> Array:
    return 4 * CF * z


def _quark(sf: str) -> Parts:
    if sf == "FL":
        return Parts(lambda z, y: _quark_longitudinal(z), (), 0.0)

    def regular(z: Array, y: Array) -> Array:
        parity = 2 * CF * (1 + z) if sf == "F3" else 0.0
        return _quark_f2(z, y) - parity

    return Parts(regular, (-3 * CF, 4 * CF), -CF * (9 + 4 * ZETA2))


def _gluon(sf: str, nf: int) -> Parts:
    """4 TR nf {(z^2 + (1-z)^2) ln((1-z)/z) - 1 + 8 z(1-z)} and 16 TR nf z(1-z)."""

    def regular(z: Array, y: Array) -> Array:
        if sf == "FL":
            return 16 * TR * nf * z * y
        ratio = log_one_minus_z(z, y) - log_z(z, y)
        return 4 * TR * nf * ((z**2 + y**2) * ratio - 1 + 8 * z * y)

    return Parts(regular, (), 0.0)


def nlo(sf: str, name: str, nf: int) -> Parts:
    """Coefficient of a^1 at mu_r = mu_f = Q."""
    if name in NON_SINGLET:
        return _quark(sf)
    return _gluon(sf, nf) if name == "gluon" and sf != "F3" else ZERO
