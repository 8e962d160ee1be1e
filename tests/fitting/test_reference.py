"""The reference of multiplicative errors: bias with the data, none after iteration."""

import numpy as np
import pytest
from scalewright import ChiSquare, InputError, Measurements
from scalewright.fitting.reference import settle_reference


def two_data(first, second, own, common):
    """Return two measurements of one number, with own errors and a common normalisation, in per cent."""
    percent = {"given_in": "percent"}
    return Measurements.from_columns(
        {"title": "A", "measures": "F2", "exchange": "photon", "uncertainty": [
            {"name": "own", "column": "own", "given_in": "value", "scales_with": "nothing"},
            {"name": "norm", "size": common, "scales_with": "value", "correlated": True, **percent}]},
        {"x": [0.1, 0.2], "q2": [10.0, 10.0], "value": [first, second], "own": [own, own]})  # fmt: skip


def constant(chi2):
    """Return the best fit of one constant to all data."""
    ones = chi2.whiten(np.ones(len(chi2.measurements)))
    best = ones @ chi2.residuals(np.zeros(len(chi2.measurements))) / (ones @ ones)
    return np.full(len(chi2.measurements), best)


def test_data_as_reference_bias_a_fit_and_its_own_prediction_does_not():
    # G. D'Agostini, Nucl. Instrum. Meth. A346 (1994) 306, as in arXiv:0912.2276 section 2 (recalled from
    # memory): two data d1, d2 with equal own errors s and a common normalisation error f. The fit with the
    # data as reference gives mean / (1 + f^2 (d1 - d2)^2 / (2 s^2)), below both; with one reference for both
    # it gives the mean.
    first, second, own, norm = 8.5, 8.0, 0.17, 10.0
    measured = two_data(first, second, own, norm)
    mean = 0.5 * (first + second)
    biased = constant(ChiSquare(measured))[0]
    expected = mean / (1.0 + (norm / 100) ** 2 * (first - second) ** 2 / (2.0 * own**2))
    assert biased == pytest.approx(expected, rel=1e-12)
    settled = settle_reference(ChiSquare(measured), constant)
    np.testing.assert_allclose(settled.prediction, mean, rtol=1e-12)
    assert abs(settled.history[-1] - settled.history[-2]) < 0.1
    assert settled.chi_square.value(settled.prediction) == settled.history[-1]


def test_the_form_and_the_theory_are_kept():
    measured = two_data(8.5, 8.0, 0.2, 10.0)
    start = ChiSquare(measured, "nuisance", theory=0.01 * np.ones((2, 2)))
    settled = settle_reference(start, constant)
    assert settled.chi_square.form == "nuisance"
    expected = measured.covariance(settled.chi_square.reference) + 0.01
    np.testing.assert_allclose(settled.chi_square.covariance, expected, rtol=1e-14)


def test_a_fit_that_never_settles_is_refused():
    turn = iter(range(100))

    def wanders(chi2):
        return np.full(2, 8.0 + next(turn))

    with pytest.raises(InputError, match="reference has not settled after 4 fits: the last chi-squares are"):
        settle_reference(ChiSquare(two_data(8.5, 8.0, 0.2, 10.0)), wanders, most=4)


@pytest.mark.parametrize(
    ("fit", "changes", "message"),
    [
        (lambda chi2: 1 / 0, {}, "fit raised ZeroDivisionError"),
        (lambda chi2: None, {}, "prediction of fit = None: prediction of fit must be given"),
        (lambda chi2: [1.0], {}, "the last axis must have 2 data"),
        (constant, {"tolerance": 0.0}, r"tolerance = 0: tolerance must lie in \(0, inf\)"),
        (constant, {"most": 1}, "most = 1: most must be at least 2"),
    ],
)
def test_wrong_fits_are_refused(fit, changes, message):
    with pytest.raises(InputError, match=message):
        settle_reference(ChiSquare(two_data(8.5, 8.0, 0.2, 10.0)), fit, **changes)
