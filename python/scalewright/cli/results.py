"""What a fit leaves behind: files, report, pictures, and the summary on the screen."""

from __future__ import annotations

import os
from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from .._display import brief
from ..densities import Densities
from ..errors import StoreError
from ..files.whole import reason, write_whole
from ..fitting.ensemble import Ensemble
from ..fitting.functionals import Functional
from ..report import fit_report
from .fit_job import FitJob
from .fitted import Fitted, evolved, fit_data, numerical_error, replicas_of, spread_of
from .report import Report, chi_square_summary
from .written import write_parameters, write_predictions, write_table

_SHOWN = 16  # parameters: more would not fit on a screen


@dataclass
class Results:
    """What a job gave.

    Attributes
    ----------
    fitted, ensemble
        The fit, and its replicas or None.
    text
        Of the job file.
    truth
        Functional -> value, where the law behind the data is known.
    files
        What was written, one line each.
    """

    fitted: Fitted
    ensemble: Ensemble | None
    text: str
    truth: Mapping[str, float] = field(default_factory=dict)
    files: list[str] = field(default_factory=list)


def done(job: FitJob, report: Report, text: str, truth: Mapping[str, float] | None = None) -> Results:
    """Do all that a job asks for, and write it.

    Parameters
    ----------
    job : FitJob
    report : Report
        Where progress is drawn.
    text : str
        Of the job file.
    truth : mapping, optional
        Functional -> value, where the law behind the data is known.
    """
    _make_folder(job)
    with job.place.blame():
        fitted = fit_data(job, job.maps(), job.measured, report)
    try:
        with job.place.blame():
            ensemble = replicas_of(job, fitted, report)
    except KeyboardInterrupt:
        if job.replicas is not None and job.replicas.journal is not None:
            report.note(
                f"what was computed is in {job.replicas.journal}: the same command goes on from there"
            )
        raise
    results = Results(fitted, ensemble, text, dict(truth or {}))
    with job.place.blame():
        write_all(job, results, report)
    return results


def write_all(job: FitJob, results: Results, report: Report) -> None:
    """Write what a job asks for; what is dear comes first.

    Raises
    ------
    StoreError
        If a file cannot be written; those before it stay.
    """
    fitted, ensemble, files = results.fitted, results.ensemble, job.files
    if "result" in files:
        fitted.result.save(files["result"])
        results.files.append(f"{files['result']}: the fit; `scalewright info` shows it")
    if "ensemble" in files and ensemble is not None:
        ensemble.save(files["ensemble"])
        results.files.append(f"{files['ensemble']}: {ensemble!r}")
    if "parameters" in files:
        write_parameters(files["parameters"], fitted.result, ensemble)
        results.files.append(f"{files['parameters']}: parameters")
    if "predictions" in files:
        _predictions(files["predictions"], job, results)
        results.files.append(f"{files['predictions']}: predictions and pulls")
    carried = _densities(job, results, report)
    if "report" in files:
        _report(job, results, carried)
        results.files.append(f"{files['report']}: the report; it opens in any browser")
    if job.pictures is not None:
        results.files.append(f"{job.pictures}: {_pictures(job, results, carried)} pictures")


def _predictions(file: str, job: FitJob, results: Results) -> None:
    fitted = results.fitted
    spread = None if results.ensemble is None else spread_of(fitted, results.ensemble)
    error = numerical_error(job, fitted)
    write_predictions(file, fitted.chi_square, fitted.result.prediction, error, spread)


def _densities(job: FitJob, results: Results, report: Report) -> Densities | None:
    """Write the lattice of densities; return them."""
    if job.q2 is None:
        return None
    carried = evolved(job, results.fitted, results.ensemble, job.q2, report)
    write_table(carried, job.files["densities"], job.x)
    results.files.append(f"{job.files['densities']}: {carried!r}")
    return carried


def _report(job: FitJob, results: Results, carried: Densities | None) -> None:
    fitted = results.fitted
    notes = {
        "electroweak inputs": job.electroweak.describe().removeprefix("electroweak inputs: "),
        "target mass": "kept" if job.target_mass else "neglected",
        "reference of multiplicative errors": "the data"
        if job.reference == "data"
        else "an earlier prediction",
        "shape": repr(job.shape),
        "corrections": ", ".join(map(repr, job.corrections)) or "none",
    }
    if fitted.scales is not None:
        notes["covariance of the theory"] = "; ".join(_scales(job, fitted))
    if job.theory.heavy_quarks == "matched":
        notes["what is beyond the massive part"] = job.subtraction
    if job.free:
        names = ", ".join(job.free)
        notes["replicas"] = f"move {names} to first order around the best fit, thresholds fixed"
    fit_report(
        job.files["report"], fitted.result, fitted.chi_square, ensemble=results.ensemble, evolved=carried,
        truth=results.truth, history=fitted.history, notes=notes, job=results.text,
    )  # fmt: skip


def _scales(job: FitJob, fitted: Fitted) -> tuple[str, str]:
    """Say which scales vary, by how much, and what that is beside the errors of the data."""
    assert fitted.scales is not None and job.variations is not None
    of_data = np.diagonal(fitted.chi_square.covariance) - np.diagonal(fitted.scales.matrix)
    ratio = np.sqrt(np.diagonal(fitted.scales.matrix) / of_data)
    size = f"{np.median(ratio):.2g} of those of the data (median; the largest {ratio.max():.2g})"
    by = f"ratios times and over {job.variations.factor:g} make errors of {size}"
    return fitted.scales.describe(), by


