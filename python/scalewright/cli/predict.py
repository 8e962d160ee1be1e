"""`scalewright predict JOB.toml`: what densities predict for measured tables, and how far off."""

from __future__ import annotations

import argparse
import time

import numpy as np

from .._check import Floats
from ..corrections import covariance
from ..densities import Densities
from ..fitting.chi_square import ChiSquare
from ..forward import ForwardMap, forward_map
from .jobs import PredictJob, read_predict_job, refuse_without_matplotlib
from .report import Report, chi_square_summary
from .written import write_predictions

NAME = "predict"
SUMMARY = "predict measured tables from densities, as a job file says"
EXAMPLE = """example:
  scalewright predict job.toml

with job.toml:
  [theory]
  order = "NNLO"                      # "NLO", "LO"
  flavours = [3, 5]                   # fewest and most; one number: fixed
  coupling = { alpha_s = 0.118, q2 = 8315.18, nf = 5 }
  heavy_quarks = "massless"           # "massive", "matched"

  [electroweak]
  inputs = "effective"                # "on shell", "running"

  [grid]
  x_min = 1e-5

  [input]
  file = "start.csv"                  # columns q2, nf, x, flavour, replica, value; or a stored .h5
  interpolate = true                  # the x of the table are not the nodes of the grid

  [data]
  file = "run1.toml"                  # a description of measured points, or a list of them
  cut = { q2 = [3.5, inf] }           # also x, w2, y: least and most

  # [[correction]]                    # none by default; "higher twist" and "target factor" too
  # kind = "known factor"
  # target = "deuteron"               # { z = 26, a = 56 }; or a list of them
  # file = "deuteron.csv"             # columns x, factor; others are its uncertainties

  [chi_square]
  reference = "data"                  # "prediction": what multiplicative errors multiply

  [output]
  file = "predictions.csv"
"""


def arguments(parser: argparse.ArgumentParser) -> None:
    """Describe the arguments."""
    parser.add_argument("job", metavar="JOB.toml", help="the job; file names in it are relative to it")


def run(options: argparse.Namespace) -> None:
    """Read the job, predict, write the result, print what was found."""
    report = Report(options.quiet)
    job = read_predict_job(options.job)
    if job.picture is not None:
        refuse_without_matplotlib(job.place, "picture")
    start = time.perf_counter()
    with job.place.blame():
        fmap, mean = _mapped(job)
        predicted = fmap.predict(job.given, job.corrections)
        error = fmap.numerical_error(mean, job.corrections)[0]
        prediction = predicted.mean(axis=0)
        reference = prediction if job.reference == "prediction" else None
        theory = covariance(fmap, job.corrections, mean) if job.corrections else None
        chi_square = ChiSquare(job.measured, job.form, reference, theory)
        orders = fmap.orders(job.boundaries).of_data(fmap.data)
        described = fmap.describe(job.corrections, job.boundaries)
    spread = predicted.std(axis=0, ddof=1) if predicted.shape[0] > 1 else None
    write_predictions(job.file, chi_square, prediction, error, spread, orders)
    report.say(f"{job.file}: {job.measured!r}, predicted")
    report.say(f"  from {job.given!r}")
    report.say(f"  with {job.theory!r}")
    report.say(f"  in {time.perf_counter() - start:.2f} s")
    part = float((error / np.sqrt(np.diagonal(chi_square.covariance))).max())
    report.say("\n".join(f"  {line.strip()}" for line in described.splitlines()[1:]))
    report.say(f"  numerical errors at most {part:.1g} of the uncertainty of a datum")
    for cut in job.measured.cuts:
        report.say(f"  cut {cut}")
    chi_square_summary(chi_square, prediction, report)
    if predicted.shape[0] > 1:
        report.say(f"  chi-square is that of the mean of {predicted.shape[0]} replicas")
    _draw(job, prediction, report)


def _mapped(job: PredictJob) -> tuple[ForwardMap, Densities]:
    """Return the map, and the mean of the densities."""
    given = job.given
    q2, nf = float(np.ravel(given.q2)[0]), int(np.ravel(given.nf)[0])
    fmap = forward_map(
        job.theory,
        given.grid,
        start_q2=q2,
        start_nf=nf,
        points=job.measured,
        electroweak=job.electroweak,
        target_mass=job.target_mass,
        subtraction=job.subtraction,
    )
    values = given.values.reshape(-1, *given.values.shape[-2:]).mean(axis=0)
    return fmap, Densities(given.grid, q2=q2, nf=nf, flavours=given.flavours, values=values)


def _draw(job: PredictJob, prediction: Floats, report: Report) -> None:
    """Draw, where the job asks for it."""
    if job.picture is None:
        return
    from .. import plot_data

    plot_data.data_picture(job.measured, prediction, job.picture)
    report.say(f"{job.picture}: data over prediction by Q^2")
