"""`scalewright closure JOB.toml`: whether a fit finds back a law that is known."""

from __future__ import annotations

import argparse
import time
from dataclasses import dataclass
from typing import Any

import numpy as np

from .. import _check
from ..closure import Closure, Starts, closure_test
from ..densities import Densities
from ..errors import InputError
from ..files import toml
from ..files.toml import Section
from ..fitting.chi_square import ChiSquare
from ..fitting.functionals import Functional, default_functionals
from .fit_job import FitJob, read_fit_job
from .jobs import result_file
from .report import Report
from .written import numbers, write_columns

NAME = "closure"
SUMMARY = "fit pseudo-data from a known law, and count how often the truth lies inside the uncertainties"
EXAMPLE = """example:
  scalewright closure job.toml

with job.toml as for `scalewright fit`, with another [output], and

  [closure]
  sets = 100                          # sets of pseudo-data at level 2
  seed = 1
  levels = [0, 1, 2]                  # arXiv:1410.8849
  law = "law.h5"                      # densities at the start; without it the shape where it starts
  functionals = ["alpha_s", "momentum(g)", "u_v(0.3)", "g(0.01)"]

  [output]
  sets = "closure.csv"                # value and uncertainty of each functional in each set

The theory of the job is that of the law. With a table [replicas] so many replicas are made of each set.
"""


@dataclass(frozen=True)
class ClosureJob:
    """What `scalewright closure` is told.

    Attributes
    ----------
    fit
        The job of the fits.
    sets, seed, levels, starts, functionals
        As for `closure_test`.
    law
        Densities behind the pseudo-data.
    file
        Where results of each set go, or None.
    """

    fit: FitJob
    sets: int
    seed: int
    levels: tuple[int, ...]
    starts: int
    functionals: tuple[Functional, ...]
    law: Densities
    file: str | None


def arguments(parser: argparse.ArgumentParser) -> None:
    """Describe the arguments."""
    parser.add_argument("job", metavar="JOB.toml", help="the job; file names in it are relative to it")


def run(options: argparse.Namespace) -> None:
    """Read the job, fit the sets, print how often the truth lies inside."""
    report = Report(options.quiet)
    job = read_closure_job(options.job)
    fit, replicas = job.fit, job.fit.replicas
    start = time.perf_counter()
    with fit.place.blame():
        progress = report.progress("closure")
        found = closure_test(
            fit.maps()(), ChiSquare(fit.measured, fit.form), fit.shape, job.law,
            functionals=[one.text for one in job.functionals], sets=job.sets, seed=job.seed,
            levels=job.levels, starts=job.starts, theory=fit.free, priors=fit.priors,
            replicas=0 if replicas is None else replicas.number,
            workers=1 if replicas is None else replicas.workers,
            progress=False if progress is None else progress,
        )  # fmt: skip
    if job.file is not None:
        _write(job.file, found)
    report.say(f"{options.job}: closure test of {fit.shape!r}")
    report.say(f"  on {fit.measured!r}, with {fit.theory!r}")
    report.say(f"  in {time.perf_counter() - start:.1f} s")
    closure_summary(found, report)
    if job.file is not None:
        report.say(f"{job.file}: values of {found.sets} sets")


def read_closure_job(path: str) -> ClosureJob:
    """Read a job of `scalewright closure`.

    Raises
    ------
    InputError
        If a key is unknown, missing or wrong; file and key are named.
    StoreError
        If the job or a file that it names cannot be read.
    """
    fit = read_fit_job(path, more=("closure",), writes=False)
    if fit.variations is not None:
        where = fit.place.section("chi_square").where("scale_variations")
        raise InputError(f"{where}: the theory of a closure test is that of the law: leave it out")
    section = fit.place.section("closure").only("sets", "seed", "levels", "starts", "law", "functionals")
    output = fit.place.section("output", {}).only("sets")
    file = None if output.get("sets", None) is None else result_file(path, output, "sets", ".csv")
    levels = section.get("levels", [0, 1, 2])
    if not isinstance(levels, list) or not levels:
        raise InputError(f"{section.where('levels')} = {levels!r}: must be a list of 0, 1 and 2")
    sets, seed = section.get("sets", 100), section.get("seed")
    with section.blame():
        return ClosureJob(
            fit,
            _check.whole("sets", sets, least=2, most=10**6),
            _check.whole("seed", seed, least=0),
            tuple(_check.whole("levels", level, least=0, most=2) for level in levels),
            _check.whole("starts", section.get("starts", 4), least=1, most=1000),
            _functionals(section, fit),
            _law(path, section, fit),
            file,
        )


