"""Couplings: against helicity amplitudes at LO, and every measure against direct quadrature at NNLO."""

import numpy as np
import pytest
import scalewright as sw
from observables import direct

CHARGE = np.array([-1, 2, -1, 2, -1, 2]) / 3
ISOSPIN = np.array([-1, 1, -1, 1, -1, 1]) / 2
PICOBARN = 0.3893793721e9


def handed(charge, isospin, sin2):
    """Return couplings of left- and right-handed fermions to the Z, in units where left is gV + gA."""
    return 2 * isospin - 2 * charge * sin2, -2 * charge * sin2


def of_amplitudes(beam, helicity, y, q2, quarks, antiquarks, electroweak):
    """Return Y+ times the reduced cross section of x q, x qbar: squared amplitudes of pure helicities.

    Like helicities scatter isotropically, unlike ones with (1-y)^2; an antiparticle of helicity +1 has the
    coupling of the particle of helicity -1.
    """
    eta = electroweak.interference * q2 / (q2 + electroweak.z_mass**2)
    lepton_left = (helicity < 0) == (beam == "e-")
    lepton = handed(-1.0, -0.5, electroweak.sin2)[0 if lepton_left else 1]
    total = 0.0
    for quark in range(5):
        for left, coupling in zip(
            (True, False), handed(CHARGE[quark], ISOSPIN[quark], electroweak.sin2), strict=True
        ):
            amplitude2 = (-CHARGE[quark] + eta * lepton * coupling) ** 2
            for density, anti in ((quarks[quark], False), (antiquarks[quark], True)):
                quark_helicity = (-1 if left else 1) * (-1 if anti else 1)
                total += amplitude2 * density * (1.0 if quark_helicity == helicity else (1 - y) ** 2)
    return total


@pytest.mark.parametrize("beam", ["e-", "e+"])
@pytest.mark.parametrize("helicity", [-1, 1])
def test_neutral_current_is_the_sum_of_squared_helicity_amplitudes(grid, start, beam, helicity):
    theory, q2, x, y = sw.Theory(order="LO"), 2e4, 0.1, 0.6
    evolved = sw.evolve(theory, start, [q2]).scale(q2)
    q, qbar = ([float(evolved.at(q2, [x], s * f)[0, 0]) for f in range(1, 6)] for s in (1, -1))
    electroweak = sw.Electroweak.effective()
    value = sw.structure_function(
        "reduced_cross_section",
        x=x,
        q2=q2,
        y=y,
        densities=evolved,
        theory=theory,
        beam=beam,
        polarisation=helicity,
    )
    expected = of_amplitudes(beam, helicity, y, q2, q, qbar, electroweak) / (1 + (1 - y) ** 2)
    # rounding: the coefficient function is delta(1-z), the densities are the same numbers
    assert value[0] == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize("beam", ["e-", "e+", "nu", "nubar"])
