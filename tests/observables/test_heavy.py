"""Heavy quarks: an independent integral, the massless limit, and what matching changes."""

from dataclasses import replace
from itertools import pairwise
from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw
from kernels.second_writing.coefficients_massive import massive_gluon, z_max
from scalewright import _core
from scipy.integrate import quad

X = np.array([1e-4, 1e-2, 0.1])


def predicted(theory, grid, start, q2, **case):
    rows = SimpleNamespace(x=X, q2=q2 * np.ones(X.size), **case)
    fmap = sw.forward_map(theory, grid, start_q2=1.5, start_nf=3, points=rows)
    return fmap.predict(start)[0]


@pytest.mark.parametrize("measure", ["F2", "FL"])
@pytest.mark.parametrize(("tagged", "charge2"), [("charm", 4 / 9), ("bottom", 1 / 9)])
@pytest.mark.parametrize("q2", [5.0, 400.0])
def test_pairs_agree_with_a_second_writing_and_scipy(grid, start, measure, tagged, charge2, q2):
    theory = sw.Theory(order="NLO", flavours=3, heavy_quarks="massive")
    mass = getattr(theory.masses, tagged)
    gluon = sw.evolve(theory, start, [q2])
    a = float(theory.alpha_s(q2)) / (4 * np.pi)
    value = predicted(theory, grid, start, q2, measure=measure, exchange="photon", tagged=tagged)
    for x, found in zip(X, value, strict=True):
        end = z_max(q2, mass**2)

        def integrand(s, x=x, end=end):
            z = x + (end - x) * (1 - s**2)  # a square root at the threshold
            c = float(massive_gluon(measure, np.array(z), q2, mass**2))
            return c * float(gluon.at(q2, [min(1.0, x / z)], 21).ravel()[0]) * 2 * s * (end - x)

        # F(x) = x int dz/z C(z) g(x/z) = int dz C(z) G(x/z), G = x g
        expected = 0.0
        if x < end:
            expected = charge2 * a * quad(integrand, 0, 1, epsabs=0, epsrel=1e-9, limit=400)[0]
        assert found == pytest.approx(expected, rel=1e-6, abs=1e-9)  # standard resolution


@pytest.mark.parametrize(
    "case",
    [
        {"measure": "F2", "exchange": "photon"},
        {"measure": "FL", "exchange": "photon"},
        {"measure": "F2", "current": "charged", "beam": "nu"},
        {"measure": "FL", "current": "charged", "beam": "nubar"},
        {"measure": "xF3", "current": "charged", "beam": "nubar"},
        {"measure": "xF3", "current": "charged", "beam": "nu"},
    ],
)
@pytest.mark.parametrize("subtraction", ["damped", "plain", "chi"])
@pytest.mark.parametrize("muf", [1.0, 2.0])
def test_matched_tends_to_massless_like_a_power_of_the_mass(grid, start, case, subtraction, muf):
    q2 = 1e4
    values = np.concatenate([start.values, start.values[:, -2:]], axis=1)
    four = sw.Densities(grid, q2=1.5, nf=4, flavours=(*start.flavours, 4, -4), values=values)

    def of(measure, scheme, mass):
        # the charm threshold lies below the start: densities do not know the mass
        theory = sw.Theory(
            order="NLO", heavy_quarks=scheme, hard_muf2_ratio=muf, thresholds_q2=(1.44, 20.0, 3e4),
            masses=sw.QuarkMasses(charm=mass, bottom=4.5, top=170.0, kind="pole"),
        )  # fmt: skip
        rows = SimpleNamespace(x=X, q2=q2 * np.ones(X.size), tagged="charm", **{**case, "measure": measure})
        fmap = sw.forward_map(
            theory, grid, start_q2=1.5, start_nf=4, points=rows, subtraction=subtraction, tolerance=1e-12
        )
        return fmap.predict(four)[0]

    massless, f2 = of(case["measure"], "massless", 1.2), of("F2", "massless", 1.2)
    misses = [np.abs(of(case["measure"], "matched", mass) - massless) / f2 for mass in (1.2, 0.6)]
    # m^2/Q^2 = 1.4e-4 times logarithms of 1/x and Q^2/m^2, and a quarter of it at half the mass, logarithms
    # apart
    assert misses[0].max() < 5e-3
    assert (misses[1] < 0.36 * misses[0]).all()


def test_below_its_threshold_a_matched_quark_is_massive(grid, start):
    variable = sw.Theory(order="NLO", flavours=(3, 5), heavy_quarks="matched", thresholds_q2=(4.0, 20.0, 3e4))
    fixed = sw.Theory(
        order="NLO", flavours=3, heavy_quarks="massive", coupling=sw.Coupling(0.3, q2=3.0, nf=3)
    )
    variable = replace(variable, coupling=fixed.coupling)
    for case in ({"exchange": "photon"}, {"current": "charged", "beam": "nu"}):
        both = [predicted(theory, grid, start, 3.0, measure="F2", **case) for theory in (variable, fixed)]
        np.testing.assert_allclose(both[0], both[1], rtol=1e-12)  # the same sums


