"""The matched scheme against adaptive quadrature: charged-current charm, and the chi-type variable."""

import numpy as np
import pytest
import scalewright as sw
from kernels.second_writing.coefficients import charm_gluon, charm_quark, coefficient, massive_gluon, z_max
from kernels.second_writing.splitting_lo_nlo import splitting
from observables import direct
from scipy.integrate import quad


def of(parts):
    """Return a second writing in the form that `direct.convolved` wants."""
    return lambda z, y: (parts.regular(z, y), parts.plus, parts.local)


def by_flavour(evolved):
    return dict(zip(evolved.flavours, evolved.values.reshape(len(evolved.flavours), -1), strict=True))


@pytest.mark.parametrize("beam", ["nu", "nubar"])
@pytest.mark.parametrize("subtraction", ["damped", "plain", "chi"])
@pytest.mark.parametrize(
    ("x", "q2", "mur", "muf"),
    # bottom is a source of charm from 20 GeV^2 on
    [(2e-4, 5.0, 1.0, 1.0), (0.1, 300.0, 2.0, 0.5), (0.6, 12.0, 1.0, 1.0)],
)
def test_charm_of_a_w(grid, start, x, q2, mur, muf, subtraction, beam):
    # F = F(massive) + D (F(massless) - limit). S: quarks (nu), antiquarks (nubar) that charm comes from, c:
    # its antiquark, all times x; t = ln(Q^2/mu_f^2), L = ln(Q^2/m^2). S and C_g/nf g cancel in the rest;
    # left is |V|^2 times (1 + a (C_q + t P_qq)) c + a (t - L) P_qg/(2 nf) g in F2/2, minus that with its own
    # C_q in F3/2, and a C_L c in FL/2; at x, or at x (1 + m^2/Q^2) for "chi". The massive part is that of
    # `test_charged_current_charm`
    theory = sw.Theory(order="NLO", heavy_quarks="matched", hard_mur2_ratio=mur, hard_muf2_ratio=muf)
    evolved = sw.evolve(theory, start, [muf * q2]).scale(muf * q2)
    nf, values, mass2 = int(evolved.nf), by_flavour(evolved), theory.masses.charm**2
    a = float(theory.alpha_s(mur * q2, nf)) / (4 * np.pi)
    v2 = np.array(sw.Electroweak.effective().mixing)[1] ** 2 * (np.array([1, 3, 5]) <= nf)
    sign = 1 if beam == "nu" else -1
    three = np.array([
        sum(v * values[sign * d] for v, d in zip(v2, (1, 3, 5), strict=True) if v),
        v2.sum() * values[21],
        v2.sum() * values[-4 * sign],
    ])  # fmt: skip

    def on(kernels, at):
        return direct.convolved(lambda p: grid.interpolate(three, p), grid.edges, at, kernels)

    lam = q2 / (q2 + mass2)
    t, far, near = -np.log(muf), np.log(q2 / mass2), np.log((q2 + mass2) / (muf * q2))
    xi, down = x / lam, {}
    for name in ("F1", "F2", "F3"):
        quark, gluon = on([of(charm_quark(name, lam, near)), of(charm_gluon(name, lam, near))], xi)
        down[name] = grid.interpolate(three, xi)[0] + a * (quark[0] + gluon[1])
    at = xi if subtraction == "chi" else x
    names = [coefficient(1, name, "ns+", nf) for name in ("F2", "FL", "F3")]
    *c, p_qq, p_qg = on([of(part) for part in (*names, splitting(0, "ns+", nf), splitting(0, "qg", nf))], at)
    here = grid.interpolate(three, at)[2]
    gluon = a * (t - far) * p_qg[1] / (2 * nf)
    beyond = {
        "F2": here + a * (c[0][2] + t * p_qq[2]) + gluon,
        "FL": a * c[1][2],
        "xF3": -sign * (here + a * (c[2][2] + t * p_qq[2]) + gluon),
    }
    damping = max(0.0, 1 - mass2 / q2) ** 2 if subtraction == "damped" else 1.0
    massive = {"F2": down["F2"], "FL": down["F2"] - lam * down["F1"], "xF3": sign * lam * down["F3"]}
    expected = {name: 2 * (massive[name] + damping * beyond[name]) for name in massive}
    asked = {"x": x, "q2": q2, "densities": evolved, "theory": theory, "current": "charged", "beam": beam}
    for name, exact in expected.items():
        value = sw.structure_function(name, tagged="charm", subtraction=subtraction, **asked)[0]
        # what the standard resolution promises
        assert abs(value - exact) <= 1e-6 * max(abs(exact), 1e-3 * expected["F2"]), name


