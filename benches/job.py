"""The job that the benches share: NNLO, three to five flavours, 50 scales, the published benchmark input.

Sources of the input and of the numbers it is checked with: python/scalewright/data/benchmark/README.md.
"""

from __future__ import annotations

import numpy as np
import scalewright as sw
from figures import check
from numpy.typing import NDArray
from scalewright.cli import benchmark

Floats = NDArray[np.float64]

START_Q2, START_NF = benchmark.START_Q2, 3
LOWEST_Q2, HIGHEST_Q2 = 2.0, 1e5
X_MIN = 1e-7
# All scales start with this many replicas of the published input, varied by a few per cent.
REPLICAS = 10_000
SEED = 1


def scales(count: int) -> Floats:
    """Return scales evenly spaced in ln Q^2; that of the published tables, 1e4 GeV^2, is one of them."""
    spaced = np.geomspace(LOWEST_Q2, HIGHEST_Q2, count - 1)
    return np.sort(np.append(spaced, benchmark.END_Q2))


def first_theory() -> sw.Theory:
    """Return the theory of the published NNLO table with thresholds."""
    return benchmark.theory("NNLO", "variable")


def next_theory() -> sw.Theory:
    """Return one with another coupling and other masses; the charm threshold is the mass, 1.41 GeV."""
    return sw.Theory(
        order="NNLO",
        coupling=sw.Coupling(0.34, q2=START_Q2, nf=3),
        masses=sw.QuarkMasses(charm=1.43, bottom=4.75, top=173.0, kind="pole"),
        flavours=(3, 5),
    )


def build(theory: sw.Theory, grid: sw.ChebyshevGrid, q2: Floats) -> sw.Operators:
    """Build the operators and have all their blocks computed."""
    operators = sw.build_operators(theory, grid, start_q2=START_Q2, start_nf=START_NF, q2=q2)
    assert operators.blocks.shape[0] == q2.size
    return operators


def start(grid: sw.ChebyshevGrid) -> sw.Densities:
    """Return the published input."""
    return sw.Densities.sample(grid, q2=START_Q2, nf=START_NF, functions=benchmark.toy())


def many(grid: sw.ChebyshevGrid, replicas: int = REPLICAS) -> sw.Densities:
    """Return replicas: the published input times 1 + 5 per cent times a normal number for each flavour.

    The first is the published input itself.
    """
    one = start(grid)
    numbers = np.random.default_rng(SEED).standard_normal((replicas, len(one.flavours), 1))
    numbers[0] = 0.0
    values = one.values * (1.0 + 0.05 * numbers)
    return sw.Densities(grid, q2=START_Q2, nf=START_NF, flavours=one.flavours, values=values)


def check_published(evolved: sw.Densities) -> float:
    """Compare replica 0 with the published NNLO table; return the largest deviation in printed units.

    A right number, rounded to what is printed, is off by half a unit. Ten of 428 entries of the tables differ
    from an independent solution by up to one unit: hence 1.02 and not 0.5.
    """
    worst = 0.0
    for entry in benchmark.read("NNLO", "variable"):
        ours = evolved.at(benchmark.END_Q2, entry.x, benchmark.QUANTITIES[entry.quantity])
        worst = max(worst, abs(float(ours[0]) - float(entry.text)) / entry.unit)
    check("the published table, in units of its last digit,", worst, 1.02)
    return worst


def check_momentum(evolved: sw.Densities) -> float:
    """Compare the momentum sum with that of the start; return the largest relative change.

    The parametrised three-loop kernels keep it to 3e-7 only; three times that is allowed here.
    """
    total = np.asarray(evolved.momentum())
    change = float(np.max(np.abs(total / total.flat[0] - 1.0)))
    check("the momentum sum", change, 1e-6)
    return change
