"""Splitting functions at LO and NLO, exact, in harmonic polylogarithms.

S. Moch, J. Vermaseren, A. Vogt, hep-ph/0403192 eqs. (4.5), (4.6), and A. Vogt, S. Moch,
J. Vermaseren, hep-ph/0404111 eqs. (4.6) to (4.9), equal to G. Curci, W. Furmanski,
R. Petronzio (1980) and W. Furmanski, R. Petronzio (1980), whose own form stands in
`splitting_nlo_1980.py`. Equation numbers and constants recalled from memory.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from kernels.second_writing.parts import (
    CA,
    CF,
    ZERO,
    ZETA2,
    ZETA3,
    Array,
    Parts,
    log_one_minus_z,
    log_z,
)
from kernels.second_writing.polylogs import li2, li2_negative

CHANNELS = ("ns+", "ns-", "ns-sea", "pure singlet", "qg", "gq", "gg")


@dataclass(frozen=True)
class _Harmonic:
    """Harmonic polylogarithms of weight 1 and 2, and the lowest-order shapes."""

    z: Array
    y: Array
    h0: Array
    h1: Array
    h00: Array
    h11: Array
    h2: Array
    h10: Array
    hm10: Array

    @classmethod
    def at(cls, z: Array, y: Array) -> _Harmonic:
        h0, h1 = log_z(z, y), -log_one_minus_z(z, y)
        h2 = li2(z, y)
        hm10 = np.log1p(z) * h0 + li2_negative(z)
        return cls(z, y, h0, h1, h0**2 / 2, h1**2 / 2, h2, h1 * h0 - h2, hm10)


def _qq_minus(z: Array) -> Array:
    return 2 / (1 + z) - 1 + z


def _qg_plus(z: Array) -> Array:
    return 1 - 2 * z + 2 * z**2


def _qg_minus(z: Array) -> Array:
    return 1 + 2 * z + 2 * z**2


def _gq_plus(z: Array) -> Array:
    return 2 / z - 2 + z


def _gq_minus(z: Array) -> Array:
    return -2 / z - 2 - z


def _gg_minus(z: Array) -> Array:
    return 1 / (1 + z) - 1 / z - 2 - z - z**2


def lo(channel: str, nf: int) -> Parts:
    """P^(0): hep-ph/0403192 (4.5), hep-ph/0404111 (4.6)."""
    if channel in ("ns+", "ns-"):
        return Parts(lambda z, y: -2 * CF * (1 + z), (4 * CF,), 3 * CF)
    if channel == "qg":
        return Parts(lambda z, y: 2 * nf * _qg_plus(z), (), 0.0)
    if channel == "gq":
        return Parts(lambda z, y: 2 * CF * _gq_plus(z), (), 0.0)
    if channel == "gg":
        local = 11 / 3 * CA - 2 / 3 * nf
        return Parts(lambda z, y: 4 * CA * (1 / z - 2 + z - z**2), (4 * CA,), local)
    return ZERO


def _non_singlet(nf: int, minus: bool) -> Parts:
    """P_ns^(1)+-: hep-ph/0403192 (4.6)."""
    k_a, k_f = 67 / 18 - ZETA2, 5 / 9

    def regular(z: Array, y: Array) -> Array:
        h = _Harmonic.at(z, y)
        full = 2 / y - 1 - z
        crossed = _qq_minus(z) * (ZETA2 + 2 * h.hm10 - h.h00)
        ca = full * (11 / 6 * h.h0 + h.h00) - (1 + z) * k_a + crossed + 14 / 3 * y
        cf = 2 * full * (h.h10 - 3 / 4 * h.h0 + h.h2) - 2 * crossed
        cf += -y * (1 - 3 / 2 * h.h0) - h.h0 - (1 + z) * h.h00
        light = full * h.h0 / 3 - (1 + z) * k_f + 2 / 3 * y
        total = 4 * CF * (CA * ca + CF * cf - nf * light)
        if minus:
            odd = crossed - (1 + z) * h.h0 - 2 * y
            total = total + 16 * CF * (CF - CA / 2) * odd
        return total

    local = CA * (17 / 24 + 11 / 3 * ZETA2 - 3 * ZETA3) + CF * (3 / 8 - 3 * ZETA2 + 6 * ZETA3)
    local -= nf * (1 / 12 + 2 / 3 * ZETA2)
    return Parts(regular, (8 * CF * (CA * k_a - nf * k_f),), 4 * CF * local)


def _pure_singlet(nf: int) -> Parts:
    """P_ps^(1): hep-ph/0404111 (4.7)."""

    def regular(z: Array, y: Array) -> Array:
        h = _Harmonic.at(z, y)
        shape = 20 / 9 / z - 2 + 6 * z - 4 * h.h0 + z**2 * (8 / 3 * h.h0 - 56 / 9)
        return 4 * CF * nf * (shape + (1 + z) * (5 * h.h0 - 2 * h.h00))

    return Parts(regular, (), 0.0)


def _quark_from_gluon(nf: int) -> Parts:
    """P_qg^(1): hep-ph/0404111 (4.8)."""

    def regular(z: Array, y: Array) -> Array:
        h = _Harmonic.at(z, y)
        ca = 20 / 9 / z - 2 + 25 * z - 2 * _qg_minus(z) * h.hm10 - 2 * _qg_plus(z) * h.h11
        ca += z**2 * (44 / 3 * h.h0 - 218 / 9) + 4 * y * (h.h00 - 2 * h.h0 + z * h.h1)
        ca += -4 * ZETA2 * z - 6 * h.h00 + 9 * h.h0
        cf = 2 * _qg_plus(z) * (h.h10 + h.h11 + h.h2 - ZETA2)
        cf += 4 * z**2 * (h.h0 + h.h00 + 5 / 2) + 2 * y * (h.h0 + h.h00 - 2 * z * h.h1 + 29 / 4)
        cf += -15 / 2 - h.h00 - h.h0 / 2
        return 4 * nf * (CA * ca + CF * cf)

    return Parts(regular, (), 0.0)


def _gluon_from_quark(nf: int) -> Parts:
    """P_gq^(1): hep-ph/0404111 (4.8)."""

    def regular(z: Array, y: Array) -> Array:
        h = _Harmonic.at(z, y)
        p = _gq_plus(z)
        ca = 1 / z + 2 * p * (h.h10 + h.h11 + h.h2 - 11 / 6 * h.h1)
        ca += -(z**2) * (8 / 3 * h.h0 - 44 / 9) + 4 * ZETA2 - 2 - 7 * h.h0 + 2 * h.h00
        ca += -2 * z * h.h1 + (1 + z) * (2 * h.h00 - 5 * h.h0 + 37 / 9)
        ca += -2 * _gq_minus(z) * h.hm10
        light = 2 / 3 * z - p * (2 / 3 * h.h1 - 10 / 9)
        cf = p * (3 * h.h1 - 2 * h.h11) + (1 + z) * (h.h00 - 7 / 2 + 7 / 2 * h.h0)
        cf += -3 * h.h00 + 1 - 3 / 2 * h.h0 + 2 * z * h.h1
        return 4 * CF * (CA * ca - nf * light + CF * cf)

    return Parts(regular, (), 0.0)


def _gluon_from_gluon(nf: int) -> Parts:
    """P_gg^(1): hep-ph/0404111 (4.9)."""
    k_a = 67 / 18 - ZETA2

    def regular(z: Array, y: Array) -> Array:
        h = _Harmonic.at(z, y)
        rest = 1 / z - 2 + z - z**2
        tails = 1 / z - z**2
        light = 1 - z - 10 / 9 * rest - 13 / 9 * tails - 2 / 3 * (1 + z) * h.h0
        ca = 27 + (1 + z) * (11 / 3 * h.h0 + 8 * h.h00 - 27 / 2)
        ca += 2 * _gg_minus(z) * (h.h00 - 2 * h.hm10 - ZETA2) - 67 / 9 * tails
        ca += -12 * h.h0 - 44 / 3 * z**2 * h.h0 + 2 * k_a * rest
        ca += 2 * (1 / y + rest) * (h.h00 + 2 * h.h10 + 2 * h.h2)
        cf = 2 * h.h0 + 2 / 3 / z + 10 / 3 * z**2 - 12 + (1 + z) * (4 - 5 * h.h0 - 2 * h.h00)
        return 4 * (CA * nf * light + CA**2 * ca + CF * nf * cf)

    plus = 4 * CA * (2 * CA * k_a - 10 / 9 * nf)
    local = 4 * (CA**2 * (8 / 3 + 3 * ZETA3) - 2 / 3 * CA * nf - CF * nf / 2)
    return Parts(regular, (plus,), local)


def nlo(channel: str, nf: int) -> Parts:
    """P^(1)."""
    if channel in ("ns+", "ns-"):
        return _non_singlet(nf, minus=channel == "ns-")
    singlet = {
        "pure singlet": _pure_singlet,
        "qg": _quark_from_gluon,
        "gq": _gluon_from_quark,
        "gg": _gluon_from_gluon,
    }
    return singlet[channel](nf) if channel in singlet else ZERO


def splitting(order: int, channel: str, nf: int) -> Parts:
    """Splitting function of a^(order + 1), order 0 or 1.

    Raises
    ------
    ValueError
        Unknown channel, or another order.
    """
    if channel not in CHANNELS:
        raise ValueError(f"channel {channel!r} is none of {CHANNELS}")
    if order not in (0, 1):
        raise ValueError(f"order {order} is neither 0 nor 1")
    return lo(channel, nf) if order == 0 else nlo(channel, nf)
