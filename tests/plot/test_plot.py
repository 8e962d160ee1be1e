"""Pictures: what is drawn is what was asked for; how it looks was looked at by eye."""

import numpy as np
import pytest
import scalewright as sw

matplotlib = pytest.importorskip("matplotlib")
matplotlib.use("Agg")
from matplotlib import pyplot as plt  # noqa: E402
from scalewright.plot import plot_against_q2, plot_densities  # noqa: E402


@pytest.fixture(autouse=True)
def close():
    yield
    plt.close("all")


@pytest.fixture(scope="module")
def grid():
    return sw.ChebyshevGrid(x_min=1e-4)


def made(grid, replicas, scales=None):
    rng = np.random.default_rng(2)
    shape = grid.x**0.5 * (1 - grid.x) ** 3
    lead = (replicas,) if scales is None else (len(scales), replicas)
    values = (1 + 0.1 * rng.normal(size=(*lead, 3, 1))) * shape
    q2, nf = (2.0, 3) if scales is None else (scales, [3] * len(scales))
    return sw.Densities(grid, q2=q2, nf=nf, flavours=(21, 2, -2), values=values)


def test_median_and_interval_are_drawn(grid):
    densities = made(grid, 101)
    x = [1e-3, 0.01, 0.1, 0.5]
    ax = plot_densities(densities, ["g", "u_v"], x=x, interval=90.0, scale_by=[0.5, 1.0])
    line, band = ax.lines[0], ax.collections[0]
    values = 0.5 * densities.at(2.0, x, "g")
    np.testing.assert_array_equal(line.get_xdata(), x)
    np.testing.assert_allclose(line.get_ydata(), np.median(values, axis=0), rtol=1e-13)
    corners = band.get_paths()[0].vertices
    low, high = np.percentile(values, [5, 95], axis=0)
    for point, bottom, top in zip(x, low, high, strict=True):
        heights = corners[corners[:, 0] == point, 1]
        np.testing.assert_allclose([heights.min(), heights.max()], [bottom, top], rtol=1e-12)
    assert [text.get_text() for text in ax.get_legend().get_texts()] == ["0.5 g", "u_v"]


def test_one_replica_has_no_band(grid):
    ax = plot_densities(made(grid, 1), [21, 2])
    assert len(ax.collections) == 0
    assert [line.get_label() for line in ax.lines] == ["g", "u"]
    assert ax.get_xlim() == (grid.x_min, 1.0)


def test_axes_of_ones_own_are_used_and_settings_are_left_alone(grid):
    before = dict(matplotlib.rcParams)
    figure, axes = plt.subplots(1, 2)
    assert plot_densities(made(grid, 3), ["g"], ax=axes[1]) is axes[1]
    assert plot_against_q2(made(grid, 3, [2.0, 3.0]), "g", [0.1], ax=axes[0]) is axes[0]
    assert dict(matplotlib.rcParams) == before
    assert len(plt.get_fignums()) == 1
    figure.canvas.draw()


def test_curves_against_the_scale_rise_in_q2(grid):
    densities = made(grid, 5, [100.0, 2.0, 10.0])
    ax = plot_against_q2(densities, "g", [0.1, 0.3])
    np.testing.assert_array_equal(ax.lines[0].get_xdata(), [2.0, 10.0, 100.0])
    expected = np.median(densities.at([2.0, 10.0, 100.0], 0.1, "g"), axis=1)
    np.testing.assert_allclose(ax.lines[0].get_ydata(), expected, rtol=1e-13)


@pytest.mark.parametrize(
    ("options", "error", "says"),
    [
        ({"flavours": ["w"]}, sw.InputError, "flavour"),
        ({"flavours": []}, sw.InputError, "flavours must be a list of at least one flavour"),
        ({"flavours": "u_v"}, sw.InputError, "flavours must be a list of at least one flavour"),
        ({"flavours": ["g"], "scale_by": [1, 2]}, sw.InputError, "scale_by must be one number or 1 of them"),
        ({"flavours": ["g"], "interval": 0}, sw.InputError, r"interval = 0: interval must lie in \(0, 100\]"),
        ({"flavours": ["g"], "q2": 3.0}, sw.RangeError, "q2 = 3: not among the scales at hand"),
        ({"flavours": ["g"], "x": [1e-6]}, sw.RangeError, "x = 1e-06 at index 0"),
        ({"flavours": ["g"], "ax": 3}, sw.InputError, "ax must be matplotlib axes, not int"),
    ],
)
def test_what_cannot_be_drawn_is_named(grid, options, error, says):
    with pytest.raises(error, match=says):
        plot_densities(made(grid, 2), **options)


def test_what_is_not_densities_is_named():
    with pytest.raises(sw.InputError, match="densities must be Densities, not int"):
        plot_densities(3)
    with pytest.raises(sw.InputError, match="densities must be Densities, not int"):
        plot_against_q2(3, "g", [0.1])
