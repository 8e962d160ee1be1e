"""Residuals divided by their uncertainties, correlations included: the sum of squares is chi-square.

Which one when: `Cholesky` for any covariance; `LowRank` where a few common sources sit on independent errors,
its cost growing with data times sources instead of data squared. Both are factorised once.
"""

from __future__ import annotations

from functools import cached_property
from typing import Protocol

import numpy as np

from .._check import Floats, show
from .._measured.correlated import heaviest
from ..errors import InputError

__all__ = ["Cholesky", "LowRank", "Whitening"]


class Whitening(Protocol):
    """A matrix W with W^T W = C^-1, applied to the first axis."""

    def apply(self, array: Floats) -> Floats:
        """Return W times `array`, (datum, ...)."""
        ...

    def transposed(self, array: Floats) -> Floats:
        """Return W^T times `array`, (datum, ...)."""
        ...

    @property
    def log_determinant(self) -> float:
        """The logarithm of det C."""
        ...


class Cholesky:
    """W = L^-1 of C = L L^T, with the scale of each datum taken out first.

    Parameters
    ----------
    covariance : ndarray, (datum, datum)
        Symmetric.

    Raises
    ------
    InputError
        If it is singular to rounding or not positive definite; the data are named.
    """

    def __init__(self, covariance: Floats) -> None:
        from scipy.linalg import lapack  # type: ignore[import-untyped]

        self._size = np.sqrt(np.diagonal(covariance))
        for datum in np.flatnonzero(~(self._size > 0.0))[:1]:
            raise InputError(f"covariance: datum {datum + 1} has no uncertainty")
        _refuse_lost(self._size)
        scaled = covariance / self._size[:, None] / self._size
        # Fortran order: LAPACK works in place and makes no copy of its own
        factor, failed = lapack.dpotrf(np.asfortranarray(scaled), lower=1, clean=1)
        norm = float(np.abs(scaled).sum(axis=0).max())
        condition = 0.0 if failed else float(lapack.dpocon(factor, norm, uplo="L")[0])
        if condition < scaled.shape[0] * np.finfo(float).eps:
            values, vectors = np.linalg.eigh(scaled)
            rows = heaviest(vectors[:, 0]).replace("row", "datum").replace("datums", "data")
            raise InputError(
                f"covariance: not positive definite: the smallest eigenvalue of the correlations is "
                f"{values[0]:.3g}, mostly of {rows}"
            )
        self._factor: Floats = factor

    def apply(self, array: Floats) -> Floats:
        """Return L^-1 times `array`, (datum, ...)."""
        return self._solved(_divided(array, self._size), "N")

    def transposed(self, array: Floats) -> Floats:
        """Return L^-T times `array`, (datum, ...)."""
        return _divided(self._solved(array, "T"), self._size)

    def _solved(self, array: Floats, trans: str) -> Floats:
        from scipy.linalg import solve_triangular

        flat = array.reshape(array.shape[0], -1)
        solved = solve_triangular(self._factor, flat, lower=True, trans=trans, check_finite=False)
        return np.ascontiguousarray(solved).reshape(array.shape)

    @cached_property
    def log_determinant(self) -> float:
        """The logarithm of det C."""
        return float(2.0 * (np.log(np.diagonal(self._factor)) + np.log(self._size)).sum())


class LowRank:
    """W = (1 + B B^T)^(-1/2) sigma^-1 with B = shifts/sigma, for C = sigma^2 + shifts shifts^T.

    The root is symmetric: with the singular values B = Q S P^T it is 1 - Q (1 - 1/sqrt(1 + S^2)) Q^T. That
    its square is what remains when nuisance parameters of unit Gaussian penalty are minimised away is the
    matrix identity of Woodbury (W. Woodbury, Inverting modified matrices, Princeton 1950).

    Parameters
    ----------
    sigma : ndarray, (datum,)
    shifts : ndarray, (datum, source)

    Raises
    ------
    InputError
        If a datum has no error of its own.
    """

    def __init__(self, sigma: Floats, shifts: Floats) -> None:
        for datum in np.flatnonzero(~(sigma > 0.0))[:1]:
            what = 'has no uncertainty of its own: use form = "covariance"'
            raise InputError(f"nuisance: datum {datum + 1} {what}")
        _refuse_lost(sigma)
        self._sigma = sigma
        self._left, self._values, self._right = np.linalg.svd(shifts / sigma[:, None], full_matrices=False)
        # 1 - 1/sqrt(1 + S^2) without cancellation at small S
        root = np.sqrt(1.0 + self._values**2)
        self._less: Floats = self._values**2 / (root * (1.0 + root))

    def apply(self, array: Floats) -> Floats:
        """Return W times `array`, (datum, ...)."""
        return self._root(_divided(array, self._sigma))

    def transposed(self, array: Floats) -> Floats:
        """Return W^T times `array`, (datum, ...)."""
        return _divided(self._root(array), self._sigma)

    def _root(self, array: Floats) -> Floats:
        flat = array.reshape(array.shape[0], -1)
        result: Floats = flat - self._left @ (self._less[:, None] * (self._left.T @ flat))
        return result.reshape(array.shape)

    @cached_property
    def log_determinant(self) -> float:
        """The logarithm of det C."""
        return float(2.0 * np.log(self._sigma).sum() + np.log1p(self._values**2).sum())


def _refuse_lost(size: Floats) -> None:
    """Refuse uncertainties whose squares have overflowed or lost digits."""
    with np.errstate(over="ignore", under="ignore"):
        square = size**2
    for datum in np.flatnonzero(~np.isfinite(square) | (square < np.finfo(float).tiny))[:1]:
        what = "its square is no float of full precision; choose another unit"
        raise InputError(f"uncertainty {show(size[datum])} of datum {datum + 1}: {what}")


def _divided(array: Floats, size: Floats) -> Floats:
    """Divide along the first axis."""
    return array / size.reshape(-1, *(1,) * (array.ndim - 1))
