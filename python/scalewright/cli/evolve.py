"""`scalewright evolve JOB.toml`: densities in, densities at other scales out."""

from __future__ import annotations

import argparse
import time

import numpy as np

from .._display import brief
from ..build import build_operators
from ..densities import Densities
from ..flavours import flavour_name
from .jobs import EvolveJob, read_evolve_job, write_densities
from .report import Report

NAME = "evolve"
SUMMARY = "evolve densities to other scales, as a job file says"
EXAMPLE = """example:
  scalewright evolve job.toml

with job.toml:
  [theory]
  order = "NNLO"                      # "NLO", "LO"
  flavours = [3, 5]                   # fewest and most; one number: fixed
  coupling = { alpha_s = 0.118, q2 = 8315.18, nf = 5 }
  masses = { charm = 1.27, bottom = 4.18, top = 162.5, kind = "msbar" }

  [grid]
  x_min = 1e-7
  resolution = "standard"             # "fine"

  [input]
  file = "start.csv"                  # columns q2, nf, x, flavour, replica, value; or a stored .h5
  interpolate = true                  # the x of the table are not the nodes of the grid

  [output]
  q2 = [10.0, 100.0, 1e4]             # GeV^2
  file = "evolved.h5"                 # or .csv, then also x = [...]
"""


def arguments(parser: argparse.ArgumentParser) -> None:
    """Describe the arguments."""
    parser.add_argument("job", metavar="JOB.toml", help="the job; file names in it are relative to it")


def run(options: argparse.Namespace) -> None:
    """Read the job, evolve, write the result, print what was done."""
    report = Report(options.quiet)
    job = read_evolve_job(options.job)
    start = time.perf_counter()
    with job.place.blame():
        evolved = _evolved(job, report)
    write_densities(evolved, job.file, job.x)
    report.say(f"{job.file}: {evolved!r}")
    report.say(f"  from {job.given!r}")
    report.say(f"  with {job.theory!r}")
    report.say(f"  in {time.perf_counter() - start:.2f} s")
    _summary(evolved, report)


def _evolved(job: EvolveJob, report: Report) -> Densities:
    """Build and apply."""
    given = job.given
    operators = build_operators(
        job.theory,
        given.grid,
        start_q2=float(np.ravel(given.q2)[0]),
        start_nf=int(np.ravel(given.nf)[0]),
        q2=job.q2,
        nf=job.nf,
        intrinsic=job.intrinsic,
        progress=report.progress("building operators"),
    )
    return operators.apply(given, missing=job.missing)


def _summary(evolved: Densities, report: Report) -> None:
    """Print the momentum at each scale, the first and last few of many."""
    momentum = evolved.momentum(part="above").mean(axis=1)
    q2, nf = np.atleast_1d(evolved.q2), np.atleast_1d(evolved.nf)
    places = range(q2.size) if q2.size <= 8 else (0, 1, 2, q2.size - 3, q2.size - 2, q2.size - 1)
    rows = [[brief(q2[i]), str(nf[i]), f"{momentum[i]:.6f}"] for i in places]
    report.table(["q2 (GeV^2)", "nf", "momentum above x_min"], rows)
    report.say(f"  flavours {', '.join(flavour_name(number) for number in evolved.flavours)}")
