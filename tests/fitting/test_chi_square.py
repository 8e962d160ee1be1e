"""Chi-square in both forms against sums, solves and minima of other origin."""

import mpmath
import numpy as np
import pytest
from scalewright import ChiSquare, InputError, Measurements

PERCENT = {"given_in": "percent", "scales_with": "value"}
VALUE = {"given_in": "value", "scales_with": "nothing"}


def table(seed, data=40, sources=6, matrix=False, title="A", tables_share=True):
    """Return random measurements with every kind of error."""
    rng = np.random.default_rng(seed)
    x = np.sort(rng.uniform(0.01, 0.9, data))
    points = {"x": x, "q2": np.geomspace(2, 1e4, data), "value": rng.uniform(0.5, 2, data)}
    points["stat"], points["part"] = rng.uniform(0.01, 0.1, data), rng.uniform(0.5, 3, data)
    uncertainty = [{"column": "stat", **VALUE}, {"column": "part", **PERCENT}]
    for number in range(sources):
        points[f"s{number}"] = rng.normal(0, 3, data)
        shared = {"shared_as": f"k{number}"} if tables_share and number % 2 else {"correlated": True}
        uncertainty.append({"column": f"s{number}", **PERCENT, **shared})
    uncertainty.append({"name": "lumi", "size": 2.0, "correlated": True, **PERCENT})
    root = rng.normal(size=(data, data)) / np.sqrt(data)
    full = root @ root.T + 0.1 * np.eye(data)
    size = np.sqrt(np.diagonal(full))
    matrices = [full / np.outer(size, size)] if matrix else []
    description = {"title": title, "measures": "F2", "exchange": "photon", "uncertainty": uncertainty}
    if matrix:
        description["covariance"] = [{"kind": "correlation", "of": "part"}]
    return Measurements.from_columns(description, points, matrices)


@pytest.mark.parametrize("seed", range(8))
@pytest.mark.parametrize("matrix", [False, True])
@pytest.mark.parametrize("theory", [False, True])
def test_both_forms_are_one_number(seed, matrix, theory):
    measured = Measurements.join([table(seed, matrix=matrix), table(seed + 50, title="B", matrix=matrix)])
    rng = np.random.default_rng(seed)
    prediction = measured.value * rng.uniform(0.9, 1.1, len(measured))
    extra = rng.normal(size=(len(measured), 5)) * 0.02
    added = extra @ extra.T if theory else None
    for reference in (None, prediction):
        forms = [ChiSquare(measured, form, reference, added) for form in ("covariance", "nuisance")]
        values = [form.value(prediction) for form in forms]
        # what the issue asks for; found: a few 1e-13
        assert values[1] == pytest.approx(values[0], rel=1e-10)
        assert forms[1].log_determinant == pytest.approx(forms[0].log_determinant, rel=1e-10)
        np.testing.assert_allclose(
            forms[0].shifts(prediction), forms[1].shifts(prediction), rtol=1e-8, atol=1e-10
        )


def test_a_tiny_example_by_hand_in_exact_arithmetic():
    # Two data, value 1.1 and 0.6, own error 0.1, one common shift 0.1: C = [[2, 1], [1, 2]]/100, and for
    # residuals (0.1, 0.1): chi-square = 2/3, best shift = 2/3, log det C = ln(3e-4).
    measured = Measurements.from_columns(
        {"title": "A", "measures": "F2", "exchange": "photon",
         "uncertainty": [{"column": "stat", **VALUE},
                         {"name": "o", "size": 0.1, "correlated": True, **VALUE}]},
        {"x": [0.1, 0.2], "q2": [10, 10], "value": [1.1, 0.6], "stat": [0.1, 0.1]},
    )  # fmt: skip
    for form in ("covariance", "nuisance"):
        chi2 = ChiSquare(measured, form)
        assert chi2.value([1.0, 0.5]) == pytest.approx(2 / 3, rel=1e-14)
        np.testing.assert_allclose(chi2.shifts([1.0, 0.5]), [2 / 3], rtol=1e-14)
        assert chi2.log_determinant == pytest.approx(np.log(3e-4), rel=1e-14)
        np.testing.assert_allclose(chi2.pulls([1.0, 0.5]), 0.1 / np.sqrt(0.02), rtol=1e-14)
        np.testing.assert_allclose(chi2.pulls([1.0, 0.5], shifted=True), 1 / 3, rtol=1e-13)


