"""The input of the published benchmark, at mu^2 = 2 GeV^2, alpha_s = 0.35 there.

W. Giele et al., hep-ph/0204316, section 1.3; M. Dittmar et al., hep-ph/0511119, section 4.
Keys are PDG numbers.
"""

from __future__ import annotations

from mellin.inputs import Density, Moments

START_Q2 = 2.0
ALPHA_S = 0.35
MASSES = (2.0**0.5, 4.5, 175.0)
"""Pole masses of charm, bottom, top, GeV."""
FINAL_Q2 = 1.0e4

_U_VALENCE = Density(((5.107200, 0.8, 3.0),))
_D_VALENCE = Density(((3.064320, 0.8, 4.0),))
_D_BAR = Density(((0.1939875, -0.1, 6.0),))
_U_BAR = Density(((0.1939875, -0.1, 7.0),))
_STRANGE = (_U_BAR + _D_BAR).scaled(0.2)

DENSITIES: dict[int, Density] = {
    21: Density(((1.700000, -0.1, 5.0),)),
    1: _D_VALENCE + _D_BAR,
    -1: _D_BAR,
    2: _U_VALENCE + _U_BAR,
    -2: _U_BAR,
    3: _STRANGE,
    -3: _STRANGE,
}
MOMENTS: dict[int, Moments] = {pdg: density.moments for pdg, density in DENSITIES.items()}
