"""The second writing of the kernels against exact moments, sum rules and limits.

"Rounding" below is 1e-12: moments are sums of about 2000 terms of size up to 1e3, each
good to 2e-16, and 2e-13 is the worst that was seen.
"""

from __future__ import annotations

import math

import mpmath
import numpy as np
import pytest
from kernels.second_writing import anomalous_dimensions, polylogs, splitting_nlo_1980
from kernels.second_writing.matching import matching
from kernels.second_writing.moments import moment
from kernels.second_writing.parts import CA, CF, ZETA3, Parts, nothing
from kernels.second_writing.splitting_nnlo import CHANNELS, splitting

ROUNDING = 1e-12
FLAVOURS = (0, 3, 4, 5, 6)
INSIDE = np.array([1e-5, 1e-3, 0.05, 0.3, 0.5, 0.7, 0.9, 0.99])


def split(order: int, channel: str, nf: int, n: float) -> float:
    return moment(splitting(order, channel, nf), n)


def by_power_of_nf(channel: str, n: float) -> tuple[float, float, float]:
    """Three-loop moment as a polynomial in nf."""
    zero, one, two = (split(2, channel, nf, n) for nf in (0, 1, 2))
    square = (two - 2 * one + zero) / 2
    return zero, one - zero - square, square


# Quadrature and polylogarithms


@pytest.mark.parametrize("n", [1, 2, 5.5])
@pytest.mark.parametrize("k", [0, 1, 4])
def test_moments_of_logarithms_are_exact(n: float, k: int) -> None:
    """Int z^(n-1) ln^k z = (-1)^k k!/n^(k+1), elementary; 1e-14 relative is rounding."""
    powers = Parts(lambda z, y: np.log(z) ** k, (), 0.0)
    exact = (-1) ** k * math.factorial(k) / n ** (k + 1)
    assert moment(powers, n) == pytest.approx(exact, rel=1e-13)


def test_moments_of_plus_distributions_are_exact() -> None:
    """Int (z-1)/(1-z) ln^k(1-z) = -(-1)^k k!, elementary; 1e-13 relative is rounding."""
    for k in range(4):
        parts = Parts(nothing, (0.0,) * k + (1.0,), 0.0)
        assert moment(parts, 2) == pytest.approx(-((-1) ** k) * math.factorial(k), rel=1e-13)


def test_moment_of_a_kernel_agrees_with_mpmath() -> None:
    """The same integral by tanh-sinh quadrature of mpmath; 1e-10 is what doubles near
    the end points leave of it.
    """
    parts = matching(2, "heavy<-gluon", 0)

    def integrand(z: mpmath.mpf) -> float:
        value = parts.regular(np.array([float(z)]), np.array([float(1 - z)]))
        return float(z**2 * value[0])

    exact = float(mpmath.quad(integrand, [0, 0.01, 0.5, 0.99, 1]))
    assert moment(parts, 3) == pytest.approx(exact, rel=1e-10)


@pytest.mark.parametrize("z", [1e-8, 1e-3, 0.1, 0.3, 0.499, 0.5, 0.501, 0.7, 0.9, 0.999])
def test_polylogarithms_agree_with_mpmath(z: float) -> None:
    """30 digits of mpmath; 2e-15 relative is ten units in the last place, for series of
    60 positive terms and sums of up to five logarithms.
    """
    with mpmath.workdps(30):
        exact, y = mpmath.mpf(z), np.array([1 - mpmath.mpf(z)], dtype=float)
        half = mpmath.mpf(1) / 2
        expected = {
            "li2": mpmath.polylog(2, exact),
            "li3": mpmath.polylog(3, exact),
            "s12": half * mpmath.quad(lambda t: mpmath.log1p(-t) ** 2 / t, [0, exact / 2, exact]),
            "li2_negative": mpmath.polylog(2, -exact),
            "li3_negative": mpmath.polylog(3, -exact),
            "s12_negative": half * mpmath.quad(lambda t: mpmath.log1p(t) ** 2 / t, [0, exact]),
        }
    for name, value in expected.items():
        arguments = (np.array([z]),) if name.endswith("negative") else (np.array([z]), y)
        found = getattr(polylogs, name)(*arguments)[0]
        assert found == pytest.approx(float(value), rel=2e-15), name


