"""Matching of densities across a heavy-quark threshold, nl -> nl + 1, to a^2.

f^(nl+1)_i = sum_k a^k L^p A_ij^(k,p) * f^(nl)_j with a = a^(nl+1), L = ln(mu^2/m^2) and
"heavy" = h + hbar. Constants in `matching_constants.py`; the logarithms are derived here
from dA/dL - beta0' a A^(1) = P' A - A P with P' for nl + 1 flavours and P for nl, where
a^(nl) = a (1 - 2/3 a L): A^(2,1) = P1' - P1 and
2 A^(2,2) = beta0' A^(1,1) + 2/3 P0 + P0' A^(1,1) - A^(1,1) P0.
"""

from __future__ import annotations

from collections.abc import Callable

from kernels.second_writing import convolution as conv, matching_constants as constants
from kernels.second_writing.parts import (
    CA,
    CF,
    TR,
    ZERO,
    Array,
    Parts,
    log_one_minus_z,
    nothing,
)
from kernels.second_writing.splitting_lo_nlo import splitting

ELEMENTS = (
    "heavy<-gluon",
    "heavy<-quark",
    "gluon<-gluon",
    "gluon<-quark",
    "quark<-quark",
    "heavy<-heavy",
    "gluon<-heavy",
)

ONE_FLAVOUR: conv.Powers = {0: 4 * TR, 1: -8 * TR, 2: 8 * TR}
"""P_qg^(0) of one flavour, q + qbar."""
GLUON_FROM_QUARK: conv.Powers = {-1: 4 * CF, 0: -4 * CF, 1: 2 * CF}
GLUON_RATIONAL: conv.Powers = {-1: 4 * CA, 0: -8 * CA, 1: 4 * CA, 2: -4 * CA}
QUARK_RATIONAL: conv.Powers = {0: -2 * CF, 1: -2 * CF}


def _of_powers(powers: conv.Powers, factor: float = 1.0) -> Parts:
    def regular(z: Array, y: Array) -> Array:
        return factor * conv.evaluate_powers(powers, z, y)

    return Parts(regular, (), 0.0)


def _heavy_from_heavy(logarithm: bool) -> Parts:
    """Coefficient of L, or constant, of 2 CF [(1+z^2)/(1-z) (L - 2 ln(1-z) - 1)]_+."""
    if logarithm:
        return splitting(0, "ns+", 0)

    def regular(z: Array, y: Array) -> Array:
        return 2 * CF * (1 + z) * (2 * log_one_minus_z(z, y) + 1)

    return Parts(regular, (-4 * CF, -8 * CF), 4 * CF)


def _gluon_from_heavy(logarithm: bool) -> Parts:
    """Coefficient of L, or constant, of 2 CF (1+(1-z)^2)/z (L - 2 ln z - 1)."""
    if logarithm:
        return splitting(0, "gq", 0)

    def regular(z: Array, y: Array) -> Array:
        shape = conv.evaluate_powers(GLUON_FROM_QUARK, z, y)
        return -shape * (2 * log_one_minus_z(y, z) + 1)

    return Parts(regular, (), 0.0)


def _first_order(element: str, power_of_l: int) -> Parts:
    if element in ("heavy<-heavy", "gluon<-heavy") and power_of_l < 2:
        build = _heavy_from_heavy if element == "heavy<-heavy" else _gluon_from_heavy
        return build(power_of_l == 1)
    if power_of_l == 1 and element == "heavy<-gluon":
        return _of_powers(ONE_FLAVOUR)
    if power_of_l == 1 and element == "gluon<-gluon":
        return Parts(nothing, (), -4 / 3 * TR)
    return ZERO


def _flavour_step(channel: str) -> Parts:
    """P^(1) of one flavour more: the coefficient of nf, all these being linear in it."""
    one, none = splitting(1, channel, 1), splitting(1, channel, 0)

    def regular(z: Array, y: Array) -> Array:
        return one.regular(z, y) - none.regular(z, y)

    before = none.plus or (0.0,) * len(one.plus)
    plus = tuple(a - b for a, b in zip(one.plus, before, strict=True))
    return Parts(regular, plus, one.local - none.local)


def _quark_from_quark_squared() -> Parts:
    """A^(1,1) has no quark column: P0/3."""
    p = splitting(0, "ns+", 0)
    return Parts(lambda z, y: p.regular(z, y) / 3, (p.plus[0] / 3,), p.local / 3)


def _heavy_from_quark_squared() -> Parts:
    """-A_Hg^(1,1) P_gq/2."""
    product = conv.powers_with_powers(ONE_FLAVOUR, GLUON_FROM_QUARK)
    return Parts(lambda z, y: -conv.evaluate(product, z, y) / 2, (), 0.0)


