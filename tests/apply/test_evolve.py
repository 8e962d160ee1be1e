"""Without operators; and what flows below x_min: sum rules hold for all of 0 < x < 1."""

import numpy as np
import pytest
import scalewright as sw
from apply.toy import D_V, U_V, functions, moment, momentum


def test_without_operators_the_same_comes_out(theory, ops, many):
    direct, whole = sw.evolve(theory, many, ops.q2), ops.apply(many)
    assert direct.flavours == whole.flavours
    # both solve the same equation to 1e-8 a step, in other ways
    np.testing.assert_allclose(direct.values, whole.values, rtol=0, atol=1e-7 * abs(whole.values).max())
    assert direct.below is None


@pytest.mark.parametrize("flavours", [4, (3, 5)])
def test_without_operators_the_same_flows_below_x_min(flavours):
    grid = sw.ChebyshevGrid(x_min=1e-5)
    theory = sw.Theory(order="NLO", coupling=sw.Coupling(0.35, q2=2.0, nf=4), flavours=flavours)
    start = sw.Densities.sample(grid, q2=2.0, nf=theory.start_nf(2.0), functions=functions())
    direct = sw.evolve(theory, start, [10.0, 1e4], missing="zero")
    whole = sw.build_operators(theory, grid, start_q2=2.0, q2=[10.0, 1e4]).apply(start, missing="zero")
    # both solve the same equation to 1e-8; momentum and numbers are of order one
    np.testing.assert_allclose(direct.below.momentum, whole.below.momentum, rtol=0, atol=2e-8)
    np.testing.assert_allclose(direct.below.number, whole.below.number, rtol=0, atol=2e-8)
    # x_min = 1e-5 at standard resolution: what flows below is carried to 1e-7, the goal of the grid
    np.testing.assert_allclose(direct.momentum(), momentum(), rtol=0, atol=1e-7)
    np.testing.assert_allclose(direct.number("u"), moment(U_V, 1), rtol=0, atol=1e-7)
    assert (direct.momentum() - direct.momentum(part="above")).max() > 1e-4


def test_evolve_names_what_does_not_fit(theory, many, grid):
    with pytest.raises(sw.InputError, match="densities must be Densities, not int"):
        sw.evolve(theory, 3, [10.0])
    with pytest.raises(sw.InputError, match="theory must be a Theory, not str"):
        sw.evolve("LO", many, [10.0])
    part = sw.Densities(grid, q2=2.0, nf=3, flavours=[21], values=many.values[:, :1])
    with pytest.raises(sw.InputError, match=r"densities have no flavour 1, -1, .*active at nf = 3"):
        sw.evolve(theory, part, [10.0])


# x_min = 1e-7, standard resolution: at LO and NLO sums above plus below are kept to 1e-7, the goal of the
# grid. At NNLO the published kernels are parametrisations that keep momentum to 3e-7 and numbers to 1e-9.
SUMS = {"LO": 1e-7, "NLO": 1e-7, "NNLO": 5e-7}


@pytest.mark.parametrize("order", SUMS)
@pytest.mark.parametrize("flavours", [4, (3, 5)])
def test_momentum_and_numbers_are_kept_above_plus_below(order, flavours):
    grid = sw.ChebyshevGrid(x_min=1e-7)
    theory = sw.Theory(order=order, coupling=sw.Coupling(0.35, q2=2.0, nf=4), flavours=flavours)
    nf = theory.start_nf(2.0)
    start = sw.Densities.sample(grid, q2=2.0, nf=nf, functions=functions())
    evolved = sw.build_operators(theory, grid, start_q2=2.0, q2=[10.0, 1e4]).apply(start, missing="zero")
    tolerance = SUMS[order]
    np.testing.assert_allclose(evolved.momentum(), momentum(), rtol=0, atol=tolerance)
    np.testing.assert_allclose(evolved.number("u"), moment(U_V, 1), rtol=0, atol=tolerance)
    np.testing.assert_allclose(evolved.number("d"), moment(D_V, 1), rtol=0, atol=tolerance)
    for quark in ("s", "c"):
        np.testing.assert_allclose(evolved.number(quark), 0.0, rtol=0, atol=tolerance)
    # and the part below matters: it is far larger than the tolerance
    assert (evolved.momentum() - evolved.momentum(part="above")).max() > 1e-4


def test_below_stays_unknown(ops, many):
    assert many.below is None
    assert ops.apply(many).below is None
