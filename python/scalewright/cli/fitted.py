"""The steps of a fit: map, chi-square with its reference, minimum, replicas."""

from __future__ import annotations

import contextlib
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from .._check import Floats
from .._progress import Line
from ..build import build_operators
from ..densities import Densities
from ..errors import InputError, RangeError, ScalewrightError
from ..fitting.chi_square import ChiSquare
from ..fitting.ensemble import Ensemble
from ..fitting.least_squares import FitResult, NotSettledError, fit
from ..fitting.maps import KnownMap, Maps, theory_at
from ..fitting.reference import settle_reference
from ..fitting.replicas import fit_replicas
from ..fitting.theory_covariance import ScaleCovariance
from ..measurements import Measurements
from .fit_job import FitJob
from .report import Report


@dataclass(frozen=True)
class Fitted:
    """What the steps gave.

    Attributes
    ----------
    chi_square
        The last one, with its reference.
    result
        The fit to the data.
    fmap
        The map it ended with.
    history
        Chi-squares while the reference settled.
    scales
        The covariance of the theory in chi-square, or None.
    """

    chi_square: ChiSquare
    result: FitResult
    fmap: KnownMap
    history: tuple[float, ...]
    scales: ScaleCovariance | None = None


def fit_data(job: FitJob, maps: Maps, measured: Measurements, report: Report | None = None) -> Fitted:
    """Fit a job's shape to measurements, the reference of multiplicative errors settled.

    Parameters
    ----------
    job : FitJob
    maps : Maps
        Those of the job; what they built last is used again.
    measured : Measurements
        The data of the job, or others at the same points.
    report : Report, optional
        Where progress is drawn.

    Raises
    ------
    InputError
        If the parts do not fit each other, or the reference does not settle.
    """
    first = ChiSquare(measured, job.form)
    line = None if report is None else report.progress("fit to the data")
    # it takes the map as it comes; fits after it follow theory parameters
    found = [_fit_once(job, maps, first, None, line)]
    scales = None
    if job.variations is not None:  # around a fit that knows nothing of them
        scales = job.variations.covariance(maps, found[-1], first, job.corrections)
        first = ChiSquare(measured, job.form, theory=scales.matrix)
        found.append(_fit_once(job, maps, first, found[-1], line))

    def once(chi_square: ChiSquare) -> Floats:
        if chi_square is not first:
            found.append(_fit_once(job, maps, chi_square, found[-1], line))
        return found[-1].prediction

    if job.reference == "data":
        if job.free:
            found.append(_fit_once(job, maps, first, found[-1], line))
        return Fitted(first, found[-1], _map_of(maps, found[-1]), (found[-1].chi2,), scales)
    settled = settle_reference(first, once)
    return Fitted(settled.chi_square, found[-1], _map_of(maps, found[-1]), settled.history, scales)


def _fit_once(
    job: FitJob, maps: Maps, chi_square: ChiSquare, last: FitResult | None, line: Line | None
) -> FitResult:
    """Fit with one reference; from the second time on the map follows theory parameters."""
    if line is not None:
        line.say("...")
    try:
        return _fit_on(job, maps, chi_square, last, line)
    except NotSettledError as error:
        said = "; ".join(error.result.status)
        raise InputError(f"{error.reason}; the last fit{_kept(job, error.result)}: {said}") from error
    finally:
        if line is not None:
            line.clear()


def _kept(job: FitJob, result: FitResult) -> str:
    """Write a fit that did not settle, if there is a file for it; say where it is."""
    if "result" not in job.files:
        return ""
    try:
        result.save(job.files["result"])
    except InputError:  # with a coupling on its bound at 0 there is no theory to write
        return ""
    return f", which is in {job.files['result']}"


def _fit_on(
    job: FitJob, maps: Maps, chi_square: ChiSquare, last: FitResult | None, line: Line | None
) -> FitResult:
    def step(number: int, chi2: float, _: Floats) -> None:
        if line is not None:
            line.say(f"step {number}, chi-square {chi2:.6g}")

    options: dict[str, Any] = {"priors": job.priors, "delta_chi2": job.delta_chi2, "theory": job.free}
    options |= {
        "evaluations": job.evaluations,
        "corrections": job.corrections,
        "starts": job.starts,
        "callback": step,
    }
    if last is None:
        return fit(maps(), chi_square, job.shape, **options)
    rebuild = maps if job.free else None
    start = last.parameters if last.converged else None
    return fit(_map_of(maps, last), chi_square, job.shape, start=start, rebuild=rebuild, **options)


