"""Functions of x into nodal values, and into what lies below the grid."""

from __future__ import annotations

from collections.abc import Callable, Mapping

import numpy as np

from . import _check, _resolution, below
from ._check import Floats
from .below import Below
from .grid import ChebyshevGrid


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
