"""Data that are sums, averages, ratios and asymmetries of rows."""

import numpy as np
import pytest
from measurements.tables import DESCRIPTION, POINTS, RATIO
from scalewright import InputError, Measurements
from scalewright._measured.combination import Combination


@pytest.fixture
def bins(tmp_path):
    (tmp_path / "bins.csv").write_text(POINTS)
    (tmp_path / "bins.toml").write_text(DESCRIPTION)
    return tmp_path / "bins.toml"


def test_a_ratio_of_targets_is_two_rows_a_line(make):
    table = make(combination=RATIO)
    assert len(table) == 3 and len(table.rows) == 6
    assert table.rows.target == ("deuteron", "proton") * 3
    assert table.rows.x.tolist() == [0.1, 0.1, 0.2, 0.2, 0.3, 0.3]
    np.testing.assert_array_equal(table.data.predict([2.0, 4.0, 3.0, 2.0, 5.0, 5.0]), [0.5, 1.5, 1.0])
    assert "6 rows, ratios" in table.describe()


def test_lines_can_be_rows_data_or_both(bins):
    table = Measurements.read(bins)
    assert table.value.tolist() == [0.9, 0.5, 1.8]
    assert table.x.tolist() == [0.15, 0.3, 0.3]
    assert table.rows.x.tolist() == [0.1, 0.2, 0.3]
    np.testing.assert_allclose(table.data.predict([1.0, 2.0, 4.0]), [1.75, 4.0, 0.25], rtol=1e-15)


def test_what_a_datum_rests_on_survives_a_cut(bins):
    table = Measurements.read(bins)
    kept = table.cut(keep=[False, False, True])
    assert kept.value.tolist() == [1.8] and kept.rows.x.tolist() == [0.1, 0.3]
    np.testing.assert_allclose(kept.data.predict([1.0, 4.0]), [0.25], rtol=1e-15)
    # a datum goes when one of its rows does: "bin" has a row at 0.2, "over" one at 0.3
    assert table.cut(x=(None, 0.25)).value.tolist() == [0.9]


def test_predictions_of_many_replicas_are_combined_at_once(bins):
    data = Measurements.read(bins).data
    rows = np.random.default_rng(1).uniform(1, 2, (4, 5, 3))
    result = data.predict(rows)
    assert result.shape == (4, 5, 3)
    for index in np.ndindex(4, 5):
        np.testing.assert_array_equal(result[index], data.predict(rows[index]))


def test_the_derivative_is_exact(make):
    # Against complex steps, good to rounding: d/dr of a linear form over a linear form.
    rng = np.random.default_rng(2)
    top, bottom = rng.normal(size=(4, 6)), rng.uniform(0.5, 1.0, size=(4, 6))
    bottom[2] = 0.0
    sums = [[(r, float(w)) for r, w in enumerate(row)] for row in top]
    under = [[(r, float(w)) for r, w in enumerate(row)] if row.any() else [] for row in bottom]
    data = Combination(sums, under, 6)
    rows = rng.uniform(1, 2, 6)
    expected = np.empty((4, 6))
    for r in range(6):
        moved = rows + 1e-30j * (np.arange(6) == r)
        divisor = np.where(bottom.any(axis=1), bottom @ moved, 1.0)
        expected[:, r] = (top @ moved / divisor).imag / 1e-30
    np.testing.assert_allclose(data.derivative(rows), expected, rtol=1e-12, atol=1e-14)
    directions = rng.normal(size=(6, 3, 2))
    along = np.einsum("dr,rab->dab", expected, directions)
    np.testing.assert_allclose(data.tangent(rows, directions), along, rtol=1e-11, atol=1e-13)


def test_plain_tables_pass_rows_on(make):
    data = make().data
    assert data.is_identity and data.is_linear
    rows = np.array([1.0, 2.0, 3.0])
    assert data.predict(rows) is rows
    np.testing.assert_array_equal(data.derivative(rows), np.eye(3))


def test_tables_are_joined_with_their_rows(make, bins):
    both = Measurements.join([make(combination=RATIO), Measurements.read(bins)])
    result = both.data.predict([2.0, 4.0, 3.0, 2.0, 5.0, 5.0, 1.0, 2.0, 4.0])
    np.testing.assert_allclose(result, [0.5, 1.5, 1.0, 1.75, 4.0, 0.25], rtol=1e-15)


def test_a_vanishing_denominator_is_refused(make):
    data = make(combination=RATIO).data
    with pytest.raises(
        InputError, match=r"denominator = 0 at index 1: the denominator of a datum must not be 0"
    ):
        data.predict([1.0, 1.0, 1.0, 0.0, 1.0, 1.0])
    with pytest.raises(InputError, match="the last axis must have 6 rows"):
        data.predict([1.0, 2.0])
    with pytest.raises(InputError, match="both must begin with the 6 rows"):
        data.tangent(np.ones(6), np.ones((5, 2)))
