"""A small fit that its tests share: a made-up table drawn from a law that the shape of the job contains."""

import numpy as np
import scalewright as sw
from scalewright.fitting.shapes import PowerLaw, Term

JOB = """
[theory]
order = "LO"
flavours = 3
coupling = { alpha_s = 0.3, q2 = 2.0, nf = 3 }

[grid]
x_min = 1e-2

[data]
file = "run1.toml"

[shape]
start_q2 = 2.0
relations = ["dbar = ubar", "s = sbar", "s = 0.5*ubar"]
momentum = "g"
numbers = { u_v = 2, d_v = 1 }

[shape.terms]
g = { power = 0.1, fall = 5 }
u_v = { power = 0.7, fall = 3.5 }
d_v = { power = 0.7, fall = 4 }
ubar = { power = 0.1, fall = 7, coefficients = [0.3] }

[parameters]
g.power = { fixed = true }
g.fall = { fixed = 5.0 }
"u_v.fall" = { start = 3.4, bounds = [1, 10] }
d_v.power = { tied = "u_v.power" }
d_v.fall = { fixed = true }
ubar.power = { prior = [0.1, 0.05] }

[fit]
theory = ["alpha_s"]

[replicas]
number = 6
seed = 3
workers = 1
journal = "fit.journal"

[output]
result = "fit.h5"
ensemble = "replicas.h5"
densities = "densities.csv"
q2 = [10.0, 50.0]
x = [0.01, 0.1, 0.5]
parameters = "parameters.csv"
predictions = "predictions.csv"
report = "fit.html"
"""
TABLE = """
title = "Run 1, positrons"
points = "run1.csv"
measures = "reduced_cross_section"
beam = "e+"
s = 1e4

[[uncertainty]]
column = "stat"
given_in = "percent"
scales_with = "nothing"

[[uncertainty]]
name = "luminosity"
size = 1.0
given_in = "percent"
scales_with = "value"
shared_as = "luminosity"
"""
GRID = sw.ChebyshevGrid(x_min=1e-2)
THEORY = sw.Theory(order="LO", coupling=sw.Coupling(0.3, q2=2.0, nf=3), flavours=3)


def shape():
    """Return the shape of the job, all parameters free, where it starts."""
    terms = {"g": Term(0.1, 5), "u_v": Term(0.7, 3.5), "d_v": Term(0.7, 4), "ubar": Term(0.1, 7, [0.3])}
    relations = ["dbar = ubar", "s = sbar", "s = 0.5*ubar"]
    numbers = {"u_v": 2, "d_v": 1}
    return PowerLaw(GRID, terms, nf=3, relations=relations, momentum="g", numbers=numbers)


def law():
    """Return the law behind the table."""
    made = shape()
    return made.densities(made.start, q2=2.0, nf=3)


def write_case(folder):
    """Write job, description and points; the values are drawn from the law with one seed."""
    x, q2 = np.meshgrid([0.02, 0.05, 0.1, 0.2, 0.35, 0.5], [4.0, 10.0, 30.0, 90.0])
    columns = {"x": x.ravel(), "q2": q2.ravel(), "value": np.ones(24), "stat": np.full(24, 1.0)}
    stat = {"column": "stat", "given_in": "percent", "scales_with": "nothing"}
    what = {"title": "Run 1, positrons", "measures": "reduced_cross_section", "beam": "e+", "s": 1e4}
    inside = q2.ravel() < 0.9 * x.ravel() * 1e4
    points = {name: values[inside] for name, values in columns.items()}
    empty = sw.Measurements.from_columns(what | {"uncertainty": [stat]}, points)
    truth = sw.forward_map(THEORY, GRID, start_q2=2.0, points=empty).predict(law())[0]
    rng = np.random.default_rng(5)
    values = truth * (1 + 0.01 * rng.normal(size=truth.size)) * (1 + 0.01 * rng.normal())
    rows = ["x,q2,value,stat"] + [
        f"{a:g},{b:g},{c:.6g},1.0" for a, b, c in zip(points["x"], points["q2"], values, strict=True)
    ]
    (folder / "run1.csv").write_text("\n".join(rows) + "\n")
    (folder / "run1.toml").write_text(TABLE)
    (folder / "job.toml").write_text(JOB)
