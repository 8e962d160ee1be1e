"""What an ensemble says of a quantity: mean, deviation, intervals, correlations, with sampling errors."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats
from ..errors import InputError
from . import _statistics
from ._statistics import Estimate

__all__ = ["Statistics"]

_ONE_SIGMA = 0.6827


class Statistics:
    """Statistics of weighted replicas; the part of `Ensemble` that knows nothing of densities."""

    weights: Floats

    @property
    def replicas(self) -> int:
        """Number of replicas."""
        return self.weights.size

    def parameter(self, name: str) -> Floats:
        """Return a parameter of each replica, (replica,)."""
        raise NotImplementedError

    def mean(self, quantity: str | ArrayLike) -> Estimate:
        """Mean of a quantity.

        Parameters
        ----------
        quantity : str or array_like, (replica, ...)
            Name of a parameter, or anything computed from each replica, such as ``at(...)`` or a prediction.

        Returns
        -------
        Estimate
            Value and sampling error, the axes of the quantity without the first.

        Raises
        ------
        InputError
            If there are fewer than two replicas, or the quantity does not have one entry for each.
        """
        return _statistics.mean(self._of_each("quantity", quantity), self.weights)

    def std(self, quantity: str | ArrayLike) -> Estimate:
        """Standard deviation of a quantity.

        Parameters
        ----------
        quantity : str or array_like, (replica, ...)
            As for `mean`.

        Returns
        -------
        Estimate
        """
        return _statistics.deviation(self._of_each("quantity", quantity), self.weights)

    def interval(self, quantity: str | ArrayLike, level: float = _ONE_SIGMA) -> tuple[Estimate, Estimate]:
        """Central interval of a quantity.

        Parameters
        ----------
        quantity : str or array_like, (replica, ...)
            As for `mean`.
        level : float
            Part of the replicas inside, in (0, 1).

        Returns
        -------
        low, high : Estimate
            The sampling error is nan where replicas are too few to tell: 95 per cent need 40 of equal weight,
            68 per cent need 6.
        """
        inside = _check.real("level", level, above=0.0, below=1.0)
        values = self._of_each("quantity", quantity)
        low, high = _statistics.quantiles(values, self.weights, [0.5 * (1 + s * inside) for s in (-1, 1)])
        return low, high

    def correlation(self, one: str | ArrayLike, other: str | ArrayLike) -> Estimate:
        """Correlation of two quantities, element by element.

        Parameters
        ----------
        one, other : str or array_like, (replica, ...)
            As for `mean`; the axes behind the first are broadcast, so that ``a[:, :, None]`` and
            ``b[:, None, :]`` give a matrix.

        Returns
        -------
        Estimate
            nan where one of them does not vary.
        """
        first, second = self._of_each("one", one), self._of_each("other", other)
        most = max(first.ndim, second.ndim)
        first, second = (a.reshape(len(a), *(1,) * (most - a.ndim), *a.shape[1:]) for a in (first, second))
        try:
            np.broadcast_shapes(first.shape, second.shape)
        except ValueError:
            _check.refuse("other", second, f"its axes cannot be broadcast to {first.shape}")
        return _statistics.correlation(first, second, self.weights)

    def correlation_matrix(self, one: str | ArrayLike, other: str | ArrayLike | None = None) -> Estimate:
        """Correlation of every element of one quantity with every element of another.

        Parameters
        ----------
        one : str or array_like, (replica, ...)
            As for `mean`.
        other : str or array_like, (replica, ...), optional
            By default `one` itself.

        Returns
        -------
        Estimate
            The axes of `one`, then those of `other`; nan where an element does not vary. As
            ``correlation(a[:, :, None], b[:, None, :])``, without its memory.
        """
        first = self._of_each("one", one)
        second = first if other is None else self._of_each("other", other)
        return _statistics.correlation_matrix(first, second, self.weights)

    def _of_each(self, name: str, quantity: str | ArrayLike) -> Floats:
        """Return a checked quantity, (replica, ...)."""
        if self.replicas < 2 or self.weights.max() >= 1.0:
            raise InputError(f"{self.replicas} replica of weight: statistics need at least two")
        if isinstance(quantity, str):
            return self.parameter(quantity)
        array = _check.real_array(name, quantity)
        if array.ndim == 0 or len(array) != self.replicas:
            _check.refuse(name, array, f"the first axis must have {self.replicas} replicas")
        return array
