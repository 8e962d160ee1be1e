"""Quark thresholds against the Mellin-space solution: off the mass, kinds of mass, intrinsic charm, top.

M. Buza et al., hep-ph/9612398, for the matching; the coupling in it is a^(nl+1) at mu_r^2 = mu_thr^2.
"""

from __future__ import annotations

import itertools
from dataclasses import replace

import numpy as np
import pytest
import scalewright as sw
from evolution.cases import ORDERS, PUBLISHED_X, QUANTITIES, Case, errors, grid, worst
from mellin import toy_input
from mellin.inputs import shaped

PROMISE = {"standard": 1e-7, "fine": 1e-9}

SHIFTED = {
    f"{ORDERS[k]}-{ratio}-{kappa}-{kind}": Case(k, ratio=ratio, kappa=kappa, kind=kind)
    for k, ratio, kappa, kind in [
        (0, 1.5, 1.0, "pole"),
        (1, 1.5, 1.0, "pole"),
        (1, 1.5, 0.5, "pole"),
        (2, 1.5, 1.0, "pole"),
        (2, 1.5, 1.0, "msbar"),
        (2, 1.5, 2.0, "msbar"),
        (2, 1.0, 1.0, "msbar"),
    ]
}


def end(case: Case, resolution: str) -> sw.Densities:
    on = grid(resolution)
    return case.operators(on).apply(case.start(on)).scale(case.q2)


@pytest.mark.parametrize("resolution", PROMISE)
@pytest.mark.parametrize("case", SHIFTED.values(), ids=SHIFTED)
def test_thresholds_off_the_mass_and_kinds_of_mass(case: Case, resolution: str) -> None:
    assert worst(errors(case, end(case, resolution), PUBLISHED_X))[0] < PROMISE[resolution]


@pytest.mark.parametrize("resolution", PROMISE)
@pytest.mark.parametrize(("order", "ratio"), list(itertools.product([0, 1], [1.0, 1.5])))
def test_intrinsic_charm(order: int, ratio: float, resolution: str) -> None:
    """Charm and anticharm of their own shapes, constant below the threshold, matched with A_HH and A_gH."""
    charm = {4: shaped(0.3, 0.2, 4.0), -4: shaped(0.25, 0.3, 5.0)}
    case = Case(order, ratio=ratio, start_q2=1.5, densities={**toy_input.DENSITIES, **charm})
    names = (*QUANTITIES, "c_v")
    assert worst(errors(case, end(case, resolution), PUBLISHED_X, names))[0] < PROMISE[resolution]


@pytest.mark.parametrize("resolution", PROMISE)
@pytest.mark.parametrize("order", [0, 1, 2])
def test_up_to_top(order: int, resolution: str) -> None:
    case = Case(order, (3, 6), q2=1e6)
    names = (*QUANTITIES, "t+")
    assert worst(errors(case, end(case, resolution), PUBLISHED_X, names))[0] < PROMISE[resolution]


@pytest.mark.parametrize("order", [0, 1, 2])
def test_both_sides_of_a_threshold_at_one_scale(order: int) -> None:
    """At mu_thr^2 itself with nl and nl + 1 flavours, the matching alone between them."""
    case, on = Case(order, masses=(1.5, 4.5, 175.0), ratio=1.5), grid()
    there = 1.5 * 4.5**2
    sides = case.operators(on, [there, there], nf=[4, 5]).apply(case.start(on))
    for nf in (4, 5):
        # at LO bottom begins with nothing: no relative error there; without it the promise
        names = QUANTITIES if order else tuple(name for name in QUANTITIES if name != "b+")
        side = sides.scale(there, nf)
        assert worst(errors(replace(case, q2=there), side, PUBLISHED_X, names))[0] < 1e-7
    if order == 0:
        # rounding of the sea, 10 at most, from which flavours are put together
        assert np.all(np.abs(sides.scale(there, 5).combination("b+")) < 1e-14)
    step = {
        name: np.max(
            np.abs(sides.scale(there, 5).combination(name) - sides.scale(there, 4).combination(name))
        )
        for name in ("g", "u_v")
    }
    # continuous at LO; the gluon moves by a L = 0.8 per cent beyond, the valence by a^2 only; a rounding of
    # quark and antiquark, below 1, is not a step
    assert (step["g"] > 1e-3) == (order > 0)
    assert (step["u_v"] > 1e-6) == (order == 2)
    assert step["u_v"] < 1e-15 or order == 2
