"""Target mass and single charm by adaptive quadrature of the second writing."""

import numpy as np
import pytest
import scalewright as sw
from kernels.second_writing.coefficients import coefficient
from kernels.second_writing.coefficients_charm import charm_gluon, charm_quark
from numpy.polynomial.legendre import leggauss
from observables import direct

CHARGES2 = np.array([1, 4, 1, 4, 1, 4]) / 9
M2 = 0.93827208816**2


def of(parts):
    """Return a second writing in the form that `direct.convolved` wants."""
    return lambda z, y: (parts.regular(z, y), parts.plus, parts.local)


@pytest.mark.parametrize(("x", "q2"), [(0.3, 3.0), (0.7, 8.0)])
def test_target_mass(grid, start, x, q2):
    # I. Schienbein et al., arXiv:0709.1775, eqs. (22)-(23), with the massless F2 and FL at NLO by quadrature
    theory = sw.Theory(order="NLO")
    evolved = sw.evolve(theory, start, [q2]).scale(q2)
    nf, flavours = int(evolved.nf), list(evolved.flavours)
    a = float(theory.alpha_s(q2, nf)) / (4 * np.pi)
    values = evolved.values.reshape(len(flavours), -1)
    plus = sum(
        CHARGES2[q - 1] * (values[flavours.index(q)] + values[flavours.index(-q)]) for q in range(1, nf + 1)
    )
    both = np.array([plus, CHARGES2[:nf].mean() * values[flavours.index(21)]])

    def massless(name, at):
        kernels = [of(coefficient(1, name, part, nf)) for part in ("ns+", "gluon")]
        quark, gluon = direct.convolved(lambda p: grid.interpolate(both, p), grid.edges, at, kernels)
        born = grid.interpolate(both, at)[0] if name == "F2" else 0.0
        return born + a * (quark[0] + gluon[1])

    mu = M2 / q2
    r = np.sqrt(1 + 4 * x**2 * mu)
    xi = 2 * x / (1 + r)
    nodes, weights = leggauss(24)
    u = xi + (1 - xi) / 2 * (1 + nodes)
    f2 = np.array([massless("F2", at) for at in u])
    du = (1 - xi) / 2 * weights
    h2, g2 = np.sum(du * f2 / u**2), np.sum(du * (u - xi) * f2 / u**2)
    f2_here, fl_here = massless("F2", xi), massless("FL", xi)
    expected = {
        "F2": x**2 / (xi**2 * r**3) * f2_here + 6 * mu * x**3 / r**4 * h2 + 12 * mu**2 * x**4 / r**5 * g2,
        "FL": x**2 / (xi**2 * r) * fl_here + 4 * mu * x**3 / r**2 * h2 + 8 * mu**2 * x**4 / r**3 * g2,
    }
    common = {"x": x, "q2": q2, "densities": evolved, "theory": theory, "exchange": "photon"}
    for name, exact in expected.items():
        value = sw.structure_function(name, target_mass=True, **common)[0]
        assert abs(value - exact) <= 1e-6 * max(abs(exact), 1e-3 * expected["F2"])


