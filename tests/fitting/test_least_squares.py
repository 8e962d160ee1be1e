"""Fits: against normal equations, scipy, exact parabolas; and what is said where there is no answer."""

import pickle

import numpy as np
import pytest
import scalewright as sw
from fitting.laws import power_law
from fitting.problems import (
    ALPHA_S,
    GRID,
    Rows,
    bent_shape,
    chi_square,
    fmap,
    linear_shape,
    measured,
    points,
    quick_shape,
    truth,
    twin_shape,
)
from scalewright import InputError
from scalewright._measured.combination import Combination
from scalewright.fitting._problem import Problem
from scalewright.fitting.least_squares import fit
from scalewright.fitting.shapes import FunctionShape
from scipy import optimize


def normal_equations(shape, chi2):
    """Return best fit and covariance of a linear shape, from the covariance of the data itself."""
    flat = fmap().matrix.reshape(len(fmap().matrix), -1)
    order = [shape.flavours.index(f) for f in fmap().flavours]
    columns = flat @ shape.jacobian(shape.start)[:, order].reshape(len(shape.names), -1).T
    rest = chi2.measurements.value - flat @ shape(shape.start)[order].ravel()
    inverse = np.linalg.inv(chi2.covariance)
    covariance = np.linalg.inv(columns.T @ inverse @ columns)
    return shape.start + covariance @ columns.T @ inverse @ rest, covariance


def test_a_linear_fit_solves_the_normal_equations(linear):
    shape, chi2, result = linear
    best, covariance = normal_equations(shape, chi2)
    errors = np.sqrt(np.diagonal(covariance))
    # Condition of the normal equations: 1e4, squared in the inverse: 1e-10 of an error is the goal
    np.testing.assert_allclose((result.parameters - best) / errors, 0.0, atol=1e-9)
    np.testing.assert_allclose(result.covariance / np.outer(errors, errors),
                               covariance / np.outer(errors, errors), atol=1e-8)  # fmt: skip
    np.testing.assert_allclose(result.errors, errors, rtol=1e-8)
    assert result.converged
    assert result.status[0].startswith("converged")
    assert result.chi2 == pytest.approx(chi2.value(result.prediction), rel=1e-12)


def test_a_linear_fit_takes_few_calls(linear):
    # one step to the minimum, one to see that it is one; at most as many again to reach rounding
    assert linear[2].calls["jacobian"] <= 10
    assert linear[2].calls["residuals"] <= 12


def test_predictions_are_those_of_the_densities(bent):
    _, _, result = bent
    values = result.densities.values[0]
    order = [result.densities.flavours.index(f) for f in fmap().flavours]
    np.testing.assert_allclose(
        result.prediction, np.tensordot(fmap().matrix, values[order], axes=2), rtol=1e-13
    )
    np.testing.assert_allclose(result.densities.momentum(), 1.0, atol=1e-4)  # quadrature of a coarse grid


def test_other_parameters_predict_what_their_densities_do(bent):
    _, _, result = bent
    many = result.parameters + np.outer([0.0, 0.5, -0.5], result.errors)
    order = [result.densities.flavours.index(f) for f in fmap().flavours]
    shape = bent_shape()
    expected = [np.tensordot(fmap().matrix, shape(row)[order], axes=2) for row in many]
    np.testing.assert_allclose(result.predict(many), expected, rtol=1e-13)
    np.testing.assert_array_equal(result.predict(many[1]), result.predict(many)[1])
    np.testing.assert_array_equal(result.predict(result.parameters), result.prediction)
    with pytest.raises(InputError, match="the last axis must have 7"):
        result.predict([1.0])


def test_a_fit_to_its_own_law_finds_it():
    shape = bent_shape()
    chi2 = chi_square(truth(shape), size=0.002, common=0.001)
    off = shape.start * 1.1 + 0.02
    result = fit(fmap(), chi2, shape, start=off)
    assert result.converged, result.status
    # Gauss-Newton converges quadratically at zero residual: to rounding of chi-square, 1e-8 of an error
    np.testing.assert_allclose((result.parameters - shape.start) / result.errors, 0.0, atol=1e-6)
    assert result.chi2 < 1e-12


