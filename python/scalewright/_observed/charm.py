"""Charm made singly by a W, with its mass, at order a; and what is beyond it where charm is active.

T. Gottschalk, Phys. Rev. D 23 (1981) 56; M. Glueck, S. Kretzer, E. Reya, hep-ph/9603304. At order a^0 it is
slow rescaling: with lambda = Q^2/(Q^2 + m^2) and xi = x/lambda, per mixing element and for D -> c

    F2/2 = xi D(xi),   FL/2 = (1 - lambda) xi D(xi),   x F3/2 = lambda xi D(xi);

an anticharm from Dbar the same, F3 with the other sign. With t = ln(Q^2/mu_f^2) the order a has besides
t (P_qq * D + P_qg/(2 nf) * g) with the same three factors.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from .._check import Floats
from .couplings import mixing_pairs
from .heavy import at_q
from .light import splitting
from .measures import FUNCTIONS
from .pullback import GLUON, MINUS, PLUS
from .rows import Setting

Booleans = NDArray[np.bool_]

__all__ = ["limit_rows", "single_rows"]


def single_rows(
    setting: Setting,
    shares: Floats,
    x: Floats,
    q2: Floats,
    powers: Floats,
    nf: int,
    mass: float,
    negative: Booleans,
) -> Floats:
    """Return the rows of a single charm quark or antiquark, (point, 13, node).

    Parameters
    ----------
    setting : Setting
    shares : ndarray, (point, 3)
        Weights of F2, FL, xF3 in what is measured.
    x, q2 : ndarray, (point,)
    powers : ndarray, (point, power)
        a(mu_r)^k, k = 0 and 1, or its derivative.
    nf : int
        Active flavours: charm comes from d and s, and from b where that is active.
    mass : float
        Of charm, in GeV.
    negative : ndarray of bool, (point,)
        Where the boson is W-, which makes anticharm.
    """
    from .. import _core

    grid = setting.grid
    ratio = q2 / (q2 + mass**2)
    xi = x / ratio
    at_xi = np.zeros((x.size, grid.nodes))
    open_ = xi < 1.0
    at_xi[open_] = grid.cardinals(xi[open_])
    t = -float(np.log(setting.muf2_ratio))
    zeroth, first = _two(powers)
    quark_part, gluon_part = (np.zeros((x.size, grid.nodes)) for _ in range(2))
    flipped_quark, flipped_gluon = (np.zeros((x.size, grid.nodes)) for _ in range(2))
    p_qq, p_qg = splitting(grid, 0, "ns+", nf), splitting(grid, 0, "qg", nf) / (2.0 * nf)
    for place, (function, factor) in enumerate(
        zip(FUNCTIONS, (np.ones_like(x), 1.0 - ratio, ratio), strict=True)
    ):
        share = shares[:, place, np.newaxis]
        if not share.any():
            continue
        leading = factor[:, np.newaxis] * at_xi
        quark, gluon = zeroth * leading, np.zeros_like(leading)
        if setting.highest[function] >= 1:
            name = function.removeprefix("x")
            parts = [
                _core.massive_rows(grid.handle(), f"charged {name} {of}", x, q2, mass)
                for of in ("quark", "gluon")
            ]
            quark = quark + first * (parts[0] + t * leading @ p_qq)
            gluon = first * (parts[1] + t * leading @ p_qg)
        if function == "xF3":
            flipped_quark, flipped_gluon = share * quark, share * gluon
        else:
            quark_part, gluon_part = quark_part + share * quark, gluon_part + share * gluon
    return _placed(setting, nf, negative, (quark_part, gluon_part), (flipped_quark, flipped_gluon))


def limit_rows(
    setting: Setting,
    nodal: dict[str, Floats],
    q2: Floats,
    powers: Floats,
    nf: int,
    mass: float,
    negative: Booleans,
) -> Floats:
    """Return what `single_rows` tends to for Q^2 >> m^2, (point, 13, node).

    Notes
    -----
    F2/2: D + a (C_q * D + (C_g/nf + ln(Q^2/m^2) P_qg/(2 nf)) * g), xF3/2 with C_3 and -ln(Q^2/m^2) P_qg/(2
    nf) alone, FL/2 with C_L; and the logarithms of mu_f of the light side.
    """
    grid, t = setting.grid, -float(np.log(setting.muf2_ratio))
    p_qq, p_qg = splitting(grid, 0, "ns+", nf), splitting(grid, 0, "qg", nf) / (2.0 * nf)
    logarithm = np.log(q2 / mass**2)[:, np.newaxis]
    zeroth, first = _two(powers)
    sums = {name: [np.zeros((q2.size, grid.nodes)) for _ in range(2)] for name in ("even", "odd")}
    for function in FUNCTIONS:
        w = nodal[function]
        if not w.any():
            continue
        leading = np.zeros_like(w) if function == "FL" else w
        quark, gluon = zeroth * leading, np.zeros_like(w)
        if setting.highest[function] >= 1:
            matrices = at_q(setting, function, nf)
            quark = quark + first * (w @ matrices["ns+"][1] + t * leading @ p_qq)
            sign = {"F2": 1.0, "FL": 0.0, "xF3": -1.0}[function]
            hard = np.zeros_like(w) if function == "xF3" else w @ matrices["gluon"][1] / nf
            gluon = first * (hard + (sign * logarithm * w + t * leading) @ p_qg)
        target = sums["odd" if function == "xF3" else "even"]
        target[0], target[1] = target[0] + quark, target[1] + gluon
    return _placed(
        setting, nf, negative, (sums["even"][0], sums["even"][1]), (sums["odd"][0], sums["odd"][1])
    )


def _two(powers: Floats) -> tuple[Floats, Floats]:
    """Return what multiplies a^0 and a^1, (point, 1) each."""
    first = powers[:, 1:2] if powers.shape[1] > 1 else np.zeros_like(powers)
    return powers[:, :1], first


def _placed(
    setting: Setting, nf: int, negative: Booleans, even: tuple[Floats, Floats], odd: tuple[Floats, Floats]
) -> Floats:
    """Return rows (point, 13, node) from those on D and gluon; `odd` is xF3, which changes sign with W-."""
    rows = np.zeros((negative.size, 13, setting.grid.nodes))
    mixing2 = mixing_pairs(setting.electroweak, 6, 4)[1] * (np.array([1, 3, 5]) <= nf)
    sign = np.where(negative, -1.0, 1.0)[:, np.newaxis]
    quark, gluon = even[0] + sign * odd[0], even[1] + sign * odd[1]
    # 2 |V|^2 D = |V|^2 ((D + Dbar) + (D - Dbar)); Dbar with the other sign of the difference
    for down, factor in zip((0, 2, 4), mixing2, strict=True):
        rows[:, PLUS][:, down] += factor * quark
        rows[:, MINUS][:, down] += factor * sign * quark
    rows[:, GLUON] += 2.0 * mixing2.sum() * gluon
    return rows
