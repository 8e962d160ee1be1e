"""What is written reads back as the same measurements, to the last bit and the last letter."""

import pickle
import tomllib

import numpy as np
import pytest
from measurements.tables import DESCRIPTION, POINTS, RATIO
from scalewright import InputError, Measurements, StoreError
from scalewright.files.toml_text import toml_text

PERCENT = {"given_in": "percent", "scales_with": "value"}
VALUE = {"given_in": "value", "scales_with": "nothing"}


def same(a, b):
    """Say whether two measurements agree in everything that a fit sees, bit by bit."""
    assert a == b
    assert a.tables == b.tables and a.names_of_sources == b.names_of_sources
    for name in ("x", "q2", "y", "value", "table_of"):
        np.testing.assert_array_equal(getattr(a, name), getattr(b, name))
    np.testing.assert_array_equal(a.covariance(), b.covariance())
    np.testing.assert_array_equal(a.covariance(2.0 * a.value), b.covariance(2.0 * b.value))


def test_a_file_comes_back_with_every_letter(run, tmp_path):
    table = Measurements.read(run)
    (tmp_path / "new").mkdir()
    table.write(tmp_path / "new" / "copy.toml")
    assert (tmp_path / "new" / "copy.csv").read_text() == run.with_suffix(".csv").read_text()
    old, new = tomllib.loads(run.read_text()), tomllib.loads((tmp_path / "new" / "copy.toml").read_text())
    assert new == old | {"points": "copy.csv"}
    same(Measurements.read(tmp_path / "new" / "copy.toml"), table)


def test_writing_twice_gives_equal_bytes(run, tmp_path):
    table = Measurements.read(run)
    table.write(tmp_path / "copy.toml")
    first = [(tmp_path / f"copy.{end}").read_bytes() for end in ("toml", "csv")]
    Measurements.read(tmp_path / "copy.toml").write(tmp_path / "copy.toml")
    assert [(tmp_path / f"copy.{end}").read_bytes() for end in ("toml", "csv")] == first


def test_random_tables_with_everything_come_back(make, tmp_path):
    rng = np.random.default_rng(4)
    for trial in range(20):
        matrix = rng.normal(size=(3, 3)) / 10
        points = {name: rng.normal(size=3) for name in ("value", "a", "up", "stat")}
        points |= {"down": -points["up"], "x": rng.uniform(0, 1, 3), "q2": np.exp(rng.normal(size=3))}
        kind = {
            "given_in": ["value", "percent"][trial % 2],
            "scales_with": ["nothing", "value"][trial // 2 % 2],
        }
        table = make(
            points, [matrix @ matrix.T, np.eye(3)], target={"z": 26, "a": 56}, note='a "quoted"\nline \\ é',
            uncertainty=[
                {"column": "stat", **kind},
                {"column": "a", "shared_as": "k", **kind},
                {"name": "s", "up": "up", "down": "down", "asymmetric": "shifted", **kind},
                {"name": "lumi", "size": 1.5, "correlated": True, **PERCENT}],
            covariance=[{"kind": "covariance", **kind}, {"kind": "correlation", "of": "stat"}],
            combination=RATIO if trial % 3 == 0 else None,
        )  # fmt: skip
        table.write(tmp_path / "t.toml")
        same(Measurements.read(tmp_path / "t.toml"), table)


def test_several_tables_go_to_several_files(make, run, tmp_path):
    both = Measurements.join([make(), Measurements.read(run)])
    both.write(tmp_path / "all.toml")
    assert {p.name for p in tmp_path.glob("all*")} == {
        "all.toml", "all-1.toml", "all-1.csv", "all-2.toml", "all-2.csv"
    }  # fmt: skip
    same(Measurements.read(tmp_path / "all.toml"), both)


def test_rows_without_value_come_back(tmp_path):
    (tmp_path / "bins.csv").write_text(POINTS)
    (tmp_path / "bins.toml").write_text(DESCRIPTION)
    table = Measurements.read(tmp_path / "bins.toml")
    for some in (table, table.cut(keep=[True, False, True])):
        some.write(tmp_path / "copy.toml")
        back = Measurements.read(tmp_path / "copy.toml")
        same(back, some)
        np.testing.assert_array_equal(back.data.predict(back.rows.x), some.data.predict(some.rows.x))


def test_other_values_keep_the_errors_they_should(make, tmp_path):
    matrix = np.array([[0.04, 0.01, 0.0], [0.01, 0.09, 0.02], [0.0, 0.02, 0.25]])
    table = make(
        {"up": [0.4] * 3, "down": [-0.2] * 3}, [matrix],
        uncertainty=[
            {"column": "stat", "given_in": "percent", "scales_with": "nothing"},
            {"name": "v", "column": "stat", "given_in": "value", "scales_with": "value", "shared_as": "k"},
            {"up": "up", "down": "down", "asymmetric": "shifted", **VALUE},
            {"name": "lumi", "size": 3.0, "given_in": "percent", "scales_with": "value", "correlated": True}],
        covariance=[{"kind": "covariance", "given_in": "percent", "scales_with": "nothing"}],
    )  # fmt: skip
    values = np.array([3.0, -1.0, 0.0])
    other = table.with_values(values)
    np.testing.assert_array_equal(other.value, values)
    assert other.names_of_sources == table.names_of_sources
    # percents are written anew: one rounding there and one back
    np.testing.assert_allclose(other.covariance(), table.covariance(values), rtol=1e-14, atol=1e-18)
    np.testing.assert_allclose(
        other.covariance([1, 2, 3]), table.covariance([1, 2, 3]), rtol=1e-14, atol=1e-18
    )
    other.write(tmp_path / "o.toml")
    same(Measurements.read(tmp_path / "o.toml"), other)


def test_pickled_measurements_are_the_same(run):
    table = Measurements.read(run)
    same(pickle.loads(pickle.dumps(table)), table)


def test_a_folder_that_is_not_there_is_a_store_error(make, tmp_path):
    with pytest.raises(StoreError, match="cannot be written"):
        make().write(tmp_path / "no" / "a.toml")


@pytest.mark.parametrize(
    "values",
    [
        {"a": 1, "b": 2.5, "c": "x\ty\x7f\u00e9\n", "d": True, "e": [1, 2], "f": {"g": {"h": 1e-300}}},
        {"odd key": [{"a": 1, "b": {"z": 1}}, {"a": 2, "c": [[1], [{"q": 1}]]}], "e": []},
        {"a.b": {'say "x"': 5e-324, "": -0.0}},
    ],
)
def test_toml_reads_back(values):
    assert tomllib.loads(toml_text(values)) == values


@pytest.mark.parametrize("value", [None, float("nan"), float("inf"), object(), {"a": None}])
def test_what_toml_cannot_say_is_refused(value):
    with pytest.raises(InputError, match="has no form in TOML"):
        toml_text({"a": value})
