"""Coefficient functions of the user as matrices on a grid."""

from __future__ import annotations

from functools import lru_cache
from typing import TypeAlias

import numpy as np

from .._check import Floats
from ..grid import ChebyshevGrid
from ..kernels import CoefficientFunction

__all__ = ["FurtherOrders", "further_matrix"]

#: Of one structure function: one entry an order, each pairs of name and function.
FurtherOrders: TypeAlias = tuple[tuple[tuple[str, CoefficientFunction], ...], ...]


@lru_cache(maxsize=64)
def further_matrix(grid: ChebyshevGrid, kernel: CoefficientFunction | None, nf: int) -> Floats:
    """Return the matrix (node, node) of a coefficient function; 0 where there is none."""
    from .. import _core

    if kernel is None:
        return np.zeros((grid.nodes, grid.nodes))
    return _core.convolution_matrix(grid.handle(), *kernel.evaluate(grid.handle().quadrature_z(), nf))