# Splitting functions, LO and NLO


@pytest.mark.parametrize("nf", FLAVOURS)
@pytest.mark.parametrize("order", [0, 1])
def test_quark_number_is_conserved(order: int, nf: int) -> None:
    assert split(order, "ns-", nf, 1) == pytest.approx(0, abs=ROUNDING)


@pytest.mark.parametrize("nf", FLAVOURS)
@pytest.mark.parametrize("order", [0, 1])
def test_momentum_is_conserved(order: int, nf: int) -> None:
    quark = sum(split(order, c, nf, 2) for c in ("ns+", "pure singlet", "gq"))
    gluon = sum(split(order, c, nf, 2) for c in ("qg", "gg"))
    assert quark == pytest.approx(0, abs=ROUNDING)
    assert gluon == pytest.approx(0, abs=ROUNDING)


@pytest.mark.parametrize("n", range(1, 11))
def test_non_singlet_moments_are_those_of_floratos(n: int) -> None:
    """E. Floratos et al. (1977, 1979): harmonic sums, of other origin than the kernels."""
    channel = "ns+" if n % 2 == 0 else "ns-"
    lo = anomalous_dimensions.non_singlet_lo(n)
    assert split(0, channel, 0, n) == pytest.approx(lo, abs=ROUNDING)
    for nf in (0, 4):
        nlo = anomalous_dimensions.non_singlet_nlo(n, nf)
        assert split(1, channel, nf, n) == pytest.approx(nlo, abs=ROUNDING)


@pytest.mark.parametrize("channel", [c for c in CHANNELS if c != "ns-sea"])
def test_nlo_agrees_with_the_form_of_1980(channel: str) -> None:
    """G. Curci, W. Furmanski, R. Petronzio (1980), W. Furmanski, R. Petronzio (1980).

    1e-12 of the largest value of |P| times z at hand: terms cancel by up to 1e3.
    """
    parts = splitting(1, channel, 4)
    plus = parts.plus[0] / (1 - INSIDE) if parts.plus else 0.0
    found = INSIDE * (parts.regular(INSIDE, 1 - INSIDE) + plus)
    expected = INSIDE * splitting_nlo_1980.below_one(channel, INSIDE, 4)
    assert np.max(np.abs(found - expected)) < 1e-12 * np.max(np.abs(expected))


def test_two_loop_second_moments_are_the_published_ones() -> None:
    """S. Larin et al., hep-ph/9605317 (recalled): rationals, e.g. 11744/243 = 48.32921811."""
    for nf in FLAVOURS:
        ns = -11744 / 243 + 256 / 81 * nf
        assert split(1, "ns+", nf, 2) == pytest.approx(ns, abs=ROUNDING)
        assert split(1, "qg", nf, 2) == pytest.approx(611 / 81 * nf, abs=ROUNDING)
        assert split(1, "pure singlet", nf, 2) == pytest.approx(160 / 81 * nf, abs=ROUNDING)


def test_two_loop_cusp() -> None:
    """A2 = 8 CF ((67/18 - zeta2) CA - 5/9 nf); J. Kodaira, L. Trentadue (1982)."""
    for nf in FLAVOURS:
        cusp = 66.47322097 - 5.92592593 * nf
        quark, gluon = splitting(1, "ns+", nf), splitting(1, "gg", nf)
        assert quark.plus[0] == pytest.approx(cusp, abs=5e-8 * (1 + nf))
        assert gluon.plus[0] == pytest.approx(CA / CF * quark.plus[0], rel=1e-15)


# Splitting functions, NNLO: tolerances are what the published parametrisations allow


