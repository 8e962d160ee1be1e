"""Coefficient functions of light quarks on a grid, with the logarithms of both hard scales.

With t = ln(Q^2/mu_f^2), lr = ln(mu_r^2/mu_f^2) and C = sum_k a^k C_k, that a structure function does not
depend on mu_f means d C/d t = C P + beta(a) d C/d a, beta(a) = -b0 a^2 - b1 a^3 - ...; solved order by
order in `_with_logarithms` in a(mu_f), and re-expanded in a(mu_r) after that. Products of C and P are
products of matrices on the grid: ratios of scales are those of the theory, so that these are computed
once for each number of flavours.
"""

from __future__ import annotations

from functools import lru_cache
from typing import NamedTuple

import numpy as np

from .._check import Floats, Integers
from ..grid import ChebyshevGrid
from .own_functions import FurtherOrders, further_matrix

__all__ = [
    "COEFFICIENTS",
    "LIGHT_FUNCTIONS",
    "Terms",
    "beta_coefficients",
    "light_matrices",
    "light_terms",
    "splitting",
]

COEFFICIENTS = ("ns+", "ns-", "pure singlet", "gluon")
LIGHT_FUNCTIONS = ("F2", "FL", "xF3")
#: The highest power of a known of each structure function.
HIGHEST = {"F2": 2, "FL": 3, "xF3": 2}


def beta_coefficients(nf: int) -> tuple[float, float]:
    """Return b0, b1 of d a/d ln mu^2 = -b0 a^2 - b1 a^3.

    W. Caswell, Phys. Rev. Lett. 33 (1974) 244; D. Jones, Nucl. Phys. B75 (1974) 531.
    """
    return 11.0 - 2.0 / 3.0 * nf, 102.0 - 38.0 / 3.0 * nf


class Terms(NamedTuple):
    """Coefficient matrices that rows are sums of, one a structure function, coefficient and power of a.

    Attributes
    ----------
    matrices : ndarray, (term, node, node)
    functions, parts, orders : ndarray of int, (term,)
        Index in `LIGHT_FUNCTIONS`, index in `COEFFICIENTS`, power of a.
    """

    matrices: Floats
    functions: Integers
    parts: Integers
    orders: Integers


@lru_cache(maxsize=32)
def light_terms(
    grid: ChebyshevGrid,
    highest: tuple[int, ...],
    nf: int,
    mur2_ratio: float,
    muf2_ratio: float,
    further: tuple[FurtherOrders, ...] = ((), (), ()),
    by: str | None = None,
) -> Terms:
    """Return all coefficients that do not vanish.

    They depend on neither coupling nor scale: kept for the life of the process.

    Parameters
    ----------
    grid : ChebyshevGrid
    highest : tuple of int
        Highest power of a of each of `LIGHT_FUNCTIONS`.
    nf, mur2_ratio, muf2_ratio, by
        As for `light_matrices`.
    further : tuple of tuple
        The same of each of `LIGHT_FUNCTIONS`.
    """
    found = []
    for place, function in enumerate(LIGHT_FUNCTIONS):
        ratios = mur2_ratio, muf2_ratio
        made = light_matrices(grid, function, highest[place], nf, *ratios, further[place], by)
        for part, name in enumerate(COEFFICIENTS):
            powers = enumerate(made[name])
            found += [(matrix, place, part, order) for order, matrix in powers if matrix.any()]
    matrices = np.stack([term[0] for term in found]) if found else np.zeros((0, grid.nodes, grid.nodes))
    numbers = np.array([term[1:] for term in found], dtype=np.int64).reshape(-1, 3).T.copy()
    return Terms(matrices, *numbers)


@lru_cache(maxsize=512)
def splitting(grid: ChebyshevGrid, order: int, channel: str, nf: int) -> Floats:
    """Return the matrix (node, node) of a splitting function; see `scalewright.kernels` for the channels."""
    from .. import _core

    return _core.splitting_matrix(grid.handle(), order, channel, nf)


@lru_cache(maxsize=64)
def light_matrices(
    grid: ChebyshevGrid,
    function: str,
    highest: int,
    nf: int,
    mur2_ratio: float,
    muf2_ratio: float,
    further: FurtherOrders = (),
    by: str | None = None,
) -> dict[str, Floats]:
    """Return the coefficients of a(mu_r)^k, k = 0 to `highest`, as matrices.

    Parameters
    ----------
    grid : ChebyshevGrid
        Where x lives.
    function : {"F2", "FL", "xF3"}
        The structure function.
    highest : int
        Highest power of a.
    nf : int
        Number of active flavours.
    mur2_ratio, muf2_ratio : float
        mu_r^2/Q^2 and mu_f^2/Q^2.
    further : tuple of tuple
        Coefficient functions beyond `highest`, one entry an order, pairs of name and function.
    by : {None, "mur2_ratio", "muf2_ratio"}
        The coefficients, or their derivative with respect to the logarithm of a ratio at fixed a(mu_r).

    Returns
    -------
    dict
        Name of the coefficient -> (power of a, node, node), acting on nodal values of x f(x).
    """
    t, lr = -float(np.log(muf2_ratio)), float(np.log(mur2_ratio / muf2_ratio))
    plain = {name: [_plain(grid, k, function, name, nf) for k in range(highest + 1)] for name in COEFFICIENTS}
    for order in further:
        given = dict(order)
        for name in COEFFICIENTS:
            plain[name].append(further_matrix(grid, given.get(name), nf))
    highest += len(further)
    # beyond the known splitting functions the ratios of scales are 1, and these count for nothing
    known = [min(k, 2) for k in range(highest)]
    plus, minus = ([splitting(grid, k, name, nf) for k in known] for name in ("ns+", "ns-"))
    nonsinglet = {"ns+": (plain["ns+"], plus), "ns-": (plain["ns-"], minus)}
    made = {name: _shifted(c, p, (t, lr), nf, by) for name, (c, p) in nonsinglet.items()}
    # the singlet as one row of two blocks (Sigma, gluon)
    both = [
        np.hstack([plain["ns+"][k] + plain["pure singlet"][k], plain["gluon"][k]]) for k in range(highest + 1)
    ]
    singlet = _shifted(both, [_singlet(grid, k, nf) for k in known], (t, lr), nf, by)
    n = grid.nodes
    made["pure singlet"] = [c[:, :n] - d for c, d in zip(singlet, made["ns+"], strict=True)]
    made["gluon"] = [c[:, n:] for c in singlet]
    return {name: np.stack(made[name]) for name in COEFFICIENTS}


