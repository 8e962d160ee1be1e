"""`scalewright fit JOB.toml`: measured tables in, densities with uncertainties out."""

from __future__ import annotations

import argparse
import time

from ..files.whole import read_whole
from .fit_job import read_fit_job
from .fitted import refuse_unconverged
from .jobs import refuse_without_matplotlib
from .report import Report
from .results import done, fit_summary

NAME = "fit"
SUMMARY = "fit densities, and alpha_s or masses, to measured tables, as a job file says"
EXAMPLE = """example:
  scalewright fit job.toml

with job.toml:
  [theory]
  order = "NNLO"                      # "NLO", "LO"
  flavours = [3, 5]                   # fewest and most; one number: fixed
  coupling = { alpha_s = 0.118, q2 = 8315.18, nf = 5 }

  [grid]
  x_min = 1e-5

  [data]
  file = ["run1.toml"]                # descriptions of measured points
  cut = { q2 = [3.5, inf] }           # also x, w2, y: least and most

  [chi_square]
  reference = "prediction"            # "data": what multiplicative errors multiply

  [chi_square.scale_variations]       # none by default; arXiv:1906.10698: adds a covariance of the theory
  points = "9"                        # "7", "5", "5bar", "3"
  factor = 4                          # of squared scales
  common = "hard_muf2_ratio"          # varies for all data at once
  own = "hard_mur2_ratio"             # for each process by itself; also "evolution_mu2_ratio"
  processes = { "Run 1, positrons" = "neutral current" }  # of each table; without, all data are one process

  [shape]
  kind = "power law"                  # "network": then hidden = [8], seed = 0
  start_q2 = 1.5                      # GeV^2
  start_nf = 3
  relations = ["s = sbar", "s = 0.5*ubar"]
  momentum = "g"                      # the term that the momentum sum determines
  numbers = { u_v = 2, d_v = 1 }

  [shape.terms]                       # x^power (1-x)^fall times a polynomial of coefficients
  g = { power = -0.1, fall = 5 }
  u_v = { power = 0.7, fall = 3, coefficients = [1.0, 0.5], variable = "sqrt x" }
  d_v = { power = 0.7, fall = 4 }
  ubar = { power = -0.1, fall = 7, coefficients = [0.15] }
  dbar = { power = -0.1, fall = 7, coefficients = [0.15] }

  [parameters]                        # start, bounds, fixed, tied, prior = [value, deviation]
  g.fall = { bounds = [1, 20] }
  dbar.power = { tied = "ubar.power" }
  dbar.c0 = { tied = ["ubar.c0", 1.0] }
  alpha_s = { prior = [0.118, 0.01] }

  [[correction]]                      # none by default; also "known factor", "target factor"
  kind = "higher twist"
  target = "proton"
  polynomial = { degree = 1 }

  [fit]
  theory = ["alpha_s"]                # also "charm", "bottom"
  starts = 1                          # more searches, and the lowest minimum: there may be several

  [replicas]
  number = 100
  seed = 1
  workers = 2
  journal = "fit.journal"             # a run that was stopped goes on from here

  [output]                            # what is not named is not written
  result = "fit.h5"
  ensemble = "replicas.h5"
  densities = "densities.csv"
  q2 = [10.0, 100.0, 1e4]             # scales of densities.csv; also x = [...]
  parameters = "parameters.csv"
  predictions = "predictions.csv"
  report = "fit.html"
  pictures = "pictures"               # a folder
"""


def arguments(parser: argparse.ArgumentParser) -> None:
    """Describe the arguments."""
    parser.add_argument("job", metavar="JOB.toml", help="the job; file names in it are relative to it")


def run(options: argparse.Namespace) -> None:
    """Read the job, fit, write the results, print what was found."""
    report = Report(options.quiet)
    job = read_fit_job(options.job)
    if job.pictures is not None:
        refuse_without_matplotlib(job.place, "pictures")
    start = time.perf_counter()
    results = done(job, report, read_whole(options.job).decode("utf-8", "replace"))
    report.say(f"{options.job}: {job.measured!r}, fitted in {time.perf_counter() - start:.1f} s")
    report.say(f"  with {results.fitted.result.theory!r}")
    fit_summary(job, results, report)
    for line in results.files:
        report.say(line)
    refuse_unconverged(job, results.fitted)
