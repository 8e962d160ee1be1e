"""Scale logarithms: predictions at other mu_r and mu_f differ by one order more than is kept."""

from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw
from observables import direct

CASES = [
    {"measure": "F2", "exchange": "photon"},
    {"measure": "FL", "exchange": "photon"},
    {"measure": "xF3", "beam": "e-"},
    {"measure": "F2", "current": "charged", "beam": "nu"},
    {"measure": "FL", "current": "charged", "beam": "nubar"},
    {"measure": "xF3", "current": "charged", "beam": "nubar"},
]
X, Q2 = np.array([1e-3, 0.03, 0.4]), 100.0


def shift(grid, case, order, alpha, ratios, counting="absolute", heavy="massless"):
    """Return the change of predictions with the ratios of scales; the input is given at Q^2."""
    flavours = 3 if counting == "own" or heavy == "massive" else 4
    theory = {
        "order": order, "flavours": flavours, "coupling": sw.Coupling(alpha, q2=Q2, nf=flavours),
        "fl_counting": counting, "heavy_quarks": heavy,
    }  # fmt: skip
    rows = SimpleNamespace(x=X, q2=Q2 * np.ones(3), **case)
    start = direct.start(grid, q2=Q2, nf=flavours)
    if flavours == 4:  # charm as strange
        values = np.concatenate([start.values, start.values[:, -2:]], axis=1)
        start = sw.Densities(grid, q2=Q2, nf=4, flavours=(*start.flavours, 4, -4), values=values)
    maps = [
        sw.forward_map(
            sw.Theory(hard_mur2_ratio=mur, hard_muf2_ratio=muf, **theory),
            grid, start_q2=Q2, start_nf=flavours, points=rows, tolerance=1e-12,
        )
        for mur, muf in ((1.0, 1.0), ratios)
    ]  # fmt: skip
    return maps[1].predict(start)[0] - maps[0].predict(start)[0]


@pytest.mark.parametrize("ratios", [(2.0, 1.0), (1.0, 3.0), (4.0, 0.25), (0.5, 2.0)])
@pytest.mark.parametrize("case", CASES)
@pytest.mark.parametrize("order", ["LO", "NLO", "NNLO"])
def test_shifts_of_scales_are_one_order_higher(grid, case, order, ratios):
    # LO F2 does not know mu_r, and FL begins at a: nothing changes there
    power = ["LO", "NLO", "NNLO"].index(order) + 1
    small, smaller = (np.abs(shift(grid, case, order, alpha, ratios)) for alpha in (0.004, 0.002))
    silent = order == "LO" and (case["measure"] == "FL" or ratios[1] == 1.0)
    if silent:
        assert (small == 0.0).all()
        return
    # F2 and xF3 at NLO know mu_r through a(mu_r) C_1, as does FL. Halving alpha_s halves the shift `power`
    # times; what is one order higher still shows at some x, the more so where the leading term nearly
    # vanishes: the median counts
    falls = np.log2(small / smaller)
    assert abs(np.median(falls) - power) < 0.15


@pytest.mark.parametrize("ratios", [(2.0, 1.0), (1.0, 3.0), (0.5, 2.0)])
@pytest.mark.parametrize("measure", ["F2", "FL", "xF3"])
@pytest.mark.parametrize("order", ["LO", "NLO"])
def test_shifts_with_charm_made_by_a_w_are_one_order_higher(grid, measure, order, ratios):
    # with its mass, FL begins at a^0 too; as above
    case = {"measure": measure, "current": "charged", "beam": "nu", "tagged": "charm"}
    small, smaller = (np.abs(shift(grid, case, order, a, ratios, heavy="massive")) for a in (0.004, 0.002))
    if order == "LO" and ratios[1] == 1.0:
        assert (small == 0.0).all()
        return
    assert abs(np.median(np.log2(small / smaller)) - (1 if order == "LO" else 2)) < 0.15


