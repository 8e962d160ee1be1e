"""The matrix of a table: rows of all points carried back to the input, some points at a time.

The operators of single scales are never made: the compiled core multiplies rows by what it holds of the
evolution, so that memory is that of the rows of some points and the time next to independent of the number of
scales.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from functools import partial
from typing import TypeAlias

import numpy as np

from .._carry import thread_count
from .._check import Floats, Integers, show
from .._route import Live
from ..build import build_operators
from ..errors import RangeError
from ..operators import Operators
from .point_rows import point_rows
from .problem import Problem
from .pullback import CHANNELS

__all__ = ["built", "carried", "carried_matrix", "live", "scale_groups", "with_target"]

RowsOf: TypeAlias = Callable[[Integers, int, Floats], Floats]

#: Points whose rows are held at a time: some 4 MB.
_POINTS = 512


def scale_groups(problem: Problem) -> tuple[Floats, Integers, Integers]:
    """Return the distinct (mu_f^2, nf), and to which of them each point belongs."""
    q2, nf, group = problem.groups
    return q2 * problem.theory.hard_muf2_ratio, nf, group


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
    operators = built(problem, start_q2=start_q2, start_nf=start_nf, tolerance=tolerance, threads=threads)
    rows = partial(point_rows, problem)
    return carried(problem, live(operators), operators._route.active, rows, threads), operators


def live(operators: Operators) -> Live:
    """Return the solution that `build_operators` has made."""
    source = operators._source
    assert isinstance(source, Live)
    return source


def built(
    problem: Problem, *, start_q2: float, start_nf: int | None, tolerance: float | None, threads: int | None
) -> Operators:
    """Return operators that serve the scales of all points.

    Raises
    ------
    RangeError
        If they do not reach the lowest mu_f^2; the message names its point.
    """
    q2, nf, _ = scale_groups(problem)
    try:
        return build_operators(
            problem.theory,
            problem.grid,
            start_q2=start_q2,
            start_nf=start_nf,
            q2=q2,
            nf=nf,
            tolerance=tolerance,
            threads=threads,
        )
    except RangeError as error:
        lowest = int(np.argmin(problem.muf2))
        if problem.muf2[lowest] > start_q2:  # it is the start that cannot be reached
            raise
        at = f"q2 = {show(problem.points.q2[lowest])}, mu_f^2 = {show(problem.muf2[lowest])} GeV^2"
        raise RangeError(f"{problem.points.place[lowest]}: {at}: {error}") from None


def carried(
    problem: Problem, source: Live, flavours: tuple[int, ...], rows: RowsOf, threads: int | None
) -> Floats:
    """Return the matrix (row, flavour, node) on the input of rows at the scales of their points.

    Parameters
    ----------
    problem : Problem
    source : Live
        Operators that `build_operators` has made, or their derivative.
    flavours : tuple of int
        PDG numbers of the input.
    rows : callable
        (points, number of flavours, where to write) -> (point, 13, node): `point_rows`, or a derivative.
    threads : int, optional
        As for `build_operators`.
    """
    q2, nf, group = scale_groups(problem)
    matrix = np.empty((len(problem.points), len(flavours), problem.grid.nodes))
    room = np.empty((min(_POINTS, group.size), CHANNELS, problem.grid.nodes))
    for members in _chunks(nf, group):
        scales, scale_of = np.unique(group[members], return_inverse=True)
        of_points = rows(members, int(nf[scales[0]]), room[: members.size])
        source.evolution.pull_back(
            of_points,
            q2=q2[scales],
            nf=nf[scales],
            scale_of=scale_of.astype(np.int64),
            protons=problem.points.protons[members],
            flavours=np.asarray(flavours, dtype=np.int64),
            places=members,
            out=matrix,
            threads=thread_count(threads),
        )
    return matrix


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
