"""Chi-square and its gradient as functions of parameters, for minimisers and samplers of your own."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats
from .._corrected.bound import Correction
from ._problem import Distance, Map, Problem, Theory
from ._shape import Shape
from ._space import product

__all__ = ["Objective"]


class Objective:
    """Chi-square of data and priors as a function of the parameters of a fit, with exact gradient.

    Parameters
    ----------
    fmap, chi2, shape, theory, priors, corrections
        As for `fit`.

    Attributes
    ----------
    names : tuple of str
        Parameters of the shape, then of corrections, then of the theory.
    start : ndarray, (parameter,)
    bounds : tuple of two ndarrays, (parameter,)

    Raises
    ------
    InputError
        If the parts do not fit each other.

    Notes
    -----
    Where data are sums of rows, whitened predictions of all data are replaced once by their coordinates in
    the space that they fill; a call then costs about as much as one product of the map with densities.

    Examples
    --------
    >>> import scalewright as sw
    >>> from types import SimpleNamespace
    >>> from scalewright.fitting.shapes import FunctionShape
    >>> grid = sw.ChebyshevGrid(x_min=1e-4)
    >>> table = sw.Measurements.from_columns(
    ...     {"title": "Run 1", "measures": "F2", "exchange": "photon", "uncertainty": [
    ...         {"column": "stat", "given_in": "value", "scales_with": "nothing"}]},
    ...     {"x": [0.1], "q2": [2.0], "value": [0.36], "stat": [0.01]})
    >>> fmap = SimpleNamespace(
    ...     matrix=4 / 9 * grid.cardinals([0.1])[:, None], flavours=(2,), grid=grid, start_q2=2.0, start_nf=3)
    >>> flat = FunctionShape(grid, [2], lambda x, p: p[0] * (1 - x), [1.0], names=["norm"])
    >>> value, gradient = Objective(fmap, sw.ChiSquare(table), flat).value_and_gradient([1.0])
    >>> round(value, 6), gradient.round(3)  # (0.4 - 0.36)^2 / 0.01^2
    (16.0, array([320.]))
    """

    def __init__(
        self,
        fmap: Map,
        chi2: Distance,
        shape: Shape,
        *,
        theory: Theory = (),
        priors: Mapping[str, tuple[float, float]] | None = None,
        corrections: Sequence[Correction] | Correction = (),
    ) -> None:
        problem = Problem(fmap, chi2, shape, theory, priors, corrections=corrections)
        self._problem = problem
        self.names, self.start, self.bounds = problem.names, problem.start, (problem.low, problem.high)
        whitened = problem._whitened
        self._back = None if whitened is None else [np.ascontiguousarray(one.T) for one in whitened]
        self._places = np.argsort(problem._order)  # of the flavours of the shape in the map

    def value(self, parameters: ArrayLike) -> float:
        """Return chi-square of data and priors.

        Parameters
        ----------
        parameters : array_like, (parameter,)

        Returns
        -------
        float
        """
        residuals = self._problem.residuals(self._given(parameters))
        return float(residuals @ residuals)

    def value_and_gradient(self, parameters: ArrayLike) -> tuple[float, Floats]:
        """Return chi-square and its derivative.

        Parameters
        ----------
        parameters : array_like, (parameter,)

        Returns
        -------
        value : float
        gradient : ndarray, (parameter,)
        """
        given, problem = self._given(parameters), self._problem
        if self._back is None or problem._whitened is None:  # ratios of rows
            residuals = problem.residuals(given)
            return float(residuals @ residuals), 2.0 * (problem.jacobian(given).T @ residuals)
        count, moved = len(problem.shape.names), problem._moved(given)
        values, pullback = problem.shape.with_pullback(given[:count])
        flat = values[problem._order].ravel()
        along = [product(one, flat) for one in problem._whitened]
        residuals, weights = problem.offset - along[0], self._back[0]
        for change, one, back in zip(moved, along[1:], self._back[1:], strict=True):
            residuals = residuals - change * one
            weights = weights + change * back if change != 0.0 else weights
        on_values = product(weights, residuals).reshape(values.shape)[self._places]
        of_theory = np.array([one @ residuals for one in along[1:]], dtype=np.float64)
        gradient = -2.0 * np.concatenate([pullback(on_values), of_theory])
        pulls = problem._pulls(given)
        np.add.at(gradient, problem._prior_place, 2.0 * pulls / problem._prior_width)
        return float(residuals @ residuals + pulls @ pulls), gradient

    def prediction(self, parameters: ArrayLike) -> Floats:
        """Return the data predicted.

        Parameters
        ----------
        parameters : array_like, (parameter,)

        Returns
        -------
        ndarray, (datum,)
        """
        return self._problem.prediction(self._given(parameters))

    def _given(self, parameters: ArrayLike) -> Floats:
        return _check.real_array("parameters", parameters, shape=(len(self.names),))

    def __repr__(self) -> str:
        """One line."""
        return f"Objective({len(self.names)} parameters, {self._problem.count} data)"
