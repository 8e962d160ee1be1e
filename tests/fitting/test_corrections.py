"""Corrections in fits: known higher twist found again, exact derivatives, known factors as nuisances."""

from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw
from fitting import problems
from scalewright.corrections import HigherTwist, KnownFactor, Polynomial, TargetFactor, covariance
from scalewright.fitting._problem import Problem
from scalewright.fitting.objective import Objective

TRUE_H = np.array([0.4, -0.9])
TRUE = np.array([1.1, 0.4, 0.25])


def rows(count=64, alpha_s=0.35):
    """Return a map of proton and deuteron rows alternating, the deuteron like the proton."""
    plain = problems.fmap(alpha_s, count_q2=count // 8)
    x, q2 = (np.array(column) for column in problems.points(count_q2=count // 8))
    target = tuple("deuteron" if row % 2 else "proton" for row in range(count))
    points = SimpleNamespace(
        x=x, q2=q2, target=target, tag=np.zeros(count, int), is_charged=np.zeros(count, bool),
        place=[f"point {row}" for row in range(count)],
    )  # fmt: skip
    weights = np.tile([1.0, 0.0, 0.0], (count, 1))
    identity = SimpleNamespace(is_identity=True, tangent=lambda rows, along: along)
    made = SimpleNamespace(
        matrix=plain.matrix, flavours=plain.flavours, grid=plain.grid, start_q2=plain.start_q2, start_nf=3,
        points=points, weights=weights, derivative=plain.derivative, data=identity,
    )  # fmt: skip
    made.predict_rows = lambda values: np.tensordot(np.asarray(values)[None], made.matrix, ([-2, -1], [1, 2]))
    return made


def twist(start=(0.0, 0.0), **options):
    return HigherTwist(
        Polynomial(1, family="plain", a=0.5, start=start), targets=["proton", "deuteron"], **options
    )


def truth(fmap, corrections):
    """Return predictions of the true shape with corrections at their start."""
    shape = problems.quick_shape()
    return Problem(fmap, sw.ChiSquare(problems.measured(np.ones(64))), shape, corrections=corrections)


@pytest.mark.parametrize("form", ["factor", "addition"])
def test_a_known_higher_twist_is_found_again(form):
    fmap, shape = rows(), problems.quick_shape()
    given = truth(fmap, twist(TRUE_H, form=form))
    data = problems.measured(given.prediction(np.append(TRUE, TRUE_H)), size=0.005, common=0.002)
    result = sw.fit(fmap, sw.ChiSquare(data), shape, corrections=twist(form=form))
    assert result.converged and result.chi2 < 1e-9  # no noise: what convergence leaves
    np.testing.assert_allclose(result.parameters, np.append(TRUE, TRUE_H), rtol=1e-5)
    assert result.names[-2:] == (("h" if form == "factor" else "H") + "_proton_deuteron.c0", result.names[-1])
    assert "no correction for the deuteron (32 rows): free protons and neutrons" in result.status
    # without it the data cannot be described
    assert sw.fit(fmap, sw.ChiSquare(data), shape).chi2 > 10.0


def test_an_objective_has_the_gradient_of_corrections():
    fmap, shape = rows(), problems.quick_shape()
    data = problems.measured(np.linspace(0.9, 1.1, 64), size=0.05)
    objective = Objective(fmap, sw.ChiSquare(data), shape, corrections=twist())
    at, h = np.append(TRUE, TRUE_H), 1e-4
    value, gradient = objective.value_and_gradient(at)
    assert value == pytest.approx(objective.value(at), rel=1e-13)
    # four-point differences: an error of h^4, and of rounding over h
    steps = ((1, 8 / 12), (-1, -8 / 12), (2, -1 / 12), (-2, 1 / 12))
    for place in range(at.size):
        along = np.eye(at.size)[place] * h
        slope = sum(weight * objective.value(at + times * along) for times, weight in steps) / h
        assert abs(gradient[place] - slope) < 1e-7 * abs(gradient).max()


def test_residuals_have_the_exact_derivative_with_theory_parameters_too():
    fmap, shape = rows(), problems.quick_shape()
    given = [twist((0.3, 0.2)), KnownFactor(0.98, 0.01), TargetFactor(Polynomial(0, free=["b"], start=[0.1]))]
    chi2 = sw.ChiSquare(problems.measured(np.ones(64)))
    problem = Problem(fmap, chi2, shape, {"alpha_s": 0.35}, corrections=given)
    at = problem.start + 0.05
    exact, step = problem.jacobian(at), 1e-3
    for place, name in enumerate(problem.names):
        unit = step * np.eye(at.size)[place]
        r = {k: problem.residuals(at + k * unit) for k in (-2, -1, 1, 2)}
        found = (8 * (r[1] - r[-1]) - (r[2] - r[-2])) / (12 * step)  # error h^4 and rounding over h
        scale = np.abs(found).max()
        np.testing.assert_allclose(exact[:, place], found, atol=1e-9 * scale, err_msg=name)


def test_theory_parameters_come_after_those_of_corrections():
    # data of another coupling: the map is built anew until it is that of the fit
    shape = problems.quick_shape()
    other = Problem(
        rows(alpha_s=0.36), sw.ChiSquare(problems.measured(np.ones(64))), shape, corrections=twist()
    )
    data = problems.measured(other.prediction(np.append(TRUE, TRUE_H)), size=0.005, common=0.002)
    result = sw.fit(
        rows(), sw.ChiSquare(data), shape, corrections=twist(), theory={"alpha_s": 0.35},
        rebuild=lambda at: rows(alpha_s=at["alpha_s"]),
    )  # fmt: skip
    assert result.names[-1] == "alpha_s" and result.rebuilt >= 1 and result.converged
    # what moving the map by less than 0.01 of the uncertainty leaves
    miss = (result.parameters - np.concatenate([TRUE, TRUE_H, [0.36]])) / result.errors
    assert np.abs(miss).max() < 0.02
    profile = result.profile("alpha_s", [0.36])
    assert profile.chi2[0] == pytest.approx(result.chi2, abs=1e-3)


def test_corrections_without_parameters_become_part_of_the_map():
    fmap, shape = rows(), problems.quick_shape()
    chi2 = sw.ChiSquare(problems.measured(np.ones(64)))
    fast = Problem(fmap, chi2, shape, corrections=KnownFactor(0.97))
    slow = Problem(fmap, chi2, shape, corrections=KnownFactor(0.97, 0.01))
    at = np.append(TRUE, 0.0)
    assert np.sum(fast.residuals(TRUE) ** 2) == pytest.approx(np.sum(slow.residuals(at) ** 2), rel=1e-11)
    np.testing.assert_allclose(fast.prediction(TRUE), slow.prediction(at), rtol=1e-13)
    # a step of the one costs one product with a whitened map
    assert fast._whitened is not None and slow._whitened is None


def test_a_known_uncertainty_is_a_correlated_source():
    # minimising over b with prior 0 +- 1 is adding the covariance u u^T: an identity of linear algebra
    fmap, shape, known = (
        rows(),
        problems.quick_shape(),
        KnownFactor(0.97, {"a": 0.02, "b": lambda x, q2: 0.05 * x}),
    )
    table = problems.measured(truth(fmap, ()).prediction(TRUE))
    held = shape.restricted(fixed=dict(zip(shape.names[:2], TRUE[:2], strict=True)))
    fitted = sw.fit(
        fmap, sw.ChiSquare(table), held, corrections=known, priors={held.names[0]: (TRUE[2], 1e-8)}
    )
    values = shape(TRUE)
    theory = covariance(fmap, known, values)
    assert np.linalg.matrix_rank(theory) == 2
    factor = np.where([t == "deuteron" for t in fmap.points.target], 0.97, 1.0)
    alone = sw.ChiSquare(table, theory=theory).value(factor * fmap.predict_rows(values)[0])
    assert fitted.chi2 + fitted.chi2_priors == pytest.approx(alone, rel=1e-5)  # the shape moves by 1e-8


def test_replicas_fit_corrections_as_well():
    fmap, shape = rows(), problems.quick_shape()
    given = [twist(TRUE_H), KnownFactor(1.0, 0.01)]
    at = np.concatenate([TRUE, TRUE_H, [0.0]])
    data = problems.measured(truth(fmap, given).prediction(at), size=0.005, common=0.002, seed=5)
    chi2 = sw.ChiSquare(data)
    result = sw.fit(fmap, chi2, shape, corrections=given)
    assert "no correction" not in str(result)
    ensemble = sw.fit_replicas(fmap, chi2, shape, corrections=given, replicas=40, seed=2, workers=1)
    assert ensemble.names == result.names and not ensemble.failed
    spread = ensemble.parameters.std(axis=0, ddof=1)
    # 40 replicas know a spread to 1/sqrt(78) = 11 per cent; six numbers, four deviations
    np.testing.assert_allclose(spread, result.errors, rtol=0.45)


def test_maps_that_do_not_say_what_their_rows_are_are_refused():
    chi2, shape = sw.ChiSquare(problems.measured(np.ones(32))), problems.quick_shape()
    with pytest.raises(sw.InputError, match="corrections: the map does not say what its rows are"):
        sw.fit(problems.fmap(), chi2, shape, corrections=twist())
    with pytest.raises(sw.InputError, match=r"corrections = 'a': the shape has a parameter of this name"):
        odd = KnownFactor(1.0, 0.1)
        odd.names = ("a",)
        sw.fit(rows(), sw.ChiSquare(problems.measured(np.ones(64))), shape, corrections=odd)