@pytest.mark.parametrize("seed", range(5))
def test_scipy_with_differences_finds_the_same_minimum(seed):
    shape = bent_shape()
    chi2 = chi_square(truth(shape), seed=seed, size=0.002, common=0.001)
    order = [shape.flavours.index(f) for f in fmap().flavours]

    def residuals(p):
        return chi2.residuals(np.tensordot(fmap().matrix, shape(p)[order], axes=2))

    other = optimize.least_squares(residuals, shape.start, jac="3-point", method="lm", xtol=1e-14, ftol=1e-14)
    result = fit(fmap(), chi2, shape)
    assert result.converged, result.status
    assert result.chi2 <= 2 * other.cost + 1e-9  # `converged` promises 1e-6
    # differences of three points: relative error 1e-10 of the Jacobian, times residuals of order one
    np.testing.assert_allclose((result.parameters - other.x) / result.errors, 0.0, atol=1e-5)


def test_the_jacobian_of_the_problem_is_exact():
    shape = bent_shape().restricted(priors={"g.fall": (5.0, 0.5)})
    chi2 = chi_square(truth(shape), seed=3)
    ratios = Combination(
        [[(i, 1.0), (i + 1, 0.5)] for i in range(16)], [[(i + 16, 1.0)] for i in range(16)], 32
    )
    rational = Rows(ALPHA_S, *points())
    rational.data = ratios
    few = sw.ChiSquare(measured(np.ones(16), seed=3))
    for the_map, distance in ((fmap(), chi2), (rational, few)):
        problem = Problem(the_map, distance, shape, {"alpha_s": ALPHA_S}, {"alpha_s": (0.35, 0.01)})
        p = problem.start + 0.01
        jacobian, step = problem.jacobian(p), 1e-3
        for place in range(p.size):
            along = step * np.eye(p.size)[place]
            weights = {1: 3 / 4, 2: -3 / 20, 3: 1 / 60}  # error h^6
            by_hand = sum(w * (problem.residuals(p + k * along) - problem.residuals(p - k * along)) / step
                          for k, w in weights.items())  # fmt: skip
            size = max(abs(by_hand).max(), 1.0)
            assert abs(jacobian[:, place] - by_hand).max() < 1e-9 * size, problem.names[place]


@pytest.mark.parametrize("count", [40, 80])
def test_fewer_residuals_have_the_same_sum_of_squares(count):
    shape, the_map = bent_shape(), fmap(count_q2=count)
    chi2 = chi_square(truth(shape, the_map), seed=3)
    few, all_of_them = (
        Problem(the_map, chi2, shape, {"alpha_s": ALPHA_S}, compressed=c) for c in (True, False)
    )
    assert all_of_them.rows == few.count == 8 * count
    assert few.rows < 0.8 * few.count
    moved = chi2.whiten(np.random.default_rng(1).normal(size=few.count) * 0.02)
    p = few.start + 0.01
    for shift in (None, moved):
        one, other = (
            problem.residuals(p, None if shift is None else problem.shift(shift))
            for problem in (few, all_of_them)
        )
        # directions of 1e-15 are left out, where whitened predictions are of order 100
        assert one @ one == pytest.approx(other @ other, rel=1e-11)
        gradients = (few.jacobian(p).T @ one, all_of_them.jacobian(p).T @ other)
        size = np.linalg.norm(all_of_them.jacobian(p), axis=0) * np.linalg.norm(other)
        np.testing.assert_allclose(gradients[0] / size, gradients[1] / size, atol=1e-11)


def test_ratios_of_rows_are_fitted_too():
    shape, rational = bent_shape(), Rows(ALPHA_S, *points())
    rational.data = Combination([[(i, 1.0)] for i in range(16)], [[(i + 16, 1.0)] for i in range(16)], 32)
    rows = truth(shape)
    few = shape.restricted(fixed=["ubar.c0"])
    chi2 = chi_square(rows[:16] / rows[16:], size=0.001, common=1e-4)
    result = fit(rational, chi2, few, start=few.start * 1.03)
    assert result.converged, result.status
    np.testing.assert_allclose((result.parameters - few.start) / result.errors, 0.0, atol=1e-6)


# ---- bounds, blind directions, priors ------------------------------------------------------------------


def test_a_parameter_pressed_on_its_bound_is_named_and_has_no_error(bent):
    shape, chi2, free = bent
    edge = free.value("g.fall") + 2.0 * free.error("g.fall")
    low = shape.restricted(bounds={"g.fall": (edge, 30.0)}, start={"g.fall": edge + 1.0})
    result = fit(fmap(), chi2, low)
    assert result.at_bounds == {"g.fall": "lower"}
    assert result.value("g.fall") == edge
    assert result.converged, result.status
    assert np.isnan(result.error("g.fall"))
    assert "g.fall lies on its lower bound" in "\n".join(result.status)
    # the others are where they would be with it fixed there
    held = fit(fmap(), chi2, shape.restricted(fixed={"g.fall": edge}))
    others = [name for name in shape.names if name != "g.fall"]
    for name in others:
        assert abs(result.value(name) - held.value(name)) < 1e-6 * held.error(name)
        assert result.error(name) == pytest.approx(held.error(name), rel=1e-6)
    assert "on its lower bound" in str(result)


