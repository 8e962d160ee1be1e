"""Rows at the scale of each point: what multiplies gluon, q + qbar and q - qbar there.

The nodal weights of a structure function at a point (interpolation, or more of it with target mass) times the
coefficient matrices, times powers of a and the couplings of the quarks.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from .._check import Floats
from ..electroweak import Electroweak
from ..grid import ChebyshevGrid
from .couplings import Weights
from .light import light_matrices
from .pullback import GLUON, MINUS, PLUS

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
    by : {None, "mur2_ratio", "muf2_ratio"}
        Coefficient matrices, or their derivative with respect to the logarithm of a ratio.
    """

    grid: ChebyshevGrid
    electroweak: Electroweak
    highest: Mapping[str, int]
    mur2_ratio: float
    muf2_ratio: float
    by: str | None = None

    def matrices(self, function: str, nf: int) -> dict[str, Floats]:
        """Return the coefficient matrices of one structure function."""
        return light_matrices(
            self.grid, function, self.highest[function], nf, self.mur2_ratio, self.muf2_ratio, self.by
        )

    def powers(self, a: Floats) -> Floats:
        """Return a^k, (point, power), as far as they are needed."""
        return powers_of(a, max(self.highest.values()))


def powers_of(a: Floats, highest: int) -> Floats:
    """Return a^0 to a^highest, (point, power)."""
    return np.asarray(a[:, np.newaxis] ** np.arange(highest + 1))


def light_rows(
    setting: Setting, nodal: Mapping[str, Floats], weights: Weights, powers: Floats, nf: int
) -> Floats:
    """Return the part of light quarks and gluon: linear in nodal weights, couplings and powers.

    Parameters
    ----------
    setting : Setting
    nodal : mapping
        Structure function -> (point, node), its weight in the measure at each node.
    weights : Weights
        Couplings at these points, of active quarks only.
    powers : ndarray, (point, power)
        What multiplies the coefficient of a^k: `Setting.powers`, or its derivative.
    nf : int
        Number of active flavours.

    Returns
    -------
    ndarray, (point, 13, node)
        In the order of `pullback`.
    """
    rows = np.zeros((len(powers), 13, setting.grid.nodes))
    for function, of_nodes in nodal.items():
        if not of_nodes.any():
            continue
        matrices = setting.matrices(function, nf)
        even, odd = (weights.even3, weights.odd3) if function == "xF3" else (weights.even, weights.odd)
        for name, factors, place in (("ns+", even, PLUS), ("ns-", odd, MINUS)):
            if factors.any():
                part = summed(of_nodes, matrices[name], powers)
                rows[:, place] += factors[:, :, np.newaxis] * part[:, np.newaxis]
        mean = even[:, :nf].mean(axis=1)[:, np.newaxis]
        if function != "xF3" and mean.any():
            rows[:, PLUS][:, :nf] += (mean * summed(of_nodes, matrices["pure singlet"], powers))[
                :, np.newaxis
            ]
            rows[:, GLUON] += mean * summed(of_nodes, matrices["gluon"], powers)
    return rows


def summed(of_nodes: Floats, matrices: Floats, powers: Floats) -> Floats:
    """Return sum_k powers_k of_nodes @ C_k, (point, node)."""
    total = np.zeros_like(of_nodes)
    for k, matrix in enumerate(matrices):
        total += powers[:, k, np.newaxis] * (of_nodes @ matrix)
    return total
