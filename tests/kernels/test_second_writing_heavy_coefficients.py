"""The second writing of the heavy-quark coefficient functions of a^1."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from kernels.second_writing.coefficients import (
    charm_gluon,
    charm_quark,
    coefficient,
    massive_gluon,
    z_max,
)
from kernels.second_writing.matching import matching
from kernels.second_writing.matrix_elements import (
    LEFT,
    VECTOR,
    Process,
    coefficients,
    integrand,
    residue,
)
from kernels.second_writing.moments import moment
from kernels.second_writing.parts import CF, TR, Parts

CHARM = ("F1", "F2", "F3")
LAMBDAS = (0.05, 0.3, 0.6, 0.9, 0.99)
PROPAGATORS = 1e-9
"""Relative error of the phase-space integrals: near a pole at v the amplitude cancels to
1e-16/v^2, and nodes begin at v = 5e-4 (massless) or 5e-7 (massive, pole further off)."""


def at(parts: Parts, z: float) -> float:
    """Value below z = 1, plus distributions included."""
    y = np.array([1 - z])
    plus = sum(c * np.log(y[0]) ** k / y[0] for k, c in enumerate(parts.plus))
    return float(parts.regular(np.array([z]), y)[0] + plus)


# Photon-gluon fusion


def glueck_reya(z: float, q2: float, m2: float) -> tuple[float, float]:
    """F2 and FL in the form of M. Glück, E. Reya (1979), from memory."""
    r = m2 / q2
    beta = np.sqrt(1 - 4 * r * z / (1 - z))
    log = 2 * np.arctanh(beta)
    split = z**2 + (1 - z) ** 2 + 4 * r * z * (1 - 3 * z) - 8 * r**2 * z**2
    two = split * log + beta * (-1 + 8 * z * (1 - z) - 4 * r * z * (1 - z))
    return 4 * TR * two, 16 * TR * (z * (1 - z) * beta - 2 * r * z**2 * log)


@pytest.mark.parametrize(("q2", "m2"), [(2.0, 20.0), (10.0, 2.0), (300.0, 2.0), (20.0, 21.0)])
@pytest.mark.parametrize("part", [0.01, 0.3, 0.7, 0.95])
def test_photon_gluon_fusion_follows_from_the_matrix_element(q2: float, m2: float, part: float) -> None:
    """Dirac traces over two-body phase space; and another published form at 1e-10, what
    its cancellation near threshold leaves.
    """
    z = part * z_max(q2, m2)
    two, long = (float(massive_gluon(sf, np.array([z]), q2, m2)[0]) for sf in ("F2", "FL"))
    numeric = coefficients(Process(True, VECTOR, q2, m2, m2), z, 1.0)
    assert numeric[1] == pytest.approx(two, rel=PROPAGATORS)
    assert numeric[1] - numeric[0] == pytest.approx(long, abs=PROPAGATORS * two)
    assert (two, long) == pytest.approx(glueck_reya(z, q2, m2), rel=1e-10, abs=1e-11)


@pytest.mark.parametrize("z", [1e-4, 0.01, 0.1, 0.5, 0.8])
@pytest.mark.parametrize("sf", ["F2", "FL"])
def test_photon_gluon_fusion_tends_to_massless(sf: str, z: float) -> None:
    """C -> c_g + A_Hg^(1) ln(Q^2/m^2), the difference falling as r (A + B ln r), r = m^2/Q^2.

    D/r at three r in geometric ratio has a vanishing second difference, up to r itself
    (times 1/(1-z)^2) and rounding 1e-15/r.
    """
    point, y = np.array([z]), np.array([1 - z])
    massless = coefficient(1, sf, "gluon", 1).regular(point, y)
    matched = matching(1, "heavy<-gluon", 1).regular(point, y) if sf == "F2" else 0.0

    def difference(r: float) -> float:
        limit = massless - matched * np.log(r)
        return float((massive_gluon(sf, point, 1.0, r) - limit)[0])

    scaled = [difference(r) / r for r in (1e-5, 1e-6, 1e-7)]
    size = max(abs(s) for s in scaled)
    assert size < 1e3
    assert scaled[0] - 2 * scaled[1] + scaled[2] == pytest.approx(0, abs=5e-3 * size + 1e-6)
    assert difference(1e-10) == pytest.approx(0, abs=1e-7)


def test_photon_gluon_fusion_vanishes_at_threshold() -> None:
    edge = z_max(10.0, 2.0)
    z = np.array([edge * (1 - 1e-8), edge, 0.9])
    for sf in ("F2", "FL"):
        value = massive_gluon(sf, z, 10.0, 2.0)
        # proportional to beta = 1e-4 and beta^3
        assert 0 <= value[0] < 1e-3 and value[1] < 1e-6 and value[2] == 0
    with pytest.raises(ValueError, match="neither"):
        massive_gluon("F3", z, 10.0, 2.0)


# Charged-current charm


@pytest.mark.parametrize("lam", [0.01, *LAMBDAS, 0.9999])
def test_first_adler_moment_vanishes_at_any_mass(lam: float) -> None:
    """S. Adler (1966), whatever mass the quark changes into: fixes the delta term of F2.

    1e-14 of the terms that cancel, of which the delta term is as large as any.
    """
    for log in (0.0, 1.3):
        parts = charm_quark("F2", lam, log)
        size = abs(parts.local) + sum(abs(c) for c in parts.plus)
        assert moment(parts, 1) == pytest.approx(0, abs=1e-14 * size)


@pytest.mark.parametrize("lam", LAMBDAS)
def test_delta_terms_are_those_of_the_vertex(lam: float) -> None:
    """F2 differs from F1 and F3 by the vertex terms without a gamma matrix.

    C. Bauer, S. Fleming, D. Pirjol, I. Stewart, hep-ph/0011336 eq. (33), b -> u at q^2 =
    m^2 (1 - x), from memory, with x = 1/(1-lambda): C_2 v^mu + C_3 n^mu, p^mu = x m n^mu/2.
    Rounding, times 1/lambda^2 of their own cancellation.
    """
    x = 1 / (1 - lam)
    c2 = 2 / (1 - x) + 2 * x * np.log(x) / (1 - x) ** 2
    c3 = -x / (1 - x) + x * (1 - 2 * x) * np.log(x) / (1 - x) ** 2
    f1, f2, f3 = (charm_quark(sf, lam).local for sf in CHARM)
    assert f1 == f3
    assert f2 - f1 == pytest.approx(CF * (c2 + 2 * c3 / x), rel=1e-14 / lam**2 + 1e-12)


@pytest.mark.parametrize("lam", LAMBDAS)
@pytest.mark.parametrize("z", [0.02, 0.3, 0.6, 0.85])
def test_charm_follows_from_matrix_elements(lam: float, z: float) -> None:
    """W s -> c g and W g -> c sbar, massless s, over phase space, at two values of mu_f."""
    q2 = 3.0
    m2 = q2 * (1 - lam) / lam
    for mu2 in (q2 + m2, 7.0):
        log = np.log((q2 + m2) / mu2)
        quark = [at(charm_quark(sf, lam, log), z) for sf in CHARM]
        gluon = [at(charm_gluon(sf, lam, log), z) for sf in CHARM]
        found = coefficients(Process(False, LEFT, q2, m2, 0.0), z, mu2)
        assert found == pytest.approx(quark, rel=PROPAGATORS, abs=PROPAGATORS)
        found = coefficients(Process(True, LEFT, q2, m2, 0.0), z, mu2)
        assert found == pytest.approx(gluon, rel=PROPAGATORS, abs=PROPAGATORS)


@pytest.mark.parametrize("gluon", [False, True])
def test_collinear_pole_is_the_splitting_function(gluon: bool) -> None:
    """v times the integrand at v -> 0, for all three: 1e-5 is v ln v and more at v = 1e-7."""
    for m2 in (0.0, 2.0):
        process = Process(gluon, LEFT, 3.0, m2, 0.0)
        for z in (0.1, 0.5, 0.8):
            found = 1e-7 * integrand(process, z, np.array([1e-7]))[0]
            assert found == pytest.approx([residue(process, z)[0]] * 3, rel=1e-5)


def _distances(build: Callable[[str, float], Parts], n: int, distance: float) -> np.ndarray:
    """Moments of F1, F2, F3 less their limits at lambda = 1 - distance."""
    if build is charm_quark:
        two, long, three = (moment(coefficient(1, sf, "ns+", 3), n) for sf in ("F2", "FL", "F3"))
        limit = [two - long, two, three]
    else:
        two, long = (moment(coefficient(1, sf, "gluon", 1), n) for sf in ("F2", "FL"))
        lam = 1 - distance
        log = moment(matching(1, "heavy<-gluon", 1), n) / 2 * np.log(lam / (1 - lam))
        limit = [two - long + log, two + log, -log]
    # mu_f = Q on both sides
    found = [moment(build(sf, 1 - distance, -np.log(1 - distance)), n) for sf in CHARM]
    return np.array(found) - limit


@pytest.mark.parametrize("build", [charm_quark, charm_gluon])
@pytest.mark.parametrize("n", [2, 3, 5])
def test_charm_tends_to_massless(build: Callable[[str, float], Parts], n: int) -> None:
    """Quark: F1, F2, F3 of massless quarks. Gluon: those plus or minus A_Hg ln(Q^2/m^2)/2,
    half of which belongs to the charm quark.

    The distance falls like r (A + B ln r), r = 1 - lambda: over r it has no second
    difference in ln r up to r ln r N (1e-2), and is below 1e-7 at r = 1e-10.
    """
    scaled = np.array([_distances(build, n, r) / r for r in (1e-4, 1e-5, 1e-6)])
    size = np.abs(scaled).max(axis=0)
    assert np.all(size < 2e3)
    assert np.all(np.abs(scaled[0] - 2 * scaled[1] + scaled[2]) < 1e-2 * size + 1e-6)
    assert _distances(build, n, 1e-10) == pytest.approx([0, 0, 0], abs=1e-7)


def test_unknown_structure_functions_are_refused() -> None:
    for build in (charm_quark, charm_gluon):
        with pytest.raises(ValueError, match="none of"):
            build("FL", 0.5)
