"""The matrix of a table: rows of all points carried back to the input, some points at a time.

The operators of single scales are never made: the compiled core multiplies rows by what it holds of the
evolution, so that memory is that of the rows of some points and the time next to independent of the number of
scales.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

import numpy as np

from .._carry import thread_count
from .._check import Floats, Integers
from .._route import Live
from ..build import build_operators
from ..operators import Operators
from .point_rows import point_rows
from .problem import Problem
from .pullback import CHANNELS

if TYPE_CHECKING:
    from .. import _core

__all__ = ["carried_matrix", "scale_groups", "with_target"]

#: Points whose rows are held at a time: some 4 MB.
_POINTS = 512


def scale_groups(problem: Problem) -> tuple[Floats, Integers, Integers]:
    """Return the distinct (mu_f^2, nf), and to which of them each point belongs."""
    pairs = np.stack([problem.muf2, problem.nf.astype(float)], axis=1)
    distinct, group = np.unique(pairs, axis=0, return_inverse=True)
    return distinct[:, 0].copy(), distinct[:, 1].astype(np.int64), group.reshape(-1)


def carried_matrix(
    problem: Problem,
    *,
    start_q2: float,
    start_nf: int | None,
    tolerance: float | None,
    threads: int | None,
) -> tuple[Floats, Operators]:
    """Return the matrix (row, flavour, node) on the input, and the operators that it went through.

    Parameters
    ----------
    problem : Problem
    start_q2, start_nf, tolerance, threads
        As for `build_operators`.

    Returns
    -------
    matrix : ndarray, (row, flavour, node)
    operators : Operators
    """
    q2, nf, group = scale_groups(problem)
    operators = build_operators(
        problem.theory,
        problem.grid,
        start_q2=start_q2,
        start_nf=start_nf,
        q2=q2,
        nf=nf,
        tolerance=tolerance,
        threads=threads,
    )
    flavours = operators._route.active
    matrix = np.empty((len(problem.points), len(flavours), problem.grid.nodes))
    if isinstance(operators._source, Live):  # what `build_operators` makes
        numbers = np.asarray(flavours, dtype=np.int64)
        _carry(problem, operators._source.evolution, numbers, matrix, (q2, nf, group), thread_count(threads))
    return matrix, operators


def _carry(
    problem: Problem,
    evolution: _core.Evolution,
    flavours: Integers,
    matrix: Floats,
    groups: tuple[Floats, Integers, Integers],
    threads: int,
) -> None:
    """Write rows of all points on the input, `matrix` (row, flavour, node), some points at a time."""
    q2, nf, group = groups
    room = np.empty((min(_POINTS, group.size), CHANNELS, problem.grid.nodes))
    for members in _chunks(nf, group):
        scales, scale_of = np.unique(group[members], return_inverse=True)
        rows = point_rows(problem, members, int(nf[scales[0]]), room[: members.size])
        evolution.pull_back(
            rows,
            q2=q2[scales],
            nf=nf[scales],
            scale_of=scale_of.astype(np.int64),
            protons=problem.points.protons[members],
            flavours=flavours,
            places=members,
            out=matrix,
            threads=threads,
        )


def _chunks(nf: Integers, group: Integers) -> Iterator[Integers]:
    """Yield points that share a number of flavours, by growing scale, few enough to hold their rows."""
    order = np.argsort(group, kind="stable")
    for count in np.unique(nf):
        some = order[nf[group[order]] == count]
        for start in range(0, some.size, _POINTS):
            yield some[start : start + _POINTS]


def with_target(rows: Floats, protons: Floats, flavours: tuple[int, ...]) -> Floats:
    """Return rows for a target of protons and neutrons: in a neutron u and d change places.

    Parameters
    ----------
    rows : ndarray, (point, flavour, node)
        For a proton.
    protons : ndarray, (point,)
        Fraction of protons.
    flavours : tuple of int
        PDG numbers of the flavour axis.
    """
    if (protons == 1.0).all():
        return rows
    exchange = {1: 2, 2: 1, -1: -2, -2: -1}
    places = [flavours.index(exchange.get(flavour, flavour)) for flavour in flavours]
    weight = protons[:, np.newaxis, np.newaxis]
    return weight * rows + (1.0 - weight) * rows[:, places]
