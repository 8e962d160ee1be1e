"""Leaving data out of a fit in closed form; the formulas stand in `influence`."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .._check import Floats, Integers
from ._result import FitResult
from ._space import whitened_derivative
from .chi_square import ChiSquare

__all__ = ["Deletion"]

#: A direction of which the data that are left out hold all but this part is not determined without them.
_LEFT = 1e-6
#: Part of a quantity that may lie along such directions.
_ALONG = 1e-6


@dataclass(frozen=True, eq=False)
class Deletion:
    """What is needed to leave data out.

    Parameters
    ----------
    whitening : ndarray, (residual, datum)
        W with W^T W = P, the inverse of the covariance of the data.
    along : ndarray, (datum, parameter)
        P D: weighted derivatives of the predictions.
    pull : ndarray, (datum,)
        P r: weighted residuals.
    root : ndarray, (parameter, direction)
        R with R R^T = V, the covariance of the parameters of the linear fit.
    covariance : ndarray, (datum, datum)
    """

    whitening: Floats
    along: Floats
    pull: Floats
    root: Floats
    covariance: Floats

    @classmethod
    def of(cls, result: FitResult, chi2: ChiSquare) -> Deletion:
        """Collect it from a fit that has a covariance."""
        back = chi2._whitening.transposed
        assert result.linear_covariance is not None
        return cls(
            chi2.whiten(np.eye(result.data)),
            back(whitened_derivative(result)),
            back(chi2.residuals(result.prediction)),
            _root(result.linear_covariance / result.delta_chi2),
            chi2.covariance,
        )

    def variance(self, gradient: Floats) -> Floats:
        """Return g^T V g for each column of derivatives (parameter, k), (k,)."""
        return np.asarray(((self.root.T @ gradient) ** 2).sum(axis=0))

    def without(self, part: Integers, gradient: Floats) -> tuple[Floats, Floats]:
        """Return change and variance of quantities, (k,) each, when some data are left out."""
        from scipy.linalg import solve_triangular  # type: ignore[import-untyped]

        columns = self.whitening[:, part]
        size = np.linalg.norm(columns, axis=0)
        factor = np.linalg.cholesky(columns.T @ columns / np.outer(size, size))  # of P_SS, scaled
        both = np.column_stack([self.along[part] @ self.root, self.pull[part]]) / size[:, None]
        solved = solve_triangular(factor, both, lower=True, check_finite=False)
        scaled, pull = solved[:, :-1], solved[:, -1]
        # in axes along which V is 1; what the rest still knows of each is 1 - held
        held, vectors = np.linalg.eigh(scaled.T @ scaled)
        rest, axes = 1.0 - held, vectors.T
        along, push = axes @ (self.root.T @ gradient), axes @ (scaled.T @ pull)
        return _moved(along, push, rest)

    def each(self, gradient: Floats) -> tuple[Floats, Floats]:
        """Return change and variance of quantities, (datum, k) each, when one datum is left out."""
        weight = (self.whitening**2).sum(axis=0)  # P_ii
        rows = self.along @ self.root
        leverage = (rows**2).sum(axis=1)
        rest = weight - leverage
        known = rest > _LEFT * weight
        across = rows @ (self.root.T @ gradient)  # a^T V g
        safe = np.where(known, rest, 1.0)[:, None]
        change, variance = -across * self.pull[:, None] / safe, self.variance(gradient) + across**2 / safe
        # a datum that holds nearly all of a direction, and does not move this quantity, is still no loss
        bound = np.sqrt(leverage[:, None] * self.variance(gradient))
        lost = ~known[:, None] & (abs(across) > _ALONG * bound)
        return np.where(lost, np.nan, change), np.where(lost, np.inf, variance)

    def shares(self, gradient: Floats) -> Floats:
        """Return the part of the variance of quantities that each datum brings in, (datum, k).

        Quantities are sums of weights u times data, u = P D V g; of their variance u^T C u datum i brings in
        u_i (C u)_i.
        """
        weights = self.along @ (self.root @ (self.root.T @ gradient))
        total = self.variance(gradient)
        return np.asarray(weights * (self.covariance @ weights) / np.where(total > 0.0, total, 1.0))


def _moved(along: Floats, push: Floats, rest: Floats) -> tuple[Floats, Floats]:
    """Return change and variance from what is left along each axis."""
    known = rest > _LEFT
    size = np.linalg.norm(along, axis=0)
    lost = (abs(along[~known]) > _ALONG * size).any(axis=0)
    kept = along[known] / rest[known, None]
    change, variance = -push[known] @ kept, (along[known] * kept).sum(axis=0)
    return np.where(lost, np.nan, change), np.where(lost, np.inf, variance)


def _root(covariance: Floats) -> Floats:
    """Return R with R R^T = covariance; parameters on a bound, without variance, have rows of 0."""
    size = np.sqrt(np.diagonal(covariance))
    size = np.where(size > 0.0, size, 1.0)
    values, vectors = np.linalg.eigh(covariance / np.outer(size, size))
    return np.asarray(size[:, None] * vectors * np.sqrt(np.maximum(values, 0.0)))