def test_quark_number_at_nnlo() -> None:
    """The shifted delta terms have three decimals, so each power of nf is good to 5e-4."""
    for channel in ("ns-", "ns-sea"):
        assert np.max(np.abs(by_power_of_nf(channel, 1))) < 5e-4


def test_momentum_at_nnlo() -> None:
    """Sizes cancelling are 860, 180 and 5: coefficients printed with four digits.

    The defects were found by an independent calculation to be 6e-3, 3e-3 (quark) and
    1e-3, 7e-4, 6e-5 (gluon); nf^2 of the quark is 4e-6 by the five decimals of 1.13067.
    """
    quark = np.sum([by_power_of_nf(c, 2) for c in ("ns+", "pure singlet", "gq")], axis=0)
    gluon = np.sum([by_power_of_nf(c, 2) for c in ("qg", "gg")], axis=0)
    assert np.all(np.abs(quark) < (6e-3, 3e-3, 5e-6))
    assert np.all(np.abs(gluon) < (1e-3, 7e-4, 6e-5))


def test_three_loop_second_moment_is_the_published_one() -> None:
    """S. Larin, T. van Ritbergen, J. Vermaseren (1994), hep-ph/9605317, recalled.

    3.5e-3 of 859 at nf^0; 3.0e-3 at nf^1, nearly all of it the delta term: -173.924
    instead of -173.927 leaves 4e-5. 4e-6 at nf^2 as above.
    """
    exact = (
        -5514208 / 6561 - 1280 / 81 * ZETA3,
        167200 / 2187 + 1280 / 27 * ZETA3,
        896 / 729,
    )
    defect = np.abs(np.subtract(by_power_of_nf("ns+", 2), exact))
    assert np.all(defect < (3.6e-3, 3.1e-3, 5e-6))


def test_three_loop_cusp_is_casimir_scaled() -> None:
    """A3 of the gluon = CA/CF A3; 5e-4 per power of nf are the printed decimals."""
    for nf in FLAVOURS:
        quark, gluon = (splitting(2, c, nf).plus[0] for c in ("ns+", "gg"))
        assert quark == pytest.approx(1174.89827 - 183.18743 * nf - 64 / 81 * nf**2, abs=4e-3)
        assert gluon == pytest.approx(CA / CF * quark, abs=1e-2)


def test_small_x_logarithms_are_casimir_scaled() -> None:
    """ln(x)/x of ps against qg and gq against gg (nf^0): CF/CA. 2e-5: four digits printed."""
    z = np.array([1e-30, 1e-40])

    def slope(channel: str, nf: int) -> float:
        scaled = z * splitting(2, channel, nf).regular(z, 1 - z)
        return float((scaled[1] - scaled[0]) / np.log(z[1] / z[0]))

    assert slope("pure singlet", 4) == pytest.approx(CF / CA * slope("qg", 4), rel=1e-10)
    assert slope("gq", 0) == pytest.approx(CF / CA * slope("gg", 0), rel=5e-5)
    assert slope("gg", 0) == pytest.approx(2675.847, rel=2e-5)
    assert slope("gg", 1) - slope("gg", 0) == pytest.approx(157.269, rel=2e-5)


def test_plus_and_minus_meet_at_large_n() -> None:
    """They differ by terms that fall as a power of 1/N; 1e-3 is the parametrisations'
    claimed accuracy.
    """
    plus, minus = by_power_of_nf("ns+", 10), by_power_of_nf("ns-", 10)
    assert np.allclose(plus, minus, rtol=1e-3, atol=0)


# Refusals


@pytest.mark.parametrize(
    ("arguments", "message"),
    [((3, "ns+", 4), "order 3"), ((2, "quark", 4), "quark"), ((0, "quark", 4), "quark")],
)
def test_unknown_splitting_is_refused(arguments: tuple[int, str, int], message: str) -> None:
    with pytest.raises(ValueError, match=message):
        splitting(*arguments)
