"""Every measure in its unit against quadrature at NNLO: with the Z and with the W, at small and large x.

Couplings and prefactors are those of S. Navas et al. (Particle Data Group), review "Structure functions",
recalled from memory, written a second time.
"""

import numpy as np
import pytest
import scalewright as sw
from observables import direct

#: Recalled from memory: (hbar c)^2 in GeV^2 pb (Particle Data Group).
PICOBARN = 0.3893793721e9
CHARGE, ISOSPIN = np.array([-1, 2, -1, 2, -1, 2]) / 3, np.array([-1, 1, -1, 1, -1, 1]) / 2
#: Small and large x, Q^2 from 2 to 4e4 GeV^2 as far as y < 1 at some collider.
POINTS = [(2e-5, 2.0, 0.8), (3e-3, 900.0, 0.6), (0.05, 8e3, 0.4), (0.4, 4e4, 0.9), (0.85, 3e4, 0.2)]


def neutral(beam, spin, q2, electroweak):
    """Return weights of q + qbar in F2 and of q - qbar in xF3."""
    sign = 1 if beam == "e+" else -1
    s2, eta = electroweak.sin2, q2 / (q2 + electroweak.z_mass**2)
    eta /= 4 * electroweak.sin2 * (1 - electroweak.sin2)
    vector, axial = -0.5 + 2 * s2, -0.5
    v, a = ISOSPIN - 2 * CHARGE * s2, ISOSPIN
    mixed = -(vector + sign * spin * axial) * eta
    weak = (vector**2 + axial**2 + sign * 2 * spin * vector * axial) * eta**2
    even = CHARGE**2 + mixed * 2 * CHARGE * v + weak * (v**2 + a**2)
    mixed = -(axial + sign * spin * vector) * eta
    weak = (2 * vector * axial + sign * spin * (vector**2 + axial**2)) * eta**2
    return even, mixed * 2 * CHARGE * a + weak * 2 * v * a


def charged(beam, nf, electroweak):
    """Return weights of q + qbar and q - qbar in F2, which in xF3 change places."""
    v2 = np.array(electroweak.mixing) ** 2
    v2 = v2 * np.array([[max(u, d) <= nf for d in (1, 3, 5)] for u in (2, 4, 6)])
    both, up = np.empty(6), 1 if beam in ("e-", "nubar") else -1
    both[1::2], both[::2] = v2.sum(axis=1), v2.sum(axis=0)
    return both, both * up * np.array([-1, 1] * 3)


def measures(x, q2, y, functions, sign, factor, divisor):
    """Return every measure; `factor` is what multiplies Y+ F2 - ... in d2sigma/dx dQ2, in GeV^-4."""
    f2, fl, f3 = functions
    bracket = (1 + (1 - y) ** 2) * f2 - y**2 * fl - sign * (1 - (1 - y) ** 2) * f3
    return {
        "F2": f2,
        "FL": fl,
        "xF3": f3,
        "F1": (f2 - fl) / (2 * x),
        "reduced_cross_section": bracket / divisor,
        "d2sigma_dx_dq2": PICOBARN * factor * bracket,
        "d2sigma_dx_dy": PICOBARN * factor * bracket * q2 / y,
    }


def compare(expected, asked):
    """Hold each measure to 1e-6 of max(|value|, 1e-3 of what it is for F2 alone)."""
    for name, exact in expected.items():
        value = sw.structure_function(name, **asked)[0]
        f2 = expected["F2"] if name in ("FL", "xF3") else 0.0
        # what the standard resolution promises
        assert abs(value - exact) <= 1e-6 * max(abs(exact), 1e-3 * f2), name


@pytest.mark.parametrize(("x", "q2", "y"), POINTS)
@pytest.mark.parametrize(("beam", "spin"), [("e-", -0.7), ("e+", 0.3)])
def test_photon_and_z(grid, start, x, q2, y, beam, spin):
    theory, electroweak = sw.Theory(), sw.Electroweak.on_shell()
    evolved = sw.evolve(theory, start, [q2]).scale(q2)
    even, odd = neutral(beam, spin, q2, electroweak)
    zero = np.zeros(6)
    functions = [
        *(direct.light(theory, evolved, name, x, even, zero, 2) for name in ("F2", "FL")),
        direct.light(theory, evolved, "xF3", x, zero, odd, 2),
    ]
    factor = 2 * np.pi * electroweak.alpha**2 / (x * q2**2)
    sign = 1 if beam == "e+" else -1
    expected = measures(x, q2, y, functions, sign, factor, 1 + (1 - y) ** 2)
    asked = {"x": x, "q2": q2, "y": y, "densities": evolved, "theory": theory, "beam": beam}
    compare(expected, asked | {"polarisation": spin, "electroweak": electroweak})