@pytest.mark.parametrize("form", ["covariance", "nuisance"])
def test_against_thirty_digits(form):
    measured = table(3, data=8, sources=2, matrix=True)
    prediction = measured.value * 1.03
    covariance = measured.covariance()
    with mpmath.workdps(30):
        matrix = mpmath.matrix(covariance.tolist())
        residual = mpmath.matrix((measured.value - prediction).tolist())
        exact = float((residual.T * mpmath.lu_solve(matrix, residual))[0])
        determinant = float(mpmath.log(mpmath.det(matrix)))
    condition = np.linalg.cond(covariance)
    assert ChiSquare(measured, form).value(prediction) == pytest.approx(exact, rel=condition * 1e-15)
    assert ChiSquare(measured, form).log_determinant == pytest.approx(determinant, rel=1e-12)


@pytest.mark.parametrize("form", ["covariance", "nuisance"])
def test_the_nuisance_parameters_are_at_their_minimum(form):
    # scipy solves the least-squares problem of the nuisance form: data and penalties as one list.
    from scipy.optimize import lsq_linear

    measured = table(5, matrix=True)
    prediction = measured.value * np.random.default_rng(1).uniform(0.9, 1.1, len(measured))
    sigma, shifts = measured.nuisance()
    system = np.concatenate([shifts / sigma[:, None], np.eye(shifts.shape[1])])
    target = np.concatenate([(measured.value - prediction) / sigma, np.zeros(shifts.shape[1])])
    best = lsq_linear(system, target, tol=1e-14)
    chi2 = ChiSquare(measured, form)
    assert chi2.value(prediction) == pytest.approx(2 * best.cost, rel=1e-10)
    np.testing.assert_allclose(chi2.shifts(prediction), best.x, rtol=1e-8, atol=1e-10)
    pulls = (measured.value - prediction - shifts @ best.x) / sigma
    np.testing.assert_allclose(chi2.pulls(prediction, shifted=True), pulls, rtol=1e-8, atol=1e-10)


@pytest.mark.parametrize("form", ["covariance", "nuisance"])
def test_shifted_pulls_leave_to_the_theory_what_its_covariance_explains(form):
    # without it their squares and those of the shifts added up to twice chi-square
    measured = table(5, matrix=False)
    prediction = measured.value * np.random.default_rng(1).uniform(0.9, 1.1, len(measured))
    sigma, shifts = measured.nuisance()
    wave = 0.1 * measured.value * np.stack([np.ones(len(measured)), np.linspace(-1, 1, len(measured))])
    both = np.concatenate([shifts, wave.T], axis=1)
    system = np.concatenate([both / sigma[:, None], np.eye(both.shape[1])])
    target = np.concatenate([(measured.value - prediction) / sigma, np.zeros(both.shape[1])])
    best = np.linalg.lstsq(system, target, rcond=None)[0]
    chi2 = ChiSquare(measured, form, theory=wave.T @ wave)
    pulls = chi2.pulls(prediction, shifted=True)
    np.testing.assert_allclose(pulls, (system @ best - target)[: sigma.size] * -1, rtol=1e-8, atol=1e-9)
    np.testing.assert_allclose(chi2.shifts(prediction), best[: shifts.shape[1]], rtol=1e-8, atol=1e-9)


@pytest.mark.parametrize("form", ["covariance", "nuisance"])
def test_whitening_is_the_root_of_the_inverse(form):
    measured = table(7)
    chi2 = ChiSquare(measured, form)
    rng = np.random.default_rng(2)
    white = chi2.whiten(np.eye(len(measured)))
    np.testing.assert_allclose(white.T @ white @ measured.covariance(), np.eye(len(measured)), atol=1e-10)
    matrix = rng.normal(size=(len(measured), 3, 2))
    np.testing.assert_allclose(
        chi2.whiten(matrix), np.einsum("ij,jab->iab", white, matrix), rtol=1e-9, atol=1e-9
    )
    prediction = rng.normal(size=len(measured))
    step = rng.normal(size=len(measured))
    moved = chi2.residuals(prediction + step) - chi2.residuals(prediction)
    np.testing.assert_allclose(moved, -chi2.whiten(step), rtol=1e-9, atol=1e-9)


