"""`scalewright demo`: the main job end to end, on the published benchmark and a made-up measurement."""

from __future__ import annotations

import argparse
import os
import time
from importlib import resources

import numpy as np

from .. import _check
from ..errors import InputError, StoreError
from ..files.whole import read_whole, reason, write_whole
from ..fitting.functionals import default_functionals
from ..grid import ChebyshevGrid
from . import benchmark, campaign
from .benchmark import Comparison
from .fit_job import read_fit_job
from .report import Report, chi_square_summary
from .results import Results, done, replica_lines, truth_table

NAME = "demo"
SUMMARY = "compare with the published benchmark, and fit a made-up measurement whose law is known"
EXAMPLE = """example:
  scalewright demo --out demo --replicas 100

What it fits is written as a job, DIR/fit.toml: change it, and run `scalewright fit DIR/fit.toml`.
"""


def arguments(parser: argparse.ArgumentParser) -> None:
    """Describe the arguments."""
    parser.add_argument("--out", metavar="DIR", default=".", help="where to write (default: here)")
    parser.add_argument("--replicas", metavar="N", default="100", help="fits to pseudo-data (default: 100)")


def run(options: argparse.Namespace) -> None:
    """Compare, fit, write, print one screen."""
    report = Report(options.quiet)
    count = _count(options.replicas)
    _make_folder(options.out)
    _refuse_changed(os.path.join(options.out, "fit.toml"))
    _benchmark(ChebyshevGrid(x_min=1e-7), report)
    report.say()
    _campaign(options.out, count, report)


def _count(text: str) -> int:
    """Return the number of replicas."""
    if not text.isdecimal():
        _check.refuse("--replicas", text, "must be a whole number")
    return _check.whole("--replicas", int(text), least=2, most=1_000_000)


def _make_folder(folder: str) -> None:
    try:
        os.makedirs(folder, exist_ok=True)
    except OSError as error:
        raise StoreError(f"--out = {folder}: the folder cannot be made: {reason(error)}") from error


def _refuse_changed(place: str) -> None:
    """Refuse to write over a job that somebody has written or changed."""
    if not os.path.exists(place):
        return
    found = read_whole(place).decode("utf-8", "replace")
    if _fixed(found) != _fixed(job_text(2)):
        raise InputError(
            f"{place}: is there already, and not as the demo writes it: move it, or name a folder with --out"
        )


def _fixed(text: str) -> list[str]:
    """Return the lines of a job of the demo that are the same for all folders and numbers of replicas."""
    return [line for line in text.splitlines() if not line.startswith(("file = ", "number = "))]


def _benchmark(grid: ChebyshevGrid, report: Report) -> None:
    """Compare with all tables and print the largest deviation of each."""
    jobs = [(order, scheme) for scheme in benchmark.SCHEMES for order in benchmark.ORDERS]
    progress = report.progress("comparing tables")
    rows = []
    for place, (order, scheme) in enumerate(jobs):
        if progress is not None:
            progress(place, len(jobs))
        rows.append(_row(benchmark.compare(order, scheme, grid)))
    if progress is not None:
        progress(len(jobs), len(jobs))
    report.say("Published benchmark, hep-ph/0204316 and hep-ph/0511119: x f(x) at 1e4 GeV^2")
    report.say("(largest deviation in units of the last printed digit; rounding alone makes up to 0.5)")
    report.table(["table", "entries", "largest", "at x", "of"], rows)


def _row(found: Comparison) -> list[str]:
    entry = found.entries[found.worst]
    name = f"{found.order}, {benchmark.SCHEMES[found.scheme]}"
    largest = f"{abs(found.off[found.worst]):.2f}"
    return [name, str(len(found.entries)), largest, f"{entry.x:g}", entry.quantity]


def _campaign(folder: str, count: int, report: Report) -> None:
    """Fit the made-up campaign, and say how far the fit is from the law behind it."""
    start = time.perf_counter()
    place = os.path.join(folder, "fit.toml")
    text = job_text(count)
    write_whole(place, text.encode("utf-8"))
    job = read_fit_job(place)
    theory, law = campaign.theory(), campaign.law(job.grid)
    known = {one.text: one.of_law(law, theory) for one in default_functionals(job.free, job.grid.x_min)}
    results = done(job, report, text, known)
    taken = time.perf_counter() - start
    report.say(f"A made-up measurement, {len(job.measured)} cross sections, fitted at NNLO in {taken:.1f} s")
    _summary(results, report)
    report.say(f"{place}: the job; `scalewright fit` does it again")
    for line in results.files:
        report.say(line)


def job_text(replicas: int) -> str:
    """Return the job of the demo, for any folder.

    Parameters
    ----------
    replicas : int
        How many.
    """
    data = resources.files("scalewright") / "data"
    text = (data / "demo" / "fit.toml").read_text(encoding="utf-8")
    measured = os.path.abspath(campaign.folder() / "campaign.toml")
    text = text.replace("../campaign/campaign.toml", measured)
    return text.replace("number = 100", f"number = {replicas}")


def _summary(results: Results, report: Report) -> None:
    result = results.fitted.result
    report.say(f"  {result.status[0]}")
    chi_square_summary(results.fitted.chi_square, result.prediction, report)
    _predictions(results, report)
    if results.ensemble is not None:
        replica_lines(results.ensemble, report)
    truth_table(results, report)


def _predictions(results: Results, report: Report) -> None:
    """Print what is predicted for the middle datum of each table."""
    chi_square, prediction = results.fitted.chi_square, results.fitted.result.prediction
    measured = chi_square.measurements
    sigma, pulls = np.sqrt(np.diagonal(chi_square.covariance)), chi_square.pulls(prediction, shifted=True)
    rows = []
    for number, title in enumerate(measured.tables):
        own = np.flatnonzero(measured.table_of == number)
        at = own[own.size // 2]
        numbers = (measured.x[at], measured.q2[at], measured.value[at], sigma[at], prediction[at])
        rows.append([title, *(f"{number:.4g}" for number in numbers), f"{pulls[at]:+.2f}"])
    report.table(["one of each", "x", "Q^2", "measured", "+-", "predicted", "pull"], rows)
