"""Job files: what a command is told, checked before it starts to work."""

from __future__ import annotations

import os
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from importlib.util import find_spec
from typing import Any

import numpy as np

from .. import _check
from .._check import Floats, refuse, show
from ..corrections import Correction
from ..densities import Densities
from ..electroweak import Electroweak
from ..errors import InputError, StoreError
from ..files import toml
from ..files.toml import Section
from ..files.whole import PathLike
from ..grid import ChebyshevGrid
from ..kinematics import BOUNDARIES
from ..measurements import Measurements
from ..theory import Theory
from .correction_job import read_corrections
from .written import write_table

_STORED = (".h5", ".hdf5")
_TABLE = ".csv"
_PICTURE = ".png"

# Each set of electroweak inputs and the numbers that it may be given.
_COMMON = ("z_mass", "g_fermi", "mixing")
_ELECTROWEAK: dict[str, tuple[Callable[..., Electroweak], tuple[str, ...]]] = {
    "effective": (Electroweak.effective, (*_COMMON, "sin2", "alpha", "w_mass")),
    "on shell": (Electroweak.on_shell, (*_COMMON, "w_mass")),
    "running": (Electroweak.running, (*_COMMON, "alpha")),
}

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


@dataclass(frozen=True)
class PredictJob:
    """What `scalewright predict` is told.

    Attributes
    ----------
    place
        The job file, for messages.
    theory, electroweak
        What is assumed.
    given
        Densities of one scale, where the map starts.
    measured
        The data, after cuts.
    target_mass, subtraction
        As for `forward_map`.
    corrections
        Higher twist, deuteron and nuclear factors.
    boundaries
        Of the regimes, where they are not those by default.
    form, reference
        Of chi-square; `reference` is "data" or "prediction".
    file
        The result.
    picture
        Where to draw, or None.
    """

    place: Section
    theory: Theory
    electroweak: Electroweak
    given: Densities
    measured: Measurements
    target_mass: bool
    subtraction: str
    corrections: list[Correction]
    boundaries: dict[str, float]
    form: str
    reference: str
    file: str
    picture: str | None


def read_predict_job(path: PathLike) -> PredictJob:
    """Read a job of `scalewright predict`, the densities and the tables it names.

    Parameters
    ----------
    path
        The job, TOML.

    Raises
    ------
    InputError
        If a key is unknown, missing or wrong, or a table is; file and key, or line and column, are named.
    StoreError
        If the job or a file that it names cannot be read.
    """
    top = toml.load(path).only(
        "theory", "electroweak", "grid", "input", "data", "prediction", "correction", "regimes", "chi_square",
        "output",
    )  # fmt: skip
    theory = Theory.from_dict(top.get("theory"), top.section("theory").where())
    source = top.section("input").only("file", "q2", "nf", "interpolate", "missing")
    data = top.section("data").only("file", "cut")
    corrections, boundaries = read_corrections(path, top), _boundaries(top)
    prediction = top.section("prediction", {}).only("target_mass", "subtraction")
    chi_square = top.section("chi_square", {}).only("form", "reference")
    output = top.section("output").only("file", "picture")
    file = result_file(path, output, "file", _TABLE)
    picture = None if output.get("picture", None) is None else result_file(path, output, "picture", _PICTURE)
    with prediction.blame():
        how = prediction.get("subtraction", "damped")
        subtraction = _check.choice("subtraction", how, ("damped", "chi", "plain"))
    with chi_square.blame():
        form = _check.choice("form", chi_square.get("form", "covariance"), ("covariance", "nuisance"))
        held = chi_square.get("reference", "data")
        reference = _check.choice("reference", held, ("data", "prediction"))
    target_mass = yes_or_no(prediction, "target_mass")
    electroweak = read_electroweak(top.section("electroweak", {}))
    given = _whole(_given(path, top, source), source)
    measured = read_measured(path, data)
    return PredictJob(
        top, theory, electroweak, given, measured, target_mass, subtraction, corrections, boundaries, form,
        reference, file, picture,
    )  # fmt: skip