def _gluon_from_gluon_squared() -> Parts:
    """2/3 (P_gg - beta0' delta) + 4/9 delta + P_gq A_Hg^(1,1), halved."""
    product = conv.powers_with_powers(GLUON_FROM_QUARK, ONE_FLAVOUR)

    def regular(z: Array, y: Array) -> Array:
        own = conv.evaluate_powers(GLUON_RATIONAL, z, y) / 3
        return own + conv.evaluate(product, z, y) / 2

    return Parts(regular, (4 * CA / 3,), 4 / 9)


def _heavy_from_gluon_squared() -> Parts:
    """(P_qq - P_gg without its delta - 4/3) A_Hg^(1,1), halved; nl drops out."""
    rational = {k: QUARK_RATIONAL.get(k, 0.0) - f for k, f in GLUON_RATIONAL.items()}
    product = conv.powers_with_powers(rational, ONE_FLAVOUR)
    soft = conv.plus_with_powers(ONE_FLAVOUR)

    def regular(z: Array, y: Array) -> Array:
        logs = conv.evaluate(soft, z, y) + conv.plus_logarithm(ONE_FLAVOUR, z, y)
        local = (3 * CF - 4 / 3) * conv.evaluate_powers(ONE_FLAVOUR, z, y)
        return (conv.evaluate(product, z, y) + 4 * (CF - CA) * logs + local) / 2

    return Parts(regular, (), 0.0)


SQUARED: dict[str, Callable[[], Parts]] = {
    "heavy<-gluon": _heavy_from_gluon_squared,
    "heavy<-quark": _heavy_from_quark_squared,
    "gluon<-gluon": _gluon_from_gluon_squared,
    "gluon<-quark": lambda: _of_powers(GLUON_FROM_QUARK, 2 / 3),
    "quark<-quark": _quark_from_quark_squared,
}
LINEAR = {
    "heavy<-gluon": "qg",
    "heavy<-quark": "pure singlet",
    "gluon<-gluon": "gg",
    "gluon<-quark": "gq",
    "quark<-quark": "ns+",
}
CONSTANT: dict[str, Callable[[], Parts]] = {
    "heavy<-gluon": constants.heavy_from_gluon,
    "heavy<-quark": constants.heavy_from_quark,
    "gluon<-gluon": constants.gluon_from_gluon,
    "gluon<-quark": constants.gluon_from_quark,
    "quark<-quark": constants.quark_from_quark,
}


def _to_running_mass(element: str, pole: Parts) -> Parts:
    """Put L_pole = L - 32/3 a (M = m(m) (1 + 16/3 a)) into the a^1 logarithms."""
    step = 8 * CF
    if element == "heavy<-gluon":

        def regular(z: Array, y: Array) -> Array:
            return pole.regular(z, y) - step * conv.evaluate_powers(ONE_FLAVOUR, z, y)

        return Parts(regular, pole.plus, pole.local)
    if element == "gluon<-gluon":
        return Parts(pole.regular, pole.plus, pole.local + step * 4 / 3 * TR)
    return pole


def _constant(element: str, kind: str, form: str) -> Parts:
    compact = form == "compact" and element == "heavy<-gluon"
    pole = constants.heavy_from_gluon_compact() if compact else CONSTANT[element]()
    return pole if kind == "pole" else _to_running_mass(element, pole)


def _second_order(element: str, power_of_l: int, kind: str, form: str) -> Parts:
    if element not in CONSTANT:
        return ZERO
    if power_of_l == 0:
        return _constant(element, kind, form)
    return _flavour_step(LINEAR[element]) if power_of_l == 1 else SQUARED[element]()


def matching(order: int, element: str, power_of_L: int, kind: str = "pole", form: str = "exact") -> Parts:
    """Coefficient of a^order L^power_of_L of a matching element, order 1 or 2.

    `kind` is "pole" or "msbar" (m = m(m)); `form` is "exact" or "compact" and concerns the
    a^2 constant of "heavy<-gluon" only. Elements from a heavy density have no a^2 part.

    Raises
    ------
    ValueError
        An argument outside the lists above.
    """
    for value, allowed in (
        (order, (1, 2)),
        (element, ELEMENTS),
        (power_of_L, (0, 1, 2)),
        (kind, ("pole", "msbar")),
        (form, ("exact", "compact")),
    ):
        if value not in allowed:
            raise ValueError(f"{value!r} is none of {allowed}")
    if order == 1:
        return _first_order(element, power_of_L)
    return _second_order(element, power_of_L, kind, form)
