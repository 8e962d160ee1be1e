"""A table with other values and the same errors: pseudo-data in place of the measured ones.

Additive errors keep their size in units of the datum, multiplicative ones their fraction. Columns that say so
in other units are rewritten; asymmetric errors are replaced by the size that the stated rule gave them.
"""

from __future__ import annotations

import copy
from typing import Any

import numpy as np

from .._check import Floats
from .table import Table
from .uncertainty import Uncertainty

__all__ = ["revalued"]


def revalued(table: Table, values: Floats) -> Table:
    """Return the table with `values`, (datum,), in place of its own."""
    description = copy.deepcopy(table.description)
    columns = {table.columns["value"]: _spread(table, table.columns["value"], values)}
    for part, meant in zip(description.get("uncertainty", []), table.described, strict=True):
        wanted = "percent" if meant.multiplicative else "value"
        if "up" not in part and part["given_in"] == wanted:
            continue
        name = _free(meant.name, {*table.cells.head, *columns})
        columns[name] = _spread(table, name, meant.size * (100.0 if meant.multiplicative else 1.0))
        _rename(part, meant, name, wanted)
    printed = table.data_cells.numbers(table.columns["value"])
    matrices = []
    for part, matrix in zip(description.get("covariance", []), table.matrices, strict=True):
        matrices.append(_rescaled(part, matrix, printed))
    return Table(description, table.cells.replaced(columns), matrices, table.file, table._moved)


def _rename(part: dict[str, Any], meant: Uncertainty, column: str, given_in: str) -> None:
    """Let a description read its sizes from another column."""
    for key in ("up", "down", "down_as", "asymmetric", "size"):
        part.pop(key, None)
    part |= {"name": meant.name, "column": column, "given_in": given_in}


def _spread(table: Table, column: str, values: Floats) -> list[str]:
    """Return a column with `values` in the lines of the data and its old entries elsewhere."""
    place = table.cells.head.index(column) if column in table.cells.head else None
    entries = ["" if place is None else row[place] for row in table.cells.rows]
    for line, value in zip(table.assembly.lines, values.tolist(), strict=True):
        entries[line] = repr(value)
    return entries


def _free(name: str, taken: set[str]) -> str:
    """Return a name for a column that is not there yet."""
    number, free = 1, name
    while free in taken:
        number, free = number + 1, f"{name} ({number})"
    return free


def _rescaled(part: dict[str, Any], matrix: Floats, printed: Floats) -> Floats:
    """Bring a covariance into the units that do not depend on the value."""
    if part["kind"] == "correlation":
        return matrix
    wanted = "percent" if part.get("scales_with") == "value" else "value"
    if part.get("given_in", "value") == wanted:
        return matrix
    part["given_in"] = wanted
    # a value of 0 has no percents: its covariances are 0 then, or the table would not have been read
    scale = printed / 100.0 if wanted == "value" else 100.0 / np.where(printed == 0.0, 1.0, printed)
    return scale[:, None] * matrix * scale