def _map_of(maps: Maps, result: FitResult) -> KnownMap:
    """Return the map that a fit ended with, without building it again."""
    return maps(result.map_at)


def replicas_of(job: FitJob, fitted: Fitted, report: Report, label: str = "replicas") -> Ensemble | None:
    """Return the replicas that the job asks for, or None.

    Raises
    ------
    StoreError
        If the journal is of another fit or cannot be written.
    ScalewrightError
        If all fits failed, or workers die again and again.
    """
    asked = job.replicas
    if asked is None:
        return None
    progress = report.progress(label)
    return fit_replicas(
        fitted.fmap, fitted.chi_square, job.shape, replicas=asked.number, seed=asked.seed, theory=job.free,
        priors=job.priors, corrections=job.corrections, workers=asked.workers, journal=asked.journal,
        progress=False if progress is None else progress, evaluations=job.evaluations,
        validation=asked.validation, patience=asked.patience,
        start=fitted.result.parameters if fitted.result.converged and not asked.validation else None,
    )  # fmt: skip


def spread_of(fitted: Fitted, ensemble: Ensemble) -> Floats:
    """Return the standard deviation of predictions over replicas, (datum,), each with all its parameters."""
    return np.asarray(np.std(fitted.result.predict(ensemble.parameters), axis=0, ddof=1))


def numerical_error(job: FitJob, fitted: Fitted) -> Floats:
    """Return the numerical error of predictions, (datum,), at the minimum."""
    found = dict(zip(fitted.result.names, fitted.result.parameters.tolist(), strict=True))
    corrections = [one.at(found) if found.keys() & set(one.names) else one for one in job.corrections]
    return np.asarray(fitted.fmap.numerical_error(fitted.result.densities, corrections)[0])


def evolved(job: FitJob, fitted: Fitted, ensemble: Ensemble | None, q2: Floats, report: Report) -> Densities:
    """Return the densities of a fit at other scales.

    Parameters
    ----------
    job : FitJob
    fitted : Fitted
    ensemble : Ensemble, optional
        With it, all replicas; where theory parameters are free, each by the theory that it found itself.
    q2 : ndarray, (scale,)
        In GeV^2.
    report : Report
        Where progress is drawn.

    Raises
    ------
    RangeError
        If a coupling is too large somewhere; the replica is named.
    """
    theory = fitted.result.theory
    assert theory is not None  # our maps say what was assumed
    if ensemble is None:
        return _carried(job, theory, fitted.result.densities, q2)
    start = ensemble.densities
    if not job.free:
        return _carried(job, theory, start, q2)
    progress = report.progress("evolving replicas")
    parts = []
    for i, row in enumerate(ensemble.parameters):
        at = dict(zip(ensemble.names[-len(job.free) :], row[-len(job.free) :].tolist(), strict=True))
        with _of_replica(int(ensemble.index[i])):
            parts.append(_carried(job, theory_at(job.theory, at), _replica(start, i), q2))
        if progress is not None:
            progress(i + 1, ensemble.replicas)
    values = np.concatenate([part.values for part in parts], axis=1)
    first = parts[0]
    return Densities(first.grid, q2=first.q2, nf=first.nf, flavours=first.flavours, values=values)


def _carried(job: FitJob, theory: Any, start: Densities, q2: Floats) -> Densities:
    operators = build_operators(
        theory, job.grid, start_q2=job.start.q2, start_nf=job.start.nf, q2=np.asarray(q2)
    )
    return operators.apply(start)


def _replica(densities: Densities, i: int) -> Densities:
    return Densities(
        densities.grid, q2=float(densities.q2), nf=int(densities.nf), flavours=densities.flavours,
        values=densities.values[i : i + 1],
    )  # fmt: skip


@contextlib.contextmanager
def _of_replica(index: int) -> Iterator[None]:
    try:
        yield
    except (InputError, RangeError) as error:
        raise type(error)(f"replica {index}: {error}") from error


def refuse_unconverged(job: FitJob, fitted: Fitted) -> None:
    """End with an error where the fit to the data has found no minimum, unless replicas stop early anyway."""
    is_early = job.replicas is not None and job.replicas.validation > 0.0
    if not fitted.result.converged and not is_early:
        said = f"{fitted.result.status[0]}; what was found is written"
        raise ScalewrightError(f"{job.place.where()}: {said}")
