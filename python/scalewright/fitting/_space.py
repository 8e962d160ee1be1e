"""The space that predictions fill: residuals of thousands of data as a hundred or two numbers.

Densities are smooth, and so are predictions: whitened, they lie in a space of far fewer dimensions than data
or nodes. In an orthogonal basis of it, found once, each step of a fit is small, and what of the data lies
outside, whatever the densities are, is one constant residual. Sums of squares are what they were.

Products here avoid the threaded matrix library: between processes its threads fight for the processors (a
fit of 16 parameters to 1,000 data took 30 s instead of 1 s on two busy ones), and their number changes bits.
Many dot products, each too short for threads, take twice the time of the library at its best.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from .._check import Floats

if TYPE_CHECKING:
    from ._result import FitResult

__all__ = ["Space", "product", "whitened_derivative"]

#: Directions in which predictions are below this part of the largest are rounding of the largest.
_SMALL = 1e-15
#: More directions than this part of the data are not worth the change.
_WORTH = 0.7


@dataclass(frozen=True, eq=False)
class Space:
    """An orthogonal basis of all predictions, and what is seen in it.

    Parameters
    ----------
    basis : ndarray, (direction, datum)
    maps : list of ndarray, (direction + 1, flavour x node)
        Whitened maps; the last row, that of what lies outside, is 0.
    offset : ndarray, (datum,)
        Whitened residuals of no densities at all.
    """

    basis: Floats
    maps: list[Floats]
    offset: Floats

    @classmethod
    def of(cls, maps: list[Floats], offset: Floats) -> Space | None:
        """Find it by a pivoted decomposition, or return None where it is hardly smaller than the data."""
        from scipy.linalg import qr  # type: ignore[import-untyped]

        whole = np.concatenate(maps, axis=1)
        basis, upper, order = qr(whole, mode="economic", pivoting=True, check_finite=False)
        size = abs(np.diagonal(upper))
        rank = int((size > _SMALL * size[0]).sum())
        if rank > _WORTH * len(offset):
            return None
        inside = np.zeros((rank + 1, whole.shape[1]))
        inside[:rank, order] = upper[:rank]
        width = maps[0].shape[1]
        parts = [np.ascontiguousarray(inside[:, k * width : (k + 1) * width]) for k in range(len(maps))]
        return cls(np.ascontiguousarray(basis[:, :rank].T), parts, offset)

    def projected(self, shift: Floats | None) -> Floats:
        """Return residuals of no densities in the basis, then the length of what lies outside."""
        vector = self.offset if shift is None else self.offset + shift
        inside = product(self.basis, vector)
        outside = vector - np.einsum("rd,r->d", self.basis, inside)
        return np.append(inside, np.linalg.norm(outside))


def product(matrix: Floats, along: Floats) -> Floats:
    """Return matrix times a vector (k,), (row,); or times the transpose of vectors (p, k), (row, p)."""
    if along.ndim == 1:
        return np.asarray(np.vecdot(matrix, along))
    return np.asarray(np.vecdot(matrix[:, None, :], along))


def whitened_derivative(result: FitResult) -> Floats:
    """Return the derivative of whitened predictions at the end of a fit, (datum, parameter)."""
    problem = result._problem
    inside = -result._solution.jacobian[: problem.rows]
    if problem._space is None:
        return inside
    basis = problem._space.basis  # one row more is what no density can move: 0
    return np.asarray(basis.T @ inside[: len(basis)])
