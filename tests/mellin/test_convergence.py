"""The solution against itself with everything finer: how many digits are its own."""

from __future__ import annotations

import numpy as np
import pytest

from mellin import contour_starts, contours, evolution, toy_input
from mellin.kernel_moments import Kernels
from mellin.published import QUANTITIES
from mellin.representations import EveryZ, NearOne
from mellin.solution import MellinSolution

X = np.concatenate(
    [
        10.0 ** -np.arange(9.0, 2.0, -1.0),
        [0.01, 0.05, 0.1, 0.2, 0.22, 0.2232, 0.25, 0.3, 0.4, 0.5, 0.6, 0.61, 0.7, 0.8, 0.82, 0.9],
    ]
)

CHANGES = {
    "more nodes": [(contours, "_REACH", 46.0), (evolution, "STEP", 0.06)],
    "another angle": [(contours, "DIRECTION", np.exp(0.7j * np.pi))],
    "other starts": [
        (contour_starts, "NON_SINGLET_STARTS", (0.65, 0.95, 1.25, 1.5, 2.0)),
        (contour_starts, "SINGLET_STARTS", (1.5, 2.0)),
    ],
    "other representations of kernels": [
        (EveryZ, "SPLIT", 1.0),
        (EveryZ, "POWERS", 23),
        (NearOne, "LENGTH", 2.0),
        (NearOne, "POWERS", 24),
    ],
}


def run(kernels: Kernels, order: int, contour_order: int) -> dict[str, np.ndarray]:
    class Fresh:  # another object, so that no moments are shared
        splitting = staticmethod(kernels.splitting)
        matching = staticmethod(kernels.matching)

    solution = MellinSolution(
        Fresh(),
        order=order,
        alpha_s=0.35,
        alpha_s_q2=2.0,
        alpha_s_nf=3,
        masses=toy_input.MASSES,
        kind="pole",
        threshold_ratios=(1.0, 1.4, 1.0),
        contour_order=contour_order,
    )
    return solution.evolve_combinations(QUANTITIES, toy_input.MOMENTS, start_q2=2.0, start_nf=3, q2=1e4, x=X)


@pytest.fixture(scope="module", params=[0, 1, 2], ids=["LO", "NLO", "NNLO"])
def base(request: pytest.FixtureRequest, kernels: Kernels) -> tuple[int, dict[str, np.ndarray]]:
    return request.param, run(kernels, request.param, contours.ORDER)


@pytest.mark.parametrize("change", CHANGES)
def test_finer_changes_nothing(
    base: tuple[int, dict[str, np.ndarray]],
    kernels: Kernels,
    change: str,
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    order, before = base
    for where, name, value in CHANGES[change]:
        monkeypatch.setattr(where, name, value)
    more = 8 if change == "more nodes" else 0
    after = run(kernels, order, contours.ORDER + more)
    largest = np.max(np.abs([before["x*u_v"], before["x*g"]]), axis=0)
    for name, values in before.items():
        # 1e-11 of each value; where a sea is 1e-5 of the valence (x = 0.9), or s - sbar
        # 1e-6 of it, the rounding of what cancels is the limit: 1e-15 of the largest density
        allowed = 1e-11 * np.abs(values) + (2e-15 * largest if np.any(values) else 0)
        assert np.all(np.abs(after[name] - values) <= allowed), name