def _functionals(section: Section, fit: FitJob) -> tuple[Functional, ...]:
    given: Any = section.get("functionals", None)
    if given is None:
        return default_functionals(fit.free, fit.grid.x_min)
    if not isinstance(given, list) or not given:
        _check.refuse("functionals", given, 'must be a list of texts such as "momentum(g)"')
    found = tuple(Functional(text) for text in given)
    for one in found:
        if one.parameter is not None and one.parameter not in fit.free:
            _check.refuse("functionals", one.text, "is not fitted: name it in [fit] theory")
        if one.x is not None:
            _check.x_values(one.text, one.x, x_min=fit.grid.x_min, rounding=1e-13)
    return found


def _law(path: str, section: Section, fit: FitJob) -> Densities:
    """Return the densities behind the pseudo-data."""
    if section.get("law", None) is None:
        return fit.shape.densities(fit.shape.start, q2=fit.start.q2, nf=fit.start.nf)
    law = Densities.load(toml.beside(path, section.text("law")))
    if law.replicas != 1:
        _check.refuse("law", law, f"there must be one set of densities, not {law.replicas}")
    if law.grid != fit.grid:
        _check.refuse("law", law, f"its grid must be that of the job, {fit.grid!r}")
    return law


def closure_summary(found: Closure, report: Report) -> None:
    """Print what the levels gave."""
    for level, starts in ((0, found.level_0), (1, found.level_1)):
        if starts is not None:
            report.say(f"  level {level}: {_starts(level, starts, found.data)}")
    if not found.sets:
        return
    per_datum = found.chi2.mean() / found.data
    report.say(f"  level 2: {found.sets} sets, chi-square per datum {per_datum:.3f} on average")
    if found.failed:
        k, said = next(iter(found.failed.items()))
        report.say(f"  {len(found.failed)} sets failed and are left out, the first of them {k}: {said}")
    head = ["functional", "law", "mean pull", "deviation", "inside"]
    rows = []
    for place, name in enumerate(found.functionals):
        pulls = found.pulls[:, place]
        row = [name, f"{found.truth[place]:.4g}", f"{pulls.mean():+.2f}", f"{pulls.std(ddof=1):.2f}"]
        row.append(_covered(found.coverage(name)))
        if found.replicas:
            row.append(_covered(found.replica_coverage(name)))
        rows.append(row)
    report.table([*head, "of replicas"] if found.replicas else head, rows)
    one = found.coverage(found.functionals[0])
    report.say(
        f"  inside one uncertainty: {100 * one.expected:.1f} +- {100 * one.error:.1f} per cent expected"
    )
    if found.replicas:
        many = found.replica_coverage(found.functionals[0])
        report.say(
            f"  with {found.replicas} replicas a set: {100 * many.expected:.1f} +- {100 * many.error:.1f}"
        )
    report.say("  (* is off by more than three binomial errors)")


def _covered(coverage: Any) -> str:
    return f"{100 * coverage.inside:.0f} %{' ' if coverage.is_fair else '*'}"


def _starts(level: int, starts: Starts, data: int) -> str:
    """Say what fits from different starts gave."""
    lost = f", {starts.failed} did not converge" if starts.failed else ""
    worst = abs(starts.off).max() if level == 0 else np.ptp(starts.off, axis=0).max()
    what = "furthest from the law" if level == 0 else "furthest from each other"
    said = f"{len(starts.chi2)} starts{lost}, chi-square {starts.chi2.min():.3g}"
    if np.ptp(starts.chi2) > 1e-6 * max(starts.chi2.max(), 1.0):
        said += f" to {starts.chi2.max():.3g}"
    return f"{said} for {data} data, {what} by {worst:.1g} of an uncertainty"


def _write(file: str, found: Closure) -> None:
    """Write values of all sets, one line a functional and set."""
    kept = [k for k in range(found.sets + len(found.failed)) if k not in found.failed]
    count = len(found.functionals)
    columns = {
        "set": [str(k) for k in kept for _ in range(count)],
        "functional": list(found.functionals) * found.sets,
        "truth": numbers(np.tile(found.truth, found.sets)),
        "value": numbers(found.values.ravel()),
        "uncertainty": numbers(found.errors.ravel()),
    }
    if found.replicas:
        columns["replica mean"] = numbers(found.replica_mean.ravel())
        columns["replica deviation"] = numbers(found.replica_std.ravel())
    write_columns(file, columns)