@pytest.mark.parametrize(("x", "q2"), [(0.3, 3.0), (0.7, 8.0)])
@pytest.mark.parametrize("beam", ["nu", "nubar"])
def test_target_mass_of_xf3(grid, start, x, q2, beam):
    # I. Schienbein et al., arXiv:0709.1775, eq. (24), with the massless xF3 at NLO by quadrature;
    # xF3(W+) = 2 sum |V|^2 (D - Ubar), xF3(W-) = 2 sum |V|^2 (U - Dbar)
    theory = sw.Theory(order="NLO", flavours=(3, 4))
    evolved = sw.evolve(theory, start, [q2]).scale(q2)
    values = dict(zip(evolved.flavours, evolved.values.reshape(len(evolved.flavours), -1), strict=True))
    a = float(theory.alpha_s(q2, 4)) / (4 * np.pi)
    v2 = np.array(sw.Electroweak.effective().mixing) ** 2
    sources = (1, 3, -2, -4) if beam == "nu" else (2, 4, -1, -3)
    of_flavour = {**dict(zip((2, 4), v2[:2, :2].sum(axis=1), strict=True)),
                  **dict(zip((1, 3), v2[:2, :2].sum(axis=0), strict=True))}  # fmt: skip
    one = np.array([sum(2 * np.sign(f) * of_flavour[abs(f)] * values[f] for f in sources)])
    kernel = of(coefficient(1, "F3", "ns-", 4))  # at NLO the same as "ns+"

    def massless(at):
        made = direct.convolved(lambda p: grid.interpolate(one, p), grid.edges, at, [kernel])
        return grid.interpolate(one, at)[0] + a * made[0, 0]

    mu = M2 / q2
    r = np.sqrt(1 + 4 * x**2 * mu)
    xi = 2 * x / (1 + r)
    nodes, weights = leggauss(24)
    u = xi + (1 - xi) / 2 * (1 + nodes)
    h3 = np.sum((1 - xi) / 2 * weights * np.array([massless(at) for at in u]) / u**2)
    expected = x**2 / (xi**2 * r**2) * massless(xi) + 2 * mu * x**3 / r**3 * h3
    common = {"x": x, "q2": q2, "densities": evolved, "theory": theory, "current": "charged", "beam": beam}
    value = sw.structure_function("xF3", target_mass=True, **common)[0]
    f2 = sw.structure_function("F2", target_mass=True, **common)[0]
    assert abs(value - expected) <= 1e-6 * max(abs(expected), 1e-3 * f2)  # standard resolution


@pytest.mark.parametrize(("x", "q2", "mur", "muf"), [(1e-3, 4.0, 1.0, 1.0), (0.1, 40.0, 2.0, 0.5)])
def test_charged_current_charm(grid, start, x, q2, mur, muf):
    # M. Glueck, S. Kretzer, E. Reya, hep-ph/9603304: with lambda = Q^2/(Q^2 + m^2), xi = x/lambda, each of
    # F2/2, x F1/lambda, x F3/(2 lambda) is |V|^2 (S(xi) + a (C_q S + C_g G)(xi)), S and G times x
    theory = sw.Theory(
        order="NLO", flavours=3, heavy_quarks="massive", hard_mur2_ratio=mur, hard_muf2_ratio=muf
    )
    evolved = sw.evolve(theory, start, [muf * q2]).scale(muf * q2)
    flavours, mass2 = list(evolved.flavours), theory.masses.charm**2
    lam = q2 / (q2 + mass2)
    a, log = float(theory.alpha_s(mur * q2, 3)) / (4 * np.pi), np.log((q2 + mass2) / (muf * q2))
    v2 = np.array(sw.Electroweak.effective().mixing)[1] ** 2
    values = evolved.values.reshape(len(flavours), -1)
    down = v2[0] * values[flavours.index(1)] + v2[1] * values[flavours.index(3)]
    both = np.array([down, (v2[0] + v2[1]) * values[flavours.index(21)]])

    def each(sf):
        kernels = [of(charm_quark(sf, lam, log)), of(charm_gluon(sf, lam, log))]
        quark, gluon = direct.convolved(lambda p: grid.interpolate(both, p), grid.edges, x / lam, kernels)
        return grid.interpolate(both, x / lam)[0] + a * (quark[0] + gluon[1])

    f1, f2, f3 = (each(sf) for sf in ("F1", "F2", "F3"))
    expected = {"F2": 2 * f2, "FL": 2 * f2 - 2 * lam * f1, "xF3": 2 * lam * f3}
    common = {"x": x, "q2": q2, "densities": evolved, "theory": theory, "current": "charged", "beam": "nu"}
    for name, exact in expected.items():
        value = sw.structure_function(name, tagged="charm", **common)[0]
        assert abs(value - exact) <= 1e-6 * max(abs(exact), 1e-3 * expected["F2"])
