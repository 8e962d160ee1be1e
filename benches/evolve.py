"""How long one density takes to 50 scales without operators, in units, kernels at hand.

python benches/evolve.py
"""

from __future__ import annotations

import time
from statistics import median

import job
import scalewright as sw
import unit
from figures import Figure, check, show

SCALES = 50
TRIALS = 15


def measure(small: bool) -> list[Figure]:
    """Return the time in units, and how far the answer is from that of operators."""
    grid = sw.ChebyshevGrid(x_min=job.X_MIN)
    theory, start = job.first_theory(), job.start(grid)
    q2 = job.scales(3 if small else SCALES)
    one = unit.seconds(products=3 if small else unit.PRODUCTS)
    evolved = sw.evolve(theory, start, q2)
    times = []
    for _ in range(1 if small else TRIALS):
        begin = time.perf_counter()
        evolved = sw.evolve(theory, start, q2)
        times.append(time.perf_counter() - begin)
    published = job.check_published(evolved)
    by_operators = job.build(theory, grid, q2).apply(start).at(job.benchmark.END_Q2, 0.1, "g")
    away = float(abs(evolved.at(job.benchmark.END_Q2, 0.1, "g") / by_operators - 1.0).max())
    # Both reach the end by the same steps: what is left is rounding of sums of 72 products.
    check("the gluon against that of operators", away, 1e-12)
    return [
        Figure(
            f"one density to {q2.size} scales without operators", f"{median(times) / one:.2f} units", "0.3"
        ),
        Figure("its answer against the published table", f"{published:.2f} of the last digit", "1"),
    ]


if __name__ == "__main__":
    unit.free_numpy()
    show(measure, __doc__)