def test_a_bound_that_does_not_press_changes_nothing(bent):
    shape, chi2, free = bent
    value, error = free.value("g.fall"), free.error("g.fall")
    wide, start = {"g.fall": (max(value - 5 * error, 0.1), value + 5 * error)}, {"g.fall": value + 3 * error}
    result = fit(fmap(), chi2, shape.restricted(bounds=wide, start=start))
    assert result.at_bounds == {}
    np.testing.assert_allclose((result.parameters - free.parameters) / free.errors, 0.0, atol=1e-6)


def test_what_the_data_do_not_see_is_named_and_has_no_covariance():
    shape = twin_shape()
    result = fit(fmap(), chi_square(truth(shape), seed=4), shape)
    assert result.covariance is None
    assert np.isnan(result.errors).all()
    (blind,) = result.blind
    assert blind.singular_value < 1e-10
    parts = blind.parameters
    assert parts["d+.c0"] == pytest.approx(-parts["s+.c0"], rel=1e-6)
    assert abs(parts.get("u+.c0", 0.0)) < 1e-6
    # d rises where s falls, and F2 stays
    d, s = (blind.values[shape.flavours.index(f)] for f in (1, 3))
    np.testing.assert_allclose(d, -s, atol=1e-6)
    text = "\n".join(result.status)
    assert "the data do not see" in text
    assert "there is no covariance" in text
    for ask in (result.eigenvectors, lambda: result.error_of(0.1, 21)):
        with pytest.raises(InputError, match="there is no covariance"):
            ask()


def test_a_prior_makes_a_covariance_of_what_the_data_do_not_see():
    shape = twin_shape()
    chi2 = chi_square(truth(shape), seed=4)
    result = fit(fmap(), chi2, shape, priors={"s+.c0": (0.3, 0.05)})
    assert result.converged
    assert result.value("s+.c0") == pytest.approx(0.3, abs=1e-9)  # nothing else pulls on it
    assert result.error("s+.c0") == pytest.approx(0.05, rel=1e-6)
    assert result.chi2_priors == pytest.approx(0.0, abs=1e-12)
    assert "known from the priors alone" in "\n".join(result.status)


def test_a_parameter_without_effect_is_blind():
    shape = FunctionShape(GRID, list(fmap().flavours), _idle, [1.0, 2.0], names=["norm", "idle"])
    result = fit(fmap(), chi_square(truth(linear_shape())), shape)
    assert [list(direction.parameters) for direction in result.blind] == [["idle"]]
    assert result.covariance is None


def _idle(x, p):
    return np.tile(p[0] * np.sqrt(x) * (1 - x) ** 3, (7, 1))


def test_a_prior_counts_like_a_datum(linear):
    shape, chi2, alone = linear
    name = shape.names[0]
    centre, width = alone.value(name) + 0.3, alone.error(name)
    result = fit(fmap(), chi2, shape, priors={name: (centre, width)})
    # two measurements of one number with equal errors: the mean, and the error over sqrt 2
    assert result.value(name) == pytest.approx(alone.value(name) + 0.15, rel=1e-7)
    assert result.error(name) == pytest.approx(width / np.sqrt(2), rel=1e-7)


# ---- what stops a fit ----------------------------------------------------------------------------------


def test_a_fit_cut_short_says_so(bent):
    shape, chi2, _ = bent
    result = fit(fmap(), chi2, shape, start=shape.start + 0.3, evaluations=2)
    assert not result.converged
    assert result.status[0].startswith("not converged: stopped after")
    assert result.covariance is None
    assert "not converged" in repr(result)
    assert "uncertainty unknown" in str(result)


def test_a_callback_watches_and_stops(bent):
    shape, chi2, _ = bent
    seen = []

    def watch(step, value, parameters):
        seen.append((step, value, parameters.copy()))
        if step == 3:
            raise StopIteration

    result = fit(fmap(), chi2, shape, start=shape.start + 0.2, callback=watch)
    assert [step for step, _, _ in seen] == [1, 2, 3]
    assert "stopped by the callback" in result.status[0]
    np.testing.assert_array_equal(result.parameters, seen[-1][2])
    assert result.chi2 == pytest.approx(seen[-1][1], rel=1e-12)


