"""Rows at the scale of each point: what multiplies gluon, q + qbar and q - qbar there.

The nodal weights of a structure function at a point (interpolation, or more of it with target mass) times the
coefficient matrices, times powers of a and the couplings of the quarks: a sum over terms, each with a factor
a point and power, that is a power of a or its derivative. The sums are the
compiled core's, which leaves out what is zero: nodes of other panels, and the upper half of each matrix.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from .._check import Floats
from ..electroweak import Electroweak
from ..grid import ChebyshevGrid
from .couplings import Weights
from .light import LIGHT_FUNCTIONS, Terms, light_matrices, light_terms
from .own_functions import FurtherOrders
from .pullback import CHANNELS

__all__ = ["Setting", "light_rows", "powers_of"]


@dataclass(frozen=True)
class Setting:
    """What the rows of all points share.

    Parameters
    ----------
    grid : ChebyshevGrid
        Where x lives.
    electroweak : Electroweak
        Couplings.
    highest : mapping
        Structure function -> highest power of a.
    mur2_ratio, muf2_ratio : float
        mu_r^2/Q^2 and mu_f^2/Q^2.
    further : mapping
        Structure function -> coefficient functions of the user beyond `highest`.
    by : {None, "mur2_ratio", "muf2_ratio"}
        Coefficient matrices, or their derivative with respect to the logarithm of a ratio.
    """

    grid: ChebyshevGrid
    electroweak: Electroweak
    highest: Mapping[str, int]
    mur2_ratio: float
    muf2_ratio: float
    further: Mapping[str, FurtherOrders] = field(default_factory=dict)
    by: str | None = None

    def matrices(self, function: str, nf: int) -> dict[str, Floats]:
        """Return the coefficient matrices of one structure function."""
        ratios, own = (self.mur2_ratio, self.muf2_ratio), self.further.get(function, ())
        return light_matrices(self.grid, function, self.highest[function], nf, *ratios, own, self.by)

    def terms(self, nf: int) -> Terms:
        """Return all coefficient matrices of one number of flavours."""
        highest = tuple(self.highest[function] for function in LIGHT_FUNCTIONS)
        own = tuple(self.further.get(function, ()) for function in LIGHT_FUNCTIONS)
        return light_terms(self.grid, highest, nf, self.mur2_ratio, self.muf2_ratio, own, self.by)

    def powers(self, a: Floats) -> Floats:
        """Return a^k, (point, power), as far as they are needed."""
        most = (power + len(self.further.get(name, ())) for name, power in self.highest.items())
        return powers_of(a, max(most))


def powers_of(a: Floats, highest: int) -> Floats:
    """Return a^0 to a^highest, (point, power)."""
    return np.asarray(a[:, np.newaxis] ** np.arange(highest + 1))


def light_rows(
    setting: Setting,
    nodal: Mapping[str, Floats],
    weights: Weights,
    powers: Floats,
    nf: int,
    *,
    out: Floats | None = None,
) -> Floats:
    """Return the part of light quarks and gluon: linear in nodal weights, couplings and powers.

    Parameters
    ----------
    setting : Setting
    nodal : mapping
        Structure function -> (point, node), its weight in the measure at each node; zero where left out.
    weights : Weights
        Couplings at these points, of active quarks only.
    powers : ndarray, (point, power)
        What multiplies the coefficient of a^k: `Setting.powers`, or its derivative.
    nf : int
        Number of active flavours.
    out : ndarray, (point, 13, node), optional
        Where to write.

    Returns
    -------
    ndarray, (point, 13, node)
        In the order of `pullback`.
    """
    from .. import _core

    points, nodes = powers.shape[0], setting.grid.nodes
    used = setting.terms(nf)
    rows = np.empty((points, CHANNELS, nodes)) if out is None else out
    nothing = np.zeros((0, 0)) if len(nodal) == len(LIGHT_FUNCTIONS) else np.zeros((points, nodes))
    f2, fl, xf3 = (np.ascontiguousarray(nodal.get(name, nothing)) for name in LIGHT_FUNCTIONS)
    even, odd, even3, odd3 = (
        np.ascontiguousarray(part) for part in (weights.even, weights.odd, weights.even3, weights.odd3)
    )
    _core.light_rows(
        setting.grid.handle(),
        matrices=used.matrices, functions=used.functions, parts=used.parts, orders=used.orders,
        f2=f2, fl=fl, xf3=xf3, powers=np.ascontiguousarray(powers),
        even=even, odd=odd, even3=even3, odd3=odd3, nf=nf, out=rows,
    )  # fmt: skip
    return rows