@pytest.mark.parametrize(("x", "q2", "y"), POINTS)
@pytest.mark.parametrize(("beam", "spin"), [("e-", -0.7), ("e+", 0.3), ("nu", 0.0)])
def test_w(grid, start, x, q2, y, beam, spin):
    theory, electroweak = sw.Theory(), sw.Electroweak.effective()
    evolved = sw.evolve(theory, start, [q2]).scale(q2)
    even, odd = charged(beam, int(evolved.nf), electroweak)
    functions = [
        *(direct.light(theory, evolved, name, x, even, odd, 2) for name in ("F2", "FL")),
        direct.light(theory, evolved, "xF3", x, odd, even, 2),
    ]
    helicity = {"e-": 1 - spin, "e+": 1 + spin, "nu": 2.0}[beam]
    w2 = electroweak.w_mass**2
    factor = helicity * electroweak.g_fermi**2 / (8 * np.pi * x) * (w2 / (q2 + w2)) ** 2
    expected = measures(x, q2, y, functions, 1 if beam == "e+" else -1, factor, 4)
    asked = {"x": x, "q2": q2, "y": y, "densities": evolved, "theory": theory, "beam": beam}
    compare(expected, asked | {"polarisation": spin, "electroweak": electroweak, "current": "charged"})


@pytest.mark.parametrize(("x", "q2"), [(2e-5, 4.0), (0.03, 10.0), (0.85, 30.0)])
@pytest.mark.parametrize("order", ["LO", "NLO", "NNLO"])
def test_fl_by_its_own_leading_order(grid, start, order, x, q2):
    # to a^3 with three flavours: hep-ph/0411112
    theory = sw.Theory(order=order, flavours=3, fl_counting="own")
    evolved = sw.evolve(theory, start, [q2]).scale(q2)
    charges2, highest = np.array([1, 4, 1, 4, 1, 4]) / 9, ["LO", "NLO", "NNLO"].index(order) + 1
    expected = direct.light(theory, evolved, "FL", x, charges2, np.zeros(6), highest)
    asked = {"x": x, "q2": q2, "densities": evolved, "theory": theory, "exchange": "photon"}
    f2 = sw.structure_function("F2", **asked)[0]
    value = sw.structure_function("FL", **asked)[0]
    assert abs(value - expected) <= 1e-6 * max(abs(expected), 1e-3 * f2)  # standard resolution


SCHEMES = [
    {"heavy_quarks": "massless", "hard_mur2_ratio": 2.0, "hard_muf2_ratio": 0.5},
    {"heavy_quarks": "massive", "flavours": 3},
    {"heavy_quarks": "matched", "hard_muf2_ratio": 2.0},
]


@pytest.mark.parametrize("options", SCHEMES)
@pytest.mark.parametrize("current", ["neutral", "charged"])
@pytest.mark.parametrize("tagged", [None, "charm"])
def test_cross_sections_are_sums_of_structure_functions_in_every_scheme(
    grid, start, options, current, tagged
):
    theory, x, q2, y = sw.Theory(**options), 0.02, 60.0, 0.7
    evolved = sw.evolve(theory, start, [theory.hard_muf2_ratio * q2])
    asked = {"x": x, "q2": q2, "densities": evolved, "theory": theory, "beam": "e+", "current": current}
    asked["tagged"] = tagged
    functions = [sw.structure_function(name, **asked)[0] for name in ("F2", "FL", "xF3")]
    electroweak = sw.Electroweak.effective()
    w2 = electroweak.w_mass**2
    factor, divisor = {
        "neutral": (2 * np.pi * electroweak.alpha**2 / (x * q2**2), 1 + (1 - y) ** 2),
        "charged": (electroweak.g_fermi**2 / (8 * np.pi * x) * (w2 / (q2 + w2)) ** 2, 4.0),
    }[current]
    for name, exact in measures(x, q2, y, functions, 1, factor, divisor).items():
        value = sw.structure_function(name, y=y, **asked)[0]
        assert value == pytest.approx(exact, rel=1e-12), name  # rounding: the same rows, weighted