def test_charged_current_is_the_sum_of_isotropic_and_suppressed_quarks(grid, start, beam):
    theory, q2, x, y = sw.Theory(order="LO"), 500.0, 0.1, 0.3
    evolved = sw.evolve(theory, start, [q2]).scale(q2)
    f = {n: float(evolved.at(q2, [x], n)[0, 0]) for s in (1, -1) for n in range(s, 6 * s, s)}
    electroweak = sw.Electroweak.effective()
    v2 = np.array(electroweak.mixing) ** 2
    negative = beam in ("e-", "nubar")
    s = 1 if negative else -1
    ups = sum(v2[i, j] * f[s * u] for i, u in enumerate((2, 4)) for j in range(3))
    downs = sum(v2[i, j] * f[-s * d] for i in range(2) for j, d in enumerate((1, 3, 5)))
    # e- and nu are left-handed: isotropic on quarks, (1-y)^2 on antiquarks; e+ and nubar the other way round
    quarks, antiquarks = (ups, downs) if negative else (downs, ups)
    left = beam in ("e-", "nu")
    expected = quarks + (1 - y) ** 2 * antiquarks if left else antiquarks + (1 - y) ** 2 * quarks
    common = {
        "x": x,
        "q2": q2,
        "y": y,
        "densities": evolved,
        "theory": theory,
        "current": "charged",
        "beam": beam,
    }
    reduced = sw.structure_function("reduced_cross_section", **common)
    assert reduced[0] == pytest.approx(expected, rel=1e-12)
    # d2sigma/dx dQ2 = (1 -+ P) G_F^2/(2 pi x) (M_W^2/(Q^2 + M_W^2))^2 sigma_r; neutrinos: one helicity, no
    # average
    strength = electroweak.g_fermi**2 * (electroweak.w_mass**2 / (q2 + electroweak.w_mass**2)) ** 2
    spin = {"e-": -0.4, "e+": 0.4}.get(beam, 0.0)
    factor = {"e-": 1 - spin, "e+": 1 + spin}.get(beam, 2.0)
    value = sw.structure_function("d2sigma_dx_dq2", polarisation=spin, **common)
    assert value[0] == pytest.approx(factor * strength / (2 * np.pi * x) * expected * PICOBARN, rel=1e-12)
    per_y = sw.structure_function("d2sigma_dx_dy", polarisation=spin, **common)
    assert per_y[0] == pytest.approx(value[0] * q2 / y, rel=1e-12)


def charged_weights(beam, nf, electroweak):
    """Return weights of q + qbar and q - qbar in F2 and FL, then in xF3: F2(W-) = 2x sum |V|^2 (U + Dbar)."""
    v2 = np.array(electroweak.mixing) ** 2
    active = np.array([[u <= nf and d <= nf for d in (1, 3, 5)] for u in (2, 4, 6)])
    v2 = v2 * active
    even, odd = np.zeros(6), np.zeros(6)
    even[1::2], even[::2] = v2.sum(axis=1), v2.sum(axis=0)
    sign = 1 if beam in ("e-", "nubar") else -1
    odd[1::2], odd[::2] = sign * v2.sum(axis=1), -sign * v2.sum(axis=0)
    # xF3: quarks as in F2, antiquarks with the other sign, so that even and odd change places
    return even, odd, odd, even


@pytest.mark.parametrize("measure", ["F2", "FL", "xF3"])
@pytest.mark.parametrize("beam", ["nu", "nubar"])
@pytest.mark.parametrize(("x", "q2"), [(1e-3, 10.0), (0.2, 1e3), (0.85, 100.0)])
def test_charged_current_agrees_with_direct_quadrature(grid, start, measure, beam, x, q2):
    theory, electroweak = sw.Theory(order="NNLO"), sw.Electroweak.effective()
    evolved = sw.evolve(theory, start, [q2]).scale(q2)
    even, odd, even3, odd3 = charged_weights(beam, int(evolved.nf), electroweak)
    common = {"densities": evolved, "theory": theory, "current": "charged", "beam": beam}
    value = sw.structure_function(measure, x=x, q2=q2, **common)[0]
    if measure == "xF3":
        expected = direct.light(theory, evolved, "xF3", x, even3, odd3, 2)
    else:
        expected = direct.light(theory, evolved, measure, x, even, odd, 2)
    f2 = direct.light(theory, evolved, "F2", x, even, odd, 2)
    # what the standard resolution promises
    assert abs(value - expected) <= 1e-6 * max(abs(expected), 1e-3 * f2)


