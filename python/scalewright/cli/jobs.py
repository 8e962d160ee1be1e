"""Job files: what a command is told, checked before it starts to work."""

from __future__ import annotations

import os
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from .. import _check
from .._check import Floats, refuse
from ..densities import Densities
from ..errors import InputError, StoreError
from ..files import toml
from ..files.csv import Lattice, write_lattice
from ..files.toml import Section
from ..files.whole import PathLike
from ..grid import ChebyshevGrid
from ..theory import Theory

_STORED = (".h5", ".hdf5")
_TABLE = ".csv"

# The smallest x of a grid is exp(-u) of its last edge and may miss the number that was typed by its rounding.
_ROUNDING = 1e-13


@dataclass(frozen=True)
class EvolveJob:
    """What `scalewright evolve` is told.

    Attributes
    ----------
    place
        The job file, for messages.
    theory
        Order, coupling, masses, flavours.
    given
        Densities of one scale.
    missing
        "error" or "zero": what an active flavour is that they do not have.
    intrinsic
        Heavy flavours that they may have.
    q2, nf
        Where to, (scale,); `nf` None for that of the theory.
    file
        The result.
    x
        Where a table gives the result; None for the nodes of the grid.
    """

    place: Section
    theory: Theory
    given: Densities
    missing: str
    intrinsic: Sequence[int]
    q2: Floats
    nf: Any
    file: str
    x: Floats | None


def read_evolve_job(path: PathLike) -> EvolveJob:
    """Read a job of `scalewright evolve` and the densities it names.

    Parameters
    ----------
    path
        The job, TOML.

    Raises
    ------
    InputError
        If a key is unknown, missing or wrong; file and key are named.
    StoreError
        If the job or a file that it names cannot be read.
    """
    top = toml.load(path).only("theory", "grid", "input", "output")
    theory = Theory.from_dict(top.get("theory"), top.section("theory").where())
    source = top.section("input").only("file", "q2", "nf", "interpolate", "missing", "intrinsic")
    output = top.section("output").only("q2", "nf", "file", "x")
    with output.blame():
        q2 = _check.scales("q2", output.get("q2"))
    file = toml.beside(path, output.text("file"))
    x = _points(output, file)
    given = _given(path, top, source)
    with source.blame():
        missing = _check.choice("missing", source.get("missing", "error"), ("error", "zero"))
    with output.blame():
        if x is not None:
            _check.x_values("x", x, x_min=given.grid.x_min, rounding=_ROUNDING)
    intrinsic, nf = source.get("intrinsic", ()), output.get("nf", None)
    return EvolveJob(top, theory, given, missing, intrinsic, q2, nf, file, x)


def _points(output: Section, file: str) -> Floats | None:
    """Return the x of a table; refuse a result that cannot be written before any work is done."""
    with output.blame():
        kind = _kind("file", file)
        if not os.path.isdir(os.path.dirname(file) or "."):
            raise StoreError(f"{output.where('file')} = {file!r}: the folder does not exist")
        x = output.get("x", None)
        if x is None:
            return None
        if kind != _TABLE:
            refuse("x", x, f"a stored result has the nodes of the grid; x is for a {_TABLE} file")
        points = np.unique(np.atleast_1d(_check.x_values("x", x)))[::-1]
        return np.ascontiguousarray(points)


def _kind(name: str, file: str) -> str:
    """Return the ending of a file, one of those that are known."""
    ending = os.path.splitext(file)[1].lower()
    if ending not in (*_STORED, _TABLE):
        refuse(name, file, f"must end in {', '.join(_STORED)} or {_TABLE}")
    return ending


def _given(path: PathLike, top: Section, source: Section) -> Densities:
    """Read the densities and pick the scale."""
    file = toml.beside(path, source.text("file"))
    with source.blame():
        stored = _kind("file", file) in _STORED
    if stored:
        densities = _stored(file, top, source)
    else:
        section = top.section("grid", {}).only("x_min", "resolution")
        with section.blame():
            grid = ChebyshevGrid(section.get("x_min", 1e-7), section.get("resolution", "standard"))
        interpolate = source.get("interpolate", False)
        if not isinstance(interpolate, bool):
            raise InputError(f"{source.where('interpolate')} = {interpolate!r}: must be true or false")
        densities = Densities.from_csv(file, grid, interpolate=interpolate)
    with source.blame():
        q2 = source.get("q2", None)
        return densities.scale(None if q2 is None else _check.scale("q2", q2), source.get("nf", None))


def _stored(file: str, top: Section, source: Section) -> Densities:
    """Read densities that bring their own grid."""
    if top.get("grid", None) is not None:
        raise InputError(f"{top.where('grid')}: {file} brings its own grid; leave the table out")
    if source.get("interpolate", None) is not None:
        raise InputError(f"{source.where('interpolate')}: for {_TABLE} files only")
    return Densities.load(file)


def write_densities(densities: Densities, file: str, x: Floats | None) -> None:
    """Write densities as the ending of the file says.

    Parameters
    ----------
    densities : Densities
        Of several scales.
    file : str
        Ending in .h5, .hdf5 or .csv.
    x : ndarray or None
        Where a table gives them, falling; None for the nodes of the grid.

    Raises
    ------
    StoreError
        If it cannot be written.
    RangeError
        If an x lies below the grid.
    """
    if _kind("file", file) in _STORED:
        densities.save(file)
    elif x is None:
        densities.to_csv(file)
    else:
        values = densities.grid.interpolate(densities.values, x)
        replicas = tuple(range(densities.replicas))
        q2, nf = np.atleast_1d(densities.q2), np.atleast_1d(densities.nf)
        write_lattice(file, Lattice(q2, nf, replicas, densities.flavours, x, np.atleast_1d(values)))
