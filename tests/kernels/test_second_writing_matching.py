"""The second writing of the matching kernels: conservation, logarithms, limits.

"Rounding" is 1e-12: see `test_second_writing.py`.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from kernels.second_writing.matching import ELEMENTS, matching
from kernels.second_writing.moments import moment
from kernels.second_writing.parts import CA, CF, TR, ZETA2
from kernels.second_writing.splitting_nnlo import splitting

ROUNDING = 1e-12
INSIDE = np.array([1e-5, 1e-3, 0.05, 0.3, 0.5, 0.7, 0.9, 0.99])


def split(order: int, channel: str, nf: int, n: float) -> float:
    return moment(splitting(order, channel, nf), n)


def match(order: int, element: str, power: int, n: float, kind: str = "pole") -> float:
    return moment(matching(order, element, power, kind), n)


@pytest.mark.parametrize("kind", ["pole", "msbar"])
@pytest.mark.parametrize("power", [0, 1, 2])
def test_matching_conserves_number_and_momentum(power: int, kind: str) -> None:
    assert match(2, "quark<-quark", power, 1, kind) == pytest.approx(0, abs=ROUNDING)
    for source in ("quark", "gluon"):
        elements = [e for e in ELEMENTS if e.endswith("<-" + source)]
        total = sum(match(2, e, power, 2, kind) for e in elements)
        assert total == pytest.approx(0, abs=ROUNDING), source


@pytest.mark.parametrize("power", [0, 1])
def test_first_order_matching_conserves_number_and_momentum(power: int) -> None:
    assert match(1, "heavy<-heavy", power, 1) == pytest.approx(0, abs=ROUNDING)
    for source in ("gluon", "heavy"):
        total = sum(match(1, e, power, 2) for e in ELEMENTS if e.endswith("<-" + source))
        assert total == pytest.approx(0, abs=ROUNDING), source


def _light_heavy_gluon(order: int, nl: int, n: float) -> np.ndarray:
    """P for nl + 1 flavours acting on (light singlet, heavy, gluon)."""
    nf = nl + 1
    one = split(order, "pure singlet", nf, n) / nf
    qg = split(order, "qg", nf, n) / nf
    own, gq = split(order, "ns+", nf, n), split(order, "gq", nf, n)
    return np.array(
        [
            [own + nl * one, nl * one, nl * qg],
            [one, own + one, qg],
            [gq, gq, split(order, "gg", nf, n)],
        ]
    )


def _light_gluon(order: int, nl: int, n: float) -> np.ndarray:
    quark = split(order, "ns+", nl, n) + split(order, "pure singlet", nl, n)
    rows = [[quark, split(order, "qg", nl, n)]]
    rows += [[split(order, "gq", nl, n), split(order, "gg", nl, n)]]
    return np.array(rows)


def _matching_matrix(order: int, power: int, n: float) -> np.ndarray:
    names = [
        ["quark<-quark", None],
        ["heavy<-quark", "heavy<-gluon"],
        ["gluon<-quark", "gluon<-gluon"],
    ]
    return np.array([[match(order, e, power, n) if e else 0.0 for e in row] for row in names])


@pytest.mark.parametrize("nl", [3, 5])
@pytest.mark.parametrize("n", [2, 3, 4.5, 8])
def test_logarithms_follow_from_the_renormalisation_group(n: float, nl: int) -> None:
    """Closed forms against products of moments: dA/dL = beta0' a A1 + P' A - A P."""
    start = np.array([[1.0, 0.0], [0.0, 0.0], [0.0, 1.0]])
    first = _matching_matrix(1, 1, n)
    p0, p0_before = _light_heavy_gluon(0, nl, n), _light_gluon(0, nl, n)
    p1, p1_before = _light_heavy_gluon(1, nl, n), _light_gluon(1, nl, n)
    beta0 = 11 - 2 / 3 * (nl + 1)
    squared = beta0 * first + 2 / 3 * start @ p0_before + p0 @ first - first @ p0_before
    for expected, found in (
        (p0 @ start - start @ p0_before, first),
        (p1 @ start - start @ p1_before, _matching_matrix(2, 1, n)),
        (squared / 2, _matching_matrix(2, 2, n)),
    ):
        assert np.max(np.abs(found - expected)) < ROUNDING


@pytest.mark.parametrize("n", [2, 5])
def test_intrinsic_logarithms_follow_from_the_renormalisation_group(n: int) -> None:
    assert match(1, "heavy<-heavy", 1, n) == pytest.approx(split(0, "ns+", 4, n), abs=ROUNDING)
    assert match(1, "gluon<-heavy", 1, n) == pytest.approx(split(0, "gq", 4, n), abs=ROUNDING)


def _published_logarithms() -> dict[tuple[str, int], np.ndarray]:
    """hep-ph/9612398 (B.1) to (B.7), recalled; there the logarithm is ln(m^2/mu^2).

    The 16/3 of (B.7) was first recalled as 8/3 and follows from the nf term of P_gg^(1).
    """
    z, y = INSIDE, 1 - INSIDE
    lz, l1 = np.log(z), np.log(y)
    p = 1 - 2 * z + 2 * z**2
    hq = 8 * (1 + z) * lz**2 - (8 + 40 * z + 64 / 3 * z**2) * lz
    hq += -160 / 9 / z + 16 - 48 * z + 448 / 9 * z**2
    gq = (160 / z - 160 + 128 * z) / 9 + (32 / z - 32 + 16 * z) / 3 * l1
    gg_cf = 8 * (1 + z) * lz**2 + (24 + 40 * z) * lz - 16 / 3 / z + 64 - 32 * z - 80 / 3 * z**2
    gg_ca = 16 / 3 * (1 + z) * lz + 80 / 9 / y
    gg_ca += (184 / z - 232 + 152 * z - 184 * z**2) / 9
    hg_cf = 8 * p * l1 - (4 - 8 * z + 16 * z**2) * lz - (2 - 8 * z)
    hg_ca = -8 * p * l1 - (8 + 32 * z) * lz - 16 / 3 / z - 4 - 32 * z + 124 / 3 * z**2
    return {
        ("quark<-quark", 1): -CF * TR * (8 / 3 * (1 + z**2) / y * lz + 80 / 9 / y + (8 - 88 * z) / 9),
        ("heavy<-quark", 1): -CF * TR * hq,
        ("gluon<-quark", 1): -CF * TR * gq,
        ("gluon<-gluon", 1): -TR * (CF * gg_cf + CA * gg_ca),
        ("heavy<-quark", 2): CF * TR * (-8 * (1 + z) * lz - 16 / 3 / z - 4 + 4 * z + 16 / 3 * z**2),
        ("heavy<-gluon", 2): TR * (CF * hg_cf + CA * hg_ca) - 16 / 3 * TR**2 * p,
    }


def test_logarithms_are_the_published_ones() -> None:
    """1e-12 of the largest value times z: see the NLO comparison."""
    for (element, power), expected in _published_logarithms().items():
        parts = matching(2, element, power)
        found = parts.regular(INSIDE, 1 - INSIDE)
        if parts.plus:
            found = found + parts.plus[0] / (1 - INSIDE)
        scale = np.max(np.abs(INSIDE * expected))
        assert np.max(np.abs(INSIDE * (found - expected))) < 1e-12 * scale, (element, power)


def test_published_local_logarithms() -> None:
    """hep-ph/9612398 (B.4), (B.7), recalled: delta terms of the single logarithm."""
    quark, gluon = (matching(2, e, 1).local for e in ("quark<-quark", "gluon<-gluon"))
    assert quark == pytest.approx(-CF * TR * (16 / 3 * ZETA2 + 2 / 3), abs=ROUNDING)
    assert gluon == pytest.approx(-TR * (4 * CF + 16 / 3 * CA), abs=ROUNDING)


def test_leading_small_x_of_heavy_quark_constants() -> None:
    """1/z terms of A_Hq and A_Hg: ratio CF/CA (high-energy factorisation), to rounding."""
    z = np.array([1e-40])
    quark, gluon = (matching(2, e, 0).regular(z, 1 - z)[0] for e in ("heavy<-quark", "heavy<-gluon"))
    assert quark == pytest.approx(CF / CA * gluon, rel=1e-14)


@pytest.mark.parametrize("n", [2, 3, 4, 6, 12])
def test_compact_form_of_heavy_from_gluon(n: int) -> None:
    """Two published forms of A_Hg^(2); the compact one claims about one per mille."""
    exact = matching(2, "heavy<-gluon", 0)
    compact = matching(2, "heavy<-gluon", 0, form="compact")
    assert moment(compact, n) == pytest.approx(moment(exact, n), rel=1e-3)


def test_compact_form_closes_momentum_to_its_digits() -> None:
    """Its delta term of three decimals was tuned for that: 5e-4."""
    compact = moment(matching(2, "heavy<-gluon", 0, form="compact"), 2)
    assert compact + match(2, "gluon<-gluon", 0, 2) == pytest.approx(0, abs=5e-4)


def _summed(element: str, kind: str, a: float, log: float, n: float) -> float:
    pairs = [(k, p) for k in (1, 2) for p in range(k + 1)]
    return sum(a**k * log**p * match(k, element, p, n, kind) for k, p in pairs)


@pytest.mark.parametrize("element", ["heavy<-gluon", "gluon<-gluon", "heavy<-quark"])
def test_pole_and_running_mass_differ_by_the_third_order(element: str) -> None:
    """M = m(m) (1 + 16/3 a), N. Gray et al. (1990): the difference over a^3 is constant
    up to one power of a, so halving a = 1e-4 gives 8 to a few per mille; A_Hq has no
    a^1 part and stays the same there too.
    """

    def difference(a: float) -> float:
        pole = _summed(element, "pole", a, 1.3 - 2 * math.log1p(16 / 3 * a), 3)
        return pole - _summed(element, "msbar", a, 1.3, 3)

    assert difference(1e-4) / difference(5e-5) == pytest.approx(8, rel=5e-3)


@pytest.mark.parametrize(
    "arguments",
    [(0, "heavy<-gluon", 0), (2, "gluon", 0), (2, "heavy<-gluon", 3), (2, "heavy<-gluon", 0, "x")],
)
def test_unknown_matching_is_refused(arguments: tuple[object, ...]) -> None:
    with pytest.raises(ValueError, match="is none of"):
        matching(*arguments)
