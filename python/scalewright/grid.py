"""Where x lives: panels in u = ln(1/x) with Chebyshev nodes in each.

A density is held as its values x f(x) at the nodes, in the order of growing u, so that x falls from near 1
to `x_min`. The node x = 1 is not held: every density vanishes there. Between the nodes of a panel a density
is the polynomial in u through them; the weights and the quadrature are the compiled core's.
"""

from __future__ import annotations

from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike

from . import _check
from ._check import Floats, Integers
from ._display import brief, count, screen, table

if TYPE_CHECKING:
    from . import _core

__all__ = ["ChebyshevGrid"]

#: x within this relative distance below x_min is taken for x_min: exp(-u) of the last edge carries an error
#: of u * 2^-53, and u is below 64.
_ROUNDING = 64 * 2.0**-53


class ChebyshevGrid:
    """Panels in u = ln(1/x) with Chebyshev nodes in each; knows how to interpolate.

    Parameters
    ----------
    x_min : float
        Smallest momentum fraction, in [1e-9, 0.01].
    resolution : {"standard", "fine"}
        For x_min = 1e-7 and x <= 0.9, interpolation of densities x^a (1-x)^b (1 + c sqrt x + d x) to about
        1e-6, or 1e-8.

    Raises
    ------
    InputError
        If `x_min` lies outside its range or `resolution` is unknown.

    Examples
    --------
    >>> grid = ChebyshevGrid(x_min=1e-5)
    >>> values = grid.x**0.5 * (1 - grid.x) ** 3
    >>> bool(abs(grid.interpolate(values, 0.25) - 0.5 * 0.75**3) < 1e-7)
    True
    """

    __slots__ = ("__dict__", "_handle")

    _handle: _core.Grid

    def __init__(self, x_min: float = 1e-7, resolution: str = "standard") -> None:
        from . import _core

        x_min = _check.real("x_min", x_min, least=1e-9, most=0.01)
        resolution = _check.choice("resolution", resolution, ("standard", "fine"))
        self._handle = _core.Grid.preset(x_min, resolution)

    @classmethod
    def from_panels(cls, edges: ArrayLike, degrees: ArrayLike) -> ChebyshevGrid:
        """Make a grid from its panels.

        Parameters
        ----------
        edges : array_like, (panel + 1,)
            In u = ln(1/x): 0 first, then rising; neighbouring panels share the node on their edge.
        degrees : array_like of int, (panel,)
            Degree of the polynomial in each panel, 2 to 64: its nodes are one more, those on its edges
            included. No more than 400 nodes in all.

        Returns
        -------
        ChebyshevGrid

        Raises
        ------
        InputError
            If the edges do not start at 0 and rise, or the degrees do not fit.

        Examples
        --------
        >>> ChebyshevGrid.from_panels([0, 1, 9], [12, 16]).nodes
        28
        """
        from . import _core

        borders = _check.real_array("edges", edges, ndim=1)
        counts = _check.whole_array("degrees", degrees, ndim=1)
        if borders.size < 2:
            _check.refuse("edges", borders, "edges must hold at least two values")
        if borders[0] != 0.0:
            _check.refuse("edges", borders[0], "the first edge must be 0 (x = 1)", index=0)
        fallen = np.concatenate([[False], np.diff(borders) <= 0.0])
        _check.refuse_where("edges", borders, fallen, "edges must rise")
        if counts.size != borders.size - 1:
            _check.refuse(
                "degrees", counts, f"there must be one degree for each of {borders.size - 1} panels"
            )
        _check.refuse_where("degrees", counts, (counts < 2) | (counts > 64), "a degree must be from 2 to 64")
        grid = cls.__new__(cls)
        grid._handle = _core.Grid(borders, counts)
        return grid

    @cached_property
    def edges(self) -> Floats:
        """Panel edges in u, (panel + 1,), read-only."""
        return _frozen(self._handle.edges)

    @cached_property
    def degrees(self) -> Integers:
        """Degrees of the panels, (panel,), read-only."""
        degrees = np.asarray(self._handle.degrees)
        degrees.flags.writeable = False
        return degrees

    @cached_property
    def u(self) -> Floats:
        """Nodes as u = ln(1/x), (node,), rising, read-only."""
        return _frozen(self._handle.u)

    @cached_property
    def x(self) -> Floats:
        """Nodes as x, (node,), falling, read-only; the last is `x_min`."""
        x = np.array(self._handle.x)
        x[-1] = self.x_min
        return _frozen(x)

    @cached_property
    def x_min(self) -> float:
        """Smallest momentum fraction.

        The last edge is ln(1/x_min), rounded; of the numbers that it may stand for this is the one with the
        fewest digits, so that a grid rebuilt from its edges has the x_min that it was made with.
        """
        last = float(self._handle.x[-1])
        for digits in range(1, 17):
            short = float(f"{last:.{digits}g}")
            if abs(short - last) <= _ROUNDING * last:
                return short
        return last

    @property
    def nodes(self) -> int:
        """Number of nodes."""
        return int(self.degrees.sum())

    def cardinals(self, x: ArrayLike) -> Floats:
        """Return the weights with which nodal values make a density at given x.

        Parameters
        ----------
        x : array_like
            In [x_min, 1], any shape.

        Returns
        -------
        ndarray, (..., node)
            F(x) = cardinals @ values; the axes of `x` first.

        Raises
        ------
        InputError
            If an `x` lies outside (0, 1].
        RangeError
            If an `x` lies below `x_min`.
        """
        points = _check.x_values("x", x, x_min=self.x_min, rounding=_ROUNDING)
        # x_min may lie an ulp below the last node of the core
        rows = self._handle.cardinals(np.maximum(np.ravel(points), self._handle.x[-1]))
        return rows.reshape((*points.shape, self.nodes))

    def interpolate(self, values: ArrayLike, x: ArrayLike) -> Floats:
        """Return densities at any x from their nodal values.

        Parameters
        ----------
        values : array_like, (..., node)
            x f(x) at the nodes.
        x : array_like
            In [x_min, 1], any shape.

        Returns
        -------
        ndarray
            The axes of `values` without the last, then those of `x`; a scalar where both have none.

        Raises
        ------
        InputError
            If `values` has another number of nodes or is not finite, or an `x` lies outside (0, 1].
        RangeError
            If an `x` lies below `x_min`.
        """
        nodal = _check.real_array("values", values)
        if nodal.ndim == 0 or nodal.shape[-1] != self.nodes:
            _check.refuse("values", nodal, f"the last axis must have the {self.nodes} nodes of the grid")
        weights = self.cardinals(x)
        result = nodal @ weights.reshape(-1, self.nodes).T
        return result.reshape(nodal.shape[:-1] + weights.shape[:-1])[()]

    def handle(self) -> _core.Grid:
        """Return the grid as the compiled core knows it."""
        return self._handle

    def _key(self) -> tuple[bytes, bytes]:
        """What makes two grids the same."""
        return self.edges.tobytes(), self.degrees.tobytes()

    def __eq__(self, other: object) -> bool:
        """Say whether panels and degrees are the same."""
        return isinstance(other, ChebyshevGrid) and self._key() == other._key()

    def __hash__(self) -> int:
        """Hash of panels and degrees."""
        return hash(self._key())

    def __reduce__(self) -> tuple[object, ...]:
        """Pickle and copy by the panels."""
        return ChebyshevGrid.from_panels, (np.array(self.edges), np.array(self.degrees))

    def __repr__(self) -> str:
        """One line."""
        panels = self.degrees.size
        return f"ChebyshevGrid({self.nodes} nodes in {count(panels, 'panel')}, x_min={brief(self.x_min)})"

    def _rows(self) -> list[tuple[str, str]]:
        x = [*np.exp(-self.edges[:-1]), self.x_min]
        panels = enumerate(self.degrees)
        return [
            ("nodes", f"{self.nodes}, x = {self.x[0]:.6g} to {brief(self.x_min)}"),
            *((f"panel {i + 1}", f"x = {x[i]:.3g} to {x[i + 1]:.3g}, degree {n}") for i, n in panels),
        ]

    def __str__(self) -> str:
        """One screen."""
        return screen("ChebyshevGrid", self._rows())

    def _repr_html_(self) -> str:
        """Return a table, for notebooks."""
        return table("ChebyshevGrid", self._rows())


def _frozen(values: Floats) -> Floats:
    """Return the array made read-only."""
    array: Floats = np.asarray(values)
    array.flags.writeable = False
    return array
