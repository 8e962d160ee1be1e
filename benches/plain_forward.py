"""Predictions as one would make them in numpy: quadrature of coefficient functions on evolved densities.

For each point Gauss-Legendre in pieces that shrink towards z = 1, all quarks at once on the same nodes; the
coefficient functions are ours, compiled; densities are a cubic spline in ln x of their evolved values, whose
evolution is not counted. Few points are timed and the time is scaled to 3,000 by their number. One such run
serves one input and F2 of photon exchange alone; the map any number of inputs, and every measure.

    python benches/plain_forward.py
"""

from __future__ import annotations

import time

import forward
import job
import numpy as np
import scalewright as sw
import unit
from figures import Figure, check, show
from numpy.typing import NDArray
from scalewright import _core
from scipy.interpolate import CubicSpline

Floats = NDArray[np.float64]

FEW = 40
CHARGES2 = np.array([1.0, 4.0, 1.0, 4.0, 1.0]) / 9.0
# Pieces in t = ln(1/z), each half as long as the one above it, and nodes in each.
PIECES, NODES = 24, 12


def nodes(x: float) -> tuple[Floats, Floats]:
    """Return t = ln(1/z) between 0 and ln(1/x), and weights of dt."""
    ends = -np.log(x) * np.append(0.5 ** np.arange(PIECES), 0.0)
    rule, weights = np.polynomial.legendre.leggauss(NODES)
    half = 0.5 * (ends[:-1] - ends[1:])[:, np.newaxis]
    middle = 0.5 * (ends[:-1] + ends[1:])[:, np.newaxis]
    return (middle + half * rule).ravel(), (half * weights).ravel()


def photon_f2(x: float, a: float, nf: int, plus: CubicSpline, gluon: CubicSpline) -> float:
    """Return F2 by photon exchange at NNLO; `plus` gives x (q + qbar) of every active quark."""
    t, weights = nodes(x)
    z, y = np.exp(-t), -np.expm1(-t)
    u = np.log(x) + t
    quarks, here, glue = plus(u), plus(np.log(x)), gluon(u)
    mean = CHARGES2[:nf].mean()
    total = float(CHARGES2[:nf] @ here)
    for k in (1, 2):
        for name in ("ns+", "pure singlet", "gluon"):
            regular, coefficients, local = _core.coefficient_function(k, "F2", name, nf, z, y)
            density = {
                "ns+": quarks @ CHARGES2[:nf],
                "pure singlet": mean * quarks.sum(axis=1),
                "gluon": mean * glue,
            }[name]
            at_one = CHARGES2[:nf] @ here if name == "ns+" else 0.0
            log = np.log(y)
            singular = sum((c * log**power / y for power, c in enumerate(coefficients)), np.zeros_like(z))
            left = sum(c * np.log1p(-x) ** (power + 1) / (power + 1) for power, c in enumerate(coefficients))
            integral = weights @ (z * (regular * density + singular * (density - at_one)))
            total += a**k * float(integral + (local + left) * at_one)
    return total


def measure(small: bool) -> list[Figure]:
    """Return the time of 3,000 points in units, and beside it that of the map."""
    theory, grid, count = job.first_theory(), sw.ChebyshevGrid(x_min=forward.X_MIN), 3 if small else FEW
    one = unit.seconds(products=3 if small else 11)
    points = forward.table(count, min(count, 10))
    points.measure, points.current, points.exchange, points.beam = "F2", "neutral", "photon", "e-"
    start = job.start(grid)
    fmap = sw.forward_map(theory, grid, points=points, start_q2=job.START_Q2, start_nf=job.START_NF)
    predicted = fmap.predict(start)[0]
    evolved = sw.evolve(theory, start, np.unique(points.q2))
    x = np.geomspace(forward.X_MIN, 0.999, 400)
    splines = {}
    for q2 in np.unique(points.q2):
        nf = int(theory.nf_at(q2))
        plus = [
            evolved.at(q2, x, f"{q}").ravel() + evolved.at(q2, x, f"{q}bar").ravel() for q in "duscb"[:nf]
        ]
        log = np.append(np.log(x), 0.0)
        splines[q2] = [
            CubicSpline(log, np.append(np.array(rows), np.zeros((len(rows), 1)), axis=1).T)
            for rows in (plus, [evolved.at(q2, x, 21).ravel()])
        ]
    begin, made = time.perf_counter(), []
    for x_value, q2 in zip(points.x, points.q2, strict=True):
        nf = int(theory.nf_at(q2))
        a = float(theory.alpha_s(q2, nf)) / (4.0 * np.pi)
        plus_of, gluon_of = splines[q2]
        made.append(photon_f2(x_value, a, nf, plus_of, lambda u, of=gluon_of: of(u)[..., 0]))
    seconds = (time.perf_counter() - begin) / count
    worst = float(np.max(np.abs(np.array(made) / predicted - 1.0)))
    check("a plain prediction", worst, 1e-4)  # the spline's, near x = 1
    return [
        Figure(
            f"{forward.POINTS} values of F2 for one input in plain numpy, scaled from {count}",
            f"{forward.POINTS * seconds / one:.0f} units",
        ),
        Figure("largest difference from the map, the spline's", f"{worst:.0e}", "1e-04"),
    ]


if __name__ == "__main__":
    show(measure, __doc__)
