"""Uncertainties of fits: exact parabolas, ellipsoids, and profiles of refits with maps built anew."""

import numpy as np
import pytest
from fitting.problems import ALPHA_S, bent_shape, chi_square, fmap, truth
from scalewright.fitting.least_squares import fit


def test_the_profile_of_a_linear_fit_is_a_parabola(linear):
    _, _, result = linear
    for name in result.names:
        at = result.value(name) + result.error(name) * np.array([-2.0, -1.0, 0.0, 1.0, 3.0])
        profile = result.profile(name, at)
        assert profile.converged.all()
        np.testing.assert_allclose(profile.chi2 - result.chi2, [4, 1, 0, 1, 9], atol=1e-7)


def test_tolerance_scales_errors(linear):
    shape, chi2, one = linear
    ten = fit(fmap(), chi2, shape, delta_chi2=10.0)
    np.testing.assert_allclose(ten.errors, np.sqrt(10.0) * one.errors, rtol=1e-9)


def test_eigenvectors_raise_chi_square_by_the_tolerance(linear):
    shape, chi2, _ = linear
    result = fit(fmap(), chi2, shape, delta_chi2=2.0)
    sets = result.eigenvectors()
    assert sets.replicas == 1 + 2 * len(shape.names)
    order = [sets.flavours.index(f) for f in fmap().flavours]
    rises = chi2.value(fmap().predict(sets.values[:, order])) - result.chi2
    np.testing.assert_allclose(rises[1:], 2.0, rtol=1e-6)
    # and their half differences make the error of any density
    x = [0.01, 0.2]
    ends = sets.at(None, x, "u")
    size = np.sqrt((((ends[1::2] - ends[2::2]) / 2) ** 2).sum(axis=0))
    np.testing.assert_allclose(result.error_of(x, "u"), size, rtol=1e-9)


def test_the_coupling_is_fitted_through_the_map():
    shape = bent_shape()
    the_map = fmap()
    chi2 = chi_square(truth(shape, fmap(0.36)), size=0.002, common=0.001)

    def rebuild(at):
        return fmap(at["alpha_s"])

    first = fit(the_map, chi2, shape, theory={"alpha_s": ALPHA_S})
    result = fit(the_map, chi2, shape, theory={"alpha_s": ALPHA_S}, rebuild=rebuild)
    assert result.converged, result.status
    assert result.rebuilt >= 1
    # the map of the last repetition is off by less than 0.01 of the error; what is left is of second order
    assert abs(result.value("alpha_s") - 0.36) < 0.01 * result.error("alpha_s")
    assert "of first order around it" in "\n".join(first.status)
    assert abs(first.value("alpha_s") - 0.36) > abs(result.value("alpha_s") - 0.36)


def curvature(result):
    """Return the second derivative of a nine-point profile in units of the error, from a quartic."""
    steps = np.linspace(-0.2, 0.2, 9)
    profile = result.profile("alpha_s", result.value("alpha_s") + steps * result.error("alpha_s"))
    return np.polyfit(steps, profile.chi2, 4)[2]


def test_the_error_of_the_coupling_is_the_curvature_of_refits():
    shape, known = bent_shape(), {"alpha_s": ALPHA_S}
    chi2 = chi_square(truth(shape), seed=5, size=0.002, common=0.001)
    result = fit(fmap(), chi2, shape, theory=known)
    # of differences and of the quartic, 1e-4 each; J^T J alone is wrong by ten times that
    assert curvature(result) == pytest.approx(1.0, rel=1e-3)
    linear = result.linear_covariance[-1, -1] / result.covariance[-1, -1]
    assert abs(linear - 1.0) > 5e-3
    again = fit(fmap(), chi2, shape, theory=known, rebuild=lambda at: fmap(at["alpha_s"]))
    # 1 per cent of the error: the map moves to first order only in the one, and is built anew in the other
    assert curvature(again) == pytest.approx(1.0, rel=0.02)
