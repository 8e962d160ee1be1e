"""Plain tables of densities: a comma-separated lattice that anyone can write in twenty lines.

One row for each value, the columns named in the first line, in any order:

======== ====================================================================
column   meaning
======== ====================================================================
q2       squared scale in GeV^2
nf       number of active flavours; a threshold scale appears with two of them
x        momentum fraction, in (0, 1]
flavour  PDG number: 21 gluon, 1 to 6 quarks d u s c b t, -1 to -6 antiquarks
replica  number of the replica, 0 for the only one
value    x f(x)
======== ====================================================================

The text is UTF-8 with a point as decimal sign; rows stand in any order; empty lines count for nothing. Knows
the format and which rows are missing or double, not what a grid or a density is.
"""

from __future__ import annotations

import csv
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import NoReturn

import numpy as np
from numpy.typing import NDArray

from .._check import PARTONS, Floats, Integers, nearest, show, show_all
from ..errors import InputError
from .whole import PathLike, read_whole, shown, write_whole

__all__ = ["COLUMNS", "Lattice", "read_lattice", "write_lattice"]

COLUMNS = ("q2", "nf", "x", "flavour", "replica", "value")

_PDG = frozenset(PARTONS)

#: What each column holds, and the test that a value must pass.
_RULES: dict[str, tuple[str, Callable[[float], bool]]] = {
    "q2": ("q2 must lie in (0, inf) GeV^2", lambda v: v > 0.0),
    "nf": ("nf must be from 3 to 6", lambda v: 3 <= v <= 6),
    "x": ("x must lie in (0, 1]", lambda v: 0.0 < v <= 1.0),
    "flavour": ("a PDG number must be 21 (gluon), 1 to 6 or -1 to -6", lambda v: v in _PDG),
    "replica": ("replica must be from 0 to 999999999", lambda v: 0 <= v < 1e9),
    "value": ("value must be finite", lambda _: True),
}
_WHOLE = ("nf", "flavour", "replica")


@dataclass(frozen=True)
class Lattice:
    """Densities on a full lattice of scales, replicas, flavours and x.

    Parameters
    ----------
    q2, nf : ndarray, (scale,)
        Rising in q2, then in nf.
    replicas : tuple of int
        Numbers of the replicas, rising.
    flavours : tuple of int
        PDG numbers, in the order of their first row.
    x : ndarray, (point,)
        Falling.
    values : ndarray, (scale, replica, flavour, point)
        x f(x).
    """

    q2: Floats
    nf: Integers
    replicas: tuple[int, ...]
    flavours: tuple[int, ...]
    x: Floats
    values: Floats


def read_lattice(path: PathLike) -> Lattice:
    """Read a lattice.

    Parameters
    ----------
    path : path-like
        The table.

    Returns
    -------
    Lattice

    Raises
    ------
    StoreError
        If the file cannot be read.
    InputError
        If an entry is wrong, a row is double or missing; the message names file, line and column.
    """
    columns, lines = _columns(path)
    scales, scale = np.unique(np.stack([columns["q2"], columns["nf"]], axis=1), axis=0, return_inverse=True)
    replicas, replica = np.unique(columns["replica"], return_inverse=True)
    rising, point = np.unique(columns["x"], return_inverse=True)
    _, first = np.unique(columns["flavour"], return_index=True)
    flavours = columns["flavour"][np.sort(first)]
    place = np.argmax(columns["flavour"][:, None] == flavours, axis=1)
    shape = (len(scales), replicas.size, flavours.size, rising.size)
    axes = (scale.reshape(-1), replica.reshape(-1), place, rising.size - 1 - point.reshape(-1))
    lattice = Lattice(
        q2=np.ascontiguousarray(scales[:, 0]),
        nf=scales[:, 1].astype(np.int64),
        replicas=tuple(int(n) for n in replicas),
        flavours=tuple(int(n) for n in flavours),
        x=np.ascontiguousarray(rising[::-1]),
        values=np.zeros(shape),
    )
    _refuse_holes(path, lattice, axes, lines)
    lattice.values[axes] = columns["value"]
    return lattice


def write_lattice(path: PathLike, lattice: Lattice) -> None:
    """Write a lattice, whole or not at all; floats keep every bit.

    Parameters
    ----------
    path : path-like
        The target.
    lattice : Lattice
        What to write.

    Raises
    ------
    StoreError
        If it cannot be written; an old file at `path` is untouched then.
    """
    write_whole(path, "".join(_rows(lattice)).encode())


