"""Job files of fits: what `scalewright fit` and `scalewright closure` are told, checked before they work."""

from __future__ import annotations

import os
from dataclasses import dataclass
from typing import Any

from .. import _check
from .._check import Floats
from ..corrections import Correction
from ..electroweak import Electroweak
from ..errors import InputError
from ..files import toml
from ..files.toml import Section
from ..files.whole import PathLike
from ..fitting._problem import THEORY
from ..fitting.maps import Maps
from ..fitting.shapes import Shape
from ..grid import ChebyshevGrid
from ..measurements import Measurements
from ..theory import Theory
from .correction_job import read_corrections
from .jobs import read_electroweak, read_measured, refuse_no_folder, result_file, yes_or_no
from .scale_job import ScaleVariations, read_variations
from .shape_job import Start, read_parameters, read_shape, read_start

SECTIONS = (
    "theory", "electroweak", "grid", "data", "prediction", "chi_square", "shape", "parameters", "correction",
    "fit", "replicas", "output",
)  # fmt: skip
#: Files that a fit writes, and their endings.
ENDINGS = {
    "result": ".h5",
    "ensemble": ".h5",
    "densities": ".csv",
    "parameters": ".csv",
    "predictions": ".csv",
    "report": ".html",
}
_OF_REPLICAS = ("ensemble",)


@dataclass(frozen=True)
class ReplicaJob:
    """How many fits to pseudo-data, and how.

    Attributes
    ----------
    number, seed
        How many; what their random numbers come from.
    workers
        Processes, or None for all processors.
    journal
        File of results so far, or None.
    validation, patience
        As for `fit_replicas`.
    """

    number: int
    seed: int
    workers: int | None
    journal: str | None
    validation: float
    patience: int


@dataclass(frozen=True)
class FitJob:
    """What `scalewright fit` is told.

    Attributes
    ----------
    place
        The job file, for messages.
    theory, electroweak, grid
        What is assumed.
    measured
        The data, after cuts.
    target_mass, subtraction
        As for `forward_map`.
    form, reference
        Of chi-square; `reference` is "data" or "prediction".
    variations
        Of scales, for a covariance of the theory in chi-square, or None.
    start
        Scale and number of flavours at which the shape stands.
    shape
        What densities may look like.
    free
        Theory parameters that are fitted too.
    priors
        Of those.
    corrections
        Higher twist, deuteron and nuclear factors; their free parameters are fitted too.
    delta_chi2, evaluations, starts
        As for `fit`.
    replicas
        Fits to pseudo-data, or None.
    files
        "result", "report" ... -> file name, for what is asked for.
    pictures
        Folder of pictures, or None.
    q2, x
        Where the lattice of densities is given: scales, and x or None for the nodes.
    """

    place: Section
    theory: Theory
    electroweak: Electroweak
    grid: ChebyshevGrid
    measured: Measurements
    target_mass: bool
    subtraction: str
    form: str
    reference: str
    variations: ScaleVariations | None
    start: Start
    shape: Shape
    free: tuple[str, ...]
    priors: dict[str, tuple[float, float]]
    corrections: list[Correction]
    delta_chi2: float
    evaluations: int | None
    starts: int
    replicas: ReplicaJob | None
    files: dict[str, str]
    pictures: str | None
    q2: Floats | None
    x: Floats | None

    def maps(self) -> Maps:
        """Return the maps of the job."""
        return Maps(
            self.theory, self.grid, start_q2=self.start.q2, start_nf=self.start.nf, points=self.measured,
            electroweak=self.electroweak, target_mass=self.target_mass, subtraction=self.subtraction,
        )  # fmt: skip


def read_fit_job(path: PathLike, more: tuple[str, ...] = (), *, writes: bool = True) -> FitJob:
    """Read a job of `scalewright fit` and the tables it names.

    Parameters
    ----------
    path
        The job, TOML.
    more
        Sections that another command reads.
    writes
        Whether [output] is that of a fit; otherwise another command reads it.

    Raises
    ------
    InputError
        If a key is unknown, missing or wrong, or a table is; file and key, or line and column, are named.
    StoreError
        If the job or a file that it names cannot be read.
    """
    top = toml.load(path).only(*SECTIONS, *more)
    theory = Theory.from_dict(top.get("theory"), top.section("theory").where())
    data = top.section("data").only("file", "cut")
    target_mass, subtraction = read_prediction(top)
    form, reference = _chi_square(top)
    free, delta_chi2, evaluations, starts = _fit(top)
    replicas = _replicas(path, top)
    electroweak = read_electroweak(top.section("electroweak", {}))
    shape_section, grid = top.section("shape"), _grid(top)
    start = read_start(shape_section, theory)
    bare = read_shape(shape_section, grid, start.nf)
    shape, priors = read_parameters(top.section("parameters", {}), bare, free)
    measured = read_measured(path, data)
    variations = read_variations(top.section("chi_square", {}), measured)
    files, pictures, q2, x = _nothing()
    if writes:
        files, pictures, q2, x = _output(path, top, start, grid, replicas is not None)
    return FitJob(
        top, theory, electroweak, grid, measured, target_mass, subtraction, form, reference,
        variations, start, shape, free, priors, read_corrections(path, top), delta_chi2, evaluations,
        starts, replicas, files, pictures, q2, x,
    )  # fmt: skip


