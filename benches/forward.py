"""What the map from input densities to predictions takes: the first in a process, and after alpha_s changes.

3,000 points of neutral and charged currents at NNLO, standard grid, in two forms: in 50 bins of Q^2, as
tables of measurements come, and every point at a Q^2 of its own. Operators are built within; the map's own
part is the whole less a build of operators to the same scales. Each trial is a fresh process, with the unit
beside it.

    python benches/forward.py
"""

from __future__ import annotations

import json
import subprocess
import sys
import time
from dataclasses import replace
from statistics import median
from types import SimpleNamespace

import job
import numpy as np
import scalewright as sw
import unit
from figures import Figure, check, show

POINTS, BINS = 3000, 50
TRIALS, CHANGES = 5, 5
X_MIN = 1e-5
CASES = {"bins": "50 different Q^2", "apart": "every Q^2 different"}


def table(count: int, bins: int) -> SimpleNamespace:
    """Return reduced cross sections at random x, half of each current and beam, in so many bins of Q^2."""
    rng = np.random.default_rng(1)
    return SimpleNamespace(
        x=np.exp(rng.uniform(np.log(1.1 * X_MIN), np.log(0.85), count)),
        q2=np.geomspace(2.0, 4e4, bins)[rng.permutation(np.arange(count) % bins)],
        y=rng.uniform(0.05, 0.9, count),
        measure="reduced_cross_section",
        current=rng.choice(["neutral", "charged"], count).tolist(),
        beam=rng.choice(["e+", "e-"], count).tolist(),
    )


def theory(alpha_s: float) -> sw.Theory:
    """Return the theory of the published NNLO table with thresholds, its coupling changed."""
    first = job.first_theory()
    given = first.coupling
    return replace(first, coupling=sw.Coupling(alpha_s, q2=given.q2, nf=given.nf))


def one_process(case: str, count: int) -> dict[str, float]:
    """Make maps in this process; return seconds of each kind and how far the answer is off."""
    grid = sw.ChebyshevGrid(x_min=X_MIN)
    points = table(count, min(BINS, count) if case == "bins" else count)
    start = {"start_q2": job.START_Q2, "start_nf": job.START_NF}

    def timed(alpha_s: float) -> tuple[float, sw.ForwardMap]:
        begin = time.perf_counter()
        fmap = sw.forward_map(theory(alpha_s), grid, points=points, **start)
        return time.perf_counter() - begin, fmap

    first, fmap = timed(0.35)
    scales = np.unique(fmap.points.q2)
    following, builds = [], []
    for change in range(CHANGES if count == POINTS else 1):
        following.append(timed(0.34 + 1e-3 * change)[0])
        begin = time.perf_counter()
        sw.build_operators(theory(0.34 + 1e-3 * change), grid, q2=scales, **start)
        builds.append(time.perf_counter() - begin)
    return {
        "first": first,
        "next": median(following),
        "own": median(whole - build for whole, build in zip(following, builds, strict=True)),
        "off": off(fmap, grid),
    }


def off(fmap: sw.ForwardMap, grid: sw.ChebyshevGrid) -> float:
    """Compare some predictions with those from densities evolved alone; return the largest deviation."""
    densities = job.start(grid)
    predicted = fmap.predict(densities)[0]
    points, worst = fmap.points, 0.0
    for row in range(0, len(points), max(1, len(points) // 10)):
        q2 = float(points.q2[row])
        again = sw.structure_function(
            points.measure[row],
            x=points.x[row],
            q2=q2,
            y=points.y[row],
            densities=sw.evolve(fmap.theory, densities, [q2]),
            theory=fmap.theory,
            current="charged" if points.is_charged[row] else "neutral",
            beam=points.beam[row],
        )
        worst = max(worst, abs(predicted[row] / float(again[0]) - 1.0))
    # the tolerance of the steps in scale is 1e-8, and both have their own
    check("a prediction", worst, 2e-8)
    return worst


def trial(case: str, count: int = POINTS) -> dict[str, float]:
    """Run `one_process` in a fresh process."""
    command = [sys.executable, __file__, "--process", case, str(count)]
    done = subprocess.run(command, capture_output=True, text=True, check=False)
    if done.returncode:
        raise SystemExit(done.stderr)
    result: dict[str, float] = json.loads(done.stdout)
    return result


def measure(small: bool) -> list[Figure]:
    """Return times in units for both cases."""
    figures = []
    for case, words in CASES.items():
        trials = []
        for _ in range(1 if small else TRIALS):
            one = unit.seconds(products=3 if small else 11)
            trials.append(trial(case, 20 if small else POINTS) | {"unit": one})
        for name, what, goal in [
            ("first", "first map in a process", "12 units"),
            ("next", "after changing alpha_s", "2 units"),
            ("own", "the same without building operators", ""),
        ]:
            ratios = sorted(one[name] / one["unit"] for one in trials)
            value = f"{median(ratios):.1f} units (least {ratios[0]:.1f})"
            figures.append(Figure(f"{POINTS} points, {words}: {what}", value, goal))
        worst = max(one["off"] for one in trials)
        figures.append(
            Figure(f"{words}: its answer against densities evolved by themselves", f"{worst:.0e}", "2e-08")
        )
    return figures


if __name__ == "__main__":
    if sys.argv[1:2] == ["--process"]:
        print(json.dumps(one_process(sys.argv[2], int(sys.argv[3]))))
    else:
        show(measure, __doc__)