def _plain(grid: ChebyshevGrid, order: int, function: str, name: str, nf: int) -> Floats:
    """Return the coefficient of a^order at mu_r = mu_f = Q."""
    from .. import _core

    return _core.coefficient_matrix(grid.handle(), order, function, name, nf)


def _singlet(grid: ChebyshevGrid, order: int, nf: int) -> Floats:
    """Return the splitting functions of (Sigma, gluon) as one matrix."""
    part = {name: splitting(grid, order, name, nf) for name in ("ns+", "pure singlet", "qg", "gq", "gg")}
    return np.block([[part["ns+"] + part["pure singlet"], part["qg"]], [part["gq"], part["gg"]]])


def _shifted(
    c: list[Floats], p: list[Floats], logarithms: tuple[float, float], nf: int, by: str | None
) -> list[Floats]:
    """Return coefficients at mu_f and mu_r from those at Q, or their derivative; `logarithms`: t, lr."""
    t, lr = logarithms
    if by is None and t == 0.0 and lr == 0.0:
        return c
    beta = beta_coefficients(nf)
    series = _with_logarithms(c, p, *beta)
    if by is None:
        return _reexpanded(_at(series, t), lr, *beta)
    slope = _reexpanded_slope(_at(series, t), lr, *beta)
    if by == "mur2_ratio":  # in lr alone
        return slope
    moved = _reexpanded(_at([_slope(powers) for powers in series], t), lr, *beta)
    # both t and lr fall with ln mu_f^2
    return [-one - other for one, other in zip(moved, slope, strict=True)]


def _reexpanded(c: list[Floats], lr: float, b0: float, b1: float) -> list[Floats]:
    """Return coefficients of a = a(mu_r) from those of a(mu_f) = a + b0 lr a^2 + (b1 lr + b0^2 lr^2) a^3."""
    result = list(c)
    if len(c) > 2:
        result[2] = c[2] + b0 * lr * c[1]
    if len(c) > 3:
        result[3] = c[3] + 2.0 * b0 * lr * c[2] + (b1 * lr + (b0 * lr) ** 2) * c[1]
    return result


def _reexpanded_slope(c: list[Floats], lr: float, b0: float, b1: float) -> list[Floats]:
    """Return the derivative of `_reexpanded` with respect to lr."""
    result = [np.zeros_like(one) for one in c]
    if len(c) > 2:
        result[2] = b0 * c[1]
    if len(c) > 3:
        result[3] = 2.0 * b0 * c[2] + (b1 + 2.0 * b0**2 * lr) * c[1]
    return result


def _with_logarithms(c: list[Floats], p: list[Floats], b0: float, b1: float) -> list[list[Floats]]:
    """Return the coefficients as series in a(mu_f), each a polynomial in t by rising power.

    d C_k/d t = sum_j C_(k-1-j) P_j - (k-1) b0 C_(k-1) - (k-2) b1 C_(k-2).
    """
    series: list[list[Floats]] = []
    for k, start in enumerate(c):
        powers = [start]
        for power in range(1, k + 1):
            slope = np.zeros_like(start)
            for j in range(k):
                if power - 1 < len(series[k - 1 - j]):
                    slope = slope + series[k - 1 - j][power - 1] @ p[j]
            for lower, factor in ((k - 1, (k - 1) * b0), (k - 2, (k - 2) * b1)):
                if lower >= 1 and power - 1 < len(series[lower]):
                    slope = slope - factor * series[lower][power - 1]
            powers.append(slope / power)
        series.append(powers)
    return series


def _at(series: list[list[Floats]], t: float) -> list[Floats]:
    """Return polynomials in t at one t."""
    return [
        sum((term * t**n for n, term in enumerate(powers)), np.zeros_like(powers[0])) for powers in series
    ]


def _slope(powers: list[Floats]) -> list[Floats]:
    """Return the derivative of a polynomial."""
    return [n * term for n, term in enumerate(powers)][1:] or [np.zeros_like(powers[0])]
