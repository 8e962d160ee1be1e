"""A small map of proton F2 at leading order from real operators, and measurements made up on it.

F2(x, Q^2) = sum over quarks of e_q^2 (x q + x qbar), at Q^2 above the start; the map is found by carrying
unit densities of each flavour and node.
"""

from functools import cache

import numpy as np
import scalewright as sw
from fitting.laws import power_law
from scalewright.fitting.shapes import FunctionShape, PowerLaw, Term

X_MIN, START_Q2 = 1e-3, 2.0
GRID = sw.ChebyshevGrid.from_panels([0.0, 0.7, 2.5, -np.log(X_MIN)], [8, 8, 8])
FLAVOURS = (21, 1, -1, 2, -2, 3, -3)
CHARGES = {1: 1 / 9, 2: 4 / 9, 3: 1 / 9, 4: 4 / 9}
ALPHA_S = 0.35


class Rows:
    """What a fit asks of a forward map."""

    def __init__(self, alpha_s, x, q2, gap=0.0):
        self.grid, self.flavours, self.start_q2, self.start_nf = GRID, FLAVOURS, START_Q2, 3
        self.alpha_s, self._points, self._gap = alpha_s, (x, q2), gap
        self.matrix = built(alpha_s, tuple(x), tuple(q2))

    def derivative(self, name):
        """Return d matrix/d alpha_s; four points, error h^4 of a smooth function: 1e-9."""
        assert name == "alpha_s"
        step = 0.002
        at = {k: built(self.alpha_s + k * step, *map(tuple, self._points)) for k in (-2, -1, 1, 2)}
        return (8 * (at[1] - at[-1]) - (at[2] - at[-2])) / (12 * step)

    def predict(self, values):
        return np.tensordot(np.asarray(values), self.matrix, axes=([-2, -1], [1, 2]))


@cache
def built(alpha_s, x, q2):
    """Return the map, (row, flavour, node)."""
    theory = sw.Theory(
        order="LO", coupling=sw.Coupling(alpha_s, q2=START_Q2, nf=3), flavours=3,
    )  # fmt: skip
    scales = sorted(set(q2))
    ops = sw.build_operators(theory, GRID, start_q2=START_Q2, q2=scales)
    units = np.eye(len(FLAVOURS) * GRID.nodes).reshape(-1, len(FLAVOURS), GRID.nodes)
    many = sw.Densities(GRID, q2=START_Q2, nf=3, flavours=FLAVOURS, values=units)
    carried = ops.apply(many, threads=1)
    rows = np.empty((len(x), len(units)))
    for row, (at, scale) in enumerate(zip(x, q2, strict=True)):
        values = carried.scale(scale).values
        charged = sum(
            CHARGES[abs(f)] * values[:, place] for place, f in enumerate(carried.flavours) if f != 21
        )
        rows[row] = charged @ GRID.cardinals(at)
    return rows.reshape(len(x), len(FLAVOURS), GRID.nodes)


def points(count_x=8, count_q2=4):
    """Return x and q2 of a rectangle of points."""
    x, q2 = np.meshgrid(np.geomspace(0.002, 0.6, count_x), np.geomspace(2.5, 200.0, count_q2))
    return x.ravel().tolist(), q2.ravel().tolist()


@cache
def fmap(alpha_s=ALPHA_S, count_x=8, count_q2=4):
    """Return the map at a coupling."""
    return Rows(alpha_s, *points(count_x, count_q2))


def measured(values, size=0.02, seed=None, common=0.01):
    """Return measurements with additive errors: independent ones, and two that all data share."""
    values = np.asarray(values)
    x, q2 = points(count_q2=values.size // 8)
    table = {"x": x, "q2": q2, "value": values, "stat": np.full(values.size, size)}
    table["tilt"] = common * np.linspace(-1, 1, values.size)
    kind = {"given_in": "value", "scales_with": "nothing"}
    errors = [{"column": "stat", **kind}, {"column": "tilt", "correlated": True, **kind},
              {"name": "offset", "size": common, "correlated": True, **kind}]  # fmt: skip
    made = sw.Measurements.from_columns(
        {"title": "Run 1", "measures": "F2", "exchange": "photon", "uncertainty": errors}, table
    )
    if seed is None:
        return made
    return made.with_values(made.pseudo_data(np.random.default_rng(seed)).values)


def linear_shape():
    """Return a shape of four parameters, all of them linear: powers are fixed."""
    shape = power_law(degree=1, grid=GRID)
    powers = [name for name in shape.names if not name.split(".")[1].startswith("c")]
    return shape.restricted(fixed=powers)


def quick_shape():
    """Return a linear shape that costs little: three functions of all flavours with coefficients."""
    return FunctionShape(GRID, FLAVOURS, _sum, [1.0, 0.5, 0.2], names=["a", "b", "c"], jacobian=_parts)


def _parts(x, p):
    weights = np.array([[3, 1, 0.2, 2, 0.2, 0.1, 0.1], [1, 0, 1, 0, 1, 0.5, 0.5], [0, 1, -1, 2, -1, 0, 0]])
    functions = [x**0.2 * (1 - x) ** 5, x**-0.1 * (1 - x) ** 7, x**0.6 * (1 - x) ** 3]
    return np.stack([np.outer(w, f) for w, f in zip(weights, functions, strict=True)])


def _sum(x, p):
    return np.tensordot(p, _parts(x, p), axes=1)


def bent_shape():
    """Return a shape of seven parameters, five of them not linear."""
    shape = power_law(degree=1, grid=GRID)
    return shape.restricted(
        fixed=[
            "g.c1",
            "u_v.c1",
            "d_v.power",
            "d_v.fall",
            "d_v.c1",
            "ubar.fall",
            "ubar.power",
            "dbar.fall",
            "dbar.c1",
        ]
    )


def twin_shape():
    """Return a shape in which F2 cannot tell two parameters apart: d and s have one charge and one form."""
    terms = {"g": Term(-0.1, 5), "u+": Term(-0.1, 4), "d+": Term(-0.1, 7, [0.5]), "s+": Term(-0.1, 7, [0.2])}
    shape = PowerLaw(GRID, terms, nf=3, momentum="g", relations=["u = ubar", "d = dbar", "s = sbar"])
    return shape.restricted(fixed=[name for name in shape.names if name not in ("u+.c0", "d+.c0", "s+.c0")])


def truth(shape, the_map=None):
    """Return the prediction at the start of a shape."""
    the_map = fmap() if the_map is None else the_map
    order = [shape.flavours.index(f) for f in the_map.flavours]
    return np.tensordot(the_map.matrix, shape(shape.start)[order], axes=2)


def chi_square(values, seed=None, **options):
    """Return chi-square of such measurements."""
    return sw.ChiSquare(measured(values, seed=seed, **options))
