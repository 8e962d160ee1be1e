"""Covariance and nuisance parameters against sums written out by hand."""

import numpy as np
import pytest
from scalewright import Measurements

PERCENT = {"given_in": "percent", "scales_with": "value"}


def test_the_covariance_of_the_files_table_by_hand(run):
    table = Measurements.read(run)
    value = [1.25, 0.8, 0.5]
    stat = [0.02 * 1.25, 0.015 * 0.8, 0.04 * 0.5]
    scale = [0.01, -0.005, 0.0025]
    for reference in (None, [1.0, 1.0, 2.0]):
        by = value if reference is None else reference
        expected = [
            [(i == j) * stat[i] ** 2 + scale[i] * by[i] * scale[j] * by[j] for j in range(3)]
            for i in range(3)
        ]
        # a few roundings of numbers of this size
        np.testing.assert_allclose(table.covariance(reference), expected, rtol=1e-14, atol=1e-20)


def test_additive_errors_do_not_follow_the_reference(make):
    table = make()
    np.testing.assert_array_equal(table.covariance([7.0, 8.0, 9.0]), table.covariance())


def test_a_name_that_is_shared_is_one_source_in_all_tables(make):
    luminosity = {"name": "lumi", "size": 2.0, "shared_as": "luminosity", **PERCENT}
    stat = {"column": "stat", "given_in": "value", "scales_with": "nothing"}
    own = {"name": "own", "size": 1.0, "correlated": True, **PERCENT}
    both = Measurements.join(
        [
            make(title="A", uncertainty=[stat, luminosity, own]),
            make(title="B", uncertainty=[stat, luminosity, own]),
        ]
    )
    assert both.names_of_sources == ("luminosity", "A: own", "B: own")
    value = np.array([1.0, 2.0, 4.0] * 2)
    table = np.array([0, 0, 0, 1, 1, 1])
    expected = np.diag(np.array([0.1, 0.2, 0.3] * 2) ** 2)
    expected += np.outer(0.02 * value, 0.02 * value)
    expected += np.where(table[:, None] == table, np.outer(0.01 * value, 0.01 * value), 0.0)
    np.testing.assert_allclose(both.covariance(), expected, rtol=1e-14)
    assert both.table_of.tolist() == table.tolist()


def test_two_columns_of_one_source_add_up_with_their_signs(make):
    parts = [
        {"name": "a", "size": 0.3, "given_in": "value", "scales_with": "nothing", "shared_as": "k"},
        {"name": "b", "size": -10.0, "shared_as": "k", **PERCENT},
        {"column": "stat", "given_in": "value", "scales_with": "nothing"},
    ]
    _, shifts = make(uncertainty=parts).nuisance()
    np.testing.assert_allclose(shifts[:, 0], [0.3 - 0.1, 0.3 - 0.2, 0.3 - 0.4], rtol=1e-14)


def test_nuisance_parameters_have_the_covariance(make):
    matrix = [[1.0, 0.4, 0.1], [0.4, 1.0, 0.3], [0.1, 0.3, 1.0]]
    table = make(
        {"other": [0.5, 0.4, 0.2]}, [matrix],
        uncertainty=[{"column": "stat", "given_in": "value", "scales_with": "nothing"},
                     {"column": "other", "given_in": "value", "scales_with": "nothing"},
                     {"name": "lumi", "size": 3.0, "correlated": True, **PERCENT}],
        covariance=[{"kind": "correlation", "of": "other"}],
    )  # fmt: skip
    sigma, shifts = table.nuisance([2.0, 3.0, 5.0])
    assert shifts.shape == (3, len(table.names_of_sources))
    rebuilt = np.diag(sigma**2) + shifts @ shifts.T
    np.testing.assert_allclose(rebuilt, table.covariance([2.0, 3.0, 5.0]), rtol=1e-13)  # one eigensystem of 3


@pytest.mark.parametrize(
    ("rule", "size", "offset"),
    # up = +0.4, down = -0.2: mean shift 0.3, half sum 0.1; D'Agostini, physics/0403086: sqrt(0.3^2 + 2 0.1^2)
    [("mean", 0.3, 0.0), ("larger", 0.4, 0.0), ("shifted", np.sqrt(0.11), 0.1)],
)
@pytest.mark.parametrize("down_as", ["shift", "size"])
def test_asymmetric_errors_follow_the_rule_that_is_named(make, rule, size, offset, down_as):
    sign = -1.0 if down_as == "shift" else 1.0
    points = {"up": [0.4] * 3, "down": [sign * 0.2] * 3}
    part = {"up": "up", "down": "down", "asymmetric": rule, "given_in": "value", "scales_with": "nothing"}
    table = make(points, uncertainty=[part | {"down_as": down_as}])
    np.testing.assert_allclose(np.diagonal(table.covariance()), size**2, rtol=1e-14)
    np.testing.assert_allclose(table.value, np.array([1.0, 2.0, 4.0]) + offset, rtol=1e-15)


def test_the_rule_shifted_is_the_mean_and_variance_of_a_parabola(make):
    # physics/0403086: x(b) = x + s b + d b^2 through x - 0.2, x, x + 0.4 at b = -1, 0, 1, b standard normal.
    nodes, weights = np.polynomial.hermite_e.hermegauss(5)  # exact to degree 9
    weights = weights / weights.sum()
    moved = 0.3 * nodes + 0.1 * nodes**2
    mean = weights @ moved
    points = {"up": [0.4] * 3, "down": [-0.2] * 3}
    part = {
        "up": "up",
        "down": "down",
        "asymmetric": "shifted",
        "given_in": "value",
        "scales_with": "nothing",
    }
    table = make(points, uncertainty=[part])
    np.testing.assert_allclose(table.value - [1.0, 2.0, 4.0], mean, rtol=1e-13)
    np.testing.assert_allclose(np.diagonal(table.covariance()), weights @ (moved - mean) ** 2, rtol=1e-13)


def test_signs_survive_in_asymmetric_sources(make):
    points = {"up": [0.4, -0.4, 0.1], "down": [-0.2, 0.2, 0.1]}
    part = {"up": "up", "down": "down", "asymmetric": "mean", "given_in": "value", "scales_with": "nothing"}
    stat = {"column": "stat", "given_in": "value", "scales_with": "nothing"}
    _, shifts = make(points, uncertainty=[part | {"correlated": True}, stat]).nuisance()
    np.testing.assert_allclose(shifts[:, 0], [0.3, -0.3, 0.0], rtol=1e-14)


def test_a_negative_value_turns_its_shift_around(make):
    table = make({"value": [1.0, -2.0, 4.0]}, uncertainty=[
        {"column": "stat", "given_in": "value", "scales_with": "nothing"},
        {"name": "lumi", "size": 10.0, "correlated": True, **PERCENT}])  # fmt: skip
    np.testing.assert_allclose(table.nuisance()[1][:, 0], [0.1, -0.2, 0.4], rtol=1e-14)
