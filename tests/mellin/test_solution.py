"""The solution at its limits: nothing evolved, flavours on a threshold, bad arguments."""

from __future__ import annotations

import numpy as np
import pytest

from mellin import toy_input
from mellin.inputs import beta_moments, shaped
from mellin.kernel_moments import Kernels
from mellin.solution import MellinSolution

X = np.array([1e-9, 1e-7, 1e-5, 1e-3, 0.03, 0.2, 0.22, 0.25, 0.44, 0.5, 0.61, 0.75, 0.85, 0.9])


def solution(kernels: Kernels, **changes: object) -> MellinSolution:
    settings = {
        "order": 1,
        "alpha_s": 0.35,
        "alpha_s_q2": 2.0,
        "alpha_s_nf": 3,
        "masses": toy_input.MASSES,
        "kind": "pole",
    }
    return MellinSolution(kernels, **(settings | changes))


@pytest.mark.parametrize("b", [1.5, 4.0, 10.0])
@pytest.mark.parametrize("a", [-0.4, -0.1, 0.2, 0.8])
def test_no_evolution_returns_the_input(kernels: Kernels, a: float, b: float) -> None:
    form = (2.0, a, b, 0.5, -0.3)
    moments = {21: beta_moments(*form), 2: beta_moments(*form)}
    parts = {"g": {21: 1.0}, "u": {2: 1.0}, "ubar": {-2: 1.0}, "u_v": {2: 1.0, -2: -1.0}}
    result = solution(kernels).evolve_combinations(
        parts, moments, start_q2=1.5, start_nf=3, q2=1.5, x=X, nf=3
    )
    expected = shaped(*form)(X)
    # rounding of the inversion, seen to be up to 3e-13; on the line right of N = 1 it is
    # x^-0.35 times that of moments of size 1: more than a gluon that vanishes like x^0.8
    relative, absolute = 3e-12 * expected, 1e-15 * X**-0.35
    assert np.all(np.abs(result["u_v"] - expected) <= relative)
    for name in ("g", "u"):
        assert np.all(np.abs(result[name] - expected) <= relative + absolute), name
    assert np.all(np.abs(result["ubar"]) <= relative + absolute)


def test_flavours_follow_the_scale_and_their_limits(kernels: Kernels) -> None:
    free = solution(kernels, flavours=(3, 6))
    thresholds = [m**2 for m in toy_input.MASSES]
    assert [free.nf_at(q2) for q2 in (1.9, *thresholds)] == [3, 4, 5, 6]
    assert [solution(kernels).nf_at(q2) for q2 in (1.9, *thresholds)] == [3, 4, 5, 5]
    assert solution(kernels, flavours=(4, 4)).nf_at(1e5) == 4


def test_bad_arguments_are_refused(kernels: Kernels) -> None:
    with pytest.raises(ValueError, match="order is 0, 1 or 2"):
        solution(kernels, order=3)
    with pytest.raises(ValueError, match="running_loops is 1, 2 or 3"):
        solution(kernels, running_loops=4)
    ask = {"start_q2": 2.0, "start_nf": 3, "q2": 1e2}
    for x in (1e-10, 0.98):
        with pytest.raises(ValueError, match=r"between 1e-9 and 0\.97"):
            solution(kernels).evolve(toy_input.MOMENTS, x=np.array([x]), **ask)
    with pytest.raises(ValueError, match="PDG number"):
        solution(kernels).evolve({7: toy_input.MOMENTS[21]}, x=X, **ask)
    with pytest.raises(ValueError, match="singular right of"):
        solution(kernels).evolve({21: beta_moments(1.0, -2.5, 3.0)}, x=X, **ask)
