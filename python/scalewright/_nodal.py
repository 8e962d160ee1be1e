"""Functions and tables onto the nodes of a grid: the ways in to `Densities`."""

from __future__ import annotations

from collections.abc import Callable, Mapping

import numpy as np

from . import _check, _resolution, below
from ._check import Floats, show
from .below import Below
from .errors import InputError, RangeError
from .grid import ChebyshevGrid

#: Relative distance within which an x of a table is a node: tables written with 13 digits still are.
_SAME_X = 1e-12


def checked(name: str, function: Callable[..., object], *first: object) -> Callable[[Floats], Floats]:
    """Return `function` of x alone, its values checked; `name` is how messages call it.

    `first` is put before x. The function gets an x of its own, so that it may write to it.
    """

    def evaluate(x: Floats) -> Floats:
        return _check.called(name, function, *first, x.copy(), shape=x.shape)

    return evaluate


def sampled(
    grid: ChebyshevGrid, functions: Mapping[int, Callable[[Floats], Floats]]
) -> tuple[Floats, Below, Floats]:
    """Return what there is of one scale and one replica.

    Nodal values, (flavour, node); what lies below x_min; errors of interpolation, (flavour, panel).
    """
    x = np.array(grid.x)
    values = np.stack([function(x) for function in functions.values()])
    errors = _resolution.measured(grid, functions, values)
    with np.errstate(all="ignore"):  # far below the grid a function may overflow: unknown, not wrong
        return values, below.from_functions(functions, float(grid.u[-1])), errors


def joined(parts: list[Below]) -> Below:
    """Return the parts of several scales as one."""
    return Below(
        np.concatenate([part.momentum for part in parts]), np.concatenate([part.number for part in parts])
    )


def on_nodes(where: str, x: Floats, values: Floats, grid: ChebyshevGrid, interpolate: bool) -> Floats:
    """Return values at the nodes of a grid from values at falling `x`.

    Parameters
    ----------
    where : str
        What stands before each message.
    x : ndarray, (point,)
        Falling, in (0, 1].
    values : ndarray, (..., point)
        x f(x).
    grid : ChebyshevGrid
        Whose nodes are wanted.
    interpolate : bool
        Whether a natural cubic spline in ln x may serve where `x` are not the nodes.

    Returns
    -------
    ndarray, (..., node)

    Raises
    ------
    InputError
        If `x` are not the nodes and `interpolate` is false, or a value at x = 1 is not 0.
    RangeError
        If the nodes reach below the smallest `x`.
    """
    if x[0] == 1.0:
        if values[..., 0].any():
            raise InputError(f"{where}: a value at x = 1 is not 0: every density must vanish there")
        x, values = x[1:], values[..., 1:]
    if x.size == grid.nodes and bool((abs(x - grid.x) <= _SAME_X * grid.x).all()):
        return np.ascontiguousarray(values)
    if not interpolate:
        raise InputError(
            f"{where}: its {x.size} x below 1 are not the {grid.nodes} nodes of the grid: "
            "write the values at grid.x, or allow a cubic spline in ln x with interpolate=True"
        )
    if x.size < 4:
        raise InputError(f"{where}: {x.size} x below 1: a cubic spline needs at least 4")
    if x[-1] > grid.x_min * (1.0 + _SAME_X):
        raise RangeError(
            f"{where}: its smallest x is {show(x[-1])}: the grid reaches down to {show(grid.x_min)}; "
            "give a grid with a larger x_min"
        )
    return _spline(x, values, grid)


def _spline(x: Floats, values: Floats, grid: ChebyshevGrid) -> Floats:
    """Interpolate by a natural cubic spline in ln x that vanishes at x = 1."""
    from scipy.interpolate import CubicSpline  # type: ignore[import-untyped]

    u = np.concatenate([[0.0], -np.log(x)])
    padded = np.concatenate([np.zeros((*values.shape[:-1], 1)), values], axis=-1)
    spline = CubicSpline(u, padded, axis=-1, bc_type="natural")
    return np.ascontiguousarray(spline(np.minimum(grid.u, u[-1])), dtype=np.float64)
