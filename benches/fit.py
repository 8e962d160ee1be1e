"""What a step of a fit costs beside one plain product of the map, and what a whole fit costs.

F2 by photons, half of the points of protons and half of isoscalar targets, at NNLO; 15 parameters. The plain
product is numpy's: map (point, flavour x node) times densities. Both on one processor, as in each of many
replicas.

    python benches/fit.py
"""

from __future__ import annotations

import os
import sys
import time
from collections.abc import Callable
from statistics import median
from types import SimpleNamespace

import numpy as np
import scalewright as sw
import unit
from figures import Figure, check, show
from numpy.typing import NDArray
from scalewright.fitting.objective import Objective
from scalewright.fitting.shapes import PowerLaw, Restricted, Term
from scipy.stats import chi2 as chi_square_law

Floats = NDArray[np.float64]

START_Q2, START_NF = 1.5, 3
SEED = 1
#: Blocks of calls of each kind, in turn, so that other work on the machine meets all of them alike.
BLOCK, BLOCKS = 20, 25
FITS = 5


def shape_of(grid: sw.ChebyshevGrid) -> Restricted:
    """Return a shape of 15 parameters with three sum rules; what it starts from is made up."""
    terms = {
        "g": Term(-0.10, 5.0, [1.0, 0.2, 0.1]),
        "u_v": Term(0.65, 3.2, [1.0, 0.3, 0.2]),
        "d_v": Term(0.60, 4.3),
        "ubar": Term(-0.12, 7.2, [0.2]),
        "dbar": Term(-0.12, 7.7, [0.22]),
    }
    law = PowerLaw(
        grid, terms, nf=3, relations=["s = 0.5*dbar", "sbar = s"], momentum="g", numbers={"u_v": 2, "d_v": 1}
    )
    return law.restricted(tied={"ubar.power": "dbar.power"})


