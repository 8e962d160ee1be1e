"""How much memory the statistics of 10,000 replicas take: every flavour and node, at several scales.

Largest resident memory of a fresh process as the system counts it. Mean, deviation, intervals of 68 and 95
per cent with their sampling errors, one scale at a time; correlations of all with all at the start;
reweighting.

    python benches/ensemble.py
"""

from __future__ import annotations

import json
import subprocess
import sys
import time

import job
import memory
import numpy as np
import scalewright as sw
from figures import Figure, check, show

SCALES = 10
LEVELS = (0.6827, 0.9545)


def ensemble_of(small: bool) -> sw.Ensemble:
    """Return replicas of the published input."""
    grid = sw.ChebyshevGrid(x_min=job.X_MIN)
    return sw.Ensemble(job.many(grid, 500 if small else job.REPLICAS))


def operators_of(ensemble: sw.Ensemble, small: bool) -> sw.Operators:
    """Return the operators of the published benchmark."""
    scales = job.scales(3 if small else SCALES)
    return job.build(job.first_theory(), ensemble.densities.grid, scales)


def check_statistics(ensemble: sw.Ensemble) -> None:
    """Compare with numpy, and with what the replicas were made of: 5 per cent of each flavour."""
    gluon = ensemble.at(0.1, "g")
    spread = ensemble.std(gluon)
    check("the deviation, relative to numpy's,", abs(spread.value / gluon.std(ddof=1) - 1.0), 1e-10)
    low, high = ensemble.interval(gluon, 0.9545)
    exact = np.quantile(gluon, [0.02275, 0.97725], method="hazen")
    off = max(abs(low.value - exact[0]), abs(high.value - exact[1])) / spread.value
    check("the interval, in deviations from numpy's,", off, 1e-10)
    # numbers of a Gaussian of 5 per cent: four sampling errors
    first = abs(spread.value / (0.05 * abs(gluon[0])) - 1.0)
    check("the deviation of what was drawn", first, 4.0 * spread.error / spread.value)


def statistics(small: bool) -> float:
    """Make all statistics; return the seconds of CPU of a scale."""
    ensemble = ensemble_of(small)
    check_statistics(ensemble)
    operators, times = operators_of(ensemble, small), []
    for part in ensemble.stream(operators):
        begin = time.process_time()
        values = part.densities.values
        values = values.reshape(ensemble.replicas, *values.shape[-2:])
        made = [part.mean(values), part.std(values)]
        for level in LEVELS:
            made += part.interval(values, level)
        assert all(np.isfinite(one.value).all() and np.isfinite(one.error).all() for one in made)
        times.append(time.process_time() - begin)
        if part.densities.q2 == job.benchmark.END_Q2:
            job.check_published(part.densities)
    whole = ensemble.densities.values.reshape(ensemble.replicas, -1)
    correlations = ensemble.correlation_matrix(whole[:, :: 5 if small else 1])
    # flavours were drawn apart: correlations of one are 1, of two are 0 within 6 sampling errors (of 1e5)
    check("the correlation of one flavour, from 1,", abs(correlations.value[0, 1] - 1.0), 1e-10)
    near = abs(correlations.value) < 0.5
    check(
        "the others, in sampling errors,",
        float((abs(correlations.value) / correlations.error)[near].max()),
        6.0,
    )
    chi2 = ((ensemble.at(0.1, "g") / ensemble.at(0.1, "g")[0] - 1.05) / 0.05) ** 2
    weighted = ensemble.reweighted(chi2, "Giele-Keller")
    # prior 1 +- 0.05, a measurement 1.05 +- 0.05: posterior 1.025 (Bayes' theorem)
    posterior = weighted.mean(ensemble.at(0.1, "g") / ensemble.at(0.1, "g")[0])
    check("the mean after reweighting", abs(posterior.value - 1.025), 4.0 * posterior.error)
    return float(np.median(times))


def measure(small: bool) -> list[Figure]:
    """Return the peak of a fresh process."""
    command = [sys.executable, __file__, "--process", *(["--small"] if small else [])]
    done = subprocess.run(command, capture_output=True, text=True, check=False)
    if done.returncode:
        raise SystemExit(done.stderr)
    peak, seconds = json.loads(done.stdout)
    count, scales = (500, 3) if small else (job.REPLICAS, SCALES)
    return [
        Figure(f"statistics of {count} replicas, {scales} scales", f"{peak:.0f} MB", "1000 MB"),
        Figure("the same, CPU for a scale", f"{seconds:.1f} s"),
    ]


if __name__ == "__main__":
    if sys.argv[1:2] == ["--process"]:
        seconds = statistics("--small" in sys.argv)
        print(json.dumps([memory.peak(), seconds]))
    else:
        show(measure, __doc__)