def _make_folder(job: FitJob) -> None:
    """Make the folder of pictures, before any work is done."""
    if job.pictures is None:
        return
    try:
        os.makedirs(job.pictures, exist_ok=True)
    except OSError as error:
        where = job.place.section("output").where("pictures")
        raise StoreError(f"{where} = {job.pictures!r}: the folder cannot be made: {reason(error)}") from error


def _pictures(job: FitJob, results: Results, carried: Densities | None) -> int:
    """Draw into the folder; return how many pictures."""
    from ..plot import png_of
    from ..plot_data import data_figure
    from ..report import figures

    assert job.pictures is not None
    fitted, ensemble = results.fitted, results.ensemble
    result, chi_square = fitted.result, fitted.chi_square
    start = ensemble.densities if ensemble else figures.hessian_samples(result) or result.densities
    sets: list[tuple[Densities, float | None]] = [(start, None)]
    if carried is not None:
        sets.append((carried, float(np.max(carried.q2))))
    drawn = {
        "densities": figures.densities_figure(sets),
        "ratios": figures.ratios_figure(result, ensemble),
        "pulls": figures.pulls_figure(chi_square, result.prediction),
    }
    if chi_square.names_of_sources:
        drawn["shifts"] = figures.shifts_figure(chi_square, result.prediction)
    known = figures.parameter_correlations(result)
    if known is not None:
        drawn["correlations"] = figures.correlations_figure(*known)
    if ensemble is not None and ensemble.replicas > 2:
        quantities = [(name, ensemble.parameter(name)) for name in ensemble.names[-3:]]
        drawn["convergence"] = figures.convergence_figure(ensemble, quantities)
    for k, title in enumerate(chi_square.measurements.tables, start=1):
        drawn[f"data-{k}"] = data_figure(
            chi_square.measurements, result.prediction, table=title, chi_square=chi_square
        )
    for name, figure in drawn.items():
        write_whole(os.path.join(job.pictures, f"{name}.png"), png_of(figure, 120))
    return len(drawn)


def fit_summary(job: FitJob, results: Results, report: Report) -> None:
    """Print what was found on one screen."""
    fitted, ensemble = results.fitted, results.ensemble
    result = fitted.result
    for line in result.status:
        report.say(f"  {line}")
    for cut in job.measured.cuts:
        report.say(f"  cut {cut}")
    if fitted.scales is not None:
        for line in _scales(job, fitted):
            report.say(f"  {line}")
    chi_square_summary(fitted.chi_square, result.prediction, report)
    if ensemble is not None:
        replica_lines(ensemble, report)
    head = ["parameter", "best fit", "uncertainty"]
    if ensemble is not None:
        head += ["replicas", "deviation"]
    rows = [_parameter(name, results) for name in _chosen(result.names)]
    report.table(head, rows)
    if len(rows) < len(result.names):
        report.say(f"    ... and {len(result.names) - len(rows)} more")


def truth_table(results: Results, report: Report) -> None:
    """Print how far the fit is from the law behind the data, in units of its uncertainty."""
    rows = []
    for text, exact in results.truth.items():
        one = Functional(text)
        value, error = one.of_fit(results.fitted.result)
        row = [text, f"{exact:.4g}", f"{value:.4g}", f"{error:.2g}", f"{(value - exact) / error:+.2f}"]
        if results.ensemble is not None:
            values = one.of_ensemble(results.ensemble)
            row.append(f"{(values.mean() - exact) / values.std(ddof=1):+.2f}")
        rows.append(row)
    head = ["against the law", "law", "fit", "uncertainty", "pull"]
    report.table([*head, "of replicas"] if results.ensemble is not None else head, rows)


def _chosen(names: tuple[str, ...]) -> tuple[str, ...]:
    """Return the parameters that are shown: the last ones, those of the theory, always."""
    return names if len(names) <= _SHOWN else (*names[: _SHOWN - 3], *names[-3:])


def _parameter(name: str, results: Results) -> list[str]:
    result = results.fitted.result
    bound, error = result.at_bounds.get(name), result.error(name)
    said = f"{bound} bound" if bound else ("unknown" if np.isnan(error) else f"{error:.2g}")
    row = [name, brief(float(f"{result.value(name):.5g}")), said]
    if results.ensemble is not None:
        values = results.ensemble.parameter(name)
        row += [f"{values.mean():.5g}", f"{values.std(ddof=1):.2g}"]
    return row


def replica_lines(ensemble: Ensemble, report: Report) -> None:
    """Print how many replicas there are, and the first failures."""
    total = ensemble.replicas + len(ensemble.failed)
    report.say(f"  {ensemble.replicas} replicas of {total}")
    if ensemble.failed:
        index, said = next(iter(ensemble.failed.items()))
        many = "  WARNING: more than 1 per cent failed" if len(ensemble.failed) > 0.01 * total else ""
        report.say(f"  {len(ensemble.failed)} failed, the first of them {index}: {said}{many}")
    if ensemble.negative:
        report.say(f"  {ensemble.negative} pseudo-data were negative, and kept")
    for note in ensemble.notes:
        report.say(f"  {note}")
