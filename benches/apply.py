"""How long it takes to carry many replicas to many scales, against plain products of the same size.

10,000 replicas to 50 scales, flavours in and flavours out, one scale at a time. The yardstick is numpy's
product (replica, node) @ (node, block * node), once a scale, with as many blocks as distinct combinations of
densities are acted on: what is left of the work if no flavour ever had to be combined.

    python benches/apply.py
"""

from __future__ import annotations

import time
from statistics import median

import job
import numpy as np
import scalewright as sw
import unit
from figures import Figure, check, show

SCALES = 50
TRIALS = 3


def block_operations(operators: sw.Operators, flavours: tuple[int, ...]) -> list[int]:
    """Return how many blocks act on each replica, for each scale.

    Differences within q + qbar and within q - qbar of the light flavours: one less than there are flavours,
    each under "ns+" and "ns-"; every other block acts once.
    """
    quarks = {abs(flavour) for flavour in flavours if flavour != 21 and abs(flavour) <= operators.light}
    differences = len(quarks) - 1
    counts = []
    for blocks in operators.blocks:
        acting = [name for name, block in zip(operators.block_names, blocks, strict=True) if np.any(block)]
        once = [name for name in acting if not name.startswith("ns")]
        valence = 0 if "light-<-light-" in acting else 1
        counts.append(len(once) + valence + 2 * differences)
    return counts


def plain(values: job.Floats, blocks: job.Floats, counts: list[int]) -> float:
    """Return the seconds of the plain products."""
    replicas, nodes = values.shape
    widest = max(counts)
    right = np.tile(blocks[0, 0].T, (1, widest))
    out = np.empty((replicas, widest * nodes))
    begin = time.perf_counter()
    for count in counts:
        np.matmul(values, right[:, : count * nodes], out=out[:, : count * nodes])
    return time.perf_counter() - begin


def streamed(operators: sw.Operators, many: sw.Densities, out: job.Floats) -> float:
    """Return the seconds of one stream, into one place as the yardstick writes."""
    begin = time.perf_counter()
    for _ in operators.stream(many, out=out):
        pass
    return time.perf_counter() - begin


def answer(operators: sw.Operators, many: sw.Densities) -> float:
    """Return how far replica 0 is from the published table."""
    first = sw.Densities(
        many.grid, q2=job.START_Q2, nf=job.START_NF, flavours=many.flavours, values=many.values[:1]
    )
    return job.check_published(operators.apply(first).scale(job.benchmark.END_Q2))


def measure(small: bool) -> list[Figure]:
    """Return the ratio to the plain products."""
    grid = sw.ChebyshevGrid(x_min=job.X_MIN)
    operators = job.build(job.first_theory(), grid, job.scales(3 if small else SCALES)).held()
    many = job.many(grid, 50 if small else job.REPLICAS)
    counts = block_operations(operators, many.flavours)
    check_one_by_one(operators, many)
    values = np.ascontiguousarray(many.values[:, 0])
    out = np.zeros((2, int(many.replicas), len(next(operators.stream(many)).flavours), grid.nodes))
    ratios, published = [], answer(operators, many)
    for _ in range(1 if small else TRIALS):
        ours = streamed(operators, many, out)
        ratios.append(ours / plain(values, operators.blocks, counts))
    what = f"{many.replicas} replicas to {operators.q2.size} scales, streamed, {max(counts)} blocks at most"
    return [
        Figure(what, f"{median(ratios):.2f} of the plain products (least {min(ratios):.2f})", "1.5"),
        Figure("its answer against the published table", f"{published:.2f} of the last digit", "1"),
    ]


def check_one_by_one(operators: sw.Operators, many: sw.Densities) -> None:
    """Check that a replica does not feel its neighbours, and that the map is linear."""
    last = int(many.replicas) - 1
    alone = sw.Densities(
        many.grid, q2=job.START_Q2, nf=job.START_NF, flavours=many.flavours, values=many.values[last:]
    )
    together = next(operators.stream(many)).values[last]
    apart = next(operators.stream(alone)).values[0]
    # Sums of 72 products in another order: rounding.
    scale = np.max(np.abs(apart), axis=-1, keepdims=True) + 1e-300
    check("a replica among others", float(np.max(np.abs(together - apart) / scale)), 1e-13)


if __name__ == "__main__":
    unit.free_numpy()
    show(measure, __doc__)
