"""One set of operators through two thresholds, and an input, shared by the tests of this folder."""

import numpy as np
import pytest
import scalewright as sw


@pytest.fixture(scope="session")
def ops():
    theory = sw.Theory(order="NLO", coupling=sw.Coupling(0.35, q2=2.0, nf=4))
    return sw.build_operators(theory, sw.ChebyshevGrid(1e-4), start_q2=2.0, start_nf=4, q2=[10.0, 1e4])


@pytest.fixture(scope="session")
def values(ops):
    """(replica, flavour, node), of no particular shape."""
    return np.random.default_rng(3).normal(size=(5, 9, ops.grid.nodes))


FLAVOURS = (21, 1, -1, 2, -2, 3, -3, 4, -4)


@pytest.fixture(scope="session")
def densities(ops, values):
    return sw.Densities(ops.grid, q2=2.0, nf=4, flavours=FLAVOURS, values=values)
