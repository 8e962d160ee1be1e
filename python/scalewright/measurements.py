"""Measured data with their uncertainties: read, cut, combined, written back, pseudo-data drawn from them.

A table is a TOML description beside a CSV file of points; `Measurements` are one table or several. Rows are
the points at which a theory predicts; data are what was measured: rows, or sums, ratios and averages of them.

Keys of a description (those with a star may also be columns: ``[columns] s = "energy squared"``):

============== =============================================================================================
title          name of the table, unlike those of others
points         CSV file beside the description; its first line names the columns
measures *     reduced_cross_section, F2, FL, F1, xF3, d2sigma_dx_dq2 or d2sigma_dx_dy
current *      neutral (default) or charged
exchange *     photon or photon+Z (default for neutral), W (charged)
beam *         e-, e+, nu or nubar; needless for F1, F2, FL, xF3 by photons alone
polarisation * -1 to 1; 0 by default
target *       proton (default), neutron, deuteron, isoscalar or { z = 26, a = 56 }; in a column "z=26 a=56"
tagged *       charm or bottom: the current couples to this quark
s *            GeV^2; y follows from Q^2 = x y (s - M^2)
unit, note     text
columns        which columns hold x, q2, value, y and label; x, q2 and value may be called so
uncertainty    ``[[uncertainty]]``, see below
covariance     ``[[covariance]]``, see below
combination    each line is a datum made of several rows at its x and q2, see below
datum          ``[[datum]]``: a line is a datum made of other lines, see below
============== =============================================================================================

An ``[[uncertainty]]`` has a ``column``; or one ``size`` for all and a ``name``; or ``up`` and ``down``,
columns of signed shifts (``down_as = "size"``: without sign) with ``asymmetric = "mean"``, ``"larger"`` or
``"shifted"``. ``given_in`` is ``"percent"`` or ``"value"``; ``scales_with`` is ``"nothing"`` (additive) or
``"value"`` (multiplicative). Each datum has its own, unless ``correlated = true`` (one source in this table)
or ``shared_as = "name"`` (one source wherever this name appears).

A ``[[covariance]]`` has a ``file``, a matrix without head in the order of the data, and a ``kind``:
``"covariance"``, with ``given_in`` and ``scales_with``; or ``"correlation"``, ``of`` one of the
uncertainties. ``repair = "clip"`` or ``"nearest"`` mends a matrix that is not positive semi-definite, and
`describe` says by how much.

A ``[combination]`` names rows by what sets them apart, ``rows = { d = { target = "deuteron" }, p = {} }``,
and their weights, ``numerator = { d = 1 }`` and, for a ratio, ``denominator = { p = 1 }``. A ``[[datum]]``
has the ``label`` of the line that bears its value, and weights of other lines by their labels; a line
without value is a row alone.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from . import _check
from ._check import Floats
from ._measured import model
from ._measured.cuts import Range, apply_cuts, in_range
from ._measured.questions import Questions
from ._measured.revalued import revalued
from ._measured.storing import from_columns, read_tables, write_tables
from .files.whole import PathLike

__all__ = ["Measurements", "PseudoData"]


@dataclass(frozen=True)
class PseudoData:
    """Values drawn around a truth.

    Parameters
    ----------
    values : ndarray, (datum,) or (replica, datum)
        What an experiment might have measured.
    negative : int
        How many of them are negative; they are kept.
    """

    values: Floats
    negative: int


class Measurements(Questions):
    """Data points with their uncertainties, from one table or several.

    Made by `read`, `from_columns` or `join`; never changed afterwards.

    Attributes
    ----------
    tables : tuple of str
        Titles.
    x, q2, y : ndarray, (datum,)
        Where each datum was measured; q2 in GeV^2. y is nan where it is not known or not one number.
    value : ndarray, (datum,)
        What was measured; moved where an asymmetric error is described as "shifted".
    table_of : ndarray of int, (datum,)
        Number of the table of each datum.
    rows : Rows
        The points at which the theory must predict, with measure, current, exchange, beam, polarisation,
        target, tagged and s of each.
    data : Combination
        The map from rows to data, with its derivative.
    cuts : tuple
        What cuts removed, and why.
    names_of_sources : tuple of str
        The nuisance parameters, in the order of the columns of `nuisance`.

    Examples
    --------
    >>> table = Measurements.from_columns(
    ...     {"title": "Run 1", "measures": "F2", "exchange": "photon", "uncertainty": [
    ...         {"column": "stat", "given_in": "value", "scales_with": "nothing"},
    ...         {"name": "luminosity", "size": 2.0, "given_in": "percent", "scales_with": "value",
    ...          "shared_as": "luminosity"}]},
    ...     {"x": [0.01, 0.1, 0.4], "q2": [10.0, 10.0, 10.0], "value": [1.0, 0.5, 0.2],
    ...      "stat": [0.02, 0.01, 0.01]})
    >>> table
    Measurements(3 data in 1 table)
    >>> print(table.covariance().round(6))
    [[8.00e-04 2.00e-04 8.00e-05]
     [2.00e-04 2.00e-04 4.00e-05]
     [8.00e-05 4.00e-05 1.16e-04]]
    >>> for cut in table.cut(x=(None, 0.2)).cuts:
    ...     print(cut)
    x <= 0.2: removed 1 (1 of Run 1)
    """

    @classmethod
    def read(cls, path: PathLike) -> Measurements:
        """Read a description and the files that it names.

        Parameters
        ----------
        path : path-like
            A TOML file: one table, or ``tables = ["a.toml", "b.toml"]``.

        Returns
        -------
        Measurements

        Raises
        ------
        StoreError
            If a file cannot be read.
        InputError
            If something in it is wrong: the message names file, line and column, or the key.

        Warns
        -----
        InputWarning
            If a y column differs from Q^2/(x (s - M^2)) by more than rounding in print.
        """
        return cls(read_tables(path))

    @classmethod
    def from_columns(
        cls, description: Mapping[str, Any], points: Any, matrices: Sequence[ArrayLike] = ()
    ) -> Measurements:
        """Make one table of arrays.

        Parameters
        ----------
        description : mapping
            The keys of the TOML description, ``points`` and ``file`` left out.
        points : mapping or data frame
            Name of a column -> numbers or text, all of one length.
        matrices : sequence of array_like, (datum, datum)
            One for each covariance of the description.

        Returns
        -------
        Measurements

        Raises
        ------
        InputError
            As for `read`.
        """
        return cls([from_columns(description, points, matrices)])

    @classmethod
    def join(cls, parts: Iterable[Measurements]) -> Measurements:
        """Put several tables together; sources of one name become one.

        Parameters
        ----------
        parts : iterable of Measurements

        Returns
        -------
        Measurements
            The data in the order given.

        Raises
        ------
        InputError
            If there is nothing to join, or two tables have one title.
        """
        try:
            given = list(parts)
        except TypeError:
            given = []
        if not given or not all(isinstance(part, Measurements) for part in given):
            _check.refuse("parts", parts, "parts must be a list of Measurements, at least one")
        return cls([t for part in given for t in part._tables], [cut for part in given for cut in part.cuts])

    def write(self, path: PathLike) -> None:
        """Write description, points and matrices; `read` gives back the same measurements to the last bit.

        Parameters
        ----------
        path : path-like
            ``NAME.toml``; points go to ``NAME.csv``, matrices to ``NAME.matrix-1.csv`` and so on, several
            tables to ``NAME-1.toml`` and so on. Files of these names are replaced. Columns that nothing uses
            and the way numbers are printed are kept, comments and the record of cuts are not.

        Raises
        ------
        StoreError
            If a file cannot be written; each is whole or not there, the description is written last.
        """
        write_tables(path, self._tables)

    def cut(
        self,
        *,
        x: Range | None = None,
        q2: Range | None = None,
        w2: Range | None = None,
        y: Range | None = None,
        keep: ArrayLike | None = None,
        reason: str = "keep",
    ) -> Measurements:
        """Return what lies within limits; how much each limit removes stands in `cuts`.

        Parameters
        ----------
        x, q2, w2, y : (float or None, float or None), optional
            Least and most, both included; q2 and w2 = M^2 + Q^2 (1 - x)/x in GeV^2. A datum that is made of
            several rows stays if all of them lie inside.
        keep : array_like of bool, (datum,), optional
            Which data stay, by any other reason.
        reason : str
            The reason for `keep`, in words.

        Returns
        -------
        Measurements

        Raises
        ------
        InputError
            If a limit is not one, y is cut on but not known, or nothing is left.
        """
        rows, conditions = self.rows, {}
        for name, given in (("x", x), ("q2", q2), ("w2", w2), ("y", y)):
            if given is not None:
                words, inside = in_range(name, given, getattr(rows, name), rows.place)
                conditions[words] = self._of_all_rows(inside)
        if keep is not None:
            chosen, words = self._chosen(keep), str(reason)
            conditions[words] = chosen & conditions[words] if words in conditions else chosen
        tables, cuts = apply_cuts(self._tables, conditions)
        return Measurements(tables, (*self.cuts, *cuts))

    def _chosen(self, keep: ArrayLike) -> NDArray[np.bool_]:
        """Return `keep` as booleans, one a datum."""
        try:
            chosen = np.asarray(keep)
        except ValueError:  # ragged lists
            chosen = np.zeros(0)
        if chosen.dtype != bool or chosen.shape != self.value.shape:
            _check.refuse("keep", keep, f"keep must be {self.value.size} booleans, one a datum")
        return chosen

    def _of_all_rows(self, inside: NDArray[np.bool_]) -> NDArray[np.bool_]:
        """Say for each datum whether all of its rows are."""
        start, result = 0, []
        for table in self._tables:
            part = inside[start : start + len(table.assembly.rows)]
            result += [bool(part[list(members)].all()) for members in table.assembly.rows_of_datum]
            start += part.size
        return np.asarray(result, dtype=bool)

    def pseudo_data(
        self, rng: np.random.Generator, truth: ArrayLike | None = None, *, replicas: int | None = None
    ) -> PseudoData:
        """Draw what the experiments might have measured.

        Parameters
        ----------
        rng : numpy.random.Generator
            Where the random numbers come from.
        truth : array_like, (datum,), optional
            Around what to draw: the data by default, or the prediction of a known law.
        replicas : int, optional
            How many; without it one, and no axis of replicas.

        Returns
        -------
        PseudoData
            (truth + sum of additive shifts) times the product over sources of (1 + multiplicative shift);
            negative values are kept and counted.

        Raises
        ------
        InputError
            If `rng` is no generator, or `truth` does not have one finite number a datum.
        """
        if not isinstance(rng, np.random.Generator):
            _check.refuse("rng", rng, "rng must be a numpy.random.Generator")
        count = 1 if replicas is None else _check.whole("replicas", replicas, least=1, most=10**9)
        centre = self.value if truth is None else truth
        centre = _check.real_array("truth", centre, shape=(self.value.size,))
        values = model.pseudo_data(self._tables, rng, centre, count)
        return PseudoData(values[0] if replicas is None else values, int((values < 0.0).sum()))

    def with_values(self, values: ArrayLike) -> Measurements:
        """Return the same measurements with other values, as those of `pseudo_data`.

        Parameters
        ----------
        values : array_like, (datum,)

        Returns
        -------
        Measurements
            Additive errors keep their size, multiplicative ones their fraction; asymmetric ones are replaced
            by the symmetric size that the stated rule gave them.

        Raises
        ------
        InputError
            If there is not one finite number a datum.
        """
        array = _check.real_array("values", values, shape=(self.value.size,))
        parts = np.split(array, np.cumsum([len(table) for table in self._tables])[:-1])
        tables = [revalued(table, part) for table, part in zip(self._tables, parts, strict=True)]
        return Measurements(tables, self.cuts)
