"""The same job in plain numpy (`by_hand.py`) and with scalewright: the answers and the times compared.

Both on the same nodes, on the same processors, in turn; the splitting functions of both are scalewright's.

    python benches/plain.py
"""

from __future__ import annotations

import time
from statistics import median

import by_hand
import job
import numpy as np
import scalewright as sw
import unit
from figures import Figure, check, show

SCALES = 50
TRIALS = 3
# Relative. The Runge-Kutta steps in `by_hand.py` leave 2.4e-8 in this job.
AGREEMENT = 1e-7


def deviation(ours: sw.Operators, plain: list[by_hand.Columns], densities: sw.Densities) -> float:
    """Return the largest relative difference of the evolved published input at the nodes with x < 0.9."""
    grid = ours.grid
    evolved = ours.apply(densities)
    gluon = densities.values[0, densities.flavours.index(21)]
    quark = {i: densities.values[0, densities.flavours.index(i)] for i in (1, 2, 3, -1, -2, -3)}
    total, valence = (sum(quark[i] + sign * quark[-i] for i in (1, 2, 3)) for sign in (1, -1))
    stacked = np.concatenate([gluon, total])
    inside = grid.x < 0.9
    worst = 0.0
    for scale, columns in zip(evolved.q2, plain, strict=True):
        light, light_minus = columns["light+"] @ stacked, columns["light-"] @ valence
        both = {}
        for i in (1, 2, 3):
            plus = columns["ns+"] @ (quark[i] + quark[-i] - total / 3) + light / 3
            minus = columns["ns-"] @ (quark[i] - quark[-i] - valence / 3) + light_minus / 3
            both |= {i: (plus + minus) / 2, -i: (plus - minus) / 2}
        expected = {
            "g": columns["gluon"] @ stacked,
            "u": both[2],
            "ubar": both[-2],
            "dbar": both[-1],
            "s": both[3],
        }
        expected |= {
            f"{name[0]}+": columns[f"{name}+"] @ stacked
            for name in ("charm", "bottom")
            if f"{name}+" in columns
        }
        for name, values in expected.items():
            found = evolved.combination(name)[list(evolved.q2).index(scale), 0]
            worst = max(worst, float(np.max(np.abs(found / values - 1)[inside])))
    return worst


def measure(small: bool) -> list[Figure]:
    """Return the deviation and the ratios of the times."""
    x_min, q2 = (1e-3, job.scales(4)) if small else (job.X_MIN, job.scales(SCALES))
    grid = sw.ChebyshevGrid(x_min=x_min)
    q2 = q2[q2 > job.START_Q2]
    theory, following = job.first_theory(), job.next_theory()
    times: dict[str, list[float]] = {
        name: [] for name in ("plain kernels", "plain", "plain next", "first", "next")
    }

    def timed(name: str, begin: float) -> float:
        now = time.perf_counter()
        times[name].append(now - begin)
        return now

    worst = 0.0
    for _ in range(1 if small else TRIALS):
        begin = time.perf_counter()
        matrices = by_hand.all_matrices(by_hand.Grid(grid.edges, list(grid.degrees)))
        begin = timed("plain kernels", begin)
        plain = by_hand.operators(matrices, theory, job.START_Q2, q2)
        begin = timed("plain", begin)
        by_hand.operators(matrices, following, job.START_Q2, q2)
        begin = timed("plain next", begin)
        # A grid that was not met before: the matrices of the core live as long as the process.
        fresh = sw.ChebyshevGrid.from_panels(grid.edges * (1 + 1e-9 * len(times["first"])), grid.degrees)
        begin = time.perf_counter()
        ours = job.build(theory, fresh, q2)
        begin = timed("first", begin)
        job.build(following, fresh, q2)
        timed("next", begin)
        if not times["first"][1:]:
            worst = deviation(ours, plain, job.start(grid))
    check("plain numpy, relative,", worst, AGREEMENT)
    middle = {name: median(values) for name, values in times.items()}
    first = (middle["plain kernels"] + middle["plain"]) / middle["first"]
    return [
        Figure("largest relative difference of the answers, x < 0.9", f"{worst:.1e}"),
        Figure(f"plain numpy / scalewright, first set of {q2.size} scales", f"{first:.1f} times the time"),
        Figure("the same, kernels at hand", f"{middle['plain next'] / middle['next']:.1f} times the time"),
    ]


if __name__ == "__main__":
    unit.free_numpy()
    show(measure, __doc__)
