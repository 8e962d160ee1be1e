"""Several starts: a law whose chi-square has two minima that are known, and one that has one."""

from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw
from fitting.problems import GRID
from fitting.runs import bent_problem
from scalewright import InputError
from scalewright.fitting.least_squares import FitResult, fit
from scalewright.fitting.shapes import FunctionShape

X, TRUTH = np.array([0.1, 0.8]), 2.3


def law(x, p):
    """Return x u(x): a cubic of the parameter with a bump at -1, and a little of it at large x."""
    return (p[0] ** 3 - 3 * p[0]) * (1 - x) + 0.1 * p[0] * x


def two_minima(start):
    rows = GRID.cardinals(X)[:, None]
    fmap = SimpleNamespace(matrix=rows, flavours=(2,), grid=GRID, start_q2=2.0, start_nf=3)
    error = {"name": "a", "size": 4.0, "given_in": "value", "scales_with": "nothing"}
    what = {"title": "A", "measures": "F2", "exchange": "photon", "uncertainty": [error]}
    points = {"x": X, "q2": [10.0, 10.0], "value": law(X, [TRUTH])}
    table = sw.Measurements.from_columns(what, points)
    return fmap, sw.ChiSquare(table), FunctionShape(GRID, [2], law, [start], names=["a"])


def test_more_starts_find_the_lower_minimum_and_tell_of_both(tmp_path):
    problem = two_minima(-1.2)
    one = fit(*problem)
    assert one.converged and one.value("a") < 0.0 and one.chi2 > 0.5
    many = fit(*problem, starts=16)
    # the law is on the lower one: chi-square 0, the parameter exact but for the convergence that is asked for
    assert many.converged and many.chi2 < 1e-6
    np.testing.assert_allclose(many.value("a"), TRUTH, atol=1e-3 * many.errors[0])
    (line,) = [line for line in many.status if "starts" in line]
    assert line.startswith("WARNING: from 16 starts: ") and f"higher by {one.chi2 - many.chi2:.3g} (" in line
    again = fit(*problem, starts=16)
    assert again.status == many.status and (again.parameters == many.parameters).all()
    many.save(tmp_path / "fit.h5")
    assert FitResult.load(tmp_path / "fit.h5").status == many.status


def test_one_minimum_stays_what_it_was():
    problem = bent_problem()
    one, many = fit(*problem), fit(*problem, starts=4)
    assert (many.parameters == one.parameters).all() and many.chi2 == one.chi2
    assert "from 4 starts: 4 end at this minimum" in many.status


def test_a_start_from_which_nothing_is_found_is_counted(monkeypatch):
    from scalewright.fitting import _starts

    fmap, chi2, shape = two_minima(2.0)
    far = [np.array([2.2]), np.array([1e200])]  # chi-square is not finite at the second
    monkeypatch.setattr(_starts, "around", lambda *_: far)
    result = fit(fmap, chi2, shape, starts=3)
    assert "from 3 starts: 2 end at this minimum; 1 did not converge" in result.status


@pytest.mark.parametrize("starts", [0, 1.5, True, "two"])
def test_starts_must_be_a_number(starts):
    with pytest.raises(InputError, match="starts"):
        fit(*two_minima(1.0), starts=starts)
