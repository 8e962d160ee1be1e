"""Kinematics: identities, limits and the boundaries of regimes."""

import numpy as np
import pytest
import scalewright as sw
from scalewright import kinematics

M2 = 0.93827208816**2


def test_invariants_close():
    x, q2, s = np.array([1e-4, 0.1, 0.7]), np.array([3.0, 50.0, 4e3]), 1e5
    y = kinematics.inelasticity(x, q2, s)
    # p.q = y (s - M^2)/2, W^2 = (p + q)^2 = M^2 + 2 p.q - Q^2
    np.testing.assert_allclose(kinematics.invariant_mass2(x, q2), M2 + y * (s - M2) - q2, rtol=1e-11)
    assert kinematics.invariant_mass2(1.0, 10.0) == pytest.approx(M2, rel=1e-15)


def test_regimes_have_the_boundaries_that_are_asked_for():
    # L = 0.5: (1/x-1) Q^2/L^2 is 10 at 1/x - 1 = 0.025 for Q^2 = 100; (1/x-1) Q/L is 1 at 0.05
    found = kinematics.regimes([0.98, 0.96, 0.9, 0.1, 1e-5], [100.0, 100.0, 100.0, 1.5, 10.0])
    assert found.name.tolist() == ["resonance", "endpoint", "inclusive", "low Q^2", "low x"]
    assert found.counts() == dict.fromkeys(kinematics.REGIMES, 1)
    np.testing.assert_allclose(found.of_resonance[:2], [400 / 49, 400 / 24], rtol=1e-12)
    everything = kinematics.regimes([0.98, 1e-5], [100.0, 1.0], resonance=0, endpoint=0, low_q2=0, low_x=0)
    assert str(everything) == "2 inclusive"


def test_limits_of_x_are_where_y_is_one_and_w2_the_least():
    q2, s = np.array([2.0, 300.0, 9e4]), 1e5
    low, high = kinematics.x_limits(q2, s, w2=12.5)
    np.testing.assert_allclose(kinematics.inelasticity(low * (1 + 1e-14), q2, s), 1.0, rtol=1e-13)
    np.testing.assert_allclose(kinematics.invariant_mass2(high, q2), 12.5, rtol=1e-10)
    assert (kinematics.x_limits(q2, s)[1] == 1.0).all()  # elastic
    with pytest.raises(sw.InputError, match=r"w2 = 0.5: w2 must lie in \[0.88"):
        kinematics.x_limits(q2, s, w2=0.5)
    with pytest.raises(sw.InputError, match=r"q2 = 0 at index 1"):
        kinematics.x_limits([1.0, 0.0], s)


def test_bad_kinematics_are_refused():
    with pytest.raises(
        sw.InputError, match=r"y = 2.* at index 1: y = Q\^2/\(x \(s - m_p\^2\)\) must lie in \(0, 1\]"
    ):
        kinematics.inelasticity([0.1, 0.0005], [10.0, 100.0], 1e5)
    with pytest.raises(sw.InputError, match=r"x = 1.2: x must lie in \(0, 1\]"):
        kinematics.invariant_mass2(1.2, 10.0)
    with pytest.raises(sw.InputError, match=r"q2 = -1 at index 0"):
        kinematics.regimes([0.1], [-1.0])
