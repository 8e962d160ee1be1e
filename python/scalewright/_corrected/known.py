"""Factors that are known from elsewhere: numbers, functions of x and Q^2, tables against x."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np

from .. import _check
from .._check import Floats, show
from ..errors import InputError
from ..files.cells import read_cells
from ..files.whole import PathLike

__all__ = ["OfX", "known_source", "read_columns"]

OfX = Callable[[Floats, Floats], Floats]


@dataclass(frozen=True)
class _Called:
    """A user's number or function, its values checked."""

    name: str
    given: Any

    def __call__(self, x: Floats, q2: Floats) -> Floats:
        """Return the values, (point,)."""
        if callable(self.given):
            return _check.called(self.name, self.given, x.copy(), q2.copy(), shape=x.shape)
        return np.full(x.shape, self.given)


@dataclass(frozen=True, eq=False)
class _Lines:
    """Straight lines in x between the entries of a table."""

    where: str
    x: Floats
    values: Floats

    def __call__(self, x: Floats, q2: Floats) -> Floats:
        """Return the values, (point,); nothing is extrapolated."""
        outside = (x < self.x[0]) | (x > self.x[-1])
        if outside.any():
            limits = f"the table spans [{show(self.x[0])}, {show(self.x[-1])}]"
            raise InputError(f"{self.where}: x = {show(x[int(np.argmax(outside))])}: {limits}")
        return np.interp(x, self.x, self.values)


def known_source(name: str, given: Any) -> OfX:
    """Return a number or a function as one of x and Q^2 whose values are checked."""
    if isinstance(given, _Lines):
        return given
    return _Called(name, given if callable(given) else _check.real(name, given))


def read_columns(path: PathLike) -> tuple[OfX, dict[str, OfX]]:
    """Read a factor and its uncertainties against x from a CSV table.

    Raises
    ------
    InputError
        If a column is missing, an entry is no number, x does not grow or leaves (0, 1], there are fewer than
        two lines, or an uncertainty is negative.
    StoreError
        If the file cannot be read.
    """
    cells = read_cells(path)
    x, factor = cells.numbers("x"), cells.numbers("factor")
    if x.size < 2:
        raise InputError(f"{cells.file}: there must be at least two lines")
    for line in range(x.size):
        if not 0.0 < x[line] <= 1.0:
            cells.refuse(line, "x", f"{show(x[line])}: x must lie in (0, 1]")
        if line and x[line] <= x[line - 1]:
            cells.refuse(line, "x", f"{show(x[line])}: x must grow from line to line")
    sources: dict[str, OfX] = {}
    for column in cells.head:
        if column not in ("x", "factor"):
            size = cells.numbers(column)
            if (size < 0.0).any():
                line = int(np.argmax(size < 0.0))
                cells.refuse(line, column, f"{show(size[line])}: an uncertainty must not be negative")
            sources[column] = _Lines(f"{cells.file}: column {column}", x, size)
    return _Lines(f"{cells.file}: column factor", x, factor), sources
