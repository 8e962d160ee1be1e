"""Whether the numerical error that a map quotes holds: 2,000 random cases against the fine grid.

Each case is one random input, one random point and one measure: x^a (1-x)^b (1 + c sqrt x + d x) for each
flavour, a from -0.4 to 0.8, b from 1.5 to 10, c from -1 to 3, d from -0.5 to 3, x from 1e-5 to 0.85, Q^2 from
2 to 4e4 GeV^2, at NNLO with thresholds. The true error is the difference of the map as it is made by default
from one on the fine grid with tight steps in scale.

    python benches/quoted_error.py
"""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np
import scalewright as sw
from figures import Figure, check, show
from numpy.typing import NDArray

Floats = NDArray[np.float64]

#: Not the seed on which the estimate was found.
SEED = 2
CASES, EACH = 2000, 25
X_MIN, START_Q2, START_NF, FLAVOURS = 1e-5, 1.5, 3, 7
TIGHT = 1e-12
LOWEST, HIGHEST = (-0.4, 1.5, -1.0, -0.5), (0.8, 10.0, 3.0, 3.0)
KINDS = {
    "F2, photon": {"measure": "F2", "exchange": "photon"},
    "FL, photon": {"measure": "FL", "exchange": "photon"},
    "F2, charged": {"measure": "F2", "current": "charged", "beam": "nubar"},
    "xF3, charged": {"measure": "xF3", "current": "charged", "beam": "nu"},
    "reduced, neutral": {"measure": "reduced_cross_section", "beam": "e+"},
}


def kernel(grid: sw.ChebyshevGrid, shapes: Floats) -> Floats:
    """Return densities of these shapes at the nodes, (flavour, node)."""
    a, b, c, d = shapes.T[:, :, np.newaxis]
    x = grid.x
    return np.asarray(x**a * (1.0 - x) ** b * (1.0 + c * np.sqrt(x) + d * x))


def cases(seed: int, count: int) -> dict[str, tuple[Floats, Floats, Floats]]:
    """Return true errors, quoted errors and values of so many cases, by kind."""
    rng = np.random.default_rng(seed)
    grids = [sw.ChebyshevGrid(x_min=X_MIN, resolution=name) for name in ("standard", "fine")]
    found = {}
    for name, kind in KINDS.items():
        points, inputs = count // len(KINDS) // EACH or 1, EACH
        x = np.exp(rng.uniform(np.log(1.1 * X_MIN), np.log(0.85), points * inputs))
        q2 = np.exp(rng.uniform(np.log(2.0), np.log(4e4), points * inputs))
        rows = SimpleNamespace(x=x, q2=q2, y=rng.uniform(0.1, 0.9, x.size), **kind)
        start = {"start_q2": START_Q2, "start_nf": START_NF, "points": rows}
        made = sw.forward_map(sw.Theory(), grids[0], **start)
        fine = sw.forward_map(sw.Theory(), grids[1], tolerance=TIGHT, **start)
        columns = []
        for first in range(0, x.size, points):
            shapes = rng.uniform(LOWEST, HIGHEST, (FLAVOURS, 4))
            standard = kernel(grids[0], shapes)
            some = slice(first, first + points)
            exact = fine.predict(kernel(grids[1], shapes))[0, some]
            value = made.predict(standard)[0, some]
            quoted = made.numerical_error(standard)[0, some]
            columns.append([np.abs(value - exact), quoted, np.abs(exact)])
        true, quoted, values = np.concatenate(columns, axis=1)
        found[name] = true, quoted, values
    return found


def measure(small: bool) -> list[Figure]:
    """Return how often the quoted error is not below the true one, and by how much it is above."""
    found = cases(SEED, 250 if small else CASES)
    ratios = {name: quoted / np.maximum(true, 1e-300) for name, (true, quoted, _) in found.items()}
    together = np.concatenate(list(ratios.values()))
    covered, typical = float((together >= 1.0).mean()), float(np.median(together))
    # one in a hundred, and three standard deviations of a sample of this size
    check("what is not covered", 1.0 - covered, 0.01 + 3.0 * np.sqrt(0.01 / together.size))
    check("the median of quoted over true", typical, 10.0)
    figures = [
        Figure(
            f"of {together.size} cases the quoted error is not below the true one in", f"{covered:.1%}", "99%"
        ),
        Figure("median of quoted over true", f"{typical:.1f}", "10"),
    ]
    for name, ratio in ratios.items():
        words = f"{(ratio >= 1.0).mean():.1%}, median {np.median(ratio):.1f}"
        figures.append(Figure(f"the same for {name}, {ratio.size} cases", words))
    return figures


if __name__ == "__main__":
    show(measure, __doc__)