def read_prediction(top: Section) -> tuple[bool, str]:
    """Return target_mass and subtraction."""
    prediction = top.section("prediction", {}).only("target_mass", "subtraction")
    with prediction.blame():
        how = prediction.get("subtraction", "damped")
        subtraction = _check.choice("subtraction", how, ("damped", "chi", "plain"))
    return yes_or_no(prediction, "target_mass"), subtraction


def _chi_square(top: Section) -> tuple[str, str]:
    section = top.section("chi_square", {}).only("form", "reference", "scale_variations")
    with section.blame():
        form = _check.choice("form", section.get("form", "covariance"), ("covariance", "nuisance"))
        held = section.get("reference", "prediction")
        return form, _check.choice("reference", held, ("prediction", "data"))


def _fit(top: Section) -> tuple[tuple[str, ...], float, int | None, int]:
    section = top.section("fit", {}).only("theory", "delta_chi2", "evaluations", "starts")
    given = section.get("theory", [])
    if not isinstance(given, list):
        known = ", ".join(f'"{name}"' for name in THEORY)
        raise InputError(f"{section.where('theory')} = {given!r}: must be a list of {known}")
    with section.blame():
        for place, name in enumerate(given):
            _check.choice("theory", name, THEORY)
            if name in given[:place]:
                _check.refuse("theory", name, "stands there twice")
        delta = _check.real("delta_chi2", section.get("delta_chi2", 1.0), above=0.0)
        most = section.get("evaluations", None)
        evaluations = None if most is None else _check.whole("evaluations", most, least=1)
        starts = _check.whole("starts", section.get("starts", 1), least=1, most=10**6)
    return tuple(given), delta, evaluations, starts


def _replicas(path: PathLike, top: Section) -> ReplicaJob | None:
    """Return what the job says of replicas, or None where it says nothing."""
    if top.get("replicas", None) is None:
        return None
    section = top.section("replicas").only("number", "seed", "workers", "journal", "validation", "patience")
    journal = None
    if section.get("journal", None) is not None:
        journal = toml.beside(path, section.text("journal"))
        refuse_no_folder(section, "journal", journal)
    number, seed = section.get("number"), section.get("seed")
    with section.blame():
        workers = section.get("workers", None)
        return ReplicaJob(
            _check.whole("number", number, least=2, most=10**7),
            _check.whole("seed", seed, least=0),
            None if workers is None else _check.whole("workers", workers, least=1, most=10**5),
            journal,
            _check.real("validation", section.get("validation", 0.0), least=0.0, below=1.0),
            _check.whole("patience", section.get("patience", 5), least=1),
        )


def _grid(top: Section) -> ChebyshevGrid:
    section = top.section("grid", {}).only("x_min", "resolution")
    with section.blame():
        return ChebyshevGrid(section.get("x_min", 1e-5), section.get("resolution", "standard"))


_Outputs = tuple[dict[str, str], str | None, Floats | None, Floats | None]


def _nothing() -> _Outputs:
    return {}, None, None, None


def _output(path: PathLike, top: Section, start: Start, grid: ChebyshevGrid, has_replicas: bool) -> _Outputs:
    """Return files, folder of pictures, and scales and x of the lattice."""
    output = top.section("output").only(*ENDINGS, "pictures", "q2", "x")
    files = {
        key: result_file(path, output, key, ending)
        for key, ending in ENDINGS.items()
        if output.get(key, None) is not None
    }
    pictures = None if output.get("pictures", None) is None else toml.beside(path, output.text("pictures"))
    if not files and pictures is None:
        raise InputError(f"{output.where()}: nothing to write: name one of {', '.join(ENDINGS)}, pictures")
    for key in _OF_REPLICAS:
        if key in files and not has_replicas:
            raise InputError(f"{output.where(key)}: there are no replicas: add a table [replicas]")
    _refuse_twice(output, files)
    for key in ("q2", "x"):
        if output.get(key, None) is not None and "densities" not in files:
            raise InputError(f"{output.where(key)}: only for the file of densities, which is not asked for")
    if "densities" not in files:
        return files, pictures, None, None
    with output.blame():
        q2 = _check.scales("q2", output.get("q2", [start.q2]))
        x: Any = output.get("x", None)
        if x is not None:
            x = _check.x_values("x", x, x_min=grid.x_min, rounding=1e-13)
    return files, pictures, q2, x


def _refuse_twice(output: Section, files: dict[str, str]) -> None:
    """Refuse two results in one file."""
    seen: dict[str, str] = {}
    for key, file in files.items():
        other = seen.setdefault(os.path.abspath(file), key)
        if other != key:
            raise InputError(f"{output.where(key)} = {file!r}: the same file as {other}")
