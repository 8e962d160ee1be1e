"""Thresholds crossed downwards: what the inverse of the matching enlarges is said, and nothing else is."""

import re
import warnings

import numpy as np
import pytest
import scalewright as sw
from apply.toy import functions

CHARM = {4: lambda x: 0.3 * x**-0.1 * (1 - x) ** 7, -4: lambda x: 0.3 * x**-0.1 * (1 - x) ** 7}


@pytest.fixture(scope="module")
def down(theory, grid):
    """From 5 GeV^2 with charm to above and below the charm threshold at 2.25 GeV^2."""
    return sw.build_operators(theory, grid, start_q2=5.0, start_nf=4, q2=[3.0, 2.1, 2.0], nf=[4, 3, 3])


@pytest.fixture(scope="module")
def charmed(grid):
    """Charm that no upward crossing has made; the second replica is a thousand times the first."""
    one = sw.Densities.sample(grid, q2=5.0, nf=4, functions=functions() | CHARM)
    values = np.concatenate([one.values, 1e3 * one.values])
    return sw.Densities(grid, q2=5.0, nf=4, flavours=one.flavours, values=values)


def test_the_warning_says_what_where_how_large_and_why(down, charmed):
    with pytest.warns(sw.ResolutionWarning, match="exact inverse of the matching") as said:
        evolved = down.apply(charmed)
    assert len(said) == 1
    assert said[0].filename == __file__
    charm = abs(
        evolved.values[:, :, evolved.flavours.index(4)] + evolved.values[:, :, evolved.flavours.index(-4)]
    )
    scale, replica, node = np.unravel_index(charm.argmax(), charm.shape)
    words = (
        f"c + cbar = {charm.max():.2g} in size at x = {down.grid.x[node]:.3g}, "
        f"q2 = {down.q2[scale]} GeV^2 (nf = 3), replica {replica}: "
        f"no input value is larger than {abs(charmed.values[replica]).max():.2g}. Below the charm threshold"
    )
    assert replica == 1
    assert words.replace(".0 GeV", " GeV") in str(said[0].message)
    assert charm.max() > 10 * abs(charmed.values[replica]).max()


@pytest.mark.parametrize("order", ["NLO", "NNLO"])
@pytest.mark.parametrize("flavours", [None, (21, 4), (21,)])
def test_it_comes_whatever_is_asked_for(theory, grid, charmed, order, flavours):
    """Charm left out of the output is looked at all the same: the light flavours carry its traces."""
    theory = sw.Theory(order=order, coupling=theory.coupling, masses=theory.masses)
    down = sw.build_operators(theory, grid, start_q2=5.0, start_nf=4, q2=[2.0], nf=[3])
    found = []
    for evolve in (
        lambda: down.apply(charmed, flavours=flavours),
        lambda: list(down.stream(charmed, flavours=flavours)),
        lambda: down.held().apply(charmed, flavours=flavours),
        lambda: sw.evolve(theory, charmed, [2.0], nf=[3], flavours=flavours),
    ):
        with pytest.warns(sw.ResolutionWarning) as said:
            evolve()
        assert [warning.filename for warning in said] == [__file__]
        found.append(re.search(r"c \+ cbar = (\S+) in size at x = (\S+), q2 = 2 GeV", str(said[0].message)))
    assert len({match.groups() for match in found}) == 1


def test_each_scale_of_a_stream_is_judged_alone(down, charmed):
    parts = down.stream(charmed)
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        next(parts)  # above the threshold
    for _ in range(2):
        with pytest.warns(sw.ResolutionWarning, match="charm threshold"):
            next(parts)


@pytest.mark.parametrize("order", ["LO", "NLO", "NNLO"])
@pytest.mark.parametrize("least", [3.0, 1e-3])
def test_up_and_down_again_is_silent_and_gives_the_input_back(theory, grid, many, order, least):
    """The image of an upward crossing goes back where it came from; warnings are errors in these tests."""
    theory = sw.Theory(order=order, coupling=theory.coupling, masses=theory.masses)
    up = sw.build_operators(theory, grid, start_q2=2.0, start_nf=3, q2=[5.0], nf=[4])
    down = sw.build_operators(theory, grid, start_q2=5.0, start_nf=4, q2=[2.0], nf=[3])
    small = sw.Densities(grid, q2=2.0, nf=3, flavours=many.flavours, values=least * many.values)
    evolved = up.apply(small).scale(5.0)
    for again in (down.apply(evolved), sw.evolve(theory, evolved, [2.0], nf=[3]), (down @ up).apply(small)):
        largest = abs(small.values).max()
        light = [again.flavours.index(flavour) for flavour in small.flavours]
        # two solutions to 1e-8 each, and the inverse enlarges what differs: measured 4e-9 in charm
        np.testing.assert_allclose(again.values[0][:, light], small.values, rtol=0, atol=1e-7 * largest)


def test_without_matching_nothing_is_said(theory, grid, charmed):
    """At LO the crossing changes nothing: charm stays of the size it had."""
    lowest = sw.Theory(order="LO", coupling=theory.coupling, masses=theory.masses)
    down = sw.build_operators(lowest, grid, start_q2=5.0, start_nf=4, q2=[2.25], nf=[3])
    down.apply(charmed)
