"""Shapes that the tests of this folder share. The laws are made up."""

import scalewright as sw
from scalewright.fitting.shapes import FunctionShape, Network, PowerLaw, Term

GRID = sw.ChebyshevGrid(x_min=1e-4)
RELATIONS = ("s = 0.5*dbar", "sbar = s")
SUMS = {"momentum": "g", "numbers": {"u_v": 2.0, "d_v": 1.0}}


def terms(polynomial="plain", degree=2, variable="x"):
    """Return one term for each combination, those of u_v and g with a polynomial."""
    bend = {"polynomial": polynomial, "variable": variable}
    tail = [0.4 / (k + 1) for k in range(degree)]
    return {
        "g": Term(-0.15, 5.2, [1.0, *tail], **bend),
        "u_v": Term(0.6, 3.1, [1.0, *tail], **bend),
        "d_v": Term(0.55, 4.2, [1.0, -0.3]),
        "ubar": Term(-0.12, 7.1, [0.2]),
        "dbar": Term(-0.12, 7.6, [0.25, 0.1]),
    }


def power_law(polynomial="plain", degree=2, variable="x", grid=GRID, **options):
    """Return a shape of all flavours of nf = 3 with three sum rules."""
    return PowerLaw(grid, terms(polynomial, degree, variable), nf=3, relations=RELATIONS, **(SUMS | options))


def network(hidden=(5, 3), **options):
    """Return a network with three sum rules."""
    powers = {"g": (-0.1, 5), "u_v": (0.7, 3), "d_v": (0.7, 4), "ubar": (-0.1, 7), "dbar": (-0.1, 7)}
    return Network(GRID, powers, nf=3, hidden=hidden, seed=3, relations=RELATIONS, **(SUMS | options))


def tilted(x, p):
    """Return a gluon and a quark of three parameters; at the top of a module, so that it can be pickled."""
    import numpy as np

    return np.stack([p[0] * x ** p[1] * (1 - x) ** 5, p[2] * p[0] * np.sqrt(x) * (1 - x) ** 3])


def tilted_derivative(x, p):
    """Return its derivative, by hand."""
    import numpy as np

    g, q = x ** p[1] * (1 - x) ** 5, np.sqrt(x) * (1 - x) ** 3
    zero = np.zeros_like(x)
    return np.stack(
        [np.stack([g, p[2] * q]), np.stack([p[0] * np.log(x) * g, zero]), np.stack([zero, p[0] * q])]
    )


def function(**options):
    """Return a shape from the function above."""
    return FunctionShape(GRID, [21, 2], tilted, [2.0, -0.1, 0.5], names=["norm", "power", "ratio"], **options)


def shapes():
    """Return one shape of each kind, by name: a new kind joins this list."""
    law = power_law()
    kinds = {f"{family} {y}": power_law(family, 3, y) for family in ("plain", "chebyshev", "bernstein")
             for y in ("x", "sqrt x")}  # fmt: skip
    return {
        **kinds,
        "no sum rules": power_law(momentum=None, numbers={}),
        "restricted": law.restricted(
            fixed={"u_v.c1": 0.1}, tied={"ubar.power": "dbar.power", "ubar.fall": ("dbar.fall", 0.9)}
        ),
        "network": network(),
        "linear network": network(hidden=()),
        "function": function(jacobian=tilted_derivative),
        "function by differences": function(),
    }