@pytest.mark.parametrize("measure", ["F2", "xF3", "reduced_cross_section", "F1"])
def test_neutral_current_agrees_with_direct_quadrature(grid, start, measure):
    theory, electroweak, x, q2, y, spin = (
        sw.Theory(order="NNLO"),
        sw.Electroweak.on_shell(),
        0.05,
        8e3,
        0.4,
        0.3,
    )
    evolved = sw.evolve(theory, start, [q2]).scale(q2)
    unit = np.eye(6)[:5]

    # weights from amplitudes with one quark or one antiquark at a time
    def cross(beam, helicity, y):
        both = [
            [of_amplitudes(beam, helicity, y, q2, *pair, electroweak) for pair in ((e, 0 * e), (0 * e, e))]
            for e in unit
        ]
        return np.array(both)

    polarised = (1 + spin) / 2 * cross("e+", 1, 1.0) + (1 - spin) / 2 * cross("e+", -1, 1.0)
    isotropic = (1 + spin) / 2 * cross("e+", 1, 0.0) + (1 - spin) / 2 * cross("e+", -1, 0.0)
    # y = 1: F2 - xF3 (Y+ = Y- = 1); y = 0: 2 F2
    f2 = isotropic / 2
    f3 = f2 - polarised
    even, odd3 = np.append(f2.mean(axis=1), 0.0), np.append((f3[:, 0] - f3[:, 1]) / 2, 0.0)
    value = sw.structure_function(
        measure, x=x, q2=q2, y=y, densities=evolved, theory=theory, beam="e+", polarisation=spin,
        electroweak=electroweak,
    )[0]  # fmt: skip
    zero = np.zeros(6)
    f2, fl = (direct.light(theory, evolved, name, x, even, zero, 2) for name in ("F2", "FL"))
    f3 = direct.light(theory, evolved, "xF3", x, zero, odd3, 2)
    y_plus, y_minus = 1 + (1 - y) ** 2, 1 - (1 - y) ** 2
    expected = {
        "F2": f2,
        "xF3": f3,
        "F1": (f2 - fl) / (2 * x),
        "reduced_cross_section": f2 - y**2 / y_plus * fl - y_minus / y_plus * f3,
    }[measure]
    assert abs(value - expected) <= 1e-6 * max(abs(expected), 1e-3 * f2)  # standard resolution


def test_targets_are_protons_and_neutrons(grid, start):
    theory = sw.Theory(order="NLO")
    evolved = sw.evolve(theory, start, [50.0])
    f2 = {
        str(target): sw.structure_function(
            "F2", x=0.2, q2=50.0, densities=evolved, theory=theory, exchange="photon", target=target
        )[0]
        for target in ("proton", "neutron", "deuteron", "isoscalar", {"z": 26, "a": 56})
    }
    swap = {1: 2, 2: 1, -1: -2, -2: -1}
    mirrored = sw.Densities(
        grid, q2=1.5, nf=3, flavours=[swap.get(f, f) for f in start.flavours], values=start.values
    )
    again = sw.evolve(theory, mirrored, [50.0])
    neutron = sw.structure_function("F2", x=0.2, q2=50.0, densities=again, theory=theory, exchange="photon")[
        0
    ]
    assert f2["neutron"] == pytest.approx(neutron, rel=1e-12)  # rounding: isospin is exact in the evolution
    assert f2["deuteron"] == f2["isoscalar"] == pytest.approx((f2["proton"] + neutron) / 2, rel=1e-12)
    assert f2["{'z': 26, 'a': 56}"] == pytest.approx((26 * f2["proton"] + 30 * neutron) / 56, rel=1e-12)


def test_the_three_sets_of_inputs_are_consistent_in_themselves():
    for make in (sw.Electroweak.effective, sw.Electroweak.on_shell, sw.Electroweak.running):
        chosen = make()
        assert chosen.interference == pytest.approx(1 / (4 * chosen.sin2 * (1 - chosen.sin2)), rel=1e-15)
        if chosen.inputs != "effective":  # G_F M_Z^2/(2 sqrt2 pi alpha), to rounding
            of_fermi = chosen.g_fermi * chosen.z_mass**2 / (2 * np.sqrt(2) * np.pi * chosen.alpha)
            assert chosen.interference == pytest.approx(of_fermi, rel=1e-13)
    # rows and columns of the mixing matrix are unit vectors to the digits printed
    v2 = np.array(sw.Electroweak.effective().mixing) ** 2
    assert np.abs(v2.sum(axis=0) - 1).max() < 1e-4 and np.abs(v2.sum(axis=1) - 1).max() < 1e-4
