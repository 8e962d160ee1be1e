"""Chi-square and gradient as functions: against chi-square itself, and against differences of it."""

import numpy as np
import pytest
import scalewright as sw
from fitting.laws import shapes
from fitting.problems import ALPHA_S, Rows, bent_shape, chi_square, fmap, measured, points, truth
from scalewright import InputError
from scalewright._measured.combination import Combination
from scalewright.fitting.objective import Objective

KNOWN = {"theory": {"alpha_s": ALPHA_S}, "priors": {"alpha_s": (0.35, 0.01), "g.fall": (5.0, 0.5)}}


def rational():
    """Return a map whose data are ratios of rows, and measurements of them."""
    made = Rows(ALPHA_S, *points())
    made.data = Combination([[(i, 1.0)] for i in range(16)], [[(i + 16, 1.0)] for i in range(16)], 32)
    return made, sw.ChiSquare(measured(np.ones(16), seed=3))


PROBLEMS = {
    "sums": lambda: (fmap(), chi_square(truth(bent_shape()), seed=3)),
    "compressed": lambda: (fmap(count_q2=40), chi_square(truth(bent_shape(), fmap(count_q2=40)), seed=3)),
    "ratios": rational,
}


@pytest.mark.parametrize("name", PROBLEMS)
def test_value_and_gradient_are_those_of_chi_square(name):
    the_map, chi2 = PROBLEMS[name]()
    objective = Objective(the_map, chi2, bent_shape(), **KNOWN)
    p = objective.start + 0.01
    value, gradient = objective.value_and_gradient(p)
    prior = ((p[-1] - 0.35) / 0.01) ** 2 + ((p[objective.names.index("g.fall")] - 5.0) / 0.5) ** 2
    assert value == pytest.approx(chi2.value(objective.prediction(p)) + prior, rel=1e-10)
    assert objective.value(p) == pytest.approx(value, rel=1e-12)
    step, weights = 1e-3, {1: 3 / 4, 2: -3 / 20, 3: 1 / 60}  # error h^6
    for place in range(p.size):
        along = step * np.eye(p.size)[place]
        by_hand = sum(
            w * (objective.value(p + k * along) - objective.value(p - k * along)) / step
            for k, w in weights.items()
        )
        # rounding of chi-square of order 1e4, over the step
        assert gradient[place] == pytest.approx(by_hand, rel=1e-8, abs=1e-7), objective.names[place]


@pytest.mark.parametrize("name", shapes())
def test_what_is_carried_back_is_the_jacobian_transposed(name):
    shape = shapes()[name]
    weights = np.random.default_rng(1).normal(size=(len(shape.flavours), shape.grid.nodes))
    values, pullback = shape.with_pullback(shape.start)
    np.testing.assert_array_equal(values, shape(shape.start))
    expected = np.tensordot(shape.jacobian(shape.start), weights, axes=2)
    # sums of some 500 numbers, of either sign: rounding of the largest
    np.testing.assert_allclose(pullback(weights), expected, rtol=1e-12, atol=1e-12 * abs(expected).max())


def test_a_wrong_number_of_parameters_is_refused():
    objective = Objective(*PROBLEMS["sums"](), bent_shape())
    assert repr(objective) == "Objective(7 parameters, 32 data)"
    with pytest.raises(InputError, match="the shape of parameters must be"):
        objective.value_and_gradient([1.0])
