"""Heavy quarks in structure functions: made with their mass, or matched to massless ones.

Which one when: with heavy_quarks="massive" the quarks above a fixed nf are made by a photon on a gluon, or
charm by a W on a light quark or gluon, at order a. With "matched" (FONLL-A: S. Forte, E. Laenen, P. Nason,
J. Rojo, arXiv:1001.2312, eqs. (13)-(15) and section 4) the same massive part stands beside what is beyond
it,

    F = F(massive) + D (F(massless, nf + 1) - F(massless limit of massive)),

all with the densities and the coupling of the nf at hand, which is right to the order a that the massive
part has. Massless heavy parts go to order a here, whatever the order of the light ones. The charged current
is treated by the same formula, which the paper does not write out. Photon couplings alone are massive:
parts with a Z stay massless.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np

from .._check import Floats
from .couplings import CHARGES, Weights
from .light import splitting
from .measures import FUNCTIONS
from .pullback import GLUON
from .rows import Setting, light_rows

__all__ = ["HEAVY", "at_q", "beyond_pair", "pair_rows", "suppression", "to_first_order"]

#: The quarks that may be massive.
HEAVY = (4, 5)


def pair_rows(
    setting: Setting, shares: Floats, x: Floats, q2: Floats, powers: Floats, quark: int, mass: float
) -> Floats:
    """Return the rows of a pair made by a photon on a gluon, (point, 13, node).

    Parameters
    ----------
    setting : Setting
    shares : ndarray, (point, 3)
        Weights of F2, FL, xF3 in what is measured.
    x, q2 : ndarray, (point,)
        Q^2 in GeV^2.
    powers : ndarray, (point, power)
        a(mu_r)^k, k = 0 and 1, or its derivative.
    quark : int
        PDG number.
    mass : float
        In GeV.
    """
    from .. import _core

    rows = np.zeros((x.size, 13, setting.grid.nodes))
    for place, function in enumerate(FUNCTIONS[:2]):
        if setting.highest[function] >= 1 and shares[:, place].any():
            made = _core.massive_rows(setting.grid.handle(), f"{function} gluon", x, q2, mass)
            rows[:, GLUON] += (CHARGES[quark - 1] ** 2 * powers[:, 1] * shares[:, place])[
                :, np.newaxis
            ] * made
    return rows


def beyond_pair(
    setting: Setting,
    nodal: Mapping[str, Floats],
    q2: Floats,
    powers: Floats,
    nf: int,
    quark: int,
    mass: float,
) -> Floats:
    """Return massless rows of a photon coupled to a heavy quark less the massless limit of the massive ones.

    Parameters
    ----------
    setting : Setting
    nodal : mapping
        Structure function -> (point, node), weights at nodes.
    q2 : ndarray, (point,)
        Q^2 in GeV^2.
    powers : ndarray, (point, power)
        a(mu_r)^k, k = 0 and 1, or its derivative.
    nf : int
        Active flavours, `quark` among them.
    quark, mass : int, float
        PDG number; GeV.

    Notes
    -----
    Limit for Q^2 >> m^2 at order a: C_g/nf + P_qg/nf ln(Q^2/m^2) for F2, C_g/nf for FL, per squared charge.
    """
    short = to_first_order(setting)
    charge2 = CHARGES[quark - 1] ** 2
    even = np.zeros((q2.size, 6))
    even[:, quark - 1] = charge2
    nothing = np.zeros_like(even)
    photon = {name: nodal[name] for name in FUNCTIONS[:2]}
    rows = light_rows(short, photon, Weights(even, nothing, nothing, nothing), powers, nf)
    logarithm = np.log(q2 / mass**2)[:, np.newaxis]
    for function, of_nodes in photon.items():
        if short.highest[function] >= 1:
            limit = of_nodes @ at_q(setting, function, nf)["gluon"][1]
            if function == "F2":
                limit = limit + logarithm * (of_nodes @ splitting(setting.grid, 0, "qg", nf))
            rows[:, GLUON] -= charge2 / nf * powers[:, 1, np.newaxis] * limit
    return rows


def to_first_order(setting: Setting) -> Setting:
    """Return the same with no power of a above the first."""
    first = {name: min(power, 1) for name, power in setting.highest.items()}
    return replace(setting, highest=first, further={})


def at_q(setting: Setting, function: str, nf: int) -> dict[str, Floats]:
    """Return coefficient matrices to order a at mu_r = mu_f = Q."""
    powers = dict.fromkeys(FUNCTIONS, 1)
    first = replace(setting, highest=powers, mur2_ratio=1.0, muf2_ratio=1.0, further={})
    return first.matrices(function, nf)


def suppression(subtraction: str, q2: Floats, mass: float) -> Floats:
    """Return D, (point,): (1 - m^2/Q^2)^2 above Q^2 = m^2 and 0 below if damped, else 1."""
    if subtraction != "damped":
        return np.ones_like(q2)
    return np.where(q2 > mass**2, (1.0 - mass**2 / q2) ** 2, 0.0)