def test_parts_add_up(grid, start):
    # light = all - charm - bottom is what a calculation with nothing but light couplings gives
    theory = sw.Theory(order="NNLO", heavy_quarks="matched")
    massive = sw.Theory(order="NNLO", heavy_quarks="massive", flavours=3)
    for chosen, q2 in ((theory, 50.0), (massive, 50.0)):
        whole, charm, bottom = (
            predicted(chosen, grid, start, q2, measure="F2", exchange="photon", tagged=tag)
            for tag in (None, "charm", "bottom")
        )
        assert (charm > 0).all() and (bottom >= 0).all() and (whole > charm + bottom).all()
    light = predicted(
        replace(massive, heavy_quarks="massless"), grid, start, 50.0, measure="F2", exchange="photon"
    )
    np.testing.assert_allclose(whole - charm - bottom, light, rtol=1e-12)


@pytest.mark.parametrize("q2", [2.0, 30.0])
def test_charged_charm_at_order_zero_is_slow_rescaling(grid, start, q2):
    theory = sw.Theory(order="LO", flavours=3, heavy_quarks="massive")
    evolved = sw.evolve(theory, start, [q2])
    lam = q2 / (q2 + theory.masses.charm**2)
    v2 = np.array(sw.Electroweak.effective().mixing) ** 2
    for sign, beam in ((1, "nu"), (-1, "nubar")):
        expected = 2 * sum(v2[1, i] * evolved.at(q2, X / lam, sign * d).ravel() for i, d in ((0, 1), (1, 3)))
        for measure, factor in (("F2", 1.0), ("FL", 1 - lam), ("xF3", sign * lam)):
            found = predicted(
                theory, grid, start, q2, measure=measure, current="charged", beam=beam, tagged="charm"
            )
            np.testing.assert_allclose(found, factor * expected, rtol=1e-8)  # tolerance of the steps in scale


def test_massive_with_a_variable_number_of_flavours_is_refused():
    with pytest.raises(
        sw.InputError, match=r'flavours = .3, 5.: heavy_quarks="massive" needs a fixed number'
    ):
        sw.Theory(heavy_quarks="massive")


@pytest.mark.parametrize(
    ("scheme", "flavours"), [("matched", (3, 5)), ("massive", 3), ("massless", (3, 5))]
)  # fmt: skip
def test_an_intrinsic_heavy_input_is_refused(grid, start, scheme, flavours):
    theory = sw.Theory(order="NLO", heavy_quarks=scheme, flavours=flavours)
    values = np.concatenate([start.values, start.values[:, -2:]], axis=1)
    charmed = sw.Densities(grid, q2=1.5, nf=3, flavours=(*start.flavours, 4, -4), values=values)
    message = (
        r"densities.flavours = 4: not active at nf = 3 and not zero: an intrinsic heavy input is not impl"
    )
    rows = SimpleNamespace(x=[0.1], q2=[20.0], measure="F2", exchange="photon")
    fmap = sw.forward_map(theory, grid, start_q2=1.5, start_nf=3, points=rows)
    with pytest.raises(sw.InputError, match=message):
        fmap.predict(charmed)
    with pytest.raises(sw.InputError, match=message):
        sw.structure_function("F2", x=0.1, q2=1.5, densities=charmed, theory=theory, exchange="photon")
    # zeros are no input
    silent = np.concatenate([start.values, 0.0 * start.values[:, -2:]], axis=1)
    none = sw.Densities(grid, q2=1.5, nf=3, flavours=(*start.flavours, 4, -4), values=silent)
    np.testing.assert_array_equal(fmap.predict(none), fmap.predict(start))


@pytest.mark.parametrize("measure", ["F2", "FL"])
@pytest.mark.parametrize(
    ("x", "q2", "mass"), [(2e-5, 3.0, 1.3), (1e-3, 50.0, 4.6), (0.1, 4e4, 1.4), (0.4, 40.0, 1.5)]
)
def test_pairs_are_integrated_to_rounding(grid, measure, x, q2, mass):
    # the density is the polynomial of the grid, cut at its edges: nothing but the quadrature differs
    density = grid.x**-0.2 * (1 - grid.x) ** 5
    end = z_max(q2, mass**2)

    def integrand(s):
        z = x + (end - x) * (1 - s**2)  # a square root at the threshold
        c = float(massive_gluon(measure, np.array(z), q2, mass**2))
        return c * float(grid.interpolate(density, min(1.0, x / z))) * 2 * s * (end - x)

    edges = [x * np.exp(edge) for edge in grid.edges if 1.0 < np.exp(edge) < end / x]
    ends = sorted({0.0, 1.0, *(np.sqrt(1 - (edge - x) / (end - x)) for edge in edges)})
    expected = sum(quad(integrand, *two, epsabs=0, epsrel=1e-12, limit=200)[0] for two in pairwise(ends))
    row = _core.massive_rows(grid.handle(), f"{measure} gluon", np.array([x]), np.array([q2]), mass)[0]
    assert row @ density == pytest.approx(expected, rel=1e-13)  # rounding: 4e-15 measured
