"""How far a prediction may be off numerically: the same map on a finer grid, and what the input does not say.

The input is known by its nodal values alone, that is as polynomials. What the map makes wrongly of these is
seen by a map on a finer grid of the same panels, with tight steps in scale, which holds the same polynomials
without error. What lies beyond them is not known: the next Chebyshev coefficient of each panel is taken to
go on as the last four fall. At the nodes T_(n+1) looks like T_(n-1), so that it counts by what the finer map
says of their difference. Flavours and panels are added in quadrature, since they cancel in no reliable way.

The two factors were found by trial on 2,000 cases: inputs x^a (1-x)^b (1 + c sqrt x + d x) for each flavour
(a from -0.4 to 0.8, b from 1.5 to 10), points with x from 1e-5 to 0.85 and Q^2 from 2 to 4e4 GeV^2, F2, FL,
xF3 and reduced cross sections at NNLO. How they fare on 2,000 others `benches/quoted_error.py` measures.
"""

from __future__ import annotations

from functools import lru_cache
from typing import NamedTuple

import numpy as np
from numpy.polynomial import chebyshev

from .._check import Floats
from ..errors import InputError
from ..grid import ChebyshevGrid

__all__ = ["TOLERANCE", "RowErrors", "finer_grid", "row_errors"]

#: Relative error of the steps in scale of the finer map.
TOLERANCE = 1e-12
#: Times the difference from the finer map, and times the sum over coefficients beyond the nodes: see above.
_SEEN, _BEYOND = 2.0, 1.5
#: Rounding of products of matrices, relative to the sum of absolute terms: of the size of the differences
#: seen between grids where nothing else is left (2e-13, measured).
_ROUNDING = 2e-13
#: Degree of a panel on the finer grid, relative to that on the grid; a panel beyond what a grid allows is
#: halved instead.
_FINER = 1.5
_LARGEST_DEGREE, _MOST_NODES = 64, 400
#: Coefficients beyond the nodes of a panel that are looked at, and those before from which they are judged.
_NEXT, _LAST = 2, 4


class RowErrors(NamedTuple):
    """What the errors of rows are computed from.

    Attributes
    ----------
    difference : ndarray, (row, flavour, node)
        The finer map on the polynomials that nodal values are, less the map.
    beyond : ndarray, (row, flavour, panel)
        Largest effect of a next Chebyshev coefficient of one.
    """

    difference: Floats
    beyond: Floats

    @classmethod
    def of(cls, grid: ChebyshevGrid, matrix: Floats, finer: Floats) -> RowErrors:
        """Compare two maps.

        Parameters
        ----------
        grid : ChebyshevGrid
        matrix : ndarray, (row, flavour, node)
        finer : ndarray, (row, flavour, node of the finer grid)
            On `finer_grid(grid)`.
        """
        effects = np.abs(finer @ _beyond(grid).T)
        panels = grid.degrees.size
        beyond = effects.reshape(*effects.shape[:2], panels, _NEXT).max(axis=3)
        return cls(finer @ _prolonged(grid) - matrix, beyond)


def row_errors(grid: ChebyshevGrid, matrix: Floats, errors: RowErrors, values: Floats) -> Floats:
    """Return estimated numerical errors of rows, (replica, row).

    Parameters
    ----------
    grid : ChebyshevGrid
    matrix : ndarray, (row, flavour, node)
    errors : RowErrors
    values : ndarray, (replica, flavour, node)
        The input.
    """
    rows = matrix.shape[0]

    def flat(array: Floats, count: int) -> Floats:
        return array.reshape(count, -1)

    seen = np.abs(flat(values, len(values)) @ flat(errors.difference, rows).T)
    size = flat(np.abs(values), len(values)) @ flat(np.abs(matrix), rows).T
    unknown = _next_coefficients(grid, values)
    squares = flat(unknown**2, len(values)) @ flat(errors.beyond**2, rows).T
    return np.asarray(_SEEN * seen + _BEYOND * np.sqrt(squares) + _ROUNDING * size)


@lru_cache(maxsize=8)
def finer_grid(grid: ChebyshevGrid) -> ChebyshevGrid:
    """Return a grid whose panels hold every polynomial of this one, and more.

    Raises
    ------
    InputError
        If it would have more nodes than a grid may.
    """
    edges, degrees = [0.0], []
    for degree, low, high in zip(grid.degrees.tolist(), grid.edges[:-1], grid.edges[1:], strict=True):
        raised = int(np.ceil(_FINER * degree))
        if raised > _LARGEST_DEGREE:
            edges += [0.5 * (low + high), high]
            degrees += [degree, degree]
        else:
            edges.append(high)
            degrees.append(raised)
    if sum(degrees) > _MOST_NODES:
        raise InputError(
            f"the numerical error is judged on a grid with {sum(degrees)} nodes: there may be {_MOST_NODES}; "
            "choose a grid with fewer"
        )
    return ChebyshevGrid.from_panels(edges, degrees)


@lru_cache(maxsize=8)
def _prolonged(grid: ChebyshevGrid) -> Floats:
    """Return the matrix (node of the finer grid, node) from nodal values to those on the finer grid."""
    return grid.cardinals(np.maximum(finer_grid(grid).x, grid.x_min))


@lru_cache(maxsize=8)
def _beyond(grid: ChebyshevGrid) -> Floats:
    """Return T_(n+k) less what it looks like at the nodes, (panel and k, node of the finer grid)."""
    u = finer_grid(grid).u
    made = []
    for degree, low, high in zip(grid.degrees.tolist(), grid.edges[:-1], grid.edges[1:], strict=True):
        inside = (u > low) & (u < high)
        angle = np.arccos(np.clip((2.0 * u - low - high) / (high - low), -1.0, 1.0))
        made += [
            np.where(inside, np.cos((degree + k) * angle) - np.cos((degree - k) * angle), 0.0)
            for k in range(1, _NEXT + 1)
        ]
    return np.array(made)


@lru_cache(maxsize=8)
def _last_coefficients(grid: ChebyshevGrid) -> Floats:
    """Return the matrix (panel, k, node) to the last Chebyshev coefficients of each panel."""
    n = grid.nodes
    u = np.concatenate([[0.0], grid.u])
    unit = np.concatenate([np.zeros((1, n)), np.eye(n)])  # the node x = 1 is not held: 0 there
    made, first = np.zeros((grid.degrees.size, _LAST, n)), 0
    panels = zip(grid.degrees.tolist(), grid.edges[:-1], grid.edges[1:], strict=True)
    for panel, (degree, low, high) in enumerate(panels):
        own = slice(first, first + degree + 1)
        basis = chebyshev.chebvander((2.0 * u[own] - low - high) / (high - low), degree)
        last = np.linalg.solve(basis, unit[own])[-_LAST:]
        made[panel, _LAST - len(last) :] = last
        first += degree
    return made


def _next_coefficients(grid: ChebyshevGrid, values: Floats) -> Floats:
    """Return estimates of the next coefficient of each panel, (replica, flavour, panel).

    Coefficients of even and odd order may differ in size: the last two are compared with the two before.
    """
    c = np.abs(np.einsum("rfn,pkn->rfpk", values, _last_coefficients(grid), optimize=True))
    last, before = c[..., 2:].sum(axis=-1), c[..., :2].sum(axis=-1)
    fall = np.sqrt(np.minimum(1.0, last / np.where(before > 0.0, before, 1.0)))
    return np.asarray(last * np.where(before > 0.0, fall, 1.0))
