"""NNLO at other scales, target mass and single charm by adaptive quadrature of the second writing."""

import numpy as np
import pytest
import scalewright as sw
from kernels.second_writing.coefficients import coefficient
from kernels.second_writing.coefficients_charm import charm_gluon, charm_quark
from kernels.second_writing.splitting_lo_nlo import splitting
from numpy.polynomial.legendre import leggauss
from observables import direct

CHARGES2 = np.array([1, 4, 1, 4, 1, 4]) / 9
M2 = 0.93827208816**2


def of(parts):
    """Return a second writing in the form that `direct.convolved` wants."""
    return lambda z, y: (parts.regular(z, y), parts.plus, parts.local)


def acting(matrix, density, edges, x):
    """Return sums over columns of a matrix of kernels, each on its function of `density`, (row,)."""
    kernels = [of(parts) for row in matrix for parts in row]
    made = direct.convolved(density, edges, x, kernels).reshape(len(matrix), len(matrix[0]), -1)
    return np.einsum("rcc->r", made)


def splitting_matrix(order, nf):
    """Return the splitting functions of (non-singlet, Sigma, g)."""
    ns, ps, qg, gq, gg = (splitting(order, name, nf) for name in ("ns+", "pure singlet", "qg", "gq", "gg"))
    nothing = splitting(0, "pure singlet", nf)
    return [[ns, nothing, nothing], [nothing, ns, qg], [nothing, gq, gg]], ps


@pytest.mark.parametrize(("mur", "muf"), [(0.5, 2.0), (4.0, 0.25)])
def test_f2_at_nnlo_and_other_scales(grid, start, mur, muf):
    # With t = ln(Q^2/mu_f^2), lr = ln(mu_r^2/mu_f^2): F2 = C0 + a C1 + a^2 (C2 + b0 lr C1), a = a(mu_r),
    # C1 = c1 + t P0, C2 = c2 + t (c1 P0 + P1 - b0 c1) + t^2/2 (P0 P0 - b0 P0), from d F2/d mu_f = 0
    # (W. van Neerven, A. Vogt, hep-ph/0006154, eq. 2.17 in other words)
    theory, x, q2 = sw.Theory(hard_mur2_ratio=mur, hard_muf2_ratio=muf), 0.05, 80.0
    evolved = sw.evolve(theory, start, [muf * q2]).scale(muf * q2)
    nf, flavours = int(evolved.nf), list(evolved.flavours)
    values = evolved.values.reshape(len(flavours), -1)
    plus = np.array([values[flavours.index(q)] + values[flavours.index(-q)] for q in range(1, nf + 1)])
    mean = CHARGES2[:nf].mean()
    # F2 = C_ns on the first, <e^2> C_singlet on the others
    three = np.array([(CHARGES2[:nf] - mean) @ plus, plus.sum(axis=0), values[flavours.index(21)]])

    def density(points):
        return grid.interpolate(three, points)

    # P0 on the densities, at the nodes of a finer grid down to x
    finer = sw.ChebyshevGrid.from_panels([*grid.edges[:3], 1.7, -np.log(x) + 1e-6, 5.0], [22, 26, 22, 22, 4])
    p0, _ = splitting_matrix(0, nf)
    p1, ps1 = splitting_matrix(1, nf)
    reached = finer.x > 0.9 * x
    made = np.zeros((3, finer.nodes))
    made[:, reached] = np.array([acting(p0, density, grid.edges, node) for node in finer.x[reached]]).T

    def once(points):
        return finer.interpolate(made, points)

    def pairs(order):
        ns, ps, g = (coefficient(order, "F2", name, nf) for name in ("ns+", "pure singlet", "gluon"))
        return [of(part) for part in (ns, ps, g)]

    def on(order, function, edges):
        ns, ps, g = direct.convolved(function, edges, x, pairs(order))
        return ns[0] + mean * (ns[1] + ps[1] + g[2])

    def born(three):
        return float(three[0] + mean * three[1])

    v, v1 = density(np.array([x]))[:, 0], once(np.array([x]))[:, 0]
    v2 = acting(p1, density, grid.edges, x)
    v2[1] += direct.convolved(density, grid.edges, x, [of(ps1)])[0][1]
    v11 = acting(p0, once, finer.edges, x)
    c1v, c2v, c1v1 = on(1, density, grid.edges), on(2, density, grid.edges), on(1, once, finer.edges)
    t, lr, b0 = -np.log(muf), np.log(mur / muf), 11 - 2 / 3 * nf
    a = float(theory.alpha_s(mur * q2, nf)) / (4 * np.pi)
    first = c1v + t * born(v1)
    second = c2v + t * (c1v1 + born(v2) - b0 * c1v) + t**2 / 2 * (born(v11) - b0 * born(v1)) + b0 * lr * first
    expected = born(v) + a * first + a**2 * second
    value = sw.structure_function("F2", x=x, q2=q2, densities=evolved, theory=theory, exchange="photon")[0]
    assert value == pytest.approx(expected, rel=1e-6)  # what the standard resolution promises


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
