"""How large the errors are: against published tables, of the grid, of the sum rules, of interpolation.

python benches/accuracy.py
"""

from __future__ import annotations

import itertools

import job
import numpy as np
import scalewright as sw
from figures import Figure, check, show
from scalewright.cli import benchmark

COMBINATIONS = ("u_v", "d_v", "dbar - ubar", "2*dbar + 2*ubar", "s+", "c+", "g")
# The finer grid that stands for the exact answer: other panels, each short enough for a high degree.
FINER = ([0.0, 0.05, 0.25, 0.8, 2.2, 5.5, 10.5], 30)
# x^a (1-x)^b (1 + c sqrt(x) + d x): the kind of input that fits use.
POWERS = {"a": (-0.4, 0.0, 0.8), "b": (1.5, 4.0, 10.0), "c": (-0.5, 2.0), "d": (0.0, 5.0)}


def published(small: bool) -> list[Figure]:
    """Compare with every table of the published benchmark."""
    grid = sw.ChebyshevGrid(x_min=job.X_MIN)
    rows = []
    orders = benchmark.ORDERS[-1:] if small else benchmark.ORDERS
    for order, scheme in itertools.product(orders, benchmark.SCHEMES):
        compared = benchmark.compare(order, scheme, grid)
        worst = float(np.max(np.abs(compared.off)))
        check(f"{order}, {scheme},", worst, 1.02)
        what = f"{order}, {benchmark.SCHEMES[scheme]}: {len(compared.entries)} published numbers"
        rows.append(Figure(what, f"off by at most {worst:.2f} of the last printed digit", "1"))
    return rows


def evolved(grid: sw.ChebyshevGrid, tolerance: float) -> sw.Densities:
    """Return the published input at 1e4 GeV^2, NNLO, three to five flavours."""
    operators = sw.build_operators(
        job.first_theory(),
        grid,
        start_q2=job.START_Q2,
        start_nf=job.START_NF,
        q2=[benchmark.END_Q2],
        tolerance=tolerance,
    )
    return operators.apply(job.start(grid))


def of_the_grid(small: bool) -> list[Figure]:
    """Compare both resolutions with a far finer grid of other panels."""
    x = np.concatenate([np.geomspace(job.X_MIN, 0.1, 60), np.linspace(0.12, 0.9, 60)])
    edges, degree = FINER
    finer = sw.ChebyshevGrid.from_panels([*edges, -np.log(job.X_MIN)], [degree] * len(edges))
    exact = evolved(finer, 1e-11)
    rows = []
    for resolution, goal in [("standard", 1e-7)] if small else [("standard", 1e-7), ("fine", 1e-9)]:
        grid = sw.ChebyshevGrid(x_min=job.X_MIN, resolution=resolution)
        ours = evolved(grid, 1e-9 if resolution == "standard" else 1e-11)
        errors = {}
        for name in COMBINATIONS:
            right = exact.at(benchmark.END_Q2, x, name)[0]
            errors[name] = float(np.max(np.abs(ours.at(benchmark.END_Q2, x, name)[0] / right - 1)))
        name = max(errors, key=errors.__getitem__)
        check(f"{resolution} grid", errors[name], 1e-5)
        what = f"{resolution}, {grid.nodes} nodes: relative error, x < 0.9, against {finer.nodes} nodes"
        rows.append(Figure(what, f"{errors[name]:.1e} ({name})", f"{goal:.0e}"))
    return rows


def interpolation(small: bool) -> list[Figure]:
    """Interpolate powers of x and 1 - x."""
    u = np.linspace(-np.log(0.9), -np.log(job.X_MIN), 400)
    x = np.exp(-u)
    rows = []
    for resolution, goal in (("standard", 1e-6), ("fine", 1e-8)):
        grid = sw.ChebyshevGrid(x_min=job.X_MIN, resolution=resolution)
        worst, where = 0.0, ""
        for a, b, c, d in itertools.product(*POWERS.values()):

            def shape(x: job.Floats, a: float = a, b: float = b, c: float = c, d: float = d) -> job.Floats:
                return np.asarray(x**a * (1 - x) ** b * (1 + c * np.sqrt(x) + d * x))

            error = float(np.max(np.abs(grid.interpolate(shape(grid.x), x) / shape(x) - 1)))
            if error > worst:
                worst, where = error, f"a = {a}, b = {b}, c = {c}, d = {d}"
        check(f"interpolation on the {resolution} grid", worst, 1e-3)
        what = f"{resolution}: interpolation of x^a (1-x)^b (1 + c sqrt x + d x), x from 1e-7 to 0.9"
        rows.append(Figure(what, f"{worst:.1e} ({where})", f"{goal:.0e}"))
    return rows


def sum_rules(small: bool) -> list[Figure]:
    """Follow momentum and the number of u quarks, what is below x_min included."""
    grid = sw.ChebyshevGrid(x_min=job.X_MIN)
    start = job.start(grid)
    rows = []
    for order, goal in [("NNLO", 3e-7)] if small else [("LO", 1e-7), ("NLO", 1e-7), ("NNLO", 3e-7)]:
        theory = benchmark.theory(order, "variable")
        operators = sw.build_operators(theory, grid, start_q2=job.START_Q2, start_nf=3, q2=[benchmark.END_Q2])
        after = operators.apply(start)
        momentum = abs(float(np.ravel(after.momentum())[0] / np.ravel(start.momentum())[0]) - 1)
        number = abs(float(np.ravel(after.number(2))[0] / np.ravel(start.number(2))[0]) - 1)
        check(f"momentum at {order}", momentum, 1e-5)
        rows.append(
            Figure(f"{order}: change of the momentum sum, 2 to 1e4 GeV^2", f"{momentum:.0e}", f"{goal:.0e}")
        )
        rows.append(Figure(f"{order}: change of the number of u - ubar", f"{number:.0e}", f"{goal:.0e}"))
    return rows


def measure(small: bool) -> list[Figure]:
    """Return all tables in one."""
    return [row for part in (published, of_the_grid, interpolation, sum_rules) for row in part(small)]


if __name__ == "__main__":
    show(measure, __doc__)
