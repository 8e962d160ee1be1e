"""Rows at the scale of each point: what multiplies gluon, q + qbar and q - qbar there.

The nodal weights of a structure function at a point (interpolation, or more of it with target mass) times the
coefficient matrices, times powers of a and the couplings of the quarks.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from .._check import Floats
from ..electroweak import Electroweak
from ..grid import ChebyshevGrid
from .couplings import Weights
from .light import light_matrices
from .own_functions import FurtherOrders
from .pullback import GLUON, MINUS, PLUS

__all__ = ["Setting", "light_rows"]


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
    """

    grid: ChebyshevGrid
    electroweak: Electroweak
    highest: Mapping[str, int]
    mur2_ratio: float
    muf2_ratio: float
    further: Mapping[str, FurtherOrders] = field(default_factory=dict)

    def matrices(self, function: str, nf: int) -> dict[str, Floats]:
        """Return the coefficient matrices of one structure function."""
        ratios, own = (self.mur2_ratio, self.muf2_ratio), self.further.get(function, ())
        return light_matrices(self.grid, function, self.highest[function], nf, *ratios, own)


def light_rows(setting: Setting, nodal: Mapping[str, Floats], weights: Weights, a: Floats, nf: int) -> Floats:
    """Return the part of light quarks and gluon.

    Parameters
    ----------
    setting : Setting
    nodal : mapping
        Structure function -> (point, node), its weight in the measure at each node.
    weights : Weights
        Couplings at these points, of active quarks only.
    a : ndarray, (point,)
        a(mu_r).
    nf : int
        Number of active flavours.

    Returns
    -------
    ndarray, (point, 13, node)
        In the order of `pullback`.
    """
    rows = np.zeros((a.size, 13, setting.grid.nodes))
    for function, of_nodes in nodal.items():
        if not of_nodes.any():
            continue
        matrices = setting.matrices(function, nf)
        even, odd = (weights.even3, weights.odd3) if function == "xF3" else (weights.even, weights.odd)
        for name, factors, place in (("ns+", even, PLUS), ("ns-", odd, MINUS)):
            if factors.any():
                part = summed(of_nodes, matrices[name], a)
                rows[:, place] += factors[:, :, np.newaxis] * part[:, np.newaxis]
        mean = even[:, :nf].mean(axis=1)[:, np.newaxis]
        if function != "xF3" and mean.any():
            rows[:, PLUS][:, :nf] += (mean * summed(of_nodes, matrices["pure singlet"], a))[:, np.newaxis]
            rows[:, GLUON] += mean * summed(of_nodes, matrices["gluon"], a)
    return rows


def summed(of_nodes: Floats, matrices: Floats, a: Floats) -> Floats:
    """Return sum_k a^k of_nodes @ C_k, (point, node)."""
    total = np.zeros_like(of_nodes)
    for matrix in matrices[::-1]:
        total = total * a[:, np.newaxis] + of_nodes @ matrix
    return total
