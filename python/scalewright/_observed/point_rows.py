"""All rows of points that share a number of flavours: light and heavy quarks, in the scheme of the theory."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from .._check import Floats, Integers
from .charm import limit_rows, single_rows
from .couplings import Weights, charged, neutral
from .heavy import HEAVY, beyond_pair, pair_rows, suppression, to_first_order
from .measures import FUNCTIONS
from .points import Points
from .problem import Problem
from .rows import light_rows
from .target_mass import with_target_mass

__all__ = ["light_weights", "nodal_weights", "point_rows"]

_CHARM = 4


def point_rows(problem: Problem, chosen: Integers, nf: int, out: Floats | None = None) -> Floats:
    """Return rows on gluon, q + qbar and q - qbar at the mu_f of each point.

    Parameters
    ----------
    problem : Problem
    chosen : ndarray of int, (point,)
        Which points; all with `nf` flavours.
    nf : int
        Number of active flavours.
    out : ndarray, (point, 13, node), optional
        Where to write.

    Returns
    -------
    ndarray, (point, 13, node)
        In the order of `pullback`.
    """
    points = problem.points.part(chosen)
    factors, a = problem.factors[chosen], problem.a[chosen]
    scheme = problem.theory.heavy_quarks
    if problem.target_mass:
        nodal = with_target_mass(problem.grid, points.x, points.q2, factors)
    else:
        nodal = nodal_weights(problem, points.x, factors)
    weights = light_weights(problem, points, nf, scheme == "matched")
    rows = light_rows(problem.setting, nodal, weights, problem.setting.powers(a), nf, out=out)
    if scheme != "massless":
        for quark in HEAVY:
            _add_pairs(rows, problem, points, factors, a, nf, quark)
        _add_charm(rows, problem, points, factors, a, nf)
    return rows


def nodal_weights(problem: Problem, x: Floats, factors: Floats) -> dict[str, Floats]:
    """Return the weights of structure functions at nodes, (point, node) each; none where x is 1 or more."""
    inside = x < 1.0
    at_x = np.zeros((x.size, problem.grid.nodes))
    at_x[inside] = problem.grid.cardinals(x[inside])
    return {name: factors[:, i, np.newaxis] * at_x for i, name in enumerate(FUNCTIONS)}


def light_weights(problem: Problem, points: Points, nf: int, matched: bool) -> Weights:
    """Return the couplings of what is treated as massless to the order of the theory."""
    first = neutral(points, problem.electroweak)
    without = _CHARM if matched and nf >= _CHARM else None
    second = charged(points, problem.electroweak, nf, without)
    even = first.even.copy()
    if matched:
        for quark in HEAVY:
            even[:, quark - 1] -= np.where(_couples(points, quark), photon_share(quark), 0.0)
    return Weights(even, first.odd, first.even3, first.odd3).active(nf).plus(second)


def photon_share(quark: int) -> float:
    """Return the squared charge of a quark."""
    return (1.0 if quark % 2 else 4.0) / 9.0


def _couples(points: Points, quark: int) -> NDArray[np.bool_]:
    """Say where a neutral boson may couple to this quark: it, or no quark, is tagged."""
    return np.asarray(points.is_neutral & ((points.tag == 0) | (points.tag == quark)))


def _add_pairs(
    rows: Floats, problem: Problem, points: Points, factors: Floats, a: Floats, nf: int, quark: int
) -> None:
    """Add what photons make of one heavy quark."""
    some = np.flatnonzero(_couples(points, quark))
    matched = problem.theory.heavy_quarks == "matched"
    if some.size == 0 or (quark <= nf and not matched):
        return
    mass = problem.theory.masses.values[quark - 4]
    x, q2, a, factors = points.x[some], points.q2[some], a[some], factors[some]
    rows[some] += pair_rows(problem.setting, factors, x, q2, a, quark, mass)
    if quark <= nf:
        at = x * (1.0 + 4.0 * mass**2 / q2) if problem.subtraction == "chi" else x
        beyond = beyond_pair(problem.setting, nodal_weights(problem, at, factors), q2, a, nf, quark, mass)
        rows[some] += suppression(problem.subtraction, q2, mass)[:, np.newaxis, np.newaxis] * beyond


def _add_charm(rows: Floats, problem: Problem, points: Points, factors: Floats, a: Floats, nf: int) -> None:
    """Add the single charm that W bosons make."""
    some = np.flatnonzero(points.is_charged & ((points.tag == 0) | (points.tag == _CHARM)))
    matched = problem.theory.heavy_quarks == "matched"
    if some.size == 0 or (nf >= _CHARM and not matched):
        return
    mass = problem.theory.masses.values[0]
    part, a, factors = points.part(some), a[some], factors[some]
    negative, setting = part.is_negative, problem.setting
    rows[some] += single_rows(setting, factors, part.x, part.q2, a, nf, mass, negative)
    if nf >= _CHARM:
        at = part.x * (1.0 + mass**2 / part.q2) if problem.subtraction == "chi" else part.x
        nodal = nodal_weights(problem, at, factors)
        whole = charged(part, problem.electroweak, nf)
        weights = whole.plus(charged(part, problem.electroweak, nf, _CHARM), -1.0)
        short = to_first_order(setting)
        beyond = light_rows(short, nodal, weights, short.powers(a), nf)
        beyond -= limit_rows(setting, nodal, part.q2, a, nf, mass, negative)
        rows[some] += suppression(problem.subtraction, part.q2, mass)[:, np.newaxis, np.newaxis] * beyond