@pytest.mark.parametrize("form", ["covariance", "nuisance"])
def test_many_predictions_at_once_are_as_one_by_one(form):
    measured = table(8)
    chi2 = ChiSquare(measured, form)
    many = measured.value * np.random.default_rng(3).uniform(0.9, 1.1, (2, 5, len(measured)))
    values, shifts, pulls = chi2.value(many), chi2.shifts(many), chi2.pulls(many, shifted=True)
    assert values.shape == (2, 5)
    for index in np.ndindex(2, 5):
        # matrix and vector products round differently
        assert values[index] == pytest.approx(chi2.value(many[index]), rel=1e-12)
        np.testing.assert_allclose(shifts[index], chi2.shifts(many[index]), rtol=1e-9, atol=1e-12)
        np.testing.assert_allclose(pulls[index], chi2.pulls(many[index], shifted=True), rtol=1e-9, atol=1e-11)


def test_shares_of_tables_add_up_and_tables_alone_do_not_know_the_others():
    one, two = table(1), table(2, title="B")
    both = Measurements.join([one, two])
    prediction = both.value * np.random.default_rng(4).uniform(0.95, 1.05, len(both))
    for form in ("covariance", "nuisance"):
        chi2 = ChiSquare(both, form)
        parts = chi2.per_table(prediction)
        assert [(part.title, part.data) for part in parts] == [("A", 40), ("B", 40)]
        assert sum(part.share for part in parts) == pytest.approx(chi2.value(prediction), rel=1e-11)
        for part, single, where in zip(parts, (one, two), (slice(40), slice(40, 80)), strict=True):
            assert part.alone == pytest.approx(ChiSquare(single).value(prediction[where]), rel=1e-11)
    apart = Measurements.join([table(1, tables_share=False), table(2, title="B", tables_share=False)])
    for part in ChiSquare(apart).per_table(prediction):
        assert part.share == pytest.approx(part.alone, rel=1e-10)


def test_the_likelihood_uses_the_prediction_and_its_determinant():
    measured = table(9)
    prediction = measured.value * 1.2
    covariance = measured.covariance(prediction)
    residual = measured.value - prediction
    sign, determinant = np.linalg.slogdet(covariance)
    expected = residual @ np.linalg.solve(covariance, residual) + determinant
    assert sign == 1.0
    assert ChiSquare(measured).minus_two_log_likelihood(prediction) == pytest.approx(expected, rel=1e-11)


def one_line(**points):
    description = {"title": "A", "measures": "F2", "exchange": "photon", "uncertainty": [
        {"column": "own", **VALUE}, {"column": "all", "correlated": True, **VALUE}]}  # fmt: skip
    return Measurements.from_columns(
        description, {"x": [0.1, 0.2, 0.3], "q2": [1, 2, 3], "value": [1, 1, 1]} | points
    )


def test_fully_correlated_data_without_own_errors_are_refused_by_name():
    measured = one_line(own=[0.0, 0.1, 0.0], all=[0.1, 0.1, 0.2])
    with pytest.raises(InputError, match=r"covariance: not positive definite: the smallest eigenvalue of the "
                       r"correlations is .*, mostly of data 1, 3\Z"):  # fmt: skip
        ChiSquare(measured)
    with pytest.raises(
        InputError, match=r'nuisance: datum 1 has no uncertainty of its own: use form = "covariance"'
    ):
        ChiSquare(measured, "nuisance")


