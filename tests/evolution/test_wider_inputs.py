"""Inputs of the class that the grid promises to carry, against the Mellin-space solution.

1e-6 at standard resolution and 1e-8 at fine, x <= 0.9, relative to what `cases.errors` says.
"""

from __future__ import annotations

import warnings
from dataclasses import replace

import numpy as np
import pytest
import scalewright as sw
from evolution.cases import Case, errors, grid, worst
from evolution.wider_class import inputs

PROMISE = {"standard": 1e-6, "fine": 1e-8}
X = np.array([1e-7, 1e-5, 1e-3, 0.05, 0.2, 0.35, 0.5, 0.65, 0.8, 0.9])
NAMES = ("g", "u", "ubar", "dbar", "s", "c+", "b+")


@pytest.mark.parametrize("order", [0, 1, 2])
def test_every_shape(order: int) -> None:
    base = Case(order)
    sets = {name: base.operators(grid(name)) for name in PROMISE}
    for densities in inputs(random=2):
        case = replace(base, densities=densities)
        for name, operators in sets.items():
            with warnings.catch_warnings():
                # at the corners of the class interpolation may just miss its 1e-6
                warnings.simplefilter("ignore", sw.ResolutionWarning)
                start = case.start(grid(name))
            end = operators.apply(start).scale(case.q2)
            found = errors(case, end, X, NAMES)
            error, flavour, where = worst(found)
            assert error < PROMISE[name], (name, flavour, X[where])
