"""From rows to data: sums, averages, ratios and asymmetries of rows, with exact derivative.

A row is a point at which the theory predicts one number; a datum is a number that was measured. Each datum is
(sum_r a_r row_r) / (sum_r b_r row_r), the denominator being 1 where none is given.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats, Integers
from ..errors import InputError

__all__ = ["Combination", "Weights"]


@dataclass(frozen=True, eq=False)
class Weights:
    """A sparse matrix (datum, row): weights of rows in sums, in the order of the data.

    Parameters
    ----------
    datum, row : ndarray of int64, (entry,)
        `datum` does not fall.
    weight : ndarray, (entry,)
    """

    datum: Integers
    row: Integers
    weight: Floats

    @classmethod
    def of(cls, sums: Sequence[Sequence[tuple[int, float]]]) -> Weights:
        """Make it of one list of (row, weight) for each datum."""
        entries = [(d, row, weight) for d, terms in enumerate(sums) for row, weight in terms]
        columns = list(zip(*entries, strict=True)) or [(), (), ()]
        return cls(
            np.asarray(columns[0], np.int64), np.asarray(columns[1], np.int64), np.asarray(columns[2], float)
        )

    def lists(self, data: int, start: int) -> list[list[tuple[int, float]]]:
        """Return what `of` takes, rows counted from `start`."""
        result: list[list[tuple[int, float]]] = [[] for _ in range(data)]
        for datum, row, weight in zip(
            self.datum.tolist(), self.row.tolist(), self.weight.tolist(), strict=True
        ):
            result[datum].append((row + start, weight))
        return result

    def sums(self, rows: Floats, data: int) -> Floats:
        """Return (..., datum) of (..., row); a datum without entry is 0."""
        result = np.zeros((*rows.shape[:-1], data))
        if self.datum.size:
            starts = np.flatnonzero(np.diff(self.datum, prepend=-1))
            result[..., self.datum[starts]] = np.add.reduceat(
                rows[..., self.row] * self.weight, starts, axis=-1
            )
        return result


class Combination:
    """The map from rows to data.

    Parameters
    ----------
    numerator : sequence of sequences of (int, float)
        For each datum the rows in the numerator and their weights.
    denominator : sequence of sequences of (int, float)
        For each datum those in the denominator; an empty one stands for 1.
    rows : int
        Number of rows.

    Examples
    --------
    >>> asymmetry = Combination([[(0, 1.0), (1, -1.0)]], [[(0, 1.0), (1, 1.0)]], rows=2)
    >>> asymmetry.predict([3.0, 1.0])
    array([0.5])
    >>> asymmetry.derivative([3.0, 1.0])
    array([[ 0.125, -0.375]])
    """

    def __init__(
        self,
        numerator: Sequence[Sequence[tuple[int, float]]],
        denominator: Sequence[Sequence[tuple[int, float]]],
        rows: int,
    ) -> None:
        self.rows, self.data = rows, len(numerator)
        self.numerator, self.denominator = Weights.of(numerator), Weights.of(denominator)
        self._divided = np.asarray([bool(terms) for terms in denominator], dtype=bool)

    @classmethod
    def join(cls, parts: Sequence[Combination]) -> Combination:
        """Put the data of several tables one after another."""
        if len(parts) == 1:
            return parts[0]
        tops: list[list[tuple[int, float]]] = []
        bottoms: list[list[tuple[int, float]]] = []
        start = 0
        for part in parts:
            tops += part.numerator.lists(part.data, start)
            bottoms += part.denominator.lists(part.data, start)
            start += part.rows
        return cls(tops, bottoms, start)

    @property
    def is_linear(self) -> bool:
        """Whether no datum is a ratio."""
        return not bool(self._divided.any())

    @cached_property
    def is_identity(self) -> bool:
        """Whether each datum is the row of the same number."""
        plain = self.rows == self.data and self.is_linear and self.numerator.row.size == self.rows
        same = np.arange(self.rows)
        return bool(
            plain
            and (self.numerator.row == same).all()
            and (self.numerator.datum == same).all()
            and (self.numerator.weight == 1.0).all()
        )

    def predict(self, rows: ArrayLike) -> Floats:
        """Combine predicted rows into data.

        Parameters
        ----------
        rows : array_like, (..., row)

        Returns
        -------
        ndarray, (..., datum)

        Raises
        ------
        InputError
            If the last axis is not that of the rows, or a denominator vanishes.
        """
        values = self._checked(rows)
        if self.is_identity:
            return values
        top = self.numerator.sums(values, self.data)
        return top if self.is_linear else top / self._bottom(values)

    def tangent(self, rows: ArrayLike, directions: ArrayLike) -> Floats:
        """Carry derivatives of the rows over to the data, exactly.

        Parameters
        ----------
        rows : array_like, (row,)
            Where the derivative is taken.
        directions : array_like, (row, ...)
            Derivatives of each row.

        Returns
        -------
        ndarray, (datum, ...)

        Raises
        ------
        InputError
            If an axis is not that of the rows, or a denominator vanishes.
        """
        values, along = self._checked(rows), _check.real_array("directions", directions)
        if values.ndim != 1 or along.ndim == 0 or along.shape[0] != self.rows:
            raise InputError(
                f"rows of shape {values.shape}, directions of shape {along.shape}: "
                f"both must begin with the {self.rows} rows, and rows have no other axis"
            )
        if self.is_identity:
            return along
        flat = along.reshape(self.rows, -1).T
        top = self.numerator.sums(flat, self.data)
        if not self.is_linear:
            bottom = self._bottom(values)
            ratio = self.numerator.sums(values, self.data) / bottom
            top = (top - ratio * self.denominator.sums(flat, self.data)) / bottom
        return np.ascontiguousarray(top.T).reshape(self.data, *along.shape[1:])

    def derivative(self, rows: ArrayLike) -> Floats:
        """Return d datum/d row, (datum, row), at `rows`, (row,)."""
        return self.tangent(rows, np.eye(self.rows))

    def _checked(self, rows: ArrayLike) -> Floats:
        values = _check.real_array("rows", rows)
        if values.ndim == 0 or values.shape[-1] != self.rows:
            _check.refuse("rows", values, f"the last axis must have {self.rows} rows")
        return values

    def _bottom(self, values: Floats) -> Floats:
        """Return the denominators, 1 where there is none."""
        bottom = np.where(self._divided, self.denominator.sums(values, self.data), 1.0)
        _check.refuse_where("denominator", bottom, bottom == 0.0, "the denominator of a datum must not be 0")
        return bottom
