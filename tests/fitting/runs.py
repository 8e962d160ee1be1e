"""Runs of replicas that several files of this folder make and compare."""

import numpy as np
import scalewright as sw
from fitting.problems import bent_shape, fmap, measured, truth
from scalewright.fitting.replicas import fit_replicas

COUNT = 24


def bent_problem():
    """Return map, chi-square and shape of a fit that is not linear."""
    shape = bent_shape()
    return fmap(), sw.ChiSquare(measured(truth(shape), seed=1, size=0.002, common=0.001)), shape


def replicas_of(problem, replicas=COUNT, seed=7, **options):
    return fit_replicas(*problem, replicas=replicas, seed=seed, **options)


def assert_same_bits(one, other):
    for name in ("index", "parameters", "chi2", "chi2_data", "weights"):
        np.testing.assert_array_equal(getattr(one, name), getattr(other, name), err_msg=name)
    assert one.densities == other.densities
    assert one.failed == other.failed
