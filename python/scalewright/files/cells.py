"""Comma-separated tables with any columns, kept as text: what is read can be written back to the letter.

The first line names the columns; every other line has as many entries. UTF-8, a point as decimal sign; empty
lines count for nothing. Entries become numbers only when they are asked for, so that a column nobody uses
may hold anything. A matrix is the same without a head. What the columns mean is not known here.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import NoReturn

import numpy as np

from .._check import Floats, nearest, show
from ..errors import InputError
from .whole import PathLike, read_whole, shown, write_whole

__all__ = ["Cells", "read_cells", "read_matrix", "write_cells", "write_matrix"]


@dataclass(frozen=True)
class Cells:
    """A table as text.

    Parameters
    ----------
    head : tuple of str
        Names of the columns, each once.
    rows : tuple of tuple of str
        Entries, as many a row as there are columns.
    file : str
        Where it is from, for messages; tables of different origin can be equal.
    lines : tuple of int
        The line of each row in that file.
    """

    head: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    file: str = field(compare=False)
    lines: tuple[int, ...] = field(compare=False)

    def index(self, column: str) -> int:
        """Return the place of a column, or refuse a name that is not there."""
        if column not in self.head:
            known = ", ".join(show(name) for name in self.head)
            hint = nearest(column, self.head)
            raise InputError(f"{self.file}: no column {show(column)}: there are {known}{hint}")
        return self.head.index(column)

    def words(self, column: str) -> list[str]:
        """Return a column as text without blanks around it."""
        place = self.index(column)
        return [row[place].strip() for row in self.rows]

    def numbers(self, column: str, *, empty: bool = False) -> Floats:
        """Return a column as finite numbers, (row,); `empty`: an empty entry is allowed and becomes nan."""
        values = [
            np.nan if empty and not entry else self._number(entry, row, column)
            for row, entry in enumerate(self.words(column))
        ]
        return np.asarray(values, dtype=np.float64)

    def _number(self, entry: str, row: int, column: str) -> float:
        try:
            # Python takes 1_000 and the digits of other scripts for numbers; such a table was not meant so
            number = float("" if "_" in entry or not entry.isascii() else entry)
        except ValueError:
            self.refuse(row, column, f"{show(entry)} is not a number")
        if not np.isfinite(number):
            self.refuse(row, column, f"{show(number)}: must be finite")
        return number

    def place(self, row: int, column: str | None = None) -> str:
        """Return where an entry stands, as messages show it."""
        return f"{self.file}: line {self.lines[row]}" + ("" if column is None else f", column {column}")

    def refuse(self, row: int, column: str | None, what: str) -> NoReturn:
        """Raise an `InputError` that names file, line and column."""
        raise InputError(f"{self.place(row, column)}: {what}")

    def select(self, rows: Sequence[int]) -> Cells:
        """Return some of the rows."""
        lines = tuple(self.lines[row] for row in rows)
        return Cells(self.head, tuple(self.rows[row] for row in rows), self.file, lines)

    def replaced(self, columns: Mapping[str, Sequence[str]]) -> Cells:
        """Return the table with other entries in some columns; new columns come last."""
        head = (*self.head, *(name for name in columns if name not in self.head))
        rows = []
        for number, row in enumerate(self.rows):
            entries = dict(zip(self.head, row, strict=True))
            entries |= {name: column[number] for name, column in columns.items()}
            rows.append(tuple(entries[name] for name in head))
        return Cells(head, tuple(rows), self.file, self.lines)


def read_cells(path: PathLike) -> Cells:
    """Read a table.

    Parameters
    ----------
    path : path-like
        The file.

    Returns
    -------
    Cells

    Raises
    ------
    StoreError
        If the file cannot be read.
    InputError
        If it is not a table: the message names file and line.
    """
    rows, lines = _rows(path)
    file = shown(path)
    if not rows:
        raise InputError(f"{file}: empty: the first line must name the columns")
    head = [entry.strip() for entry in rows[0]]
    for place, name in enumerate(head):
        if not name:
            raise InputError(f"{file}: line {lines[0]}: column {place + 1} has no name")
        if head.index(name) != place:
            raise InputError(f"{file}: line {lines[0]}: column {show(name)} stands there twice")
    for row, line in zip(rows[1:], lines[1:], strict=True):
        if len(row) != len(head):
            raise InputError(f"{file}: line {line}: {len(row)} entries: there must be {len(head)}")
    if len(rows) == 1:
        raise InputError(f"{file}: no rows below the names of the columns")
    return Cells(tuple(head), tuple(map(tuple, rows[1:])), file, tuple(lines[1:]))


def write_cells(path: PathLike, cells: Cells) -> None:
    """Write a table, whole or not at all."""
    text = io.StringIO()
    csv.writer(text, lineterminator="\n").writerows([cells.head, *cells.rows])
    write_whole(path, text.getvalue().encode())


def read_matrix(path: PathLike) -> Floats:
    """Read a matrix of finite numbers: one line a row, no head.

    Raises
    ------
    StoreError
        If the file cannot be read.
    InputError
        If a line is too short or an entry is not a finite number: the message names file, line and column.
    """
    rows, lines = _rows(path)
    if not rows:
        raise InputError(f"{shown(path)}: empty: there must be a matrix, one line a row")
    head = tuple(str(place + 1) for place in range(len(rows[0])))
    for row, line in zip(rows, lines, strict=True):
        if len(row) != len(head):
            what = f"{len(row)} entries: there must be {len(head)}, as in the first line"
            raise InputError(f"{shown(path)}: line {line}: {what}")
    cells = Cells(head, tuple(map(tuple, rows)), shown(path), tuple(lines))
    return np.stack([cells.numbers(name) for name in head], axis=1)


def write_matrix(path: PathLike, matrix: Floats) -> None:
    """Write a matrix, whole or not at all; floats keep every bit."""
    lines = (",".join(map(repr, row)) + "\n" for row in matrix.tolist())
    write_whole(path, "".join(lines).encode())


def _rows(path: PathLike) -> tuple[list[list[str]], list[int]]:
    """Return the entries of all lines that are not empty, and their numbers."""
    try:
        text = read_whole(path).decode("utf-8-sig")
    except UnicodeDecodeError as error:
        raise InputError(f"{shown(path)}: not UTF-8 text at byte {error.start}") from error
    reader = csv.reader(text.splitlines(), strict=True)
    rows, lines = [], []
    try:
        for row in reader:
            if any(entry.strip() for entry in row):
                rows.append(row)
                lines.append(reader.line_num)
    except csv.Error as error:
        raise InputError(f"{shown(path)}: line {reader.line_num}: {error}") from error
    return rows, lines
