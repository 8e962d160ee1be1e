"""Tables of measurements in files: a TOML description, its lines as CSV, matrices as CSV.

A description with ``tables = [...]`` names other descriptions instead.
"""

from __future__ import annotations

import os
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from .. import _check
from ..errors import InputError
from ..files.cells import Cells, read_cells, read_matrix, write_cells, write_matrix
from ..files.toml import beside, load
from ..files.toml_text import toml_text
from ..files.whole import PathLike, shown, write_whole
from .description import KEYS, sections
from .table import Table

__all__ = ["from_columns", "read_tables", "write_tables"]


def read_tables(path: PathLike) -> list[Table]:
    """Read one description, or all those that it names."""
    section = load(path)
    if section.get("tables", None) is None:
        return [_read(path)]
    names = section.only("tables").get("tables")
    if not isinstance(names, list) or not names or not all(isinstance(name, str) for name in names):
        raise InputError(f"{section.where('tables')} = {_check.show(names)}: must be names of files")
    # one level: a description that names itself would never end
    return [_read(beside(path, name)) for name in names]


def _read(path: PathLike) -> Table:
    section = load(path).only(*KEYS)
    cells = read_cells(beside(path, section.text("points")))
    parts = sections(section, "covariance")
    matrices = [read_matrix(beside(path, part.text("file"))) for part in parts]
    present = {key: section.get(key) for key in KEYS if section.get(key, None) is not None}
    if parts:
        present["covariance"] = [_named(part) for part in present["covariance"]]
    return Table(present, cells, matrices, shown(path))


def _named(part: Mapping[str, Any]) -> dict[str, Any]:
    """Let a matrix keep its name when it moves to another file."""
    return {"name": part.get("file"), **part}


def write_tables(path: PathLike, tables: Sequence[Table]) -> None:
    """Write one description, or one that names the others; the files beside it first, it itself last."""
    if len(tables) == 1:
        return _write(path, tables[0])
    stem, ending = os.path.splitext(os.fsdecode(path))
    names = [f"{stem}-{number + 1}{ending}" for number in range(len(tables))]
    for name, table in zip(names, tables, strict=True):
        _write(name, table)
    write_whole(path, toml_text({"tables": [os.path.basename(name) for name in names]}).encode())
    return None


def _write(path: PathLike, table: Table) -> None:
    stem = os.path.splitext(os.fsdecode(path))[0]
    points = f"{stem}.csv"
    description = dict(table.description) | {"points": os.path.basename(points)}
    parts = [dict(part) for part in description.get("covariance", [])]
    for number, (part, matrix) in enumerate(zip(parts, table.matrices, strict=True)):
        file = f"{stem}.matrix-{number + 1}.csv"
        part["file"] = os.path.basename(file)
        write_matrix(file, matrix)
    if parts:
        description["covariance"] = parts
    write_cells(points, table.cells)
    write_whole(path, toml_text(description).encode())


def from_columns(
    description: Mapping[str, Any], points: Any, matrices: Sequence[Any], file: str = "description"
) -> Table:
    """Make a table of arrays; a data frame of the common libraries is a mapping of columns too."""
    if not isinstance(description, Mapping):
        _check.refuse("description", description, "description must be a mapping, as TOML has it")
    if not hasattr(points, "keys") and hasattr(points, "to_dict"):
        points = points.to_dict()
    if isinstance(points, type) or not hasattr(points, "keys") or not hasattr(points, "__getitem__"):
        _check.refuse("points", points, "points must map names of columns to lists or arrays")
    if not isinstance(matrices, list | tuple):
        _check.refuse("matrices", matrices, "matrices must be a list of arrays")
    columns = {str(name): _texts(str(name), points[name]) for name in points.keys()}  # noqa: SIM118
    lengths = {len(column) for column in columns.values()}
    if len(lengths) != 1 or 0 in lengths:
        _check.refuse("points", sorted(lengths), "columns must have one length, at least 1")
    count = lengths.pop()
    cells = Cells(
        tuple(columns), tuple(zip(*columns.values(), strict=True)), "points", tuple(range(1, count + 1))
    )
    checked = [
        _check.real_array(f"matrices[{place}]", matrix, ndim=2) for place, matrix in enumerate(matrices)
    ]
    plain = {str(key): _plain(value, f"description: {key}") for key, value in description.items()}
    parts = plain.get("covariance")
    if isinstance(parts, list) and all(isinstance(part, dict) for part in parts):
        files = ({"file": f"matrix {place + 1}"} | part for place, part in enumerate(parts))
        plain["covariance"] = [_named(part) for part in files]
    return Table(plain, cells, checked, file)


def _texts(name: str, column: Any) -> list[str]:
    """Return a column as text; numbers keep every bit."""
    array = np.asarray(column)
    if array.ndim != 1 or array.dtype.kind not in "fiuUO":
        _check.refuse(f"points[{name!r}]", column, "a column must be a list of numbers or of text")
    return ["" if v is None else v if isinstance(v, str) else repr(v) for v in array.tolist()]


def _plain(value: Any, where: str) -> Any:
    """Turn tuples, arrays and numpy numbers into what TOML knows; refuse what it has no form for."""
    if isinstance(value, np.generic | np.ndarray):
        return _plain(value.tolist(), where)
    if isinstance(value, Mapping):
        return {str(key): _plain(inner, f"{where}: {key}") for key, inner in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(inner, f"{where}[{place}]") for place, inner in enumerate(value)]
    if not isinstance(value, str | bool | int | float):
        _check.refuse(where, value, "must be text, a number, true or false, or a list or mapping of these")
    return value
