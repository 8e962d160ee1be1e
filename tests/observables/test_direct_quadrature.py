"""Other scales and the matched scheme against adaptive quadrature: the formulas put together again."""

import numpy as np
import pytest
import scalewright as sw
from kernels.second_writing.coefficients_massive import massive_gluon, z_max
from observables import direct
from scalewright import _core
from scipy.integrate import quad

CHARGES2 = np.array([1, 4, 1, 4, 1, 4]) / 9


def splitting(channel, nf):
    return lambda z, y: _core.splitting_function(0, channel, nf, z, y)


def parts(evolved, x, kernels):
    """Return convolutions with each kernel, and the density itself, each (flavour,)."""
    values = evolved.values.reshape(len(evolved.flavours), -1)

    def density(points):
        return evolved.grid.interpolate(values, points)

    return direct.convolved(density, evolved.grid.edges, x, kernels), density(np.array([x]))[:, 0]


@pytest.mark.parametrize("measure", ["F2", "FL", "xF3"])
@pytest.mark.parametrize(("mur", "muf"), [(0.5, 2.0), (4.0, 0.25)])
@pytest.mark.parametrize(("x", "q2"), [(1e-4, 9.0), (0.2, 80.0)])
def test_other_scales_at_nlo(grid, start, measure, mur, muf, x, q2):
    # F2 = sum e^2 (1 + a (C_q + t P_qq)) q + <e^2> a (C_g + t P_qg) g, t = ln(Q^2/mu_f^2), a = a(mu_r);
    # FL without logarithms at this order
    theory = sw.Theory(order="NLO", hard_mur2_ratio=mur, hard_muf2_ratio=muf)
    evolved = sw.evolve(theory, start, [muf * q2]).scale(muf * q2)
    nf, t = int(evolved.nf), -np.log(muf)
    a = float(theory.alpha_s(mur * q2, nf)) / (4 * np.pi)
    minus = measure == "xF3"
    name = "ns-" if minus else "ns+"
    kernels = [
        direct.light_kernel(1, measure, name, nf), splitting(name, nf),
        direct.light_kernel(1, measure, "gluon", nf), splitting("qg", nf),
    ]  # fmt: skip
    (c_q, p_qq, c_g, p_qg), here = parts(evolved, x, kernels)
    born = 0.0 if measure == "FL" else 1.0
    of = evolved.flavours
    each = born * here + a * (c_q + born * t * p_qq)
    common = {"x": x, "q2": q2, "densities": evolved, "theory": theory}
    if minus:  # charged current, neutrino: xF3(W+) = 2 sum |V|^2 (D - Ubar)
        v2 = np.array(sw.Electroweak.effective().mixing) ** 2
        active = [(u, d, v2[i, j]) for i, u in enumerate((2, 4)) for j, d in enumerate((1, 3, 5))]
        allowed = [(u, d, v) for u, d, v in active if max(u, d) <= nf]
        expected = sum(2 * v * (each[of.index(d)] - each[of.index(-u)]) for u, d, v in allowed)
        value = sw.structure_function("xF3", current="charged", beam="nu", **common)[0]
        scale = abs(expected)
    else:
        expected = sum(CHARGES2[q - 1] * (each[of.index(q)] + each[of.index(-q)]) for q in range(1, nf + 1))
        gluon = of.index(21)
        expected += CHARGES2[:nf].mean() * a * (c_g[gluon] + born * t * p_qg[gluon])
        value = sw.structure_function(measure, exchange="photon", **common)[0]
        f2 = sw.structure_function("F2", exchange="photon", **common)[0]
        scale = max(abs(expected), 1e-3 * f2)
    assert abs(value - expected) <= 1e-6 * scale  # what the standard resolution promises


@pytest.mark.parametrize("measure", ["F2", "FL"])
@pytest.mark.parametrize("subtraction", ["damped", "plain"])
@pytest.mark.parametrize(("x", "q2"), [(1e-3, 4.0), (0.05, 15.0), (1e-3, 300.0)])
def test_matched_charm(grid, start, measure, subtraction, x, q2):
    # F = F(massive) + D (e^2 (1 + a C_q) (c + cbar) - e^2 a ln(Q^2/m^2) P_qg/nf g): massless less the limit
    # of massive, in which C_g cancels (S. Forte et al., arXiv:1001.2312, section 4); FL without logarithm
    theory = sw.Theory(order="NLO", heavy_quarks="matched")
    mass2 = theory.masses.charm**2
    evolved = sw.evolve(theory, start, [q2]).scale(q2)
    nf, of = int(evolved.nf), evolved.flavours
    a = float(theory.alpha_s(q2, nf)) / (4 * np.pi)
    (c_q, p_qg), here = parts(evolved, x, [direct.light_kernel(1, measure, "ns+", nf), splitting("qg", nf)])
    born = 0.0 if measure == "FL" else 1.0
    charm = sum((born * here + a * c_q)[of.index(f)] for f in (4, -4))
    beyond = charm - born * a * np.log(q2 / mass2) * p_qg[of.index(21)] / nf
    damping = (1 - mass2 / q2) ** 2 if subtraction == "damped" else 1.0
    end = z_max(q2, mass2)

    def integrand(s):
        z = x + (end - x) * (1 - s**2)  # a square root at the threshold
        g = float(evolved.at(q2, [min(1.0, x / z)], 21).ravel()[0])
        return float(massive_gluon(measure, np.array(z), q2, mass2)) * g * 2 * s * (end - x)

    massive = a * quad(integrand, 0, 1, epsabs=0, epsrel=1e-9, limit=400)[0]
    common = {
        "x": x,
        "q2": q2,
        "densities": evolved,
        "theory": theory,
        "exchange": "photon",
        "tagged": "charm",
    }
    value = sw.structure_function(measure, subtraction=subtraction, **common)[0]
    f2 = sw.structure_function("F2", subtraction=subtraction, **common)[0]
    expected = 4 / 9 * (massive + damping * beyond)
    assert abs(value - expected) <= 1e-6 * max(abs(expected), 1e-3 * f2)  # standard resolution
