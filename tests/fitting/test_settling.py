"""Where the next map is built: swings end, and what settles by itself is left alone."""

import pickle

import numpy as np
import pytest
from fitting.problems import ALPHA_S, bent_shape, chi_square, fmap, truth
from scalewright import InputError
from scalewright.fitting._settling import Settling
from scalewright.fitting.least_squares import NotSettledError, fit


def turns(slope, start, most=12):
    """Follow f(a) = 1 + slope (a - 1) from `start`; return all values."""
    settling, at, values = Settling(), np.array(start, dtype=float), []
    for _ in range(most):
        values.append(at)
        found = 1.0 + np.atleast_1d(slope @ (at - 1.0) if np.ndim(slope) == 2 else slope * (at - 1.0))
        if abs(found - at).max() < 1e-10:
            return values
        at = settling.next(at, found, np.full(at.size, 0.1))
    return values


@pytest.mark.parametrize("slope", [-1.0, -1.5, -3.0])
def test_a_swing_ends_at_once(slope):
    # a straight line: the secant method is exact at its second value
    values = turns(slope, [1.1])
    assert len(values) == 3
    assert values[-1] == pytest.approx(1.0, abs=1e-12)


def test_a_swing_of_two_parameters_ends():
    slope = np.array([[-1.1, 0.2], [0.1, -0.9]])
    assert turns(slope, [1.1, 0.8], most=40)[-1] == pytest.approx([1.0, 1.0], abs=1e-8)


def test_what_comes_closer_from_one_side_is_not_pushed_beyond():
    values = np.ravel(turns(0.3, [1.1]))
    np.testing.assert_allclose(values[1:5] - 1.0, 0.1 * 0.3 ** np.arange(1, 5), rtol=1e-12)


def deaf(at):
    """Return a map of another coupling than that asked for."""
    return fmap()


def breaks(at):
    """Have no map."""
    raise ArithmeticError("no such map")


def test_a_fit_that_does_not_settle_is_not_lost():
    shape, known = bent_shape(), {"alpha_s": ALPHA_S}
    chi2 = chi_square(truth(shape, fmap(0.36)), size=0.002, common=0.001)
    first = fit(fmap(), chi2, shape, theory=known)
    assert issubclass(NotSettledError, InputError)
    with pytest.raises(
        NotSettledError, match="'alpha_s' has not settled after 10 maps; the last fit is"
    ) as met:
        fit(fmap(), chi2, shape, theory=known, rebuild=deaf)
    assert met.value.result.rebuilt == 10
    assert met.value.result.converged
    again = pickle.loads(pickle.dumps(met.value))  # as a worker would send it
    assert str(again) == str(met.value)
    np.testing.assert_array_equal(again.result.parameters, met.value.result.parameters)
    with pytest.raises(
        NotSettledError, match="rebuild raised ArithmeticError: no such map; the last fit"
    ) as met:
        fit(fmap(), chi2, shape, theory=known, rebuild=breaks)
    np.testing.assert_array_equal(met.value.result.parameters, first.parameters)
