"""The table of measures a second time: formula, sign and unit of each, against the weights in force.

F1, F2, FL and d2sigma/dx dy with its signs: S. Navas et al. (Particle Data Group), review "Structure
functions", recalled from memory. The reduced cross sections are common practice, no source.
"""

from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw
from scalewright._observed.measures import measure_weights
from scalewright._observed.points import MEASURES, Points

#: Recalled from memory: (hbar c)^2 in GeV^2 pb and the mass of the proton in GeV (Particle Data Group).
PICOBARN, MASS = 0.3893793721e9, 0.93827208816
X, Q2, Y, SPIN = 0.23, 87.0, 0.41, 0.3
F2, FL, XF3 = 1.3, 0.17, 0.44


def general(f2, fl, xf3, sign, m2):
    """Return the bracket of the review: (1 - y - x^2 y^2 M^2/Q^2) F2 + x y^2 F1 +- (y - y^2/2) xF3."""
    f1 = ((1 + 4 * X**2 * m2 / Q2) * f2 - fl) / (2 * X)
    return (1 - Y - X**2 * Y**2 * m2 / Q2) * f2 + X * Y**2 * f1 - sign * (Y - Y**2 / 2) * xf3


def neutral(e, lepton, sign, m2):
    # 4 pi alpha^2/(x y Q^2) [...]
    return PICOBARN * 4 * np.pi * e.alpha**2 / (X * Y * Q2) * general(F2, FL, XF3, sign, m2)


def charged(e, lepton, sign, m2):
    # the factor eta of the review: 1/2 (G_F M_W^2/(4 pi alpha) Q^2/(Q^2 + M_W^2))^2, times (1 +- P)^2 for the
    # one helicity P = +-1; averaged over helicities (1 +- P)/2 of them that is 2 (1 +- P); neutrinos: 4
    eta = 0.5 * (e.g_fermi * e.w_mass**2 / (4 * np.pi * e.alpha) * Q2 / (Q2 + e.w_mass**2)) ** 2
    spin = {"e-": 2 * (1 - SPIN), "e+": 2 * (1 + SPIN)}.get(lepton, 4.0)
    return eta * spin * neutral(e, lepton, sign, m2)


def y_plus():
    return 1 + (1 - Y) ** 2


#: Measure, currents, what it is, unit.
TABLE = [
    ("F2", "both", lambda e, beam, s, m2: F2, "1"),
    ("FL", "both", lambda e, beam, s, m2: FL, "1"),
    ("xF3", "both", lambda e, beam, s, m2: XF3, "1"),
    ("F1", "both", lambda e, beam, s, m2: ((1 + 4 * X**2 * m2 / Q2) * F2 - FL) / (2 * X), "1"),
    (
        "reduced_cross_section",
        "neutral",
        lambda e, beam, s, m2: 2 * general(F2, FL, XF3, s, m2) / y_plus(),
        "1",
    ),
    ("reduced_cross_section", "charged", lambda e, beam, s, m2: general(F2, FL, XF3, s, m2) / 2, "1"),
    ("d2sigma_dx_dy", "neutral", neutral, "pb"),
    ("d2sigma_dx_dy", "charged", charged, "pb"),
    ("d2sigma_dx_dq2", "neutral", lambda e, beam, s, m2: neutral(e, beam, s, m2) * Y / Q2, "pb/GeV^2"),
    ("d2sigma_dx_dq2", "charged", lambda e, beam, s, m2: charged(e, beam, s, m2) * Y / Q2, "pb/GeV^2"),
]


@pytest.mark.parametrize("target_mass", [False, True])
@pytest.mark.parametrize("electroweak", [sw.Electroweak.effective(), sw.Electroweak.running()])
@pytest.mark.parametrize(("measure", "current", "formula", "unit"), TABLE)
def test_every_measure_is_what_the_table_says(measure, current, formula, unit, electroweak, target_mass):
    beams = {"neutral": ("e-", "e+"), "charged": ("e-", "e+", "nu", "nubar")}
    for which in ("neutral", "charged") if current == "both" else (current,):
        for lepton in beams[which]:
            spin = 0.0 if lepton.startswith("nu") else SPIN
            rows = SimpleNamespace(
                x=[X], q2=[Q2], y=[Y], measure=measure, current=which, beam=lepton, polarisation=spin
            )
            weights = measure_weights(Points.of(rows), electroweak, target_mass)[0]
            sign = 1 if lepton in ("e+", "nubar") else -1
            expected = formula(electroweak, lepton, sign, MASS**2 if target_mass else 0.0)
            assert weights @ [F2, FL, XF3] == pytest.approx(expected, rel=1e-13)  # rounding


def test_the_table_has_every_measure():
    assert {row[0] for row in TABLE} == set(MEASURES)
