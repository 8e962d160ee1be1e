"""Pictures of fits: what is drawn is what was asked for; looks were judged by eye, in colour and in grey."""

import numpy as np
import pytest
import scalewright as sw

matplotlib = pytest.importorskip("matplotlib")
matplotlib.use("Agg")
from matplotlib import pyplot as plt  # noqa: E402
from scalewright.plot_fit import (  # noqa: E402
    plot_convergence,
    plot_correlations,
    plot_distribution,
    plot_pulls,
    plot_ratios,
    plot_shifts,
)

GRID = sw.ChebyshevGrid(x_min=1e-3)


@pytest.fixture(autouse=True)
def close():
    yield
    plt.close("all")


def made(replicas, size=1.0, seed=2):
    rng = np.random.default_rng(seed)
    shape = GRID.x**0.5 * (1 - GRID.x) ** 3
    values = size * (1 + 0.1 * rng.normal(size=(replicas, 3, 1))) * shape
    return sw.Densities(GRID, q2=2.0, nf=3, flavours=(21, 2, -2), values=values)


def chi_square():
    stat = {"column": "stat", "given_in": "value", "scales_with": "nothing"}
    other = {"given_in": "value", "scales_with": "nothing", "correlated": True}
    sources = [{"name": "small", "size": 0.01, **other}, {"name": "offset", "size": 0.1, **other}]
    what = {"title": "A", "measures": "F2", "exchange": "photon", "uncertainty": [stat, *sources]}
    points = {"x": [0.1, 0.2, 0.3], "q2": [10.0] * 3, "value": [1.0, 0.8, 0.5], "stat": [0.1, 0.1, 0.2]}
    return sw.ChiSquare(sw.Measurements.from_columns(what, points))


PREDICTION = np.array([0.9, 0.5, 0.6])


def test_ratios_are_to_the_median_of_the_first():
    first, other, x = made(51), made(1, size=1.2), [0.01, 0.1, 0.5]
    ax = plot_ratios({"fit": first, "other": other}, "g", x=x)
    lines = {line.get_label(): line for line in ax.lines}
    centre = np.median(first.at(None, x, "g"), axis=0)
    np.testing.assert_allclose(lines["fit"].get_ydata(), 1.0, rtol=1e-14)
    np.testing.assert_allclose(lines["other"].get_ydata(), other.at(None, x, "g")[0] / centre, rtol=1e-14)
    assert len(ax.collections) == 1  # one replica has no band
    low, high = np.percentile(first.at(None, x, "g") / centre, [15.865, 84.135], axis=0)
    corners = ax.collections[0].get_paths()[0].vertices
    for point, bottom, top in zip(x, low, high, strict=True):
        heights = corners[corners[:, 0] == point, 1]
        np.testing.assert_allclose([heights.min(), heights.max()], [bottom, top], rtol=1e-12)
    assert ax.get_xlabel() == "x" and ax.get_ylabel() == "g / that of fit"


def test_pulls_are_counted():
    ax = plot_pulls(chi_square(), PREDICTION, shifted=False)
    pulls = chi_square().pulls(PREDICTION)
    heights = [patch.get_height() for patch in ax.patches]
    expected, _ = np.histogram(pulls, np.linspace(-5, 5, 31))
    np.testing.assert_array_equal(heights, expected)
    assert f"mean {pulls.mean():+.2f}" in ax.get_title()
    # the curve encloses as many data as there are, bins of a third; trapezoids of a smooth function
    curve = ax.lines[0].get_xydata()
    assert np.trapezoid(curve[:, 1], curve[:, 0]) == pytest.approx(3 / 3, rel=1e-4)


def test_shifts_are_drawn_the_largest_first():
    ax = plot_shifts(chi_square(), PREDICTION)
    shifts = chi_square().shifts(PREDICTION)
    names = [text.get_text() for text in ax.get_yticklabels()]
    assert names == ["A: offset", "A: small"]
    bars = [bar for bar in ax.containers[0]]
    np.testing.assert_allclose([bar.get_width() for bar in bars], shifts[::-1], rtol=1e-14)
    assert len(plot_shifts(chi_square(), PREDICTION, most=1).get_yticklabels()) == 1


