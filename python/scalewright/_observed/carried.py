"""The matrix of a table: rows of all points carried back to the input, scale by scale in bounded memory."""

from __future__ import annotations

from collections.abc import Callable, Iterator

import numpy as np

from .._check import Floats, Integers
from .._route import Source
from ..build import build_operators
from ..operators import Operators
from .point_rows import point_rows
from .problem import Problem
from .pullback import flavour_rows, pulled_back

__all__ = ["built", "carried", "carried_matrix", "scale_groups"]

#: Scales whose operators are held at a time, and points whose rows are unless one scale has more: some 30 MB.
_SCALES, _POINTS = 32, 512


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
    operators = built(problem, start_q2=start_q2, start_nf=start_nf, tolerance=tolerance, threads=threads)

    def rows(chosen: Integers, nf: int) -> Floats:
        return point_rows(problem, chosen, nf)

    return carried(problem, operators._source, operators._route.active, rows), operators


def built(
    problem: Problem, *, start_q2: float, start_nf: int | None, tolerance: float | None, threads: int | None
) -> Operators:
    """Return operators that serve the scales of all points."""
    q2, nf, _ = scale_groups(problem)
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


def carried(
    problem: Problem, source: Source, flavours: tuple[int, ...], rows: Callable[[Integers, int], Floats]
) -> Floats:
    """Return the matrix (row, flavour, node) on the input of rows at the scales of their points.

    Parameters
    ----------
    problem : Problem
    source : Source
        Operators, or their derivative.
    flavours : tuple of int
        PDG numbers of the input.
    rows : callable
        (points, number of flavours) -> (point, 13, node).
    """
    q2, nf, group = scale_groups(problem)
    matrix = np.empty((len(problem.points), len(flavours), problem.grid.nodes))
    members = [np.flatnonzero(group == scale) for scale in range(q2.size)]
    for chunk in _chunks(nf, [part.size for part in members]):
        blocks, _ = source.at(q2[chunk], nf[chunk], 0)
        together = np.concatenate([members[scale] for scale in chunk])
        of_points = rows(together, int(nf[chunk[0]]))
        start = 0
        for place, scale in enumerate(chunk):
            named = dict(zip(source.names, blocks[place], strict=True))
            some = members[scale]
            back = pulled_back(of_points[start : start + some.size], named, source.light)
            back = flavour_rows(back, flavours)
            matrix[some] = with_target(back, problem.points.protons[some], flavours)
            start += some.size
    return matrix


def _chunks(nf: Integers, sizes: list[int]) -> Iterator[Integers]:
    """Yield scales that share a number of flavours, few enough to hold their operators and rows at once."""
    start = 0
    while start < nf.size:
        end, points = start + 1, sizes[start]
        while (
            end < nf.size
            and nf[end] == nf[start]
            and end - start < _SCALES
            and points + sizes[end] <= _POINTS
        ):
            points += sizes[end]
            end += 1
        yield np.arange(start, end)
        start = end


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
