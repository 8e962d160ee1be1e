"""The parametrisation of F2 that stands in for measurements: magnitudes, scaling violations, smoothness."""

from __future__ import annotations

import importlib.util
import sys

import numpy as np
import pytest
from house.tree import ROOT


@pytest.fixture(scope="module")
def world(monkeypatch_module):
    """The bench as a module."""
    monkeypatch_module.syspath_prepend(str(ROOT / "benches"))
    spec = importlib.util.spec_from_file_location("world_fit", ROOT / "benches" / "world_fit.py")
    made = importlib.util.module_from_spec(spec)
    sys.modules["world_fit"] = made
    spec.loader.exec_module(made)
    yield made
    del sys.modules["world_fit"]


@pytest.fixture(scope="module")
def monkeypatch_module():
    with pytest.MonkeyPatch.context() as made:
        yield made


# F2 of the proton as measured at fixed targets (BCDMS, NMC) and at HERA, rounded; recalled from memory, no
# better than some per cent.
MEASURED = [
    (5e-4, 15.0, 1.2), (0.01, 15.0, 0.57), (0.01, 100.0, 0.80), (0.1, 10.0, 0.385), (0.18, 20.0, 0.345),
    (0.35, 20.0, 0.235), (0.55, 40.0, 0.075), (0.65, 40.0, 0.034),
]  # fmt: skip


@pytest.mark.parametrize(("x", "q2", "value"), MEASURED)
def test_magnitudes_are_those_of_the_world(world, x, q2, value):
    assert world.f2(np.array(x), np.array(q2)) == pytest.approx(value, rel=0.1)


def test_scaling_is_violated_as_qcd_says(world):
    # F2 rises with Q^2 at small x, where gluons make quarks, falls at large x, where quarks radiate, and does
    # neither near x = 0.15
    low, high = (world.f2(np.array([1e-3, 0.15, 0.5]), np.full(3, q2)) for q2 in (10.0, 100.0))
    assert high[0] > 1.3 * low[0]
    assert high[1] == pytest.approx(low[1], rel=0.05)
    assert high[2] < 0.8 * low[2]


def test_it_is_smooth_where_points_are_drawn(world):
    x, q2 = np.meshgrid(np.geomspace(1e-4, 0.7, 200), np.geomspace(3.0, 1000.0, 200))
    values = np.log(world.f2(x, q2))
    for axis, most in ((0, 0.5), (1, 40.0)):
        # second differences over the step squared. ln F2 bends slowly with ln Q^2; with ln x as (1 - x)^4.5
        # does, by 4.5 x/(1 - x)^2 = 35 at x = 0.7
        step = np.log([1000.0 / 3.0, 7000.0][axis]) / 199
        assert abs(np.diff(values, 2, axis=axis)).max() < most * step**2


def test_points_lie_where_there_were_measurements(world):
    x, q2 = world.points(False)
    assert x.min() == pytest.approx(1e-4)
    assert x.max() == pytest.approx(0.7)
    assert q2.min() == pytest.approx(3.0)
    assert q2.max() == pytest.approx(1000.0)
    assert (q2 / (x * world.S) <= world.MOST_Y).all()
    chi2 = world.measured(False)
    pulls = chi2.pulls(world.f2(x, q2))
    # 3 per cent each, drawn as a Gaussian: chi-square within four of its deviations, sqrt(2 n)
    assert abs(pulls @ pulls - x.size) < 4 * np.sqrt(2 * x.size)
