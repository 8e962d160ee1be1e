"""Pseudo-data: additive errors shift, multiplicative ones multiply, negative values stay."""

import numpy as np
import pytest
from scalewright import InputError, Measurements

MANY = 40_000


def everything(make, size=1.0):
    matrix = np.array([[1.0, 0.6, 0.2], [0.6, 1.0, 0.6], [0.2, 0.6, 1.0]])
    percent = {"given_in": "percent", "scales_with": "value"}
    value = {"given_in": "value", "scales_with": "nothing"}
    points = {"stat": size * np.array([0.1, 0.2, 0.3]), "other": size * np.array([3.0, 2.0, 1.0])}
    return make(
        points, [matrix],
        uncertainty=[{"column": "stat", **value}, {"column": "other", **percent},
                     {"name": "lumi", "size": 4.0 * size, "shared_as": "lumi", **percent},
                     {"name": "off", "size": 0.2 * size, "correlated": True, **value},
                     {"name": "own", "size": 2.0 * size, **percent}],
        covariance=[{"kind": "correlation", "of": "other"}],
    )  # fmt: skip


def test_mean_and_covariance_are_those_of_the_model(make):
    table = everything(make, size=0.1)  # small errors: products of two are below the sampling error
    truth = np.array([2.0, 1.0, 3.0])
    drawn = table.pseudo_data(np.random.default_rng(11), truth, replicas=MANY).values
    covariance = table.covariance(truth)
    sigma = np.sqrt(np.diagonal(covariance))
    # 4.5 standard errors: one in 10^5 for each of these few numbers, seed fixed
    assert (np.abs(drawn.mean(axis=0) - truth) < 4.5 * sigma / np.sqrt(MANY)).all()
    error = np.sqrt((np.outer(sigma, sigma) ** 2 + covariance**2) / MANY)
    assert (np.abs(np.cov(drawn.T) - covariance) < 4.5 * error).all()


def test_the_product_of_shift_and_factor_has_its_exact_variance(make):
    # One additive and one multiplicative error, both large: var = (t^2 + a^2)(1 + f^2) - t^2.
    table = make(uncertainty=[
        {"name": "a", "size": 0.5, "given_in": "value", "scales_with": "nothing"},
        {"name": "f", "size": 40.0, "given_in": "percent", "scales_with": "value"}])  # fmt: skip
    truth = np.array([1.0, 2.0, 4.0])
    drawn = table.pseudo_data(np.random.default_rng(12), truth, replicas=MANY).values
    expected = (truth**2 + 0.25) * 1.16 - truth**2
    # its fourth moment is not that of a normal law: the error of a variance is measured from the sample
    squares = (drawn - drawn.mean(axis=0)) ** 2
    error = squares.std(axis=0) / np.sqrt(MANY)
    assert (np.abs(squares.mean(axis=0) - expected) < 4.5 * error).all()


def test_common_sources_move_all_tables_together(make):
    part = {"name": "l", "size": 50.0, "given_in": "percent", "scales_with": "value", "shared_as": "l"}
    both = Measurements.join([make(title="A", uncertainty=[part]), make(title="B", uncertainty=[part])])
    drawn = both.pseudo_data(np.random.default_rng(1)).values
    factor = drawn / both.value
    np.testing.assert_allclose(factor, factor[0], rtol=1e-15)
    assert abs(factor[0] - 1.0) > 1e-3


def test_two_columns_of_one_source_multiply_once(make):
    # 1 + (sum of sizes) b, as the covariance has it: as a product of two factors the mean of
    # pseudo-data was moved by the product of the sizes, here by a quarter
    half = {"size": 50.0, "given_in": "percent", "scales_with": "value", "shared_as": "l"}
    twice = make(uncertainty=[half | {"name": "one"}, half | {"name": "two"}])
    once = make(uncertainty=[half | {"name": "both", "size": 100.0}])
    drawn, same = (table.pseudo_data(np.random.default_rng(1), replicas=5).values for table in (twice, once))
    np.testing.assert_allclose(drawn, same, rtol=1e-14)


def test_negative_values_are_kept_and_counted(make):
    table = make(uncertainty=[{"name": "a", "size": 10.0, "given_in": "value", "scales_with": "nothing"}])
    drawn = table.pseudo_data(np.random.default_rng(3), replicas=200)
    assert drawn.values.shape == (200, 3)
    assert drawn.negative == (drawn.values < 0).sum() > 100


def test_a_generator_in_the_same_state_gives_the_same_values(make):
    table = everything(make)
    first, second = (table.pseudo_data(np.random.default_rng(9)).values for _ in range(2))
    np.testing.assert_array_equal(first, second)
    assert first.shape == (3,)


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ({"rng": 7}, "rng = 7: rng must be a numpy.random.Generator"),
        ({"truth": [1.0]}, r"the shape of truth must be \(3\)"),
        ({"truth": [1.0, 2.0, float("nan")]}, "truth = nan at index 2: truth must be finite"),
        ({"replicas": 0}, "replicas = 0: replicas must be from 1 to 1000000000"),
    ],
)
def test_wrong_arguments_are_refused(make, arguments, message):
    with pytest.raises(InputError, match=message):
        make().pseudo_data(**{"rng": np.random.default_rng(1)} | arguments)
