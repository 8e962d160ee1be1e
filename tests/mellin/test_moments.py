"""Moments of kernels against closed forms, direct quadrature and convolutions in x."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import mpmath
import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.integrate import quad

from mellin import toy_input
from mellin.contours import FreePoints, contours
from mellin.inputs import Density
from mellin.kernel_moments import Kernels, moments_of
from mellin.polygamma import polygamma
from mellin.representations import EveryZ, NearOne, Parts, graded, plus_moments

Real = NDArray[np.float64]
CHANNELS = ("ns+", "ns-", "ns-sea", "pure singlet", "qg", "gq", "gg")
ELEMENTS = (
    *("heavy<-gluon", "heavy<-quark", "gluon<-gluon", "gluon<-quark", "quark<-quark"),
    *("heavy<-heavy", "gluon<-heavy"),
)


@pytest.mark.parametrize("order", [1, 2, 3])
def test_polygamma_against_mpmath(order: int) -> None:
    n = np.array([1 + 2j, -20 + 25j, 0.3 + 0.5j, -300 + 300j, 50 + 0j, 29.9 + 1j])
    expected = np.array([complex(mpmath.polygamma(order, complex(v))) for v in n])
    # forty steps of recursion, each to rounding
    np.testing.assert_allclose(polygamma(order, n), expected, rtol=5e-15)


@pytest.mark.parametrize("k", [0, 1, 2, 3])
def test_plus_distributions_against_quadrature(k: int) -> None:
    n = complex(2.5, 3.0)
    with mpmath.workdps(25):
        expected = mpmath.quad(
            lambda y: mpmath.expm1((n - 1) * mpmath.log1p(-y)) * mpmath.log(y) ** k / y,
            [0, 1e-6, 1e-3, 0.1, 1],
        )
    computed = plus_moments(np.array([n]), 3)[k][0]
    # derivatives up to the fourth of a quotient of gamma functions, sums of a few terms
    assert abs(computed / complex(expected) - 1) < 1e-13


@dataclass(frozen=True)
class Made:
    """A kernel made up for a test."""

    function: Callable[[Real, Real], Real]
    plus: tuple[float, ...] = ()
    local: float = 0.0

    def regular(self, z: Real, one_minus_z: Real) -> Real:
        return self.function(z, one_minus_z)


def log_of(z: Real, one_minus_z: Real) -> Real:
    return np.where(one_minus_z < 0.5, np.log1p(-np.minimum(one_minus_z, 0.5)), np.log(z))


KNOWN = {
    "1": (Made(lambda z, y: np.ones_like(z)), lambda n: 1 / n),
    "1/z": (Made(lambda z, y: 1 / z), lambda n: 1 / (n - 1)),
    "ln z/z": (Made(lambda z, y: log_of(z, y) / z), lambda n: -1 / (n - 1) ** 2),
    "ln^4 z": (Made(lambda z, y: log_of(z, y) ** 4), lambda n: 24 / n**5),
    "ln(1-z)": (
        Made(lambda z, y: log_of(y, z)),
        lambda n: -(polygamma(0, n + 1) + np.euler_gamma) / n,
    ),
    "ln z/(1-z)": (Made(lambda z, y: log_of(z, y) / y), lambda n: -polygamma(1, n)),
}


@pytest.mark.parametrize("name", KNOWN)
def test_moments_against_closed_forms(name: str) -> None:
    kernel, exact = KNOWN[name]
    n = np.array([1.7 + 0j, 1.4 + 2j, 3.0 - 5j, 6 + 20j])
    representation = EveryZ()
    computed = representation.matrix(n) @ representation.vector(kernel)
    # rounding of the fit, 1e-15 of the largest value
    np.testing.assert_allclose(computed, exact(n), rtol=1e-12)


@pytest.mark.parametrize("name", KNOWN)
def test_continuation_to_the_left_against_closed_forms(name: str) -> None:
    """Seen in x: at single N left of all singularities a kernel is defined by its tail."""
    kernel, exact = KNOWN[name]
    x = np.array([1e-9, 1e-7, 1e-4, 0.01, 0.1, 0.22, 0.23, 0.4, 0.6, 0.62, 0.8, 0.9])
    u, density = np.log(1 / x), toy_input.DENSITIES[21]
    for line in contours(1.4):
        representation = EveryZ() if line.reaches_small_z else NearOne()
        computed = representation.matrix(line.points) @ representation.vector(kernel)
        here = line.serves(u)
        ours, known = (
            line.invert(m * density.moments(line.points), u[here]) for m in (computed, exact(line.points))
        )
        mass = line.invert(density.moments(line.points) / line.points, u[here])
        allowed = 1e-12 * np.abs(known) + rounding_of(kernel) * mass
        assert np.all(np.abs(ours - known) <= allowed)


def rounding_of(parts: Parts) -> float:
    """Return 1e-14 of the largest value at z > 0.2.

    Where P falls towards z = 1, as ln^4 z does or the pure singlet, its moments keep the
    rounding of smaller z.
    """
    z = np.linspace(0.2, 0.999, 50)
    return 1e-14 * float(np.max(np.abs(parts.regular(z, 1 - z))))


def test_a_kernel_of_another_kind_is_refused() -> None:
    with pytest.raises(ValueError, match="no sum of powers and logarithms"):
        EveryZ().vector(Made(lambda z, y: np.sqrt(z)))
    with pytest.raises(ValueError, match="no sum of powers and logarithms"):
        NearOne().vector(Made(lambda z, y: np.sqrt(y)))


def direct_moment(parts: Parts, n: float) -> float:
    """int_0^1 dz z^(n-1) P(z) by adaptive quadrature in ln z and ln(1-z)."""

    def regular(z: float, y: float) -> float:
        return float(parts.regular(np.array([z]), np.array([y]))[0])

    def lower(t: float) -> float:
        z = np.exp(-t)
        return regular(z, -np.expm1(-t)) * z**n

    def upper(s: float) -> float:
        y = np.exp(-s)
        powers = np.exp((n - 1) * np.log1p(-y))
        plus = sum(c * (-s) ** k for k, c in enumerate(parts.plus)) * (powers - 1) / y
        return (regular(-np.expm1(-s), y) * powers + plus) * y

    def missing(t: float) -> float:  # the subtraction of the plus parts below z = 1/2
        z = np.exp(-t)
        logs = sum(c * np.log1p(-z) ** k for k, c in enumerate(parts.plus))
        return logs * (z ** (n - 1) - 1) / (1 - z) * z

    options = {"epsabs": 1e-12, "epsrel": 1e-12, "limit": 400}
    half = np.log(2.0)
    total = sum(quad(f, half, 60.0, **options)[0] for f in (lower, upper, missing))
    return float(total + parts.local)


@pytest.mark.parametrize("order", [0, 1, 2])
@pytest.mark.parametrize("channel", CHANNELS)
def test_splitting_moments_against_quadrature(kernels: Kernels, order: int, channel: str) -> None:
    n = 2.75
    here = FreePoints((complex(n),))
    computed = moments_of(kernels).splitting(here, order, channel, 4)[0]
    expected = direct_moment(kernels.splitting(order, channel, 4), n)
    # quadrature to 1e-12 of each part; parts of P2 are up to 1e4 and cancel
    assert abs(computed - expected) < 1e-12 * (1e4 if order == 2 else 1e2)


@pytest.mark.parametrize("element", ELEMENTS)
def test_matching_moments_against_quadrature(kernels: Kernels, element: str) -> None:
    n = 2.75
    here = FreePoints((complex(n),))
    for order, power in ((1, 0), (1, 1), (2, 0), (2, 1), (2, 2)):
        name = (order, element, power, "pole", "exact")
        computed = moments_of(kernels).matching(here, *name)[0]
        # quadrature to 1e-12 of each part, which are up to 1e2
        assert abs(computed - direct_moment(kernels.matching(*name), n)) < 1e-10


def convolution(parts: Parts, density: Density, x: float) -> tuple[float, float]:
    """int_x^1 dz P(z) F(x/z), and the error to be expected of the solution."""
    u, f_x = np.log(1 / x), float(density(np.array(x)))
    nodes, weights = graded(u / 2, panels=50, order=24)
    regular, mass = 0.0, 0.0
    for t in (nodes, u - nodes):  # panels shrink towards z = 1 and towards z = x
        z, y = np.exp(-t), -np.expm1(-t)
        f = density(x / z)
        plus = sum((c * np.log(y) ** k / y for k, c in enumerate(parts.plus)), 0 * y)
        mass += float(np.sum(weights * z * f))
        regular += float(np.sum(weights * z * (parts.regular(z, y) * f + plus * (f - f_x))))
    # [ln^k(1-z)/(1-z)]_+ over [0, x], which the subtraction leaves out
    rest = sum(c * np.log1p(-x) ** (k + 1) / (k + 1) for k, c in enumerate(parts.plus))
    local = f_x * (rest + parts.local)
    # 1e-11 is what is claimed; the parts of NLO and NNLO kernels cancel further
    return regular + local, 1e-11 * (abs(regular) + abs(local)) + 10 * rounding_of(parts) * mass


@pytest.mark.parametrize("x", [1e-6, 1e-3, 0.1, 0.25, 0.5, 0.8])
@pytest.mark.parametrize("order", [0, 1, 2])
def test_inversion_against_convolution_in_x(kernels: Kernels, order: int, x: float) -> None:
    density, u = toy_input.DENSITIES[21], np.log(1 / x)
    line = next(c for c in contours(1.4) if c.serves(u))
    for channel in CHANNELS:
        expected, allowed = convolution(kernels.splitting(order, channel, 5), density, x)
        moments = moments_of(kernels).splitting(line, order, channel, 5)
        computed = line.invert(moments * density.moments(line.points), np.array([u]))[0]
        assert abs(computed - expected) <= allowed, channel