def refuse_without_matplotlib(top: Section, key: str) -> None:
    """End a job that asks for pictures where they cannot be drawn, before any work is done."""
    if find_spec("matplotlib") is None:
        where = top.section("output").where(key)
        raise ImportError(f"{where}: matplotlib is not installed (pip install 'scalewright[plot]')")


def result_file(path: PathLike, output: Section, key: str, ending: str) -> str:
    """Return the name of a file to be written; refuse one that cannot be before any work is done."""
    file = toml.beside(path, output.text(key))
    if os.path.splitext(file)[1].lower() != ending:
        with output.blame():
            refuse(key, file, f"must end in {ending}")
    refuse_no_folder(output, key, file)
    return file


def read_electroweak(section: Section) -> Electroweak:
    """Return the named set of inputs, with the numbers that are given."""
    with section.blame():
        name = _check.choice("inputs", section.get("inputs", "effective"), tuple(_ELECTROWEAK))
    make, known = _ELECTROWEAK[name]
    section.only("inputs", *known)
    numbers = {key: section.get(key) for key in known if section.get(key, None) is not None}
    with section.blame():
        return make(**numbers)


def read_measured(path: PathLike, data: Section) -> Measurements:
    """Read the tables and cut them."""
    names = data.get("file")
    names = [names] if isinstance(names, str) else names
    if not isinstance(names, list) or not names or not all(isinstance(name, str) and name for name in names):
        what = "must be the name of a description, or a list of them"
        raise InputError(f"{data.where('file')} = {show(names)}: {what}")
    parts = [Measurements.read(toml.beside(path, name)) for name in names]
    with data.blame("file"):
        measured = Measurements.join(parts)
    cut = data.section("cut", {}).only("x", "q2", "w2", "y")
    ranges = {key: cut.get(key) for key in ("x", "q2", "w2", "y") if cut.get(key, None) is not None}
    with cut.blame():
        return measured.cut(**{key: _range(value) for key, value in ranges.items()})


def _range(value: Any) -> Any:
    """Return least and most as `Measurements.cut` has them: TOML has no word for an open end but inf."""
    if not isinstance(value, list):
        return value
    return tuple(None if isinstance(v, float) and np.isinf(v) else v for v in value)


def _boundaries(top: Section) -> dict[str, float]:
    """Return where regimes end, as far as the job says it."""
    section = top.section("regimes", {}).only(*BOUNDARIES)
    with section.blame():
        given = {name: section.get(name) for name in BOUNDARIES if section.get(name, None) is not None}
        return {name: _check.real(name, value, least=0.0) for name, value in given.items()}


def _whole(given: Densities, source: Section) -> Densities:
    """Return the densities with every active flavour, those that are missing 0 if the job says so."""
    with source.blame():
        missing = _check.choice("missing", source.get("missing", "error"), ("error", "zero"))
    nf = int(np.ravel(given.nf)[0])
    absent = [flavour for flavour in (*range(-nf, 0), *range(1, nf + 1), 21) if flavour not in given.flavours]
    if missing == "error" or not absent:
        return given
    shape = (given.replicas, len(absent), given.grid.nodes)
    values = np.concatenate([given.values.reshape(-1, *given.values.shape[-2:]), np.zeros(shape)], axis=1)
    q2 = float(np.ravel(given.q2)[0])
    return Densities(given.grid, q2=q2, nf=nf, flavours=(*given.flavours, *absent), values=values)


def yes_or_no(section: Section, key: str) -> bool:
    """Return true or false, false where nothing is said."""
    value = section.get(key, False)
    if not isinstance(value, bool):
        raise InputError(f"{section.where(key)} = {value!r}: must be true or false")
    return value


def refuse_no_folder(output: Section, key: str, file: str) -> None:
    """Refuse a file whose folder does not exist."""
    if not os.path.isdir(os.path.dirname(file) or "."):
        raise StoreError(f"{output.where(key)} = {file!r}: the folder does not exist")


def _points(output: Section, file: str) -> Floats | None:
    """Return the x of a table; refuse a result that cannot be written before any work is done."""
    with output.blame():
        kind = _kind("file", file)
        refuse_no_folder(output, "file", file)
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
        densities = Densities.from_csv(file, grid, interpolate=yes_or_no(source, "interpolate"))
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
    else:
        write_table(densities, file, x)