def test_a_shape_without_free_parameters_has_a_chi_square_and_nothing_else():
    # this was a ValueError of numpy
    shape = quick_shape().restricted(fixed=["a", "b", "c"])
    chi2 = chi_square(truth(quick_shape()), seed=1)
    result = fit(fmap(), chi2, shape)
    assert result.converged and result.names == ()
    assert result.chi2 == pytest.approx(chi2.value(truth(quick_shape())), rel=1e-12)
    assert result.covariance.shape == (0, 0)


def test_a_start_at_the_minimum_stays_there(bent):
    shape, chi2, first = bent
    result = fit(fmap(), chi2, shape, start=first.parameters)
    assert result.converged
    np.testing.assert_allclose((result.parameters - first.parameters) / first.errors, 0.0, atol=1e-6)


def test_an_absurd_start_ends_at_the_minimum_or_says_that_it_does_not(bent):
    shape, chi2, first = bent
    absurd = {"g.power": 9.0, "g.fall": 29.0, "dbar.c0": -1e4}
    result = fit(fmap(), chi2, shape, start=absurd)
    assert result.converged == result.status[0].startswith("converged")
    if not result.converged:
        assert result.covariance is None
    assert result.chi2 >= first.chi2 * (1 - 1e-9)


def test_results_print_and_pickle(linear, bent):
    for _, _, result in (linear, bent):
        again = pickle.loads(pickle.dumps(result))
        assert str(again) == str(result)
        assert "by its sum rule" in str(bent[2]) or result is linear[2]
        assert result._repr_html_().startswith("<pre>FitResult")


def wrong_grid():
    return fit(fmap(), chi_square(truth(linear_shape())), power_law())


def few_flavours():
    shape = FunctionShape(GRID, [21, 2], lambda x, p: np.stack([x * p, x]), [1.0])
    return fit(fmap(), chi_square(truth(linear_shape())), shape)


def many_flavours():
    flavours = [21, 1, -1, 2, -2, 3, -3, 4, -4]
    shape = FunctionShape(GRID, flavours, lambda x, p: np.tile(x * p, (9, 1)), [1.0])
    return fit(fmap(), chi_square(truth(linear_shape())), shape)


def fitted(**options):
    shape = linear_shape()
    return fit(fmap(), chi_square(truth(shape)), shape, **options)


def too_many():
    one = fmap(count_x=8, count_q2=1)
    shape = power_law(grid=GRID)
    return fit(one, sw.ChiSquare(measured(np.ones(8))), shape)


WRONG = {
    "more parameters than data": (too_many, "parameters for 8 data and 0 priors"),
    "grid": (wrong_grid, "shape.grid = .*the map is for"),
    "few flavours": (few_flavours, "shape has no flavour"),
    "many flavours": (many_flavours, "shape.flavours = 'c'"),
    "no shape": (lambda: fit(fmap(), None, lambda p: p), "shape must be a Shape"),
    "start": (lambda: fitted(start=[1.0]), "the shape of start must be"),
    "start nan": (lambda: fitted(start=np.full(6, np.nan)), "start must be finite"),
    "start unknown": (lambda: fitted(start={"g.c": 1.0}), "no free parameter of this name"),
    # these were an AssertionError, and a ValueError of scipy
    "start far": (lambda: fitted(start={"dbar.c0": 1e300}), "start: chi-square is not finite"),
    "start infinite": (lambda: fitted(start={"dbar.c0": 1e308}), "start: chi-square is not finite"),
    "start out": (
        lambda: fit(fmap(), chi_square(truth(bent_shape())), bent_shape(), start={"g.fall": -3}),
        r"start\[g.fall\] = -3: must lie in",
    ),
    "prior unknown": (lambda: fitted(priors={"g.fall": (1, 1)}), "no free parameter of this name"),
    "prior width": (lambda: fitted(priors={"dbar.c0": (1, -1)}), "standard deviation above 0"),
    "theory": (lambda: fitted(theory=["alpha"]), 'did you mean "alpha_s"'),
    "theory value": (lambda: fitted(theory=["alpha_s"]), "does not say its value"),
    "theory text": (lambda: fitted(theory="alpha_s"), "must be a list of names"),
    "delta": (lambda: fitted(delta_chi2=0), "delta_chi2 must lie in"),
    "evaluations": (lambda: fitted(evaluations=0), "at least 1"),
    "callback": (lambda: fitted(callback=1), "callable"),
    "name": (lambda: fitted().value("g.C1"), "no parameter of this name"),
    "profile": (
        lambda: fit(fmap(), chi_square(truth(bent_shape())), bent_shape()).profile("g.fall", [-1.0]),
        "g.fall must lie in",
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", WRONG)
def test_what_is_wrong_is_refused_with_the_reason(name):
    make, words = WRONG[name]
    with pytest.raises(InputError, match=words):
        make()