def test_areas_are_correlations_and_faces_their_signs():
    ax = plot_correlations([[1.0, -0.25], [-0.25, np.nan]], ["a", "b"])
    sizes = [patch.get_width() for patch in ax.patches]
    np.testing.assert_allclose(np.square(sizes) / sizes[0] ** 2, [1.0, 0.25, 0.25], rtol=1e-12)
    faces = [patch.get_facecolor()[0] for patch in ax.patches]
    assert faces[0] < 1.0 and faces[1] == faces[2] == 1.0
    assert [text.get_text() for text in ax.texts] == ["100", "-25", "-25"]


def test_the_normal_curve_has_the_area_of_the_replicas():
    values = np.random.default_rng(1).normal(0.118, 0.001, 200)
    ax = plot_distribution(values, "alpha_s", best=0.118, error=0.001, truth=0.1185)
    assert sum(patch.get_height() for patch in ax.patches) == 200
    curve, width = ax.lines[0].get_xydata(), ax.patches[0].get_width()
    # four standard deviations enclose all but 6e-5
    assert np.trapezoid(curve[:, 1], curve[:, 0]) == pytest.approx(200 * width, rel=1e-3)
    assert ax.lines[1].get_xdata()[0] == 0.1185 and ax.get_xlabel() == "alpha_s"


def test_convergence_ends_at_mean_and_deviation():
    values = np.random.default_rng(1).normal(3.0, 0.5, 40)
    densities = made(40)
    ensemble = sw.Ensemble(densities, parameters=values[:, None], names=["a"])
    ax = plot_convergence(ensemble, "a")
    mean, high, low = (line.get_ydata()[-1] for line in ax.lines)
    np.testing.assert_allclose(
        [mean, high, low],
        [values.mean(), values.mean() + values.std(ddof=1), values.mean() - values.std(ddof=1)],
        rtol=1e-12,
    )
    assert ax.lines[0].get_xdata()[0] == 2 and ax.get_ylabel() == "a"
    again = plot_convergence(ensemble, values, "b")
    np.testing.assert_array_equal(again.lines[0].get_ydata(), ax.lines[0].get_ydata())


def test_axes_that_are_given_are_drawn_into_and_settings_left_alone():
    before = dict(matplotlib.rcParams)
    _, axes = plt.subplots(1, 3)
    assert plot_ratios({"a": made(3)}, "g", ax=axes[0]) is axes[0]
    assert plot_pulls(chi_square(), PREDICTION, ax=axes[1]) is axes[1]
    assert plot_correlations([[1.0]], ["a"], ax=axes[2]) is axes[2]
    assert dict(matplotlib.rcParams) == before
    assert len(plt.get_fignums()) == 1


@pytest.mark.parametrize(
    ("call", "says"),
    [
        (lambda: plot_ratios({}, "g"), "densities must map at least one label"),
        (lambda: plot_ratios({"a": made(2), "b": 3}, "g"), "densities must be Densities, not int"),
        (lambda: plot_ratios({"a": made(2)}, "w"), "flavour"),
        (lambda: plot_pulls(3, PREDICTION), "chi_square must be a ChiSquare, not int"),
        (lambda: plot_pulls(chi_square(), [1.0]), "prediction"),
        (lambda: plot_shifts(chi_square(), PREDICTION, most=0), "most = 0"),
        (lambda: plot_correlations([[1.0]], ["a", "b"]), "matrix"),
        (lambda: plot_correlations([[2.0]], ["a"]), r"a correlation lies in \[-1, 1\]"),
        (lambda: plot_distribution([], "a"), "at least one replica"),
        (lambda: plot_convergence(3, "a"), "ensemble must be an Ensemble, not int"),
        (lambda: plot_convergence(sw.Ensemble(made(2)), [1.0, 2.0]), "at least three replicas"),
        (lambda: plot_convergence(sw.Ensemble(made(3)), [1.0, 2.0]), "quantity"),
        (lambda: plot_convergence(sw.Ensemble(made(3)), "a"), "no parameter of this name"),
    ],
)
def test_what_cannot_be_drawn_is_named(call, says):
    with pytest.raises(sw.InputError, match=says):
        call()
