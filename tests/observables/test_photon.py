"""Photon exchange: the map against adaptive quadrature of the same coefficient functions."""

from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw
from observables import direct

CHARGES2 = np.array([1, 4, 1, 4, 1, 4]) / 9
POINTS = [(2e-5, 4.0), (1e-3, 3.0), (0.03, 10.0), (0.2, 400.0), (0.5, 4e4), (0.85, 30.0)]


@pytest.mark.parametrize("order", ["LO", "NLO", "NNLO"])
@pytest.mark.parametrize("measure", ["F2", "FL"])
def test_map_agrees_with_direct_quadrature(grid, start, order, measure):
    theory = sw.Theory(order=order)
    x, q2 = (np.array(column) for column in zip(*POINTS, strict=True))
    rows = SimpleNamespace(x=x, q2=q2, measure=[measure] * x.size, exchange="photon")
    fmap = sw.forward_map(theory, grid, start_q2=1.5, start_nf=3, points=rows)
    predicted = fmap.predict(start)[0]
    highest = ["LO", "NLO", "NNLO"].index(order)
    for place, scale in enumerate(q2):
        evolved = sw.evolve(theory, start, [scale]).scale(scale)
        f2, expected = (
            direct.light(theory, evolved, name, x[place], CHARGES2, np.zeros(6), highest)
            for name in ("F2", measure)
        )
        # what the standard resolution promises, relative to F2 where the value itself is small
        assert abs(predicted[place] - expected) <= 1e-6 * max(abs(expected), 1e-3 * f2)
