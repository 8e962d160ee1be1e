"""`scalewright demo`: the main job end to end, on the published benchmark and a made-up measurement."""

from __future__ import annotations

import argparse
import os
import time
from importlib.util import find_spec

import numpy as np

from .. import _check
from .._check import Floats
from ..build import build_operators
from ..densities import Densities
from ..errors import StoreError
from ..files.whole import reason
from ..fitting.chi_square import ChiSquare
from ..grid import ChebyshevGrid
from . import benchmark, campaign
from .benchmark import Comparison
from .report import Report, chi_square_summary, size

NAME = "demo"
SUMMARY = "compare with the published benchmark, evolve replicas around its input, predict a measurement"
EXAMPLE = "example:\n  scalewright demo --out demo --replicas 1000"

SEED = 1
SCALES = (10.0, 100.0, benchmark.END_Q2)
# Relative spread of the normalisations, and spread of the power of x: wide enough to be seen.
_SPREAD, _SPREAD_OF_POWER = 0.05, 0.02
_SHOWN = ("g", "u_v", "d_v", "dbar", "s+", "c+")


def arguments(parser: argparse.ArgumentParser) -> None:
    """Describe the arguments."""
    parser.add_argument("--out", metavar="DIR", default=".", help="where to write (default: here)")
    parser.add_argument("--replicas", metavar="N", default="1000", help="how many (default: 1000)")


def run(options: argparse.Namespace) -> None:
    """Compare, evolve replicas, write, print one screen."""
    report = Report(options.quiet)
    count = _count(options.replicas)
    _make_folder(options.out)
    grid = ChebyshevGrid(x_min=1e-7)
    _benchmark(grid, report)
    many = replicas(grid, count)
    start = time.perf_counter()
    theory = benchmark.theory("NNLO", "variable")
    progress = report.progress("building operators")
    operators = build_operators(
        theory, grid, start_q2=benchmark.START_Q2, start_nf=3, q2=SCALES, progress=progress
    )
    built = time.perf_counter()
    evolved = operators.apply(many)
    applied = time.perf_counter()
    place = os.path.join(options.out, "demo.h5")
    evolved.save(place)
    report.say()
    report.say(
        f"{count} replicas around that input, NNLO, 2 GeV^2 to {len(SCALES)} scales, {grid.nodes} nodes"
    )
    report.say(f"  operators built in {built - start:.3f} s, applied in {applied - built:.3f} s")
    _summary(evolved, report)
    report.say()
    report.say(f"{place}: {evolved!r}, {size(os.path.getsize(place))}")
    _picture(many, evolved, options.out, report)
    report.say()
    _campaign(options.out, report)


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


def _benchmark(grid: ChebyshevGrid, report: Report) -> None:
    """Compare with all tables and print the largest deviation of each."""
    jobs = [(order, scheme) for scheme in benchmark.SCHEMES for order in benchmark.ORDERS]
    progress = report.progress("comparing tables")
    rows = []
    for done, (order, scheme) in enumerate(jobs):
        if progress is not None:
            progress(done, len(jobs))
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


def replicas(grid: ChebyshevGrid, count: int) -> Densities:
    """Return densities around the published input, by seeded random variation of its parameters.

    Parameters
    ----------
    grid : ChebyshevGrid
        Where x lives.
    count : int
        How many. Replica i is the same whatever the number.
    """
    draws = np.stack(
        [
            np.random.default_rng(np.random.SeedSequence(SEED, spawn_key=(i,))).normal(size=5)
            for i in range(count)
        ]
    )
    factors = 1.0 + _SPREAD * draws[:, :4, np.newaxis]
    u_v, d_v, gluon, sea = factors[:, 0], factors[:, 1], factors[:, 2], factors[:, 3]
    functions = benchmark.toy(
        valence=(5.107200 * u_v, 3.064320 * d_v),
        gluon=1.7 * gluon,
        sea=0.1939875 * sea,
        rise=_SPREAD_OF_POWER * draws[:, 4, np.newaxis],
    )
    values = np.stack([function(np.array(grid.x)) for function in functions.values()], axis=1)
    return Densities(grid, q2=benchmark.START_Q2, nf=3, flavours=list(functions), values=values)


def _summary(evolved: Densities, report: Report) -> None:
    """Print mean and standard deviation of some combinations at the largest scale."""
    points = (1e-4, 1e-2, 0.1, 0.5)
    report.say(f"  x f(x) at {benchmark.END_Q2:g} GeV^2, mean and standard deviation over the replicas:")
    rows = []
    for name in _SHOWN:
        values: Floats = evolved.at(benchmark.END_Q2, points, name)
        mean, spread = values.mean(axis=0), values.std(axis=0, ddof=1)
        rows.append([name, *(f"{m:.4g} +- {s:.1g}" for m, s in zip(mean, spread, strict=True))])
    report.table(["", *(f"x = {x:g}" for x in points)], rows)


def _campaign(folder: str, report: Report) -> None:
    """Predict the made-up campaign from the law it was drawn from; print how far the data are from it."""
    measured, grid = campaign.measured(), ChebyshevGrid(x_min=1e-5)
    start = time.perf_counter()
    prediction = campaign.carried(measured, grid).predict(campaign.law(grid))[0]
    taken = time.perf_counter() - start
    report.say(
        f"A made-up measurement, {len(measured)} cross sections, NNLO: chi-square of the law behind it"
    )
    report.say(f"  predicted in {taken:.3f} s")
    # the truth is known, so multiplicative errors are taken relative to it
    chi_square_summary(ChiSquare(measured, reference=prediction), prediction, report)
    if find_spec("matplotlib") is None:
        return
    from .. import plot_data

    place = os.path.join(folder, "campaign.png")
    plot_data.data_picture(measured, prediction, place)
    report.say(f"{place}: {measured.tables[0]}, data over prediction")


def _picture(start: Densities, evolved: Densities, folder: str, report: Report) -> None:
    """Draw, where matplotlib is there."""
    if find_spec("matplotlib") is None:
        report.say("no picture: matplotlib is not installed (pip install 'scalewright[plot]')")
        return
    from .. import plot

    place = os.path.join(folder, "demo.png")
    plot.demo_picture(start, evolved, place)
    report.say(f"{place}: the same as a picture")