def test_one_datum_without_own_error_is_fine_in_the_covariance_form():
    measured = one_line(own=[0.0, 0.1, 0.1], all=[0.1, 0.1, 0.2])
    residual = np.array([0.1, -0.1, 0.2])
    covariance = np.diag([0.0, 0.01, 0.01]) + np.outer([0.1, 0.1, 0.2], [0.1, 0.1, 0.2])
    chi2 = ChiSquare(measured)
    expected = residual @ np.linalg.solve(covariance, residual)
    assert chi2.value(1.0 - residual) == pytest.approx(expected, rel=1e-12)
    assert np.isnan(chi2.pulls(1.0 - residual, shifted=True)).tolist() == [True, False, False]


@pytest.mark.filterwarnings("ignore:overflow encountered")
@pytest.mark.parametrize("form", ["covariance", "nuisance"])
@pytest.mark.parametrize("unit", [1e-160, 1e156, 1e300])
def test_uncertainties_whose_squares_are_lost_are_refused(form, unit):
    # chi-square 1 was 1.012 in the first unit and, in the form "nuisance", 0 in the last
    points = {"x": [0.1], "q2": [2.0], "value": [1.0 * unit], "stat": [0.1 * unit]}
    stat = {"column": "stat", "given_in": "value", "scales_with": "nothing"}
    kind = {"title": "T", "measures": "F2", "exchange": "photon", "uncertainty": [stat]}
    with pytest.raises(InputError, match="datum 1: its square is no float of full precision"):
        ChiSquare(Measurements.from_columns(kind, points), form)


def test_a_multiplicative_error_of_a_prediction_zero_is_refused():
    description = {"title": "A", "measures": "F2", "exchange": "photon",
                   "uncertainty": [{"name": "a", "size": 3.0, **PERCENT}]}  # fmt: skip
    measured = Measurements.from_columns(description, {"x": [0.1, 0.2], "q2": [1, 2], "value": [1, 1]})
    for form, message in (
        ("covariance", "covariance: datum 2 has no uncertainty"),
        ("nuisance", "nuisance: datum 2"),
    ):
        with pytest.raises(InputError, match=message):
            ChiSquare(measured, form, [1.0, 0.0])


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ({"measurements": 7}, "measurements = 7: measurements must be Measurements"),
        ({"form": "nuisances"}, 'form must be one of "covariance", "nuisance"; did you mean "nuisance"?'),
        ({"reference": [1.0]}, r"the shape of reference must be \(3\)"),
        ({"theory": np.eye(2)}, r"the shape of theory must be \(3, 3\)"),
        (
            {"theory": np.diag([1.0, 1.0, -1.0])},
            r"theory: not positive semi-definite: the smallest eigenvalue is -1",
        ),
        (
            {"theory": [[1, 0.5, 0], [0, 1, 0], [0, 0, 1]]},
            r"theory = 0\.5 at index \(0, 1\): theory must be symmetric",
        ),
    ],
)
def test_wrong_arguments_are_refused(arguments, message):
    measured = one_line(own=[0.1] * 3, all=[0.1] * 3)
    with pytest.raises(InputError, match=message):
        ChiSquare(**{"measurements": measured} | arguments)


@pytest.mark.parametrize(
    "method", ["value", "residuals", "pulls", "shifts", "per_table", "minus_two_log_likelihood"]
)
def test_wrong_predictions_are_refused(method):
    chi2 = ChiSquare(one_line(own=[0.1] * 3, all=[0.1] * 3))
    for wrong, message in (
        ([1.0, 2.0], r"(the last axis must have 3 data|the shape of reference must be \(3\))"),
        ([1.0, 2.0, float("nan")], "nan at index 2"),
        ("abc", "must be real numbers, not text"),
        (1.0, "(the last axis must have 3 data|must have 1 axis)"),
    ):
        with pytest.raises(InputError, match=message):
            getattr(chi2, method)(wrong)


def test_wrong_matrices_are_refused():
    chi2 = ChiSquare(one_line(own=[0.1] * 3, all=[0.1] * 3))
    with pytest.raises(InputError, match="the first axis must have 3 data"):
        chi2.whiten(np.ones((2, 3)))
    with pytest.raises(InputError, match=r"prediction must be one, \(datum,\)"):
        chi2.per_table(np.ones((2, 3)))