def _rows(lattice: Lattice) -> Iterator[str]:
    """Give the text by pieces: the head, then all x of one scale, replica and flavour."""
    yield ",".join(COLUMNS) + "\n"
    x = [repr(value) for value in lattice.x.tolist()]
    for s, (q2, nf) in enumerate(zip(lattice.q2.tolist(), lattice.nf.tolist(), strict=True)):
        for r, replica in enumerate(lattice.replicas):
            for f, flavour in enumerate(lattice.flavours):
                values = lattice.values[s, r, f].tolist()
                head, middle = f"{q2!r},{nf},", f",{flavour},{replica},"
                yield "".join(f"{head}{a}{middle}{v!r}\n" for a, v in zip(x, values, strict=True))


def _columns(path: PathLike) -> tuple[dict[str, Floats], list[int]]:
    """Return the columns as numbers, and the line of each row."""
    try:
        text = read_whole(path).decode("utf-8-sig")
    except UnicodeDecodeError as error:
        raise InputError(f"{shown(path)}: not UTF-8 text at byte {error.start}") from error
    reader = csv.reader(text.splitlines(), strict=True)
    table: list[list[float]] = []
    lines: list[int] = []
    names: list[str] = []
    try:
        for row in reader:
            if not any(entry.strip() for entry in row):
                continue
            if not names:
                names = _head(path, row)
                continue
            if len(row) != len(names):
                _refuse(path, reader.line_num, None, f"{len(row)} entries: there must be {len(names)}")
            table.append(_numbers(path, reader.line_num, names, row))
            lines.append(reader.line_num)
    except csv.Error as error:
        _refuse(path, reader.line_num, None, str(error))
    if not table:
        raise InputError(f"{shown(path)}: no rows: the first line must be {','.join(COLUMNS)}, then values")
    numbers = np.asarray(table)
    return {name: numbers[:, i] for i, name in enumerate(names)}, lines


def _head(path: PathLike, row: list[str]) -> list[str]:
    """Return the names of the columns, each wanted one once."""
    names = [entry.strip() for entry in row]
    for name in names:
        if name not in COLUMNS:
            hint = nearest(name, COLUMNS)
            _refuse(path, 1, None, f"unknown column {show(name)}: known are {', '.join(COLUMNS)}{hint}")
        if names.count(name) > 1:
            _refuse(path, 1, name, "stands there twice")
    missing = [name for name in COLUMNS if name not in names]
    if missing:
        _refuse(path, 1, None, f"missing column {', '.join(missing)}")
    return names


def _numbers(path: PathLike, line: int, names: list[str], row: list[str]) -> list[float]:
    """Return the entries of one row as numbers."""
    numbers = []
    for name, entry in zip(names, row, strict=True):
        allowed, fits = _RULES[name]
        try:
            # Python takes 1_000 for a number; a table that says so was not written for us
            number = float("" if "_" in entry else entry)
        except ValueError:
            _refuse(path, line, name, f"{show(entry)} is not a number")
        if not np.isfinite(number) or not fits(number):
            _refuse(path, line, name, f"{show(number)}: {allowed}")
        if name in _WHOLE and number != int(number):
            _refuse(path, line, name, f"{show(number)}: {name} must be a whole number")
        numbers.append(number)
    return numbers


def _refuse(path: PathLike, line: int, column: str | None, what: str) -> NoReturn:
    """Raise an `InputError` that names file, line and column."""
    where = "" if column is None else f", column {column}"
    raise InputError(f"{shown(path)}: line {line}{where}: {what}")


def _refuse_holes(
    path: PathLike, lattice: Lattice, axes: tuple[NDArray[np.intp], ...], lines: list[int]
) -> None:
    """Refuse a table with a double or a missing row."""
    shape = lattice.values.shape
    flat = np.ravel_multi_index(axes, shape)
    if flat.size == lattice.values.size and np.unique(flat).size == flat.size:
        return
    order = np.argsort(flat, kind="stable")
    double = np.flatnonzero(np.diff(flat[order]) == 0)
    if double.size:
        first, second = lines[order[double[0]]], lines[order[double[0] + 1]]
        _refuse(path, second, None, f"the same scale, replica, flavour and x stand in line {first} already")
    absent = np.ones(lattice.values.size, bool)
    absent[flat] = False
    s, r, f, p = (int(i) for i in np.unravel_index(int(np.argmax(absent)), shape))
    where = f"q2 = {show(lattice.q2[s])}, nf = {lattice.nf[s]}, x = {show(lattice.x[p])}"
    which = f"flavour = {lattice.flavours[f]}, replica = {lattice.replicas[r]}"
    counts = show_all(shape)
    raise InputError(
        f"{shown(path)}: no row for {where}, {which}: "
        f"the lattice of scales, replicas, flavours and x ({counts}) must be full"
    )
