"""Derivatives of operators with respect to the coupling, the masses and the scale.

Against differences of rebuilt sets, the closed form at LO (scipy's matrix exponential), and sum rules.
"""

import math

import differences
import numpy as np
import pytest
import scalewright as sw
from scalewright import _core
from scipy.linalg import expm

GRID = sw.ChebyshevGrid.from_panels([0.0, 0.7, 2.5, 6.9], [8, 8, 8])
THRESHOLDS = (2.5, 25.0, 3e4)
PARAMETERS = ("alpha_s", "charm", "bottom", "top")

# start, ends, coupling; all thresholds away from the masses, so that every logarithm counts
ROUTES = {
    "up": ((1.5, 3), [(1.5, 3), (2.5, 4), (300.0, 5), (1e5, 6)], (0.4, 2.0, 3)),
    "up and down": ((10.0, 4), [(2.1, 3), (5.0, 4), (1e3, 5)], (0.118, 8315.0, 5)),
    "down": ((1e4, 5), [(15.0, 4), (2.1, 3)], (0.118, 8315.0, 5)),
}


def made(order, coupling, kind="pole", flavours=(3, 6), ratio=1.0):
    return sw.Theory(
        order,
        sw.Coupling(*coupling),
        sw.QuarkMasses(1.4, 4.5, 170.0, kind),
        flavours=flavours,
        thresholds_q2=THRESHOLDS,
        evolution_mu2_ratio=ratio,
    )


def built(theory, route, intrinsic=()):
    (start_q2, start_nf), ends, _ = ROUTES[route]
    q2, nf = zip(*ends, strict=True)
    options = {"start_q2": start_q2, "start_nf": start_nf, "intrinsic": intrinsic}
    return sw.build_operators(theory, GRID, q2=q2, nf=nf, tolerance=differences.TOLERANCE, **options)


def values(operators):
    """Return blocks and flows as one array, (scale, row of nodes, node)."""
    blocks, flows = operators._all()
    return np.concatenate([blocks.reshape(len(blocks), -1, GRID.nodes), flows], axis=1)


def slopes(operators, parameter):
    blocks, flows = operators._source.derivative(parameter, 1).at(operators.q2, operators.nf, 1)
    return np.concatenate([blocks.reshape(len(blocks), -1, GRID.nodes), flows], axis=1)


@pytest.mark.parametrize("route", ROUTES)
@pytest.mark.parametrize(("kind", "ratio"), [("pole", 1.0), ("msbar", 2.0)])
def test_derivatives_are_those_of_rebuilt_sets(route, kind, ratio):
    theory = made("NNLO", ROUTES[route][2], kind, ratio=ratio)
    # an intrinsic flavour, where the route allows one above its start
    intrinsic = () if route == "down" else (ROUTES[route][0][1] + 1,)
    operators = built(theory, route, intrinsic)
    for parameter in PARAMETERS:
        found = slopes(operators, parameter)

        def build(to, parameter=parameter):
            return values(built(differences.moved(theory, parameter, to), route, intrinsic))

        expected, _ = differences.differentiated(build, differences.value(theory, parameter))
        # what limits it are the differences: values good to 1e-12 of the set over a step of 2.5e-3
        size = np.abs(expected).max(axis=(1, 2))
        floor = 1e-9 * np.abs(values(operators)).max(axis=(1, 2)) / differences.value(theory, parameter)
        off = np.abs(found - expected).max(axis=(1, 2))
        assert (off <= 1e-7 * size + floor).all(), (parameter, off / np.where(size > 0, size, 1.0))


@pytest.mark.parametrize("parameter", ["alpha_s", "ln_q2"])
def test_at_leading_order_the_derivative_is_in_closed_form(parameter):
    # E = exp(-P0/b0 ln(a/a0)), 1/a = 1/a_given + b0 ln(q2/given): d ln a/d alpha_s = a/a_given^2/(4 pi)
    given, nf, start_q2, q2 = (0.3, 20.0, 4), 4, 5.0, np.array([3.0, 5.0, 1e4])
    theory = made("LO", given, flavours=4)
    operators = sw.build_operators(theory, GRID, start_q2=start_q2, q2=q2, tolerance=1e-13)
    kernel, b0 = _core.splitting_matrix(GRID.handle(), 0, "ns+", nf), 11 - 2 * nf / 3
    place = operators.block_names.index("ns+")
    found = operators.derivative(parameter)[:, place]
    a0, a_given = (theory.alpha_s(at) / (4 * math.pi) for at in (start_q2, given[1]))
    for slope, a in zip(found, theory.alpha_s(q2) / (4 * math.pi), strict=True):
        evolved = expm(-kernel / b0 * np.log(a / a0))
        if parameter == "alpha_s":
            expected = -kernel @ evolved * (a - a0) / (b0 * a_given**2 * 4 * math.pi)
        else:
            expected = a * kernel @ evolved
        # the tolerance of the steps
        np.testing.assert_allclose(slope, expected, rtol=0, atol=1e-11 * abs(kernel @ evolved).max())


@pytest.mark.parametrize("parameter", [*PARAMETERS, "ln_q2"])
def test_the_derivative_carries_no_momentum(parameter):
    # what arrives and what has flowed below x_min are constant at NLO, on a grid that resolves the input
    grid = sw.ChebyshevGrid(x_min=1e-4)
    theory = made("NLO", ROUTES["up"][2], "msbar")
    operators = sw.build_operators(theory, grid, start_q2=1.5, q2=[2.0, 300.0, 1e5])
    blocks, flows = operators._source.derivative(parameter, 1).at(operators.q2, operators.nf, 1)
    weights = grid.handle().moment_weights(1.0)
    names, rows = operators.block_names, operators._source.flow_names
    inputs = {"gluon": grid.x**-0.1 * (1 - grid.x) ** 5, "light+": grid.x**0.6 * (1 - grid.x) ** 3}
    for channel, density in inputs.items():
        arriving = [place for place, name in enumerate(names) if name.endswith(f"<-{channel}")]
        gained = blocks[:, arriving] @ density @ weights
        lost = flows[:, rows.index(f"momentum<-{channel}")] @ density
        # what the grid keeps of momentum at NLO: 3e-12 of it (README), and rounding of what moves
        size = weights @ density + abs(gained).sum(axis=1)
        assert (abs(gained.sum(axis=1) + lost) <= 1e-11 * size).all()


def test_what_does_not_enter_has_no_derivative():
    # below and on the first threshold no mass of a heavier quark is known, the coupling given below it too
    theory = made("NNLO", (0.4, 2.0, 3))
    operators = sw.build_operators(theory, GRID, start_q2=1.5, start_nf=3, q2=[2.0, 10.0])
    assert not operators.derivative("bottom").any()
    assert not operators.derivative("charm")[0].any()
    assert operators.derivative("charm")[1].any()


def test_only_a_live_set_has_derivatives():
    operators = sw.build_operators(made("LO", (0.4, 2.0, 3)), GRID, start_q2=1.5, start_nf=3, q2=[2.0])
    assert operators.derivative("alpha_s").shape == operators.blocks.shape
    with pytest.raises(sw.InputError, match="build them with build_operators"):
        operators.held().derivative("alpha_s")
    with pytest.raises(sw.InputError, match="parameter = 'strange'"):
        operators.derivative("strange")


def test_the_bits_do_not_depend_on_threads():
    operators = built(made("NNLO", ROUTES["up"][2]), "up")
    np.testing.assert_array_equal(
        operators.derivative("alpha_s", threads=1), operators.derivative("alpha_s", threads=2)
    )
