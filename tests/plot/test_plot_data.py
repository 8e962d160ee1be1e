"""Pictures of data beside predictions: what is drawn is what was asked for; looks were judged by eye."""

import numpy as np
import pytest
import scalewright as sw

matplotlib = pytest.importorskip("matplotlib")
matplotlib.use("Agg")
from matplotlib import pyplot as plt  # noqa: E402
from scalewright.plot_data import data_picture, plot_data, plot_ratio  # noqa: E402

DESCRIPTION = {
    "measures": "F2",
    "exchange": "photon",
    "uncertainty": [
        {"column": "stat", "given_in": "value", "scales_with": "nothing"},
        {"name": "offset", "size": 0.1, "given_in": "value", "scales_with": "nothing", "correlated": True},
    ],
}
PREDICTION = np.array([0.9, 0.5, 1.1, 0.6, 0.2, 2.0])


@pytest.fixture(autouse=True)
def close():
    yield
    plt.close("all")


@pytest.fixture
def measured():
    points = {
        "x": [0.1, 0.01, 0.1, 0.01, 0.3],
        "q2": [10.0, 10.0, 20.0, 20.0, 20.0],
        "value": [1, 2, 3, 4, 5],
    }
    first = sw.Measurements.from_columns(
        DESCRIPTION | {"title": "A"}, points | {"stat": [0.1, 0.2, 0.3, 0.4, 0.5]}
    )
    other = {"x": [0.5], "q2": [30.0], "value": [7.0], "stat": [0.1]}
    return sw.Measurements.join([first, sw.Measurements.from_columns(DESCRIPTION | {"title": "B"}, other)])


def test_every_bin_is_moved_up_by_its_power(measured):
    ax = plot_data(measured, PREDICTION, step=10.0)
    points = [container.lines[0].get_xydata() for container in ax.containers]
    np.testing.assert_allclose(points[0], [[0.01, 4.0], [0.1, 3.0], [0.3, 5.0]], rtol=1e-15)
    np.testing.assert_allclose(points[1], [[0.01, 20.0], [0.1, 10.0]], rtol=1e-15)
    lines = [line.get_xydata() for line in ax.lines if line.get_color() == "0.55"]
    np.testing.assert_allclose(lines[1], [[0.01, 5.0], [0.1, 9.0]], rtol=1e-15)
    assert [text.get_text().split()[0] for text in ax.texts] == ["20", "10"]
    assert ax.get_xlabel() == "x" and ax.get_ylabel() == "F2"


def test_bars_are_the_whole_uncertainty(measured):
    bars = plot_data(measured, table="B").containers[0].lines[2][0].get_segments()[0]
    np.testing.assert_allclose(bars[:, 1], 7.0 + np.hypot(0.1, 0.1) * np.array([-1, 1]), rtol=1e-14)


def test_ratios_as_measured_and_after_the_shifts(measured):
    ax = plot_ratio(measured, PREDICTION, q2=10.0)
    open_points, full = (container.lines[0].get_xydata() for container in ax.containers)
    np.testing.assert_allclose(open_points, [[0.01, 2.0 / 0.5], [0.1, 1.0 / 0.9]], rtol=1e-15)
    # one offset b of 0.1 for all of A: minimum of sum ((r - 0.1 b)/sigma)^2 + b^2, solved by hand
    r, sigma = measured.value[:5] - PREDICTION[:5], np.arange(1, 6) / 10.0
    b = (0.1 * r / sigma**2).sum() / (1.0 + (0.01 / sigma**2).sum())
    np.testing.assert_allclose(full[:, 1], (np.array([2.0, 1.0]) - 0.1 * b) / [0.5, 0.9], rtol=1e-12)
    own = ax.containers[1].lines[2][0].get_segments()[0]
    np.testing.assert_allclose(np.ptp(own[:, 1]), 2 * 0.2 / 0.5, rtol=1e-12)


def test_axes_that_are_given_are_drawn_into(measured):
    _, ax = plt.subplots()
    assert plot_data(measured, ax=ax) is ax
    assert plot_ratio(measured, PREDICTION, q2=20.0, ax=ax) is ax


def test_the_picture_is_a_png_without_a_window(measured, tmp_path):
    data_picture(measured, PREDICTION, tmp_path / "a.png")
    assert (tmp_path / "a.png").read_bytes().startswith(b"\x89PNG\r\n\x1a\n")
    assert plt.get_fignums() == []


@pytest.mark.parametrize(
    ("function", "options", "says"),
    [
        (plot_data, {"table": "C"}, 'table = \'C\': table must be one of "A", "B"'),
        (plot_data, {"table": 2}, "table = 2: table must be from 0 to 1"),
        (plot_data, {"step": 0.0}, r"step = 0: step must lie in \(0, inf\)"),
        (plot_data, {"prediction": [1.0]}, "prediction"),
        (plot_data, {"ax": 3}, "ax must be matplotlib axes, not int"),
        (plot_ratio, {"prediction": PREDICTION, "q2": 11.0}, "q2 = 11: the table has 10, 20 GeV"),
        (plot_ratio, {"prediction": 0 * PREDICTION, "q2": 10.0}, "prediction must not be 0"),
        (plot_ratio, {"prediction": PREDICTION, "q2": -1.0}, "q2 = -1: q2 must lie in"),
    ],
)
def test_what_cannot_be_drawn_is_named(measured, function, options, says):
    with pytest.raises(sw.InputError, match=says):
        function(measured, **options)


def test_what_is_not_measurements_is_named():
    with pytest.raises(sw.InputError, match="measurements must be Measurements, not int"):
        plot_data(3)
