"""Rows and what carries them to the input, against plain numpy: coefficients and blocks one at a time."""

from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw
from scalewright._observed import points as of_points
from scalewright._observed.carried import carried_matrix, with_target
from scalewright._observed.light import COEFFICIENTS, light_matrices
from scalewright._observed.measures import FUNCTIONS
from scalewright._observed.point_rows import light_weights, nodal_weights
from scalewright._observed.points import Points
from scalewright._observed.problem import Problem
from scalewright._observed.pullback import GLUON, MINUS, PLUS, flavour_rows, pulled_back
from scalewright._observed.target_mass import with_target_mass

SCALES = sw.Theory(order="NLO", hard_muf2_ratio=1.5, hard_mur2_ratio=0.7)


def table(count, scales, seed=3):
    """Return points of both currents, all beams and measures, at so many different Q^2."""
    rng = np.random.default_rng(seed)
    charged = rng.random(count) < 0.5
    beams = np.where(charged, rng.choice(["e-", "e+", "nu", "nubar"], count), rng.choice(["e-", "e+"], count))
    q2 = np.geomspace(2.0, 4e4, scales)
    return SimpleNamespace(
        x=np.exp(rng.uniform(np.log(1.1e-5), np.log(0.85), count)),
        q2=q2[rng.integers(0, scales, count)],
        y=rng.uniform(0.05, 0.9, count),
        polarisation=np.where(np.char.startswith(beams, "e"), rng.uniform(-0.5, 0.5, count), 0.0),
        measure=rng.choice(
            ["reduced_cross_section", "F2", "FL", "xF3", "F1", "d2sigma_dx_dq2"], count
        ).tolist(),
        current=np.where(charged, "charged", "neutral").tolist(),
        beam=beams.tolist(),
        target=rng.choice(["proton", "neutron", "deuteron", "isoscalar"], count).tolist(),
    )


def plain_rows(problem, nf, chosen):
    """Return rows (point, 13, node) of light quarks, coefficient by coefficient."""
    part, factors, a = problem.points.part(chosen), problem.factors[chosen], problem.a[chosen]
    if problem.target_mass:
        nodal = with_target_mass(problem.grid, part.x, part.q2, factors)
    else:
        nodal = nodal_weights(problem, part.x, factors)
    weights, theory = light_weights(problem, part, nf, False), problem.theory
    rows = np.zeros((chosen.size, 13, problem.grid.nodes))
    for function in FUNCTIONS:
        made = light_matrices(
            problem.grid,
            function,
            problem.highest[function],
            nf,
            theory.hard_mur2_ratio,
            theory.hard_muf2_ratio,
        )
        summed = {
            name: sum(a[:, None] ** k * (nodal[function] @ matrix) for k, matrix in enumerate(made[name]))
            for name in COEFFICIENTS
        }
        even, odd = (weights.even3, weights.odd3) if function == "xF3" else (weights.even, weights.odd)
        rows[:, PLUS] += even[:, :, None] * summed["ns+"][:, None]
        rows[:, MINUS] += odd[:, :, None] * summed["ns-"][:, None]
        if function != "xF3":
            mean = even[:, :nf].mean(axis=1)[:, None]
            rows[:, PLUS][:, :nf] += (mean * summed["pure singlet"])[:, None]
            rows[:, GLUON] += mean * summed["gluon"]
    return rows


def plain_matrix(problem, start):
    """Return the matrix by the blocks of operators, point by point."""
    q2 = np.unique(problem.muf2)
    operators = sw.build_operators(problem.theory, problem.grid, q2=q2, **start)
    flavours = operators._route.active
    matrix = np.empty((len(problem.points), len(flavours), problem.grid.nodes))
    for scale, nf, blocks in zip(operators.q2, operators.nf, operators.blocks, strict=True):
        members = np.flatnonzero(problem.muf2 == scale)
        rows = plain_rows(problem, int(nf), members)
        back = pulled_back(rows, dict(zip(operators.block_names, blocks, strict=True)), operators.light)
        matrix[members] = with_target(flavour_rows(back, flavours), problem.points.protons[members], flavours)
    return matrix


@pytest.mark.parametrize(
    ("theory", "start", "target_mass"),
    [
        (sw.Theory(), {"start_q2": 1.5, "start_nf": 3}, False),
        (sw.Theory(), {"start_q2": 4.0, "start_nf": 4}, True),  # charm is an input, and the route goes down
        (SCALES, {"start_q2": 100.0, "start_nf": 5}, False),
        (sw.Theory(order="LO", flavours=4), {"start_q2": 2.0, "start_nf": 4}, False),
    ],
)  # fmt: skip
@pytest.mark.parametrize(("count", "scales"), [(150, 6), (60, 60)])
def test_the_matrix_is_that_of_plain_sums(grid, theory, start, target_mass, count, scales):
    given = table(count, scales)
    problem = Problem(theory, grid, sw.Electroweak.effective(), Points.of(given), target_mass)
    expected = plain_matrix(problem, start)
    found, _ = carried_matrix(problem, **start, tolerance=None, threads=2)
    size = np.abs(expected).max(axis=(1, 2))
    # rounding: sums of some hundred products in another order
    assert (np.abs(found - expected).max(axis=(1, 2)) <= 1e-12 * size).all()


def test_points_by_column_are_those_of_one_by_one(monkeypatch):
    given = table(200, 7)
    given.s = np.where(np.arange(200) % 3 == 0, 1e6, np.nan)
    given.y = np.where(np.isnan(given.s), given.y, given.q2 / (given.x * 1e6))
    given.x, given.y = np.where(given.y > 0.9, 0.5, given.x), np.where(given.y > 0.9, np.nan, given.y)
    given.measure = ["F2" if np.isnan(y) and np.isnan(s) else m
                     for y, s, m in zip(given.y, given.s, given.measure, strict=True)]  # fmt: skip
    with monkeypatch.context() as patch:
        patch.setattr(of_points, "_one_by_one", None)
        together = Points.of(given)
    monkeypatch.setattr(of_points, "_together", lambda columns: None)
    one_by_one = Points.of(given)
    for name, value in vars(one_by_one).items():
        np.testing.assert_array_equal(getattr(together, name), value)
