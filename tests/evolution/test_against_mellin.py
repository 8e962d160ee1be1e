"""The published input against the Mellin-space solution, at every x of the published tables.

With the core's own kernels on both sides only the numerics differ: grid, quadrature, steps, matching. The
accuracy asked for is the promise for this input: 1e-7 at standard resolution, 1e-9 at fine.
"""

from __future__ import annotations

import numpy as np
import pytest
from evolution.cases import COMPILED, ORDERS, PUBLISHED_X, QUANTITIES, STORED, Case, errors, grid, worst
from mellin.conftest import KernelFunctions

PROMISE = {"standard": 1e-7, "fine": 1e-9}

CASES = {
    **{f"{name}-fixed4": Case(k, (4, 4)) for k, name in enumerate(ORDERS)},
    **{f"{name}-variable": Case(k) for k, name in enumerate(ORDERS)},
    **{f"{name}-fixed4-half": Case(k, (4, 4), kappa=0.5) for k, name in enumerate(ORDERS)},
    **{f"{name}-fixed4-twice": Case(k, (4, 4), kappa=2.0) for k, name in enumerate(ORDERS)},
    **{f"{name}-variable-half": Case(k, kappa=0.5) for k, name in enumerate(ORDERS)},
    **{f"{name}-variable-twice": Case(k, kappa=2.0) for k, name in enumerate(ORDERS)},
}


@pytest.mark.parametrize("resolution", ["standard", "fine"])
@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_published_input(case: Case, resolution: str) -> None:
    on = grid(resolution)
    end = case.operators(on).apply(case.start(on)).scale(case.q2)
    assert worst(errors(case, end, PUBLISHED_X))[0] < PROMISE[resolution]


@pytest.mark.parametrize("resolution", ["standard", "fine"])
def test_strange_and_charm_asymmetry_of_nnlo(resolution: str) -> None:
    """P_ns^s makes s - sbar and c - cbar, the same for all flavours that had none."""
    case, on = Case(2, (4, 4)), grid(resolution)
    end = case.operators(on).apply(case.start(on)).scale(case.q2)
    exact = case.exact(PUBLISHED_X, names=("s_v", "c_v", "u_v", "d_v", "s+"))
    # what is left of differences of the valence blocks, 1e-6 of them: each value is a sum of a hundred
    # products, so up to a hundred roundings of the valence are allowed, and those of s and sbar as stored
    rounding = 2.0**-53 * (100 * (exact["u_v"] + exact["d_v"]) + 8 * exact["s+"])
    for name in ("s_v", "c_v"):
        assert np.all(np.abs(exact[name]) > 1e2 * rounding)
        difference = np.abs(end.at(None, PUBLISHED_X, name)[0] - exact[name])
        assert np.all(difference < PROMISE[resolution] * np.abs(exact[name]) + rounding)


def test_second_writing_of_the_kernels(kernels: KernelFunctions) -> None:
    """The whole chain with nothing shared but the published constants, NNLO through two thresholds."""
    case, on, x = Case(2), grid("fine"), PUBLISHED_X[[0, 4, 8, 10]]
    end = case.operators(on).apply(case.start(on)).scale(case.q2)
    ours, theirs = (case.exact(x, kernels=k) for k in (COMPILED, kernels))
    for name in QUANTITIES:
        # the printed nf^2 delta(1-z) of the second writing is 3.63e-6 nf^2 larger than the exact one; the
        # integral of nf^2 a^3 over ln mu^2, nf^2/(2 beta0) (a^2 at start - a^2 at end), is 7e-4, which
        # makes 2.6e-9 of whatever is made of quarks; twice that is allowed
        np.testing.assert_allclose(theirs[name], ours[name], rtol=5e-9, err_msg=name)
        floor = STORED * np.abs(end.at(None, x, "dbar + ubar")[0])
        difference = np.abs(end.at(None, x, name)[0] - theirs[name])
        assert np.all(difference < 6e-9 * np.abs(theirs[name]) + floor), name


@pytest.mark.parametrize("resolution", ["standard", "fine"])
@pytest.mark.parametrize("q2", [3.0, 20.25, 300.0, 1e5])
def test_any_scale_in_between(q2: float, resolution: str) -> None:
    """Scales that were not asked for when the set was built, one of them a threshold."""
    case, on = Case(2), grid(resolution)
    dense = case.operators(on, [2.0, 1e5]).apply(case.start(on), q2=[q2]).scale(q2)
    # near the start dbar - ubar ~ x^0.9 (at 1e-6) is no better than the grid carries the input: 1e-6
    allowed = 1e-6 if resolution == "standard" and q2 < 20.0 else PROMISE[resolution]
    assert worst(errors(case, dense, PUBLISHED_X))[0] < allowed


@pytest.mark.parametrize("resolution", ["standard", "fine"])
@pytest.mark.parametrize("x_min", [1e-9, 1e-5, 1e-4, 1e-3, 1e-2])
def test_other_grids(x_min: float, resolution: str) -> None:
    case, on = Case(2), grid(resolution, x_min)
    x = np.array([1e-9, 1e-8, *PUBLISHED_X])
    x = x[x >= x_min]
    end = case.operators(on).apply(case.start(on)).scale(case.q2)
    assert worst(errors(case, end, x))[0] < PROMISE[resolution]
