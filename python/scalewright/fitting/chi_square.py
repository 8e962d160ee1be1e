"""How far a prediction is from the data: chi-square with correlated uncertainties, pulls, best-fit shifts.

Two forms of one number. "covariance": r^T C^-1 r with r = value - prediction. "nuisance": the minimum over b
of sum_i ((r_i - sum_k shifts_ik b_k)/sigma_i)^2 + sum_k b_k^2, one b for each common source. The second costs
data times sources instead of data squared, and needs an error of its own for each datum.

The first loses digits where common errors are far above those a datum has for itself: with 40 data and three
sources it was off by 4e-12 at a ratio of 100, 8e-10 at 1,000 and 5e-8 at 10,000, against 50 digits; the
second was exact to rounding at all of them.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats
from ..errors import InputError
from ..measurements import Measurements
from ._whitening import Cholesky, LowRank, Whitening

__all__ = ["ChiSquare", "TablePart"]


@dataclass(frozen=True)
class TablePart:
    """What one table contributes.

    Parameters
    ----------
    title : str
    data : int
        How many data it has.
    alone : float
        Chi-square of the table by itself, nothing known of the others.
    share : float
        Its part of the total: the sum over its data of r_i (C^-1 r)_i. Shares add up to the total; where
        tables have common sources, one of them may be negative.
    """

    title: str
    data: int
    alone: float
    share: float


class ChiSquare:
    """Measured against predicted, factorised once.

    Parameters
    ----------
    measurements : Measurements
        The data.
    form : {"covariance", "nuisance"}
        The same number in two ways; see the module.
    reference : array_like, (datum,), optional
        What multiplicative errors multiply while this object lives: the data by default, or an earlier
        prediction, as R. Ball et al., arXiv:0912.2276; `reference.settle_reference` iterates.
    theory : array_like, (datum, datum), optional
        Covariance of the theory, added to that of the data (R. Abdul Khalek et al., arXiv:1906.10698).

    Raises
    ------
    InputError
        If a covariance is not positive definite (the data are named), a datum has no error of its own in the
        form "nuisance", or a shape does not fit.

    Examples
    --------
    >>> from scalewright import Measurements
    >>> table = Measurements.from_columns(
    ...     {"title": "Run 1", "measures": "F2", "exchange": "photon", "uncertainty": [
    ...         {"column": "stat", "given_in": "value", "scales_with": "nothing"},
    ...         {"name": "offset", "size": 0.1, "given_in": "value", "scales_with": "nothing",
    ...          "correlated": True}]},
    ...     {"x": [0.1, 0.2], "q2": [10.0, 10.0], "value": [1.1, 0.6], "stat": [0.1, 0.1]})
    >>> chi2 = ChiSquare(table)
    >>> round(chi2.value([1.0, 0.5]), 12)
    0.666666666667
    >>> chi2.shifts([1.0, 0.5]).round(6)
    array([0.666667])
    >>> chi2.names_of_sources
    ('Run 1: offset',)
    """

    def __init__(
        self,
        measurements: Measurements,
        form: str = "covariance",
        reference: ArrayLike | None = None,
        theory: ArrayLike | None = None,
    ) -> None:
        if not isinstance(measurements, Measurements):
            _check.refuse("measurements", measurements, "measurements must be Measurements")
        self.form = _check.choice("form", form, ("covariance", "nuisance"))
        self.measurements = measurements
        self.reference = measurements.reference(reference)
        self._theory = _theory(theory, len(measurements))
        self._whitening = self._factorised()

    @cached_property
    def _nuisance(self) -> tuple[Floats, Floats]:
        """Independent errors and shifts by sources, made when asked for: a matrix takes an eigensystem."""
        return self.measurements.nuisance(self.reference)

    def _factorised(self) -> Whitening:
        if self.form == "covariance":
            return Cholesky(self.covariance)
        sigma, shifts = self._nuisance
        if self._theory is not None:
            values, vectors = np.linalg.eigh(self._theory)
            shifts = np.concatenate([shifts, vectors * np.sqrt(np.clip(values, 0.0, None))], axis=1)
        return LowRank(sigma, shifts)

    @property
    def covariance(self) -> Floats:
        """Covariance in force, (datum, datum): data at the reference, and theory."""
        measured = self.measurements.covariance(self.reference)
        return measured if self._theory is None else measured + self._theory

    @property
    def names_of_sources(self) -> tuple[str, ...]:
        """Names of the nuisance parameters, in the order of `shifts`."""
        return self.measurements.names_of_sources

    @property
    def log_determinant(self) -> float:
        """Logarithm of the determinant of the covariance in force."""
        return self._whitening.log_determinant

    def value(self, prediction: ArrayLike) -> float | Floats:
        """Chi-square of a prediction.

        Parameters
        ----------
        prediction : array_like, (..., datum)

        Returns
        -------
        float or ndarray, (...)

        Raises
        ------
        InputError
            If the last axis is not that of the data, or a number is not finite.
        """
        residuals = self.residuals(prediction)
        if residuals.ndim == 1:
            return float(residuals @ residuals)
        values: Floats = np.einsum("...i,...i->...", residuals, residuals)
        return values

    def residuals(self, prediction: ArrayLike) -> Floats:
        """Return whitened residuals, whose sum of squares is chi-square.

        Parameters
        ----------
        prediction : array_like, (..., datum)

        Returns
        -------
        ndarray, (..., datum)
            W (value - prediction); its derivative is that of the prediction through -`whiten`.

        Raises
        ------
        InputError
            As for `value`.
        """
        return self._moved(self._difference(prediction), self._whitening.apply)

    def whiten(self, matrix: ArrayLike) -> Floats:
        """Divide by the uncertainties along the axis of the data, correlations included.

        Parameters
        ----------
        matrix : array_like, (datum, ...)
            Derivatives of predictions, or a map with the data as its first axis.

        Returns
        -------
        ndarray, (datum, ...)
            W times `matrix`, W^T W being the inverse of the covariance.

        Raises
        ------
        InputError
            If the first axis is not that of the data.
        """
        array = _check.real_array("matrix", matrix)
        if array.ndim == 0 or array.shape[0] != len(self.measurements):
            allowed = f"the first axis must have {len(self.measurements)} data"
            _check.refuse("matrix", array, allowed)
        return self._whitening.apply(array)

    def pulls(self, prediction: ArrayLike, *, shifted: bool = False) -> Floats:
        """Differences in units of their uncertainty.

        Parameters
        ----------
        prediction : array_like, (..., datum)
        shifted : bool
            False: (value - prediction) over the total standard deviation of the datum. True: the common
            sources, and the theory within its covariance, are first moved to their best fit, and what is left
            is divided by the error the datum has for itself; nan where it has none.

        Returns
        -------
        ndarray, (..., datum)

        Raises
        ------
        InputError
            As for `value`.
        """
        difference = self._difference(prediction)
        if not isinstance(shifted, bool):
            _check.refuse("shifted", shifted, "shifted must be True or False")
        if not shifted:
            return difference / np.sqrt(np.diagonal(self.covariance))
        sigma, shifts = self._nuisance
        weighted = self._weighted(prediction)
        left = difference - (weighted @ shifts) @ shifts.T
        if self._theory is not None:
            left = left - weighted @ self._theory
        return left / np.where(sigma > 0.0, sigma, np.nan)

    def shifts(self, prediction: ArrayLike) -> Floats:
        """Best fit of each nuisance parameter.

        Parameters
        ----------
        prediction : array_like, (..., datum)

        Returns
        -------
        ndarray, (..., source)
            In standard deviations; value - prediction is described by ``shifts @ nuisance()[1].T`` best.

        Raises
        ------
        InputError
            As for `value`.
        """
        return self._weighted(prediction) @ self._nuisance[1]

    def per_table(self, prediction: ArrayLike) -> tuple[TablePart, ...]:
        """Chi-square of each table.

        Parameters
        ----------
        prediction : array_like, (datum,)

        Returns
        -------
        tuple of TablePart

        Raises
        ------
        InputError
            As for `value`.
        """
        difference = self._difference(prediction)
        if difference.ndim != 1:
            _check.refuse("prediction", difference, "prediction must be one, (datum,)")
        shares = difference * self._weighted(prediction)
        covariance, owner = self.covariance, self.measurements.table_of
        parts = []
        for number, title in enumerate(self.measurements.tables):
            mine = owner == number
            alone = Cholesky(covariance[np.ix_(mine, mine)]).apply(difference[mine])
            parts.append(TablePart(title, int(mine.sum()), float(alone @ alone), float(shares[mine].sum())))
        return tuple(parts)

    def with_reference(self, reference: ArrayLike) -> ChiSquare:
        """Return the same with another reference for multiplicative errors.

        Parameters
        ----------
        reference : array_like, (datum,)
            An earlier prediction.

        Returns
        -------
        ChiSquare
        """
        return ChiSquare(self.measurements, self.form, reference, self._theory)

    def minus_two_log_likelihood(self, prediction: ArrayLike) -> float:
        """Return chi-square with the prediction itself as reference, plus the log-determinant.

        Parameters
        ----------
        prediction : array_like, (datum,)

        Returns
        -------
        float
            r^T C(t)^-1 r + ln det C(t): without the determinant a fit would be pulled to predictions that
            make their own errors large. Factorises anew at each call.

        Raises
        ------
        InputError
            As for `value`.
        """
        if self._difference(prediction).ndim != 1:
            _check.refuse("prediction", prediction, "prediction must be one, (datum,)")
        current = self.with_reference(prediction)
        return float(np.asarray(current.value(prediction))) + current.log_determinant

    def __repr__(self) -> str:
        theory = "" if self._theory is None else ", with theory covariance"
        return f"ChiSquare({self.measurements!r}, {self.form!r}{theory})"

    def _difference(self, prediction: ArrayLike) -> Floats:
        array = _check.real_array("prediction", prediction)
        if array.ndim == 0 or array.shape[-1] != len(self.measurements):
            allowed = f"the last axis must have {len(self.measurements)} data"
            _check.refuse("prediction", array, allowed)
        return self.measurements.value - array

    def _weighted(self, prediction: ArrayLike) -> Floats:
        """Return C^-1 r, (..., datum)."""
        return self._moved(self.residuals(prediction), self._whitening.transposed)

    @staticmethod
    def _moved(array: Floats, act: Callable[[Floats], Floats]) -> Floats:
        """Let `act`, which works on the first axis, work on the last."""
        if array.ndim == 1:
            return act(array)
        return np.ascontiguousarray(np.moveaxis(act(np.ascontiguousarray(np.moveaxis(array, -1, 0))), 0, -1))


def _theory(theory: ArrayLike | None, data: int) -> Floats | None:
    """Return a checked covariance of the theory."""
    if theory is None:
        return None
    matrix = _check.real_array("theory", theory, shape=(data, data))
    size = np.sqrt(np.abs(np.diagonal(matrix)))
    uneven = np.abs(matrix - matrix.T) > 1e-9 * np.outer(size, size)  # more than rounding of a product
    _check.refuse_where("theory", matrix, uneven, "theory must be symmetric")
    matrix = 0.5 * (matrix + matrix.T)
    values = np.linalg.eigvalsh(matrix)
    if data and values[0] < -1e-10 * max(float(values[-1]), 0.0):  # far above rounding, n eps
        raise InputError(f"theory: not positive semi-definite: the smallest eigenvalue is {values[0]:.3g}")
    return matrix
