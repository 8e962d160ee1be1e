"""What can be asked of measurements: arrays by datum, rows, covariance, nuisance parameters, words."""

from __future__ import annotations

import html
from collections.abc import Sequence
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats, Integers
from ..errors import InputError
from . import model
from .combination import Combination
from .cuts import Cut
from .report import describe
from .rows import Rows
from .table import Table

__all__ = ["Questions"]


class Questions:
    """Data of one table or several; see `Measurements`, which can be read, cut and written too."""

    def __init__(self, tables: Sequence[Table], cuts: Sequence[Cut] = ()) -> None:
        for name, given, kind in (("tables", tables, Table), ("cuts", cuts, Cut)):
            if not isinstance(given, list | tuple) or not all(isinstance(part, kind) for part in given):
                _check.refuse(name, given, "measurements are made by read, from_columns or join")
        if not tables:
            _check.refuse("tables", tables, "there must be at least one table")
        titles = [table.title for table in tables]
        for place, title in enumerate(titles):
            if title in titles[:place]:
                raise InputError(f"table {title!r} stands there twice: titles must differ")
        self._tables, self.tables, self.cuts = tuple(tables), tuple(titles), tuple(cuts)
        self.value: Floats = _fixed([table.value for table in tables])
        self.x: Floats = _fixed([table.assembly.x for table in tables])
        self.q2: Floats = _fixed([table.assembly.q2 for table in tables])
        self.y: Floats = _fixed([table.assembly.y for table in tables])
        sizes = [len(table) for table in tables]
        self.table_of: Integers = np.repeat(np.arange(len(sizes), dtype=np.int64), sizes)

    @cached_property
    def rows(self) -> Rows:
        """The points at which the theory must predict."""
        return Rows.join([table.assembly.rows for table in self._tables])

    @cached_property
    def data(self) -> Combination:
        """The map from rows to data."""
        return Combination.join([table.assembly.combination for table in self._tables])

    @property
    def names_of_sources(self) -> tuple[str, ...]:
        """The nuisance parameters: shared sources, then the directions of covariance matrices."""
        return model.names_of_sources(self._tables)

    def covariance(self, reference: ArrayLike | None = None) -> Floats:
        """Covariance of the data.

        Parameters
        ----------
        reference : array_like, (datum,), optional
            What multiplicative errors multiply: the data by default, or an earlier prediction; never the
            prediction that is being fitted (R. Ball et al., arXiv:0912.2276).

        Returns
        -------
        ndarray, (datum, datum)

        Raises
        ------
        InputError
            If `reference` does not have one finite number a datum.
        """
        return model.covariance(self._tables, self.reference(reference))

    def nuisance(self, reference: ArrayLike | None = None) -> tuple[Floats, Floats]:
        """Return the same uncertainties as independent errors and common sources.

        Parameters
        ----------
        reference : array_like, (datum,), optional
            As for `covariance`.

        Returns
        -------
        sigma : ndarray, (datum,)
            Standard deviations of what each datum has for itself.
        shifts : ndarray, (datum, source)
            Shifts by one standard deviation of each source; sigma^2 + shifts shifts^T is the covariance.

        Raises
        ------
        InputError
            As for `covariance`.
        """
        return model.nuisance(self._tables, self.reference(reference))

    def reference(self, reference: ArrayLike | None = None) -> Floats:
        """Return a checked reference: the data where none is given.

        Parameters
        ----------
        reference : array_like, (datum,), optional

        Returns
        -------
        ndarray, (datum,)
        """
        if reference is None:
            return self.value
        return _check.real_array("reference", reference, shape=(self.value.size,))

    def describe(self) -> str:
        """What was understood: data, rows, uncertainties, repairs and cuts of each table, in words."""
        return describe(self._tables, self.cuts)

    def __len__(self) -> int:
        return int(self.value.size)

    def __eq__(self, other: object) -> bool:
        """Say whether description, lines and matrices of all tables are the same."""
        return self._tables == other._tables if isinstance(other, Questions) else NotImplemented

    __hash__ = None  # type: ignore[assignment]

    def __repr__(self) -> str:
        tables = "1 table" if len(self.tables) == 1 else f"{len(self.tables)} tables"
        data = "1 datum" if len(self) == 1 else f"{len(self)} data"
        return f"Measurements({data} in {tables})"

    def __str__(self) -> str:
        return self.describe()

    def _repr_html_(self) -> str:
        return f"<pre>{html.escape(self.describe())}</pre>"


def _fixed(parts: Sequence[Floats]) -> Floats:
    """Join arrays into one that cannot be changed."""
    joined = np.concatenate(parts) if parts else np.zeros(0)
    joined.flags.writeable = False
    return joined