@pytest.mark.parametrize("ratios", [(2.0, 1.0), (1.0, 3.0), (0.5, 2.0)])
@pytest.mark.parametrize("order", ["LO", "NLO", "NNLO"])
def test_own_counting_of_fl_has_one_order_more(grid, order, ratios):
    power = ["LO", "NLO", "NNLO"].index(order) + 2
    # at the larger alpha_s rounding does not show at a^4 yet
    shifts = [np.abs(shift(grid, CASES[1], order, alpha, ratios, "own")) for alpha in (0.02, 0.01)]
    assert abs(np.median(np.log2(shifts[0] / shifts[1])) - power) < 0.4


def test_own_counting_at_a3_is_refused_beside_photons_with_three_flavours(grid):
    theory = sw.Theory(flavours=(3, 5), fl_counting="own")
    rows = SimpleNamespace(x=[0.1, 0.1], q2=[1.6, 50.0], measure="FL", exchange="photon")
    with pytest.raises(sw.InputError, match=r"point 1: FL at a\^3 .* nf = 3, and not for nf = 5"):
        sw.forward_map(theory, grid, start_q2=1.5, start_nf=3, points=rows)


@pytest.mark.parametrize("heavy_quarks", ["massless", "matched"])
@pytest.mark.parametrize("ratio", [0.25, 4.0])
def test_operators_reach_the_scales_of_all_ratios(grid, start, ratio, heavy_quarks):
    # with 1/4: mu_f^2 down to 0.9 GeV^2, below the input at 1.5, and 39.5 below the threshold of bottom;
    # with 4: up to 1.6e5, four times the highest Q^2
    theory = sw.Theory(order="NLO", hard_muf2_ratio=ratio, heavy_quarks=heavy_quarks)
    q2 = [3.6, 39.5, 4e4]
    rows = SimpleNamespace(x=[0.1] * 3, q2=q2, measure="F2", exchange="photon")
    fmap = sw.forward_map(theory, grid, start_q2=1.5, start_nf=3, points=rows)
    evolved = sw.evolve(theory, start, ratio * np.array(q2))
    value = sw.structure_function(
        "F2", x=[0.1] * 3, q2=q2, densities=evolved, theory=theory, exchange="photon"
    )
    # tolerance of the steps in scale, 1e-9 each way
    np.testing.assert_allclose(fmap.predict(start), value, rtol=1e-8)


def test_an_input_above_all_points_is_carried_back(grid, start):
    # the input at 100 GeV^2 with five flavours, made of that at 1.5: the same predictions as from there
    theory = sw.Theory(order="NLO")
    q2 = np.array([2.0, 12.0, 60.0])
    rows = SimpleNamespace(x=[0.02, 0.1, 0.3], q2=q2, measure="F2", exchange="photon")
    low = sw.forward_map(theory, grid, start_q2=1.5, start_nf=3, points=rows)
    high = sw.forward_map(theory, grid, start_q2=100.0, start_nf=5, points=rows)
    above = sw.evolve(theory, start, 100.0)
    # steps in scale, 1e-8 each way
    np.testing.assert_allclose(high.predict(above), low.predict(start), rtol=2e-8)


def test_a_coupling_too_large_is_refused_by_name(grid):
    theory = sw.Theory(hard_mur2_ratio=0.25)
    rows = SimpleNamespace(x=[0.1, 0.1], q2=[40.0, 1.2], measure="F2", exchange="photon", place=("a", "b"))
    with pytest.raises(sw.RangeError, match=r"^b: "):
        sw.forward_map(theory, grid, start_q2=1.5, start_nf=3, points=rows)


def test_a_scale_below_the_reach_of_evolution_is_refused_by_name(grid):
    theory = sw.Theory(hard_muf2_ratio=0.25)
    rows = SimpleNamespace(
        x=[0.1, 0.1], q2=[40.0, 1.0], measure="F2", exchange="photon", place=("a", "run.csv, line 3")
    )
    message = r"^run.csv, line 3: q2 = 1, mu_f\^2 = 0.25 GeV\^2: alpha_s grows beyond 5 .* \(Landau pole\)"
    with pytest.raises(sw.RangeError, match=message):
        sw.forward_map(theory, grid, start_q2=1.5, start_nf=3, points=rows)
    with pytest.raises(sw.RangeError, match=r"^alpha_s grows"):  # of the start, not of a point
        rows.q2 = [40.0, 10.0]
        sw.forward_map(theory, grid, start_q2=0.05, start_nf=3, points=rows)
