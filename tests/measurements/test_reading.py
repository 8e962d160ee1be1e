"""What a description and its points mean."""

import math
import warnings

import numpy as np
import pytest
from measurements.tables import STAT
from scalewright import InputWarning, Measurements
from scalewright._measured.rows import Nucleus

# Particle Data Group: mass of the proton in GeV.
PROTON = 0.93827208816


def test_points_and_attributes_are_those_of_the_file(run):
    table = Measurements.read(run)
    assert table.tables == ("Run 1, positrons",) and len(table) == 3
    assert table.x.tolist() == [0.001, 0.01, 0.1] and table.q2.tolist() == [12.0, 12.0, 120.0]
    assert table.value.tolist() == [1.25, 0.8, 0.5]
    rows = table.rows
    assert rows.measure == ("reduced_cross_section",) * 3 and rows.beam == ("e+",) * 3
    assert rows.exchange == ("photon+Z",) * 3 and rows.target == ("proton",) * 3
    assert rows.tagged == (None,) * 3 and rows.polarisation.tolist() == [0.0, 0.0, 0.0]
    assert table.names_of_sources == ("calorimeter",)


def test_y_follows_from_x_q2_and_s(run):
    expected = [q2 / (x * (101124.0 - PROTON**2)) for x, q2 in ((0.001, 12), (0.01, 12), (0.1, 120))]
    # the same three operations: equal to one unit of rounding
    np.testing.assert_allclose(Measurements.read(run).y, expected, rtol=4e-16)


def test_w2_follows_from_x_and_q2(make):
    expected = [PROTON**2 + q2 * (1 / x - 1) for x, q2 in ((0.1, 10), (0.2, 20), (0.3, 30))]
    np.testing.assert_allclose(make().rows.w2, expected, rtol=1e-15)  # a handful of roundings


def test_q2_may_follow_from_x_y_and_s():
    table = Measurements.from_columns(
        {"title": "A", "measures": "F2", "exchange": "photon", "s": 100.0, "columns": {"y": "y"},
         "uncertainty": [{"name": "all", "size": 1.0, "given_in": "percent", "scales_with": "nothing"}]},
        {"x": [0.1, 0.2], "y": [0.5, 0.25], "value": [1.0, 1.0]},
    )  # fmt: skip
    np.testing.assert_allclose(table.q2, 0.05 * (100.0 - PROTON**2), rtol=1e-15)


def test_each_line_may_have_its_own_attributes(make):
    columns = {"measures": "what", "target": "of", "beam": "beam", "polarisation": "P", "s": "s"}
    points = {
        "what": ["F2", "xF3", "reduced_cross_section"],
        "of": ["proton", "z=26 a=56", "deuteron"],
        "beam": ["e-", "e+", "e-"],
        "P": [0.0, -0.3, 0.4],
        "s": [1e3, 2e3, 3e3],
    }
    rows = make(points, measures=None, exchange=None, columns=columns).rows
    assert rows.measure == tuple(points["what"]) and rows.beam == ("e-", "e+", "e-")
    assert rows.target == ("proton", Nucleus(26, 56), "deuteron")
    assert rows.polarisation.tolist() == [0.0, -0.3, 0.4] and rows.s.tolist() == [1e3, 2e3, 3e3]


def test_a_nucleus_may_stand_in_the_description(make):
    assert make(target={"z": 26, "a": 56}).rows.target == (Nucleus(26, 56),) * 3


def test_a_y_column_within_rounding_is_silent_and_beyond_it_a_warning(make):
    energy = 1000.0 - PROTON**2
    exact = [q2 / (x * energy) for x, q2 in ((0.1, 10.0), (0.2, 20.0), (0.3, 30.0))]
    text = [f"{y:.3f}" for y in exact]
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        table = make({"y": text, "x": ["0.1000", "0.2000", "0.3000"]}, s=1000.0, columns={"y": "y"})
    np.testing.assert_allclose(table.y, exact, rtol=1e-15)
    with pytest.warns(InputWarning, match=r"points: line 1, column y: 0\.103, but x, q2 and s say 0\.100088"):
        make({"y": ["0.103", *text[1:]], "x": ["0.1000", "0.2000", "0.3000"]}, s=1000.0, columns={"y": "y"})


def test_the_report_says_what_was_understood(run):
    report = str(Measurements.read(run))
    for words in ("Run 1, positrons", "3, values from 0.5 to 1.25", "0.001 to 0.1", "photon+Z", "101124",
                  "stat: additive, independent", "energy scale: multiplicative, one source, 'calorimeter'",
                  "unused columns remark"):  # fmt: skip
        assert words in report
    assert repr(Measurements.read(run)) == "Measurements(3 data in 1 table)"


def test_arrays_cannot_be_changed_from_outside(make):
    table = make()
    for array in (table.x, table.q2, table.y, table.value):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 7.0


def test_a_data_frame_is_a_mapping_of_columns():
    class Frame:
        """What the libraries have in common: keys() and [], or to_dict()."""

        def to_dict(self):
            return {"x": (0.1,), "q2": np.array([10]), "value": [1.0], "stat": [np.float32(0.5)]}

    description = {"title": "A", "measures": "F2", "exchange": "photon",
                   "uncertainty": [STAT]}  # fmt: skip
    assert Measurements.from_columns(description, Frame()).covariance().tolist() == [[0.25]]


def test_crlf_and_byte_order_mark_do_not_matter(run):
    plain = Measurements.read(run)
    for path in (run, run.with_suffix(".csv")):
        path.write_bytes(b"\xef\xbb\xbf" + path.read_bytes().replace(b"\n", b"\r\n"))
    assert Measurements.read(run) == plain


def test_y_is_unknown_without_s(make):
    assert all(math.isnan(y) for y in make().y)
