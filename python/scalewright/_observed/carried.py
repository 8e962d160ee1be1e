"""The matrix of a table: rows of all points carried back to the input, scale by scale in bounded memory."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from .._check import Floats, Integers
from ..build import build_operators
from ..operators import Operators
from .problem import Problem
from .pullback import flavour_rows, pulled_back

__all__ = ["carried_matrix", "scale_groups"]

#: Scales whose operators are held at a time, and points whose rows are: some 30 MB of each.
_SCALES, _POINTS = 32, 256


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
    for first in range(0, q2.size, _SCALES):
        chunk = np.arange(first, min(first + _SCALES, q2.size))
        blocks, _ = operators._source.at(q2[chunk], nf[chunk], 0)
        for place, scale in enumerate(chunk):
            named = dict(zip(operators.block_names, blocks[place], strict=True))
            _fill(matrix, problem, np.flatnonzero(group == scale), int(nf[scale]), named, operators.light, flavours)
    return matrix, operators


def _fill(
    matrix: Floats,
    problem: Problem,
    members: Integers,
    nf: int,
    blocks: dict[str, Floats],
    light: int,
    flavours: Sequence[int],
) -> None:
    """Compute the rows of the points of one scale, proton and neutron weighted."""
    for first in range(0, members.size, _POINTS):
        some = members[first : first + _POINTS]
        rows = flavour_rows(pulled_back(problem.rows(some, nf), blocks, light), tuple(flavours))
        matrix[some] = with_target(rows, problem.points.protons[some], tuple(flavours))


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