def points(count: int) -> SimpleNamespace:
    """Return rows for a map: a lattice in x and Q^2, the first half protons."""
    x, q2 = np.meshgrid(np.geomspace(2e-4, 0.7, 25), np.geomspace(3.5, 1e3, count // 50))
    target = ["proton"] * x.size + ["isoscalar"] * x.size
    return SimpleNamespace(
        x=np.tile(x.ravel(), 2), q2=np.tile(q2.ravel(), 2), measure="F2", exchange="photon", target=target
    )


def measured(rows: SimpleNamespace, law: Floats) -> sw.ChiSquare:
    """Return chi-square of pseudo-data: 3 per cent each, and 2 per cent that all have in common."""
    kind = {"given_in": "percent", "scales_with": "value"}
    errors = [
        {"column": "stat", **kind},
        {"name": "luminosity", "size": 2.0, "correlated": True, **kind},
    ]
    head = {
        "title": "Run 1", "measures": "F2", "exchange": "photon", "uncertainty": errors,
        "columns": {"target": "target"},
    }  # fmt: skip
    columns = {"x": rows.x, "q2": rows.q2, "target": rows.target, "value": law, "stat": [3.0] * law.size}
    table = sw.Measurements.from_columns(head, columns)
    drawn = table.pseudo_data(np.random.default_rng(SEED)).values
    return sw.ChiSquare(table.with_values(drawn), reference=law)


def prepared(count: int, x_min: float) -> tuple[sw.ForwardMap, sw.ChiSquare, Restricted]:
    """Return map, chi-square and shape."""
    grid = sw.ChebyshevGrid(x_min=x_min)
    rows = points(count)
    fmap = sw.forward_map(
        sw.Theory(order="NNLO"), grid, start_q2=START_Q2, start_nf=START_NF, points=rows
    )  # fmt: skip
    shape = shape_of(grid)
    return fmap, measured(rows, fmap.predict(of_map(fmap, shape, shape.start))[0]), shape


def of_map(fmap: sw.ForwardMap, shape: Restricted, parameters: Floats) -> Floats:
    """Return x f(x) in the order of the map, (flavour, node)."""
    return shape(parameters)[[shape.flavours.index(flavour) for flavour in fmap.flavours]]


def in_turn(kinds: dict[str, Callable[[], object]], blocks: int) -> dict[str, float]:
    """Return the median time of a call of each kind in seconds: blocks of calls, as a fit makes them."""
    times: dict[str, list[float]] = {name: [] for name in kinds}
    for _ in range(blocks):
        for name, call in kinds.items():
            begin = time.perf_counter()
            for _ in range(BLOCK):
                call()
            times[name].append((time.perf_counter() - begin) / BLOCK)
    return {name: median(values) for name, values in times.items()}


def check_gradient(fmap: sw.ForwardMap, chi2: sw.ChiSquare, shape: Restricted, objective: Objective) -> None:
    """Compare with chi-square of plain predictions, and with differences of it."""
    parameters = shape.start * 1.01

    def plain(moved: Floats) -> float:
        return float(np.asarray(chi2.value(fmap.predict(of_map(fmap, shape, moved))[0])))

    value, gradient = objective.value_and_gradient(parameters)
    check("chi-square, relative,", abs(value / plain(parameters) - 1.0), 1e-10)
    step, weights = 1e-3, {1: 3 / 4, 2: -3 / 20, 3: 1 / 60}
    units = step * np.eye(parameters.size)
    by_hand = np.array(
        [
            sum(w * (plain(parameters + k * one) - plain(parameters - k * one)) for k, w in weights.items())
            for one in units
        ]
    )
    # Differences of an error h^6 = 1e-18 of high derivatives, up to 1e6 times the first; rounding 1e-13/h.
    worst = float(np.max(np.abs(gradient - by_hand / step)) / np.max(np.abs(gradient)))
    check("the gradient, of its largest part,", worst, 1e-8)


def step(small: bool) -> list[Figure]:
    """Compare a step with the plain product."""
    count = 200 if small else 3000
    fmap, chi2, shape = prepared(count, 1e-4 if small else 1e-7)
    objective = Objective(fmap, chi2, shape)
    check_gradient(fmap, chi2, shape, objective)
    parameters, flat = shape.start * 1.01, fmap.matrix.reshape(count, -1)
    values = of_map(fmap, shape, parameters).ravel()
    problem = objective._problem
    kinds: dict[str, Callable[[], object]] = {
        "plain": lambda: flat @ values,
        "gradient": lambda: objective.value_and_gradient(parameters),
        "written out": lambda: (objective.value_and_gradient(parameters), flat @ values),
        "jacobian": lambda: (problem.residuals(parameters), problem.jacobian(parameters)),
    }
    times = in_turn(kinds, 1 if small else BLOCKS)
    size = f"{count} points x {flat.shape[1]}"

    def ratio(name: str) -> str:
        return f"{times[name] / times['plain']:.2f}"

    return [
        Figure(f"plain product, {size}", f"{1e3 * times['plain']:.3f} ms"),
        Figure("chi-square and gradient by 15 parameters / plain product", ratio("gradient"), "1.3"),
        Figure("the same, and every prediction written out", ratio("written out")),
        Figure("residuals and Jacobian of a step of a fit / plain product", ratio("jacobian")),
    ]


def whole(small: bool) -> list[Figure]:
    """Time fits from the map, with covariance."""
    count = 200 if small else 1000
    fmap, chi2, shape = prepared(count, 1e-4)
    times, result = [], None
    for _ in range(1 if small else FITS):
        begin = time.process_time()
        result = sw.fit(fmap, chi2, shape)
        assert result.covariance is not None, result.status
        times.append(time.process_time() - begin)
    assert result is not None
    number = result.parameters.size
    found, law = (
        float(np.asarray(chi2.value(fmap.predict(of_map(fmap, shape, at))[0])))
        for at in (result.parameters, shape.start)
    )
    check("chi-square of the fit, relative,", abs(found / result.chi2 - 1.0), 1e-10)
    # a fit lies below the law it was drawn from, by a chi-square of 15 numbers
    check("the law below the fit", result.chi2 - law, 0.0)
    check("the law above the fit", law - result.chi2, float(chi_square_law.isf(1e-6, number)))
    return [
        Figure(f"a fit of {number} parameters to {count} points, NNLO", f"{median(times):.2f} s of CPU",
               "1 s"),
        Figure("calls of residuals, Jacobian", f"{result.calls['residuals']}, {result.calls['jacobian']}"),
        Figure("chi-square", f"{result.chi2:.0f} for {count} points"),
    ]  # fmt: skip


def measure(small: bool) -> list[Figure]:
    """Return all figures."""
    return [*step(small), *whole(small)]


def on_one_processor() -> None:
    """Start this process again with one thread for numpy, as the workers of replicas have."""
    wanted = dict.fromkeys(("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"), "1")
    if any(os.environ.get(name) != value for name, value in wanted.items()):
        environment = unit.free_environment() | wanted
        os.execve(sys.executable, [sys.executable, *sys.argv], environment)


if __name__ == "__main__":
    on_one_processor()
    show(measure, __doc__)
