"""Cuts count what they remove and say why."""

import numpy as np
import pytest
from scalewright import InputError, Measurements


def test_each_cut_counts_what_earlier_ones_had_left(make):
    both = Measurements.join([make(title="A"), make(title="B")])
    kept = both.cut(q2=(15.0, None), x=(None, 0.25)).cut(keep=[True, False], reason="noisy channel")
    assert kept.tables == ("A",) and kept.value.tolist() == [2.0]
    assert [str(cut) for cut in kept.cuts] == [
        "x <= 0.25: removed 2 (1 of A, 1 of B)",
        "15 <= q2: removed 2 (1 of A, 1 of B)",
        "noisy channel: removed 1 (1 of B)",
    ]
    assert kept.cuts[2].by_table == {"A": 0, "B": 1}
    assert "noisy channel: removed 1" in kept.describe()


def test_limits_belong_to_what_is_kept(make):
    assert make().cut(x=(0.1, 0.2)).value.tolist() == [1.0, 2.0]
    w2 = make().rows.w2
    assert make().cut(w2=(w2[1], None)).value.tolist() == [1.0, 2.0]  # w2 falls with x here: 91, 81, 71


def test_the_covariance_of_what_is_left_is_a_part_of_the_whole(make):
    matrix = np.array([[1.0, 0.5, 0.25], [0.5, 1.0, 0.5], [0.25, 0.5, 1.0]])
    lumi = {"name": "l", "size": 2.0, "given_in": "percent", "scales_with": "value", "correlated": True}
    stat = {"column": "stat", "given_in": "value", "scales_with": "nothing"}
    table = make(None, [matrix], uncertainty=[stat, lumi], covariance=[{"kind": "correlation", "of": "stat"}])
    kept = table.cut(keep=[True, False, True])
    np.testing.assert_array_equal(kept.covariance(), table.covariance()[np.ix_([0, 2], [0, 2])])


@pytest.mark.parametrize("repair", ["clip", "nearest"])
@pytest.mark.parametrize("kind", ["correlation", "covariance"])
def test_what_a_repair_did_before_a_cut_stays_done(make, repair, kind, tmp_path):
    # without the third datum the matrix as printed would need no repair
    broken = np.array([[1.0, 0.9, -0.9], [0.9, 1.0, 0.9], [-0.9, 0.9, 1.0]])
    part = {"kind": kind, "repair": repair}
    part |= {"of": "stat"} if kind == "correlation" else {"given_in": "percent", "scales_with": "value"}
    table = make(None, [broken], covariance=[part])
    kept = table.cut(keep=[True, True, False])
    expected = table.covariance()[:2, :2]
    np.testing.assert_allclose(kept.covariance(), expected, rtol=1e-14)  # a root, and its square again
    said = [line for line in table.describe().splitlines() if "repaired" in line]
    assert said and said == [line for line in kept.describe().splitlines() if "repaired" in line]
    again = kept.with_values([3.0, 5.0])
    assert "repaired" in again.describe()
    kept.write(tmp_path / "kept.toml")
    assert Measurements.read(tmp_path / "kept.toml") == kept


def test_a_cut_that_removes_nothing_still_counts(make):
    kept = make().cut(x=(None, 1.0))
    assert kept == make() and [cut.removed for cut in kept.cuts] == [0]


def test_a_reason_in_the_words_of_a_limit_does_not_undo_the_limit(make):
    kept = make().cut(x=(None, 0.25), keep=[False, True, True], reason="x <= 0.25")
    assert kept.value.tolist() == [2.0] and [cut.removed for cut in kept.cuts] == [2]


@pytest.mark.parametrize(
    ("limits", "message"),
    [
        ({"x": (0.5, None)}, r"nothing left after cuts: 0\.5 <= x: removed 3 \(3 of A\)"),
        ({"x": (None, None)}, r"x = \(None, None\): x must be \(least, most\), one of them may be None"),
        ({"x": (-np.inf, None)}, r"x = \(-inf, None\): x must be \(least, most\)"),
        ({"x": (np.inf, None)}, "x = inf: x must lie in"),
        ({"x": 0.3}, r"x = 0\.3: x must be \(least, most\)"),
        (
            {"q2": (5.0, 1.0)},
            r"q2 = \(5\.0, 1\.0\): q2 must be \(least, most\): the first is above the second",
        ),
        ({"q2": ("a", None)}, "q2 = 'a': q2 must be real numbers, not text"),
        ({"w2": (float("nan"), None)}, r"w2 = nan: w2 must lie in \(-inf, inf\)"),
        ({"y": (None, 0.9)}, "points: line 1: y is not known, so it cannot be cut on"),
        ({"keep": [1, 0, 1]}, "keep must be 3 booleans, one a datum"),
        ({"keep": [True]}, "keep must be 3 booleans, one a datum"),
    ],
)
def test_wrong_cuts_are_refused(make, limits, message):
    with pytest.raises(InputError, match=message):
        make().cut(**limits)
