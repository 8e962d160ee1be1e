"""The quoted numerical error against the difference from the fine grid, on random inputs and points."""

from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw
from scalewright._observed.accuracy import finer_grid

FLAVOURS = 7


@pytest.fixture(scope="module")
def cases(grid):
    """True errors, estimates and values of 2,400 random cases."""
    rng = np.random.default_rng(20)
    fine = sw.ChebyshevGrid(x_min=1e-5, resolution="fine")
    charm = {"tagged": "charm"}
    kinds = [
        (40, {"measure": "F2", "exchange": "photon"}, {}, {}),
        (40, {"measure": "FL", "exchange": "photon"}, {}, {}),
        (40, {"measure": "xF3", "current": "charged", "beam": "nu"}, {}, {}),
        (40, {"measure": "F2", "current": "charged", "beam": "nubar"}, {}, {}),
        (20, {"measure": "F2", "exchange": "photon"} | charm, {"heavy_quarks": "matched"}, {}),
        (20, {"measure": "F2", "current": "charged", "beam": "nu"} | charm,
         {"heavy_quarks": "massive", "flavours": 3, "hard_muf2_ratio": 2.0}, {"target_mass": True}),
    ]  # fmt: skip
    found = []
    for count, kind, theory, options in kinds:
        x = np.exp(rng.uniform(np.log(1.1e-5), np.log(0.85), count))
        q2 = np.exp(rng.uniform(np.log(2.0), np.log(4e4), count))
        rows = SimpleNamespace(x=x, q2=q2, **kind)
        maps = [
            sw.forward_map(sw.Theory(**theory), g, start_q2=1.5, start_nf=3, points=rows, **options)
            for g in (grid, fine)
        ]
        for _ in range(12):
            shapes = rng.uniform([-0.4, 1.5, -1.0, -0.5], [0.8, 10.0, 3.0, 3.0], (FLAVOURS, 4))
            inputs = [
                np.array(
                    [g.x**a * (1 - g.x) ** b * (1 + c * np.sqrt(g.x) + d * g.x) for a, b, c, d in shapes]
                )
                for g in (grid, fine)
            ]
            value, exact = (fmap.predict(given)[0] for fmap, given in zip(maps, inputs, strict=True))
            found.append((np.abs(value - exact), maps[0].numerical_error(inputs[0])[0], np.abs(value)))
    return [np.concatenate(column) for column in zip(*found, strict=True)]


def test_predictions_keep_what_the_standard_resolution_promises(cases):
    true, _, value = cases
    # 1e-6 for the wide class of inputs; where xF3 passes through zero its own size is no measure
    assert np.quantile(true[value > 0] / value[value > 0], 0.99) < 1e-6


def test_the_quoted_error_is_seldom_too_small_and_not_much_too_large(cases):
    true, quoted, value = cases
    # nothing is predicted above the threshold of a pair
    ratio = quoted[value > 0] / np.maximum(true[value > 0], 1e-300)
    assert (ratio >= 1.0).mean() >= 0.99
    assert np.median(ratio) <= 10.0


def test_the_input_of_a_polynomial_is_known_and_only_the_map_can_be_wrong(grid):
    # degree 5 in u in each panel: nothing lies beyond the nodes, so that the finer map is the truth
    rows = SimpleNamespace(x=[1e-3, 0.3], q2=[50.0, 50.0], measure="F2", exchange="photon")
    fmap = sw.forward_map(sw.Theory(), grid, start_q2=1.5, start_nf=3, points=rows)
    finer = finer_grid(grid)
    exact = sw.forward_map(sw.Theory(), finer, start_q2=1.5, start_nf=3, points=rows, tolerance=1e-12)
    inputs = [np.tile((g.u / 12) * (1 - g.u / 12) ** 4, (FLAVOURS, 1)) for g in (grid, finer)]
    true = np.abs(fmap.predict(inputs[0]) - exact.predict(inputs[1]))
    quoted = fmap.numerical_error(inputs[0])
    assert (true <= quoted).all() and (quoted <= 2.1 * true + 1e-11).all()  # the factor 2, and rounding


def test_panels_of_high_degree_are_halved_and_too_many_nodes_refused():
    assert finer_grid(sw.ChebyshevGrid.from_panels([0, 1, 12], [20, 60])).degrees.tolist() == [30, 60, 60]
    many = sw.ChebyshevGrid.from_panels(np.linspace(0, 12, 8), [50] * 7)
    with pytest.raises(sw.InputError, match="judged on a grid with 700 nodes: there may be 400"):
        finer_grid(many)
