"""Target mass in the form of the operator product expansion, as weights of nodal values.

I. Schienbein et al., arXiv:0709.1775, eqs. (22)-(24), after H. Georgi, H. Politzer, Phys. Rev. D 14 (1976)
1829. With r^2 = 1 + 4 x^2 M^2/Q^2, xi = 2x/(1 + r), mu = M^2/Q^2,

    F2  = x^2/(xi^2 r^3) F2(xi) + 6 mu x^3/r^4 h2 + 12 mu^2 x^4/r^5 g2,
    FL  = x^2/(xi^2 r) FL(xi) + 4 mu x^3/r^2 h2 + 8 mu^2 x^4/r^3 g2         (r^2 F2 - 2x F1 of the paper),
    xF3 = x^2/(xi^2 r^2) xF3(xi) + 2 mu x^3/r^3 h3,

where the right-hand sides hold massless functions, h = int_xi^1 du F(u)/u^2 (of F2; of u F3(u) in h3) and
g2 = int_xi^1 du (u - xi) F2(u)/u^2.
"""

from __future__ import annotations

import numpy as np

from .._check import Floats
from .._measured.rows import NUCLEON_M2
from ..grid import ChebyshevGrid

__all__ = ["with_target_mass"]

#: Gauss-Legendre nodes a panel: the integrand is a polynomial of degree 30 at most times an exponential.
_NODES = 40


def with_target_mass(grid: ChebyshevGrid, x: Floats, q2: Floats, factors: Floats) -> dict[str, Floats]:
    """Return nodal weights of massless F2, FL, xF3 in sums of F2, FL, xF3 with target mass.

    Parameters
    ----------
    grid : ChebyshevGrid
    x, q2 : ndarray, (point,)
        Q^2 in GeV^2.
    factors : ndarray, (point, 3)
        Weights of F2, FL, xF3 with target mass in what is measured.

    Returns
    -------
    dict
        Structure function -> (point, node).
    """
    mu = NUCLEON_M2 / q2
    r = np.sqrt(1.0 + 4.0 * x**2 * mu)
    xi = 2.0 * x / (1.0 + r)
    at_xi = grid.cardinals(xi)
    first, second = _integrals(grid, xi)
    f2, fl, f3 = factors.T
    stretch = (x / xi) ** 2
    of_f2 = (
        _times(f2 * stretch / r**3, at_xi)
        + _times(f2 * 6.0 * mu * x**3 / r**4 + fl * 4.0 * mu * x**3 / r**2, first)
        + _times(f2 * 12.0 * mu**2 * x**4 / r**5 + fl * 8.0 * mu**2 * x**4 / r**3, second)
    )
    of_f3 = _times(f3 * stretch / r**2, at_xi) + _times(f3 * 2.0 * mu * x**3 / r**3, first)
    return {"F2": of_f2, "FL": _times(fl * stretch / r, at_xi), "xF3": of_f3}


def _times(factor: Floats, rows: Floats) -> Floats:
    return factor[:, np.newaxis] * rows


def _integrals(grid: ChebyshevGrid, xi: Floats) -> tuple[Floats, Floats]:
    """Return the rows of int_xi^1 du F/u^2 and of int_xi^1 du (u - xi) F/u^2, in v = ln(1/u)."""
    nodes, weights = np.polynomial.legendre.leggauss(_NODES)
    end = -np.log(xi)[:, np.newaxis]
    low, high = np.minimum(grid.edges[:-1], end), np.minimum(grid.edges[1:], end)
    half = 0.5 * (high - low)[:, :, np.newaxis]
    v = 0.5 * (high + low)[:, :, np.newaxis] + half * nodes
    cardinals = grid.cardinals(np.maximum(np.exp(-v), grid.x_min))
    first = half * weights * np.exp(v)
    second = half * weights * -np.expm1(v - end[:, :, np.newaxis])
    rows = [np.einsum("psk,pskn->pn", weight, cardinals, optimize=True) for weight in (first, second)]
    return rows[0], rows[1]
