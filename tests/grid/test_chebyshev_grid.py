"""The grid against scipy's interpolator and incomplete Beta functions, and against its own promise."""

import copy
import pickle

import numpy as np
import pytest
from scalewright import ChebyshevGrid, RangeError
from scipy.interpolate import BarycentricInterpolator
from scipy.special import beta, betaincc

EPS = 2.0**-52


@pytest.fixture(scope="module")
def grid():
    return ChebyshevGrid(x_min=1e-7)


@pytest.fixture(scope="module")
def one_panel():
    return ChebyshevGrid.from_panels([0.0, 3.0], [14])


def test_nodes_fall_from_below_one_to_x_min(grid):
    assert grid.x[0] < 1.0 and grid.x[-1] == grid.x_min == 1e-7
    assert (np.diff(grid.x) < 0).all()
    assert grid.nodes == grid.x.size == grid.degrees.sum()  # x = 1 is not held, edges are shared
    # exp(-u) carries the rounding of u, at most 16.2 * 2^-53, and its own
    np.testing.assert_allclose(np.exp(-grid.u), grid.x, rtol=20 * EPS)


def test_every_edge_but_the_first_is_a_node(grid):
    nearest = abs(grid.u[:, None] - grid.edges[1:]).min(axis=0)
    assert (nearest <= 20 * EPS).all()


def test_standard_and_fine_keep_within_their_numbers_of_nodes():
    # 72 and 110 nodes for x_min = 1e-7 are the budget of the two resolutions
    assert ChebyshevGrid(1e-7).nodes <= 72
    assert ChebyshevGrid(1e-7, "fine").nodes <= 110


def test_interpolation_is_that_of_scipy(one_panel):
    values = np.cos(3 * one_panel.u) - 1.0
    reference = BarycentricInterpolator(np.concatenate([[0.0], one_panel.u]), np.concatenate([[0.0], values]))
    u = np.linspace(0.01, 2.99, 57)
    # 15 Lobatto nodes have a Lebesgue constant below 3: rounding times a few
    np.testing.assert_allclose(
        one_panel.interpolate(values, np.exp(-u)), reference(u), rtol=0, atol=100 * EPS
    )


def test_values_at_nodes_come_back_unchanged(grid):
    values = np.random.default_rng(1).normal(size=(3, grid.nodes))
    # ln of a node is the node to rounding, and rounding times the slope of the interpolant (d^2 / width)
    np.testing.assert_allclose(grid.interpolate(values, grid.x), values, rtol=0, atol=1e-9)


def test_densities_vanish_at_one(grid):
    assert (grid.interpolate(np.ones(grid.nodes), 1.0) == 0.0).all()


def test_a_constant_is_reproduced_away_from_one(grid):
    # the panel next to x = 1 carries the zero there; in the others the weights of a constant sum to one
    x = np.geomspace(grid.x_min, np.exp(-grid.edges[1]), 40)
    np.testing.assert_allclose(grid.cardinals(x).sum(axis=1), 1.0, rtol=0, atol=100 * EPS)


@pytest.mark.parametrize(("resolution", "promise"), [("standard", 1e-6), ("fine", 1e-8)])
def test_promised_accuracy_on_random_densities(resolution, promise):
    # the class and the figures are those the grid promises: x^a (1-x)^b (1 + c sqrt x + d x), x <= 0.9
    grid = ChebyshevGrid(1e-7, resolution)
    random = np.random.default_rng(20)
    x = np.concatenate([np.geomspace(1e-7, 0.1, 300), np.linspace(0.1, 0.9, 300)])
    cards = grid.cardinals(x)
    worst = 0.0
    for _ in range(200):
        a, b = random.uniform(-0.4, 0.8), random.uniform(1.5, 10)
        c, d = random.uniform(0, 3, size=2)  # positive: no zero, so that a relative error means something

        def density(x, a=a, b=b, c=c, d=d):
            return x**a * (1 - x) ** b * (1 + c * np.sqrt(x) + d * x)

        worst = max(worst, np.max(abs(cards @ density(grid.x) / density(x) - 1.0)))
    assert worst <= promise


@pytest.mark.parametrize("power", [0.0, 1.0, 2.5])
@pytest.mark.parametrize(("a", "b"), [(0.5, 3.0), (0.8, 4.0)])
def test_moment_weights_give_incomplete_beta_functions(grid, power, a, b):
    weights = grid.handle().moment_weights(power)
    values = grid.x**a * (1 - grid.x) ** b
    exact = beta(a + power, b + 1) * betaincc(a + power, b + 1, grid.x_min)
    # the interpolation error of these densities is below 1e-7 of their values, see the promise above
    assert values @ weights == pytest.approx(exact, rel=1e-7)


def test_shapes_follow_numpy(grid):
    values = np.ones((2, 5, grid.nodes))
    assert grid.interpolate(values, np.full((3, 4), 0.1)).shape == (2, 5, 3, 4)
    assert grid.interpolate(values, 0.1).shape == (2, 5)
    assert np.ndim(grid.interpolate(values[0, 0], 0.1)) == 0
    assert grid.cardinals(0.1).shape == (grid.nodes,)
    assert grid.cardinals([]).shape == (0, grid.nodes)


def test_same_panels_are_the_same_grid(grid):
    again = ChebyshevGrid.from_panels(grid.edges, grid.degrees)
    assert again == grid and hash(again) == hash(grid)
    assert ChebyshevGrid(1e-6) != grid and grid != "grid"
    assert len({grid, again, ChebyshevGrid(1e-7, "fine")}) == 2


def test_x_min_of_a_rebuilt_grid_serves_the_x_min_it_was_made_with(grid):
    again = ChebyshevGrid.from_panels(grid.edges, grid.degrees)
    assert again.interpolate(again.x, 1e-7) == pytest.approx(1e-7, rel=1e-14)
    with pytest.raises(RangeError, match=r"x = 9\.99e-08"):
        again.interpolate(again.x, 9.99e-8)


@pytest.mark.parametrize("protocol", range(2, pickle.HIGHEST_PROTOCOL + 1))
def test_pickle_and_copies_are_equal(grid, protocol):
    for other in (pickle.loads(pickle.dumps(grid, protocol)), copy.copy(grid), copy.deepcopy(grid)):
        assert other == grid and (other.u == grid.u).all()
        # the last x is x_min as given there, and exp(-u) of the last edge here
        np.testing.assert_allclose(other.x, grid.x, rtol=20 * EPS)


def test_arrays_of_a_grid_cannot_be_changed(grid):
    for name in ("x", "u", "edges", "degrees"):
        with pytest.raises(ValueError, match="read-only"):
            getattr(grid, name)[0] = 1


def test_repr_names_nodes_panels_and_x_min():
    text = repr(ChebyshevGrid.from_panels([0, 1, 9], [12, 16]))
    assert text.startswith("ChebyshevGrid(28 nodes in 2 panels, x_min=0.0001234")


def test_one_screen_and_one_table_name_each_panel():
    grid = ChebyshevGrid.from_panels([0, 1, 9], [12, 16])
    lines = str(grid).splitlines()
    assert lines[0] == "ChebyshevGrid"
    assert lines[2:] == [
        "  panel 1  x = 1 to 0.368, degree 12",
        "  panel 2  x = 0.368 to 0.000123, degree 16",
    ]
    assert grid._repr_html_().count("<tr>") == len(lines) - 1
    assert repr(ChebyshevGrid.from_panels([0, 9], [16])).startswith("ChebyshevGrid(16 nodes in 1 panel, ")