@pytest.mark.parametrize(("quark", "x", "q2"), [(4, 1e-3, 4.0), (4, 0.3, 60.0), (5, 0.01, 40.0)])
def test_pairs_with_the_chi_type_variable(grid, start, quark, x, q2):
    # F = F(massive) + e^2 ((1 + a C_q) (q + qbar) - a ln(Q^2/m^2) P_qg/nf g) at chi = x (1 + 4 m^2/Q^2)
    # (S. Forte et al., arXiv:1001.2312, section 4, without its damping factor); FL: e^2 a C_q (q + qbar)
    theory = sw.Theory(order="NLO", heavy_quarks="matched")
    evolved = sw.evolve(theory, start, [q2]).scale(q2)
    name, charge2 = {4: ("charm", 4 / 9), 5: ("bottom", 1 / 9)}[quark]
    nf, values, mass2 = int(evolved.nf), by_flavour(evolved), getattr(theory.masses, name) ** 2
    a = float(theory.alpha_s(q2, nf)) / (4 * np.pi)
    both, end = np.array([values[quark] + values[-quark], values[21]]), z_max(q2, mass2)
    chi = x * (1 + 4 * mass2 / q2)

    def massive(measure):
        def integrand(s):
            z = x + (end - x) * (1 - s**2)  # a square root at the threshold
            g = grid.interpolate(both, min(1.0, x / z))[1]
            return float(massive_gluon(measure, np.array(z), q2, mass2)) * g * 2 * s * (end - x)

        return a * quad(integrand, 0, 1, epsabs=0, epsrel=1e-9, limit=400)[0]

    kernels = [coefficient(1, measure, "ns+", nf) for measure in ("F2", "FL")] + [splitting(0, "qg", nf)]
    two, long, p_qg = direct.convolved(
        lambda p: grid.interpolate(both, p), grid.edges, chi, [of(part) for part in kernels]
    )
    here = grid.interpolate(both, chi)[0]
    expected = {
        "F2": massive("F2") + here + a * (two[0] - np.log(q2 / mass2) / nf * p_qg[1]),
        "FL": massive("FL") + a * long[0],
    }
    asked = {"x": x, "q2": q2, "densities": evolved, "theory": theory, "exchange": "photon", "tagged": name}
    for measure, exact in expected.items():
        value = sw.structure_function(measure, subtraction="chi", **asked)[0]
        scale = charge2 * max(abs(exact), 1e-3 * expected["F2"])
        assert abs(value - charge2 * exact) <= 1e-6 * scale, measure  # standard resolution


@pytest.mark.parametrize("order", ["NLO", "NNLO"])
@pytest.mark.parametrize(("x", "q2"), [(1e-4, 6.0), (0.3, 2e3)])
def test_what_couples_to_light_quarks_is_massless(grid, start, order, x, q2):
    # charm and bottom are in it as densities and in loops, by nf
    theory = sw.Theory(order=order, heavy_quarks="matched")
    evolved = sw.evolve(theory, start, [q2]).scale(q2)
    light = np.array([1, 4, 1, 0, 0, 0]) / 9
    asked = {"x": x, "q2": q2, "densities": evolved, "theory": theory, "exchange": "photon"}
    for measure in ("F2", "FL"):
        expected = direct.light(
            theory, evolved, measure, x, light, np.zeros(6), ["LO", "NLO", "NNLO"].index(order)
        )
        whole, charm, bottom = (
            sw.structure_function(measure, tagged=tag, **asked)[0] for tag in (None, "charm", "bottom")
        )
        scale = max(abs(expected), 1e-3 * sw.structure_function("F2", **asked)[0])
        assert abs(whole - charm - bottom - expected) <= 1e-6 * scale  # standard resolution
