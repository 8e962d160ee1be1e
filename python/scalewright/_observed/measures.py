"""Measures as sums of structure functions: every factor, sign and unit.

With Y+- = 1 +- (1-y)^2; sign: upper for e+ and nubar; rho^2 = 1 + 4 x^2 M^2/Q^2 and
Y+ -> Z+ = Y+ + 2 x^2 y^2 M^2/Q^2 where target mass is kept, rho = 1 and Z+ = Y+ where not:

====================== ============================================================== ========
measure                formula                                                        unit
====================== ============================================================== ========
F2, FL, xF3            themselves                                                     1
F1                     (rho^2 F2 - FL)/(2 x)                                          1
reduced cross section  neutral: (Z+ F2 - y^2 FL -+ Y- xF3)/Y+                         1
                       charged: (Z+ F2 - y^2 FL -+ Y- xF3)/4                          1
d2sigma/dx dQ2         neutral: 2 pi alpha^2/(x Q^4) (Z+ F2 - y^2 FL -+ Y- xF3)       pb/GeV^2
                       charged, e+-: (1 +- P) G_F^2/(8 pi x) W (Z+ F2 - ... xF3)      pb/GeV^2
                       charged, nu, nubar: G_F^2/(4 pi x) W (Z+ F2 - ... xF3)         pb/GeV^2
d2sigma/dx dy          x (s - M^2) = Q^2/y times d2sigma/dx dQ2                       pb
====================== ============================================================== ========

W = (M_W^2/(Q^2 + M_W^2))^2. Source: S. Navas et al. (Particle Data Group), review "Structure functions",
recalled from memory; the reduced cross sections are common practice. Structure functions are per nucleon.
"""

from __future__ import annotations

import numpy as np

from .._check import Floats
from .._measured.rows import NUCLEON_M2
from ..electroweak import Electroweak
from .couplings import propagator_w
from .points import Points

__all__ = ["FUNCTIONS", "PICOBARN", "measure_weights"]

FUNCTIONS = ("F2", "FL", "xF3")
#: (hbar c)^2 in GeV^2 pb (exact in the SI since 2019; Particle Data Group, recalled from memory).
PICOBARN = 0.3893793721e9


def measure_weights(points: Points, electroweak: Electroweak, target_mass: bool) -> Floats:
    """Return the weights of F2, FL and xF3 in what is measured.

    Parameters
    ----------
    points : Points
        With measure, y and beam.
    electroweak : Electroweak
        For the prefactors.
    target_mass : bool
        Whether rho and Z+ have their M^2 terms.

    Returns
    -------
    ndarray, (point, 3)
        In the order of `FUNCTIONS`.
    """
    measure = np.array(points.measure)
    x, y, q2 = points.x, points.y, points.q2
    small = x**2 * NUCLEON_M2 / q2 if target_mass else np.zeros_like(x)
    nothing, one = np.zeros_like(x), np.ones_like(x)
    cross = np.stack(
        [1.0 + (1.0 - y) ** 2 + 2.0 * small * y**2, -(y**2), -points.sign * (1.0 - (1.0 - y) ** 2)], axis=1
    )
    factor = _prefactor(points, electroweak)
    forms = {
        "F2": np.stack([one, nothing, nothing], axis=1),
        "FL": np.stack([nothing, one, nothing], axis=1),
        "xF3": np.stack([nothing, nothing, one], axis=1),
        "F1": np.stack([(1.0 + 4.0 * small) / (2.0 * x), -0.5 / x, nothing], axis=1),
        "reduced_cross_section": cross
        / np.where(points.is_charged, 4.0, 1.0 + (1.0 - y) ** 2)[:, np.newaxis],
        "d2sigma_dx_dq2": cross * factor[:, np.newaxis],
        "d2sigma_dx_dy": cross * (factor * q2 / y)[:, np.newaxis],
    }
    result = np.zeros((len(points), 3))
    for name, form in forms.items():
        chosen = measure == name
        result[chosen] = form[chosen]
    return result


def _prefactor(points: Points, electroweak: Electroweak) -> Floats:
    """Return what multiplies Y+ F2 in d2sigma/dx dQ2, in pb/GeV^2."""
    x, q2 = points.x, points.q2
    neutral = 2.0 * np.pi * electroweak.alpha**2 / (x * q2**2)
    helicity = np.where(points.is_neutrino, 2.0, 1.0 + points.sign * points.polarisation)
    charged = helicity * electroweak.g_fermi**2 / (8.0 * np.pi * x) * propagator_w(q2, electroweak)
    return PICOBARN * np.where(points.is_charged, charged, neutral)
