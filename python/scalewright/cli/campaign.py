"""The made-up measurement campaign that ships with the package, and the law it was drawn from.

What was measured, with which uncertainties, and the law in formulas: `data/campaign/README.md`.
"""

from __future__ import annotations

from importlib import resources
from math import gamma
from pathlib import Path

import numpy as np

from .._check import Floats
from ..densities import Densities
from ..forward import ForwardMap, forward_map
from ..grid import ChebyshevGrid
from ..measurements import Measurements
from ..parameters import Coupling, QuarkMasses
from ..theory import Theory

START_Q2, START_NF = 1.5, 3

# x f(x) = A x^a (1-x)^b at the start: exponents here; what is fixed by a sum rule has no A.
_VALENCE = {2: (2, 0.72, 3.4), 1: (1, 0.78, 4.6)}  # PDG number: (number of quarks, a, b)
_SEA = {-2: (0.150, -0.14, 7.0), -1: (0.150, -0.14, 5.5), -3: (0.075, -0.14, 7.0)}  # (A, a, b)
_GLUON = (-0.04, 4.8)


def theory() -> Theory:
    """Return what the law assumes."""
    return Theory(
        order="NNLO",
        coupling=Coupling(0.118, q2=91.1876**2, nf=5),
        masses=QuarkMasses(charm=1.27, bottom=4.18, top=162.5, kind="msbar"),
        flavours=(3, 5),
    )


def law(grid: ChebyshevGrid) -> Densities:
    """Return the densities of the law at 1.5 GeV^2.

    Parameters
    ----------
    grid : ChebyshevGrid
        Where x lives.
    """
    return Densities.from_function(
        lambda flavour, x, _: _density(flavour, x), grid, START_Q2, START_NF, (21, 1, -1, 2, -2, 3, -3)
    )


def folder() -> Path:
    """Return where the tables are: a package with a compiled module is always installed as files."""
    return Path(str(resources.files("scalewright"))) / "data" / "campaign"


def measured() -> Measurements:
    """Read the campaign."""
    return Measurements.read(folder() / "campaign.toml")


def carried(points: Measurements, grid: ChebyshevGrid) -> ForwardMap:
    """Return the map from the start of the law to some points, under the theory of the law.

    Parameters
    ----------
    points : Measurements
        The campaign, or part of it.
    grid : ChebyshevGrid
        Down to the smallest x of the points.
    """
    return forward_map(theory(), grid, start_q2=START_Q2, start_nf=START_NF, points=points)


def _density(flavour: int, x: Floats) -> Floats:
    """Return x f(x)."""
    if flavour == 21:
        return _power(_gluon_size(), *_GLUON, x)
    sea = _power(*_SEA[-abs(flavour)], x)
    if flavour not in _VALENCE:
        return sea
    number, a, b = _VALENCE[flavour]
    return sea + _power(number / _integral(a, b), a, b, x)


def _power(size: float, a: float, b: float, x: Floats) -> Floats:
    return np.asarray(size * x**a * (1.0 - x) ** b)


def _integral(a: float, b: float) -> float:
    """Return the integral of x^(a-1) (1-x)^b from 0 to 1: Euler's beta function of a and b + 1."""
    return gamma(a) * gamma(b + 1.0) / gamma(a + b + 1.0)


def _gluon_size() -> float:
    """Return A of the gluon: the momenta of all partons add up to 1."""
    valence = sum(n * _integral(a + 1.0, b) / _integral(a, b) for n, a, b in _VALENCE.values())
    sea = sum(2.0 * size * _integral(a + 1.0, b) for size, a, b in _SEA.values())
    a, b = _GLUON
    return (1.0 - valence - sea) / _integral(a + 1.0, b)
