"""What the tests of this folder share and compute once."""

import pytest
from fitting.problems import bent_shape, chi_square, fmap, linear_shape, truth
from fitting.runs import bent_problem, replicas_of
from scalewright.fitting.least_squares import fit


@pytest.fixture(scope="session")
def serial():
    """A run in one process."""
    return replicas_of(bent_problem(), workers=1)


@pytest.fixture(scope="session")
def linear():
    """A fit whose parameters are all linear."""
    shape = linear_shape()
    chi2 = chi_square(truth(shape), seed=1)
    return shape, chi2, fit(fmap(), chi2, shape)


@pytest.fixture(scope="session")
def bent():
    """A fit most of whose parameters are not."""
    shape = bent_shape()
    chi2 = chi_square(truth(shape), seed=2, size=0.002, common=0.001)
    return shape, chi2, fit(fmap(), chi2, shape)
