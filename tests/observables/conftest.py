"""Grid and input that the tests of observables share."""

import pytest
import scalewright as sw
from observables import direct


@pytest.fixture(scope="session")
def grid():
    return sw.ChebyshevGrid(x_min=1e-5)


@pytest.fixture(scope="session")
def start(grid):
    return direct.start(grid)
