"""What flows below x_min in two steps, against applying one step after the other."""

import functools

import numpy as np
import pytest
import scalewright as sw
from apply.toy import functions
from scalewright import _flows
from scalewright._composed import _flows_of_both

CHARM = {4: lambda x: 0.1 * x**0.3 * (1 - x) ** 3, -4: lambda x: 0.05 * x**0.6 * (1 - x) ** 4}
BOTTOM = {5: lambda x: 0.1 * x**0.4 * (1 - x) ** 3, -5: lambda x: 0.05 * x**0.7 * (1 - x) ** 4}

# start, middle, end as (q2, nf); intrinsic flavours of both steps; flavours of the input
ROUTES = {
    "up from 3, second from 4": ((2.0, 3), (10.0, 4), (1e4, 5), (), (), {}),
    "up from 3, both from 3": ((2.0, 3), (2.1, 3), (1e4, 5), (), (), {}),
    "intrinsic, second from 4": ((2.0, 3), (10.0, 4), (1e4, 5), (4,), (), CHARM),
    "intrinsic in both": ((2.0, 3), (2.1, 3), (1e4, 5), (4,), (4,), CHARM),
    "down from 4 to 3": ((10.0, 4), (5.0, 4), (2.2, 3), (), (), CHARM),
    "down from 4, intrinsic": ((10.0, 4), (5.0, 4), (2.2, 3), (5,), (5,), CHARM | BOTTOM),
    "down from 5 to 4": ((100.0, 5), (50.0, 5), (15.0, 4), (), (), CHARM | BOTTOM),
}


@pytest.mark.parametrize("order", ["LO", "NLO", "NNLO"])
@pytest.mark.parametrize("route", ROUTES)
def test_two_steps_lose_what_one_after_the_other_lose(theory, grid, order, route):
    (q0, n0), (q1, n1), (q2, n2), kept, passed, heavy = ROUTES[route]
    options = {"coupling": theory.coupling, "masses": theory.masses, "flavours": (3, 5)}
    theory = sw.Theory(order=order, **options)
    build = functools.partial(sw.build_operators, theory, grid)
    first = build(start_q2=q0, start_nf=n0, q2=[q1], nf=[n1], intrinsic=kept)
    second = build(start_q2=q1, start_nf=n1, q2=[q2], nf=[n2], intrinsic=passed)
    given = sw.Densities.sample(grid, q2=q0, nf=n0, functions=functions() | heavy)
    expected = second.apply(first.apply(given).scale(None)).below
    blocks, flows = first._source.at(np.array([q1]), np.array([n1]), 0)
    rows = _flows_of_both(first, second, flows[0], blocks[0])
    light = min(first.light, second.light)
    combined = _flows.Input(given.values, given.flavours, light)
    # sums of some hundred terms; on a route downwards as large as the blocks that undo the evolution
    size = 1.0 if q2 > q0 else abs(second.blocks).max() * abs(first.blocks).max()
    momentum = given.below.momentum + _flows.momentum(rows, combined)
    np.testing.assert_allclose(momentum, expected.momentum, rtol=0, atol=1e-13 * size)
    for quark in range(1, 6):
        number = given.below.number[..., quark - 1] + _flows.number(rows, combined, quark, light)
        np.testing.assert_allclose(number, expected.number[..., quark - 1], rtol=0, atol=1e-13 * size)


def test_rows_are_those_of_the_core(theory, grid):
    whole = sw.build_operators(theory, grid, start_q2=2.0, q2=[1e4])
    first = sw.build_operators(theory, grid, start_q2=2.0, q2=[10.0])
    second = sw.build_operators(theory, grid, start_q2=10.0, q2=[1e4])
    blocks, flows = first._source.at(np.array([10.0]), np.array([4]), 0)
    rows = _flows_of_both(first, second, flows[0], blocks[0])
    expected = dict(zip(whole._source.flow_names, whole._all()[1][0], strict=True))
    assert rows.keys() == expected.keys()
    for name, row in rows.items():
        # both within the tolerance of the steps, 1e-8
        np.testing.assert_allclose(
            row[0], expected[name], rtol=0, atol=2e-8 * max(abs(expected[name]).max(), 1e-8)
        )
