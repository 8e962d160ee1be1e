"""A small grid and sets of operators that the tests of this folder share."""

import numpy as np
import pytest
import scalewright as sw
from apply.toy import functions


@pytest.fixture(scope="session")
def grid():
    return sw.ChebyshevGrid(x_min=1e-5)


@pytest.fixture(scope="session")
def theory():
    return sw.Theory(
        order="NNLO",
        coupling=sw.Coupling(0.35, q2=2.0, nf=3),
        masses=sw.QuarkMasses(charm=1.5, bottom=4.5, top=175.0, kind="pole"),
        flavours=(3, 5),
    )


@pytest.fixture(scope="session")
def ops(theory, grid):
    """Through both thresholds."""
    return sw.build_operators(theory, grid, start_q2=2.0, q2=[2.0, 10.0, 100.0, 1e4])


@pytest.fixture(scope="session")
def start(grid):
    return sw.Densities.sample(grid, q2=2.0, nf=3, functions=functions())


@pytest.fixture(scope="session")
def many(grid, start):
    """Seven replicas that have nothing in common but the scale."""
    rng = np.random.default_rng(4)
    weights = rng.normal(size=(7, 7, 7))
    values = np.einsum("rij,jn->rin", weights, start.values[0])
    return sw.Densities(grid, q2=2.0, nf=3, flavours=start.flavours, values=values)
