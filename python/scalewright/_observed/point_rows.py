"""All rows of points that share a number of flavours: light and heavy quarks, in the scheme of the theory."""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from .._check import Floats, Integers
from .charm import limit_rows, single_rows
from .couplings import Weights, charged, neutral
from .heavy import HEAVY, beyond_pair, pair_rows, suppression, to_first_order
from .measures import FUNCTIONS
from .points import Points
from .problem import Problem
from .rows import Setting, light_rows
from .target_mass import with_target_mass

__all__ = ["add_heavy", "light_part", "light_weights", "nodal_weights", "point_rows"]

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
    setting = problem.setting
    powers = setting.powers(problem.a[chosen])
    rows = light_part(problem, chosen, nf, setting, powers, out)
    add_heavy(rows, problem, chosen, nf, setting, powers, problem.theory.masses.values)
    return rows


def light_part(
    problem: Problem,
    chosen: Integers,
    nf: int,
    setting: Setting,
    powers: Floats,
    out: Floats | None = None,
) -> Floats:
    """Return the rows of what is massless to the order of the theory, (point, 13, node).

    Parameters
    ----------
    problem, chosen, nf
        As for `point_rows`.
    setting : Setting
        That of the problem, or with derivatives for coefficients.
    powers : ndarray, (point, power)
        a(mu_r)^k, or its derivative.
    out : ndarray, (point, 13, node), optional
        Where to write.
    """
    points, factors = problem.points.part(chosen), problem.factors[chosen]
    if problem.target_mass:
        nodal = with_target_mass(problem.grid, points.x, points.q2, factors)
    else:
        nodal = nodal_weights(problem, points.x, factors)
    weights = light_weights(problem, points, nf, problem.theory.heavy_quarks == "matched")
    return light_rows(setting, nodal, weights, powers, nf, out=out)


def add_heavy(
    rows: Floats,
    problem: Problem,
    chosen: Integers,
    nf: int,
    setting: Setting,
    powers: Floats,
    masses: Sequence[float],
    quarks: Sequence[int] = HEAVY,
) -> None:
    """Add what is massive, and what is beyond it where it is matched; linear in `powers`.

    Parameters
    ----------
    rows : ndarray, (point, 13, node)
    problem, chosen, nf, setting, powers
        As for `light_part`; the ratio mu_f^2/Q^2 is that of the setting.
    masses : sequence of float
        Of charm, bottom, top in GeV.
    quarks : sequence of int
        Those whose part is added.
    """
    if problem.theory.heavy_quarks == "massless":
        return
    case = _Case(problem, problem.points.part(chosen), problem.factors[chosen], setting, powers, nf)
    for quark in quarks:
        _add_pairs(rows, case, quark, masses[quark - _CHARM])
    if _CHARM in quarks:
        _add_charm(rows, case, masses[0])


class _Case(NamedTuple):
    """Points of one number of flavours, and what multiplies their coefficients."""

    problem: Problem
    points: Points
    factors: Floats
    setting: Setting
    powers: Floats
    nf: int

    @property
    def matched(self) -> bool:
        """Whether massless parts stand beside massive ones."""
        return self.problem.theory.heavy_quarks == "matched"


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


def _add_pairs(rows: Floats, case: _Case, quark: int, mass: float) -> None:
    """Add what photons make of one heavy quark."""
    problem, setting, nf = case.problem, case.setting, case.nf
    some = np.flatnonzero(_couples(case.points, quark))
    if some.size == 0 or (quark <= nf and not case.matched):
        return
    x, q2, factors = case.points.x[some], case.points.q2[some], case.factors[some]
    powers = case.powers[some]
    rows[some] += pair_rows(setting, factors, x, q2, powers, quark, mass)
    if quark <= nf:
        at = x * (1.0 + 4.0 * mass**2 / q2) if problem.subtraction == "chi" else x
        nodal = nodal_weights(problem, at, factors)
        beyond = beyond_pair(setting, nodal, q2, powers, nf, quark, mass)
        rows[some] += suppression(problem.subtraction, q2, mass)[:, np.newaxis, np.newaxis] * beyond


def _add_charm(rows: Floats, case: _Case, mass: float) -> None:
    """Add the single charm that W bosons make."""
    problem, setting, nf = case.problem, case.setting, case.nf
    tag = case.points.tag
    some = np.flatnonzero(case.points.is_charged & ((tag == 0) | (tag == _CHARM)))
    if some.size == 0 or (nf >= _CHARM and not case.matched):
        return
    part, powers, factors = case.points.part(some), case.powers[some], case.factors[some]
    negative = part.is_negative
    rows[some] += single_rows(setting, factors, part.x, part.q2, powers, nf, mass, negative)
    if nf >= _CHARM:
        at = part.x * (1.0 + mass**2 / part.q2) if problem.subtraction == "chi" else part.x
        nodal = nodal_weights(problem, at, factors)
        whole = charged(part, problem.electroweak, nf)
        weights = whole.plus(charged(part, problem.electroweak, nf, _CHARM), -1.0)
        beyond = light_rows(to_first_order(setting), nodal, weights, powers, nf)
        beyond -= limit_rows(setting, nodal, part.q2, powers, nf, mass, negative)
        rows[some] += suppression(problem.subtraction, part.q2, mass)[:, np.newaxis, np.newaxis] * beyond
