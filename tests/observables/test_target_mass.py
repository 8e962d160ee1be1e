"""Target mass: Nachtmann moments, the limit without it, and the terms of the cross section."""

from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw
from numpy.polynomial.legendre import leggauss
from scalewright._observed.target_mass import with_target_mass

M2 = 0.93827208816**2


def functions(grid, x, q2):
    """Return F2, FL, xF3 with target mass at x, from massless x^0.5 (1-x)^3 times 1, 0.2, 0.7."""
    nodal = np.sqrt(grid.x) * (1 - grid.x) ** 3
    unit = np.eye(3)
    found = []
    for place in range(3):
        rows = with_target_mass(grid, x, np.full(x.size, q2), np.tile(unit[place], (x.size, 1)))
        found.append(
            sum(rows[name] @ (size * nodal) for name, size in (("F2", 1.0), ("FL", 0.2), ("xF3", 0.7)))
        )
    return found


@pytest.mark.parametrize("n", [2, 4, 6])
@pytest.mark.parametrize("q2", [1.5, 10.0])
def test_nachtmann_moments_are_the_massless_moments(n, q2):
    # O. Nachtmann, NP B63 (1973) 237, in the form of I. Schienbein et al., arXiv:0709.1775, section 3
    grid = sw.ChebyshevGrid(x_min=1e-7, resolution="fine")
    v, weight = leggauss(60)
    edges = np.array([0.0, 0.02, 0.1, 0.35, 0.9, 2.0, 4.0, 8.0, 16.0])
    half = np.diff(edges)[:, None] / 2
    u = (edges[:-1, None] + half + half * v).ravel()
    # xi runs to 1, that is x formally to 1/(1 - M^2/Q^2): only so do the moments close
    xi, mu = np.exp(-u), M2 / q2
    x = xi / (1 - mu * xi**2)
    dxi = (half * weight).ravel() * xi
    dx = dxi * (1 + mu * xi**2) / (1 - mu * xi**2) ** 2
    f2, _, f3 = functions(grid, x, q2)
    r = np.sqrt(1 + 4 * x**2 * M2 / q2)
    of_f2 = xi ** (n + 1) / x**3 * (3 + 3 * (n + 1) * r + n * (n + 2) * r**2) / ((n + 2) * (n + 3))
    of_f3 = xi ** (n + 1) / x**3 * (1 + (n + 1) * r) / (n + 2)
    massless = np.sqrt(xi) * (1 - xi) ** 3
    for kernel, function, size in ((of_f2, f2, 1.0), (of_f3, f3, 0.7)):
        exact = size * float(np.sum(dxi * xi ** (n - 2) * massless))
        # fine resolution interpolates x^a (1-x)^b to 1e-8
        assert float(np.sum(dx * kernel * function)) == pytest.approx(exact, rel=3e-8)


def test_without_mass_nothing_changes(grid):
    x = np.array([0.01, 0.3])
    for found, size in zip(functions(grid, x, 1e12), (1.0, 0.2, 0.7), strict=True):
        # M^2/Q^2 = 1e-12; interpolation at the standard resolution
        np.testing.assert_allclose(found, size * np.sqrt(x) * (1 - x) ** 3, rtol=1e-7)


def test_cross_section_keeps_the_mass_consistently(grid, start):
    theory, x, q2, y = sw.Theory(order="NLO"), 0.4, 3.0, 0.5
    evolved = sw.evolve(theory, start, [q2])
    common = {"x": x, "q2": q2, "densities": evolved, "theory": theory, "beam": "e-", "target_mass": True}
    f1, f2, fl, f3 = (sw.structure_function(name, **common)[0] for name in ("F1", "F2", "FL", "xF3"))
    rho2 = 1 + 4 * x**2 * M2 / q2
    assert fl == pytest.approx(rho2 * f2 - 2 * x * f1, rel=1e-11)  # rounding of the difference
    # (1 - y - x^2 y^2 M^2/Q^2) F2 + x y^2 F1 + (y - y^2/2) xF3, the general form of the PDG review, over Y+/2
    general = (1 - y - x**2 * y**2 * M2 / q2) * f2 + x * y**2 * f1 + (y - y**2 / 2) * f3
    value = sw.structure_function("reduced_cross_section", y=y, **common)[0]
    assert value == pytest.approx(general * 2 / (1 + (1 - y) ** 2), rel=1e-12)


def test_forward_map_has_the_same_target_mass(grid, start):
    theory = sw.Theory(order="NLO")
    rows = SimpleNamespace(x=[0.5], q2=[2.5], measure="F2", exchange="photon")
    fmap = sw.forward_map(theory, grid, start_q2=1.5, start_nf=3, points=rows, target_mass=True)
    evolved = sw.evolve(theory, start, [2.5])
    value = sw.structure_function(
        "F2", x=0.5, q2=2.5, densities=evolved, theory=theory, exchange="photon", target_mass=True
    )
    assert fmap.predict(start)[0, 0] == pytest.approx(value[0], rel=1e-8)  # steps in scale
    without = sw.forward_map(theory, grid, start_q2=1.5, start_nf=3, points=rows)
    assert abs(fmap.predict(start)[0, 0] / without.predict(start)[0, 0] - 1) > 0.01
