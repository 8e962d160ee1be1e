"""Pictures of fits: ratios, pulls, shifts, correlations, distributions, convergence with replicas.

As in `plot`, every function draws into the axes it is given, or makes new ones, and returns them; no setting
of matplotlib is changed. Nothing is told by colour alone: filled and open, full and broken, light and dark.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import ArrayLike

from . import _check
from ._check import Floats, refuse
from .densities import Densities
from .fitting.chi_square import ChiSquare
from .fitting.ensemble import Ensemble
from .plot import COLOURS, LINES, check_densities, curve_points, new_axes, show_number

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = [
    "plot_convergence",
    "plot_correlations",
    "plot_distribution",
    "plot_pulls",
    "plot_ratios",
    "plot_shifts",
]

_GREY, _DARK = "0.6", "0.15"
_ONE_SIGMA = (15.865, 84.135)
#: Numbers are written into a matrix of at most so many rows.
_WRITTEN = 16


def plot_ratios(
    densities: Mapping[str, Densities],
    flavour: int | str,
    *,
    q2: float | None = None,
    x: ArrayLike | None = None,
    ax: Axes | None = None,
) -> Axes:
    """Draw x f(x) of several sets over the median of the first, with their 68 per cent bands.

    Parameters
    ----------
    densities : mapping
        Label -> Densities, of one replica or many.
    flavour : int or str
        PDG number or name of a combination.
    q2 : float, optional
        Scale in GeV^2; needed where there are several.
    x : array_like, optional
        Points; by default 300 from x_min to 0.9, where densities are not yet tiny.
    ax : matplotlib axes, optional
        Where to draw.

    Returns
    -------
    matplotlib axes

    Raises
    ------
    InputError, RangeError
        As `Densities.at`; or if there are no densities.
    ImportError
        If matplotlib is not installed.
    """
    if not isinstance(densities, Mapping) or not densities:
        refuse("densities", densities, "densities must map at least one label to Densities")
    ax, first = new_axes(ax), next(iter(densities.values()))
    points = curve_points(first, x)
    points = points if x is not None else points[points <= 0.9]
    centre = np.median(first.at(q2, points, flavour), axis=0)
    scale = np.where(centre != 0.0, centre, np.nan)
    for place, (label, one) in enumerate(densities.items()):
        check_densities(one)
        values = one.at(q2, points, flavour) / scale
        colour, line = COLOURS[place % len(COLOURS)], LINES[place % len(LINES)]
        if one.replicas > 1:
            low, high = np.percentile(values, _ONE_SIGMA, axis=0)
            ax.fill_between(points, low, high, color=colour, alpha=0.25, linewidth=0.0)
            for side in (low, high):  # seen in grey, and where bands overlap
                ax.plot(points, side, color=colour, linestyle=line, linewidth=0.6)
        ax.plot(points, np.median(values, axis=0), color=colour, linestyle=line, label=label)
    _limit_ratio(ax, first.at(q2, points, flavour) / scale)
    ax.set_xscale("log")
    ax.set_xlim(points.min(), points.max())
    ax.set_xlabel("x")
    ax.set_ylabel(f"{flavour} / that of {next(iter(densities))}")
    if q2 is not None:
        ax.set_title(f"{show_number(q2)} GeV$^2$")
    ax.legend(frameon=False)
    return ax


def _limit_ratio(ax: Any, ratio: Floats) -> None:
    """Keep the ratio in sight where a density crosses 0 or is hardly known."""
    spread = np.nanmedian(np.nanstd(ratio, axis=0)) if len(ratio) > 1 else 0.05
    reach = float(np.clip(6.0 * spread, 0.05, 1.5))
    ax.set_ylim(1.0 - reach, 1.0 + reach)


def plot_pulls(
    chi_square: ChiSquare, prediction: ArrayLike, *, shifted: bool = True, ax: Axes | None = None
) -> Axes:
    """Draw how often data lie how far from the prediction, beside the normal distribution.

    Parameters
    ----------
    chi_square : ChiSquare
    prediction : array_like, (datum,)
    shifted : bool
        Whether common sources are first moved to their best fit; see `ChiSquare.pulls`.
    ax : matplotlib axes, optional
        Where to draw.

    Returns
    -------
    matplotlib axes

    Raises
    ------
    InputError
        If there is not one finite number a datum.
    ImportError
        If matplotlib is not installed.
    """
    _chi_square(chi_square)
    ax, pulls = new_axes(ax), np.ravel(chi_square.pulls(prediction, shifted=shifted))
    pulls = pulls[np.isfinite(pulls)]
    edges = np.linspace(-5.0, 5.0, 31)
    shown = np.clip(pulls, edges[0], edges[-1])
    ax.hist(shown, edges.tolist(), color="0.8", edgecolor=_DARK, linewidth=0.6, label=f"{pulls.size} data")
    fine = np.linspace(-5.0, 5.0, 201)
    normal = pulls.size * (edges[1] - edges[0]) * np.exp(-0.5 * fine**2) / np.sqrt(2.0 * np.pi)
    ax.plot(fine, normal, color="black", linestyle="--", label="normal distribution")
    beyond = int((abs(pulls) > 5.0).sum())
    said = f"mean {pulls.mean():+.2f}, deviation {pulls.std():.2f}" if pulls.size else "no data"
    ax.set_title(said + (f"; {beyond} beyond 5" if beyond else ""))
    what = "after the best-fit shifts" if shifted else "as measured"
    ax.set_xlabel(f"(data - prediction) / uncertainty, {what}")
    ax.set_ylabel("data per bin")
    ax.legend(frameon=False)
    return ax


def plot_shifts(
    chi_square: ChiSquare, prediction: ArrayLike, *, most: int = 20, ax: Axes | None = None
) -> Axes:
    """Draw the best fit of the common sources of uncertainty, the largest first.

    Parameters
    ----------
    chi_square : ChiSquare
    prediction : array_like, (datum,)
    most : int
        How many are shown.
    ax : matplotlib axes, optional
        Where to draw.

    Returns
    -------
    matplotlib axes

    Raises
    ------
    InputError
        If there is not one finite number a datum.
    ImportError
        If matplotlib is not installed.
    """
    _chi_square(chi_square)
    ax, shifts = new_axes(ax), np.ravel(chi_square.shifts(prediction))
    order = np.argsort(-abs(shifts), kind="stable")[: _check.whole("most", most, least=1)]
    names = [chi_square.names_of_sources[k] for k in order]
    places = np.arange(len(names))
    ax.axvspan(-1.0, 1.0, color="0.9", zorder=0)
    ax.axvline(0.0, color=_GREY, linewidth=0.8, zorder=1)
    ax.barh(places, shifts[order], height=0.6, color="0.5", edgecolor=_DARK, zorder=2)
    ax.set_yticks(places, names)
    ax.invert_yaxis()
    reach = max(2.0, 1.15 * float(abs(shifts).max())) if shifts.size else 2.0
    ax.set_xlim(-reach, reach)
    ax.set_xlabel("best-fit shift (standard deviations)")
    return ax


def plot_correlations(matrix: ArrayLike, names: Sequence[str], *, ax: Axes | None = None) -> Axes:
    """Draw a matrix of correlations: squares as large as they are, full above 0 and open below.

    Parameters
    ----------
    matrix : array_like, (quantity, quantity)
        Correlations, nan where there is none.
    names : sequence of str
    ax : matplotlib axes, optional
        Where to draw.

    Returns
    -------
    matplotlib axes

    Raises
    ------
    InputError
        If the matrix is not square or has entries outside [-1, 1].
    ImportError
        If matplotlib is not installed.
    """
    ax, labels = new_axes(ax), list(names)
    array = _check.real_array("matrix", matrix, shape=(len(labels), len(labels)), unknown=True)
    _check.refuse_where("matrix", array, abs(array) > 1.0 + 1e-9, "a correlation lies in [-1, 1]")
    from matplotlib.patches import Rectangle

    for row, column in np.ndindex(array.shape):
        value = array[row, column]
        if np.isnan(value):
            continue
        side = 0.92 * float(np.sqrt(abs(value)))
        face = "0.75" if value > 0.0 else "white"
        corner = (column - 0.5 * side, row - 0.5 * side)
        ax.add_patch(Rectangle(corner, side, side, facecolor=face, edgecolor=_DARK, linewidth=0.6))
        if len(labels) <= _WRITTEN:
            ax.text(column, row, f"{100 * value:.0f}", ha="center", va="center", fontsize=7)
    ax.set_xticks(range(len(labels)), labels, rotation=90)
    ax.set_yticks(range(len(labels)), labels)
    ax.set_xlim(-0.5, len(labels) - 0.5)
    ax.set_ylim(len(labels) - 0.5, -0.5)
    ax.set_aspect("equal")
    ax.set_title("correlations in per cent: grey above 0, white below", fontsize=10)
    return ax


def plot_distribution(
    values: ArrayLike,
    label: str,
    *,
    best: float | None = None,
    error: float | None = None,
    truth: float | None = None,
    ax: Axes | None = None,
) -> Axes:
    """Draw the values of a quantity over the replicas, beside the best fit and its uncertainty.

    Parameters
    ----------
    values : array_like, (replica,)
    label : str
        The quantity, with its unit.
    best, error : float, optional
        Of the fit to the data; drawn as a normal distribution.
    truth : float, optional
        Where it is known, as in a closure test.
    ax : matplotlib axes, optional
        Where to draw.

    Returns
    -------
    matplotlib axes

    Raises
    ------
    InputError
        If there are no values, or one is not finite.
    ImportError
        If matplotlib is not installed.
    """
    ax, array = new_axes(ax), _check.real_array("values", values, ndim=1)
    if not array.size:
        refuse("values", values, "there must be at least one replica")
    counts, edges, _ = ax.hist(
        array, max(6, int(np.sqrt(2.0 * array.size))), color="0.8", edgecolor=_DARK, linewidth=0.6,
        label=f"{array.size} replicas",
    )  # fmt: skip
    if best is not None and error is not None and error > 0.0:
        fine = np.linspace(best - 4.0 * error, best + 4.0 * error, 201)
        area = array.size * (edges[1] - edges[0])
        shape = np.exp(-0.5 * ((fine - best) / error) ** 2) / (np.sqrt(2.0 * np.pi) * error)
        ax.plot(fine, area * shape, color="black", linestyle="--", label="best fit, second derivatives")
    if truth is not None:
        ax.axvline(truth, color="black", linewidth=1.6, label="truth")
    ax.set_ylim(0.0, 1.45 * float(np.max(counts)))  # room for the legend
    ax.set_xlabel(label)
    ax.set_ylabel("replicas per bin")
    ax.legend(frameon=False)
    return ax


def plot_convergence(
    ensemble: Ensemble, quantity: str | ArrayLike, label: str | None = None, *, ax: Axes | None = None
) -> Axes:
    """Draw mean and standard deviation of a quantity over the first n replicas, against n.

    Parameters
    ----------
    ensemble : Ensemble
    quantity : str or array_like, (replica,)
        Name of a parameter, or one number a replica.
    label : str, optional
        What it is, with its unit; by default its name.
    ax : matplotlib axes, optional
        Where to draw.

    Returns
    -------
    matplotlib axes
        A line for the mean, its sampling error as a band, and broken lines one standard deviation away.

    Raises
    ------
    InputError
        If there are fewer than three replicas, or they have weights, or the quantity is not one number for
        each.
    ImportError
        If matplotlib is not installed.
    """
    if not isinstance(ensemble, Ensemble):
        refuse("ensemble", ensemble, f"ensemble must be an Ensemble, not {type(ensemble).__name__}")
    ax, name = new_axes(ax), label or (quantity if isinstance(quantity, str) else "quantity")
    values = ensemble.parameter(quantity) if isinstance(quantity, str) else quantity
    array = _check.real_array("quantity", values, shape=(ensemble.replicas,))
    if array.size < 3 or ensemble.weights.min() != ensemble.weights.max():
        refuse("ensemble", ensemble, "there must be at least three replicas, of equal weight")
    count = np.arange(1, array.size + 1)
    mean = np.cumsum(array) / count
    squares = np.cumsum((array - array[-1]) ** 2) / count - (mean - array[-1]) ** 2
    spread = np.sqrt(np.maximum(squares[1:], 0.0) * count[1:] / (count[1:] - 1.0))
    count, mean = count[1:], mean[1:]
    ax.fill_between(
        count, mean - spread / np.sqrt(count), mean + spread / np.sqrt(count), color="0.8", linewidth=0.0,
        label="sampling error of the mean",
    )  # fmt: skip
    ax.plot(count, mean, color="black", label="mean of the first n")
    for sign, said in ((1.0, "one standard deviation"), (-1.0, None)):
        ax.plot(count, mean + sign * spread, color="black", linestyle="--", linewidth=0.9, label=said)
    ax.set_xscale("log")
    ax.set_xlim(2, array.size)
    ticks = [
        step * 10**power for power in range(8) for step in (1, 2, 5) if 2 <= step * 10**power <= array.size
    ]
    ax.set_xticks(ticks, [str(tick) for tick in ticks])  # powers of ten alone leave small numbers without
    ax.set_xticks([], minor=True)
    ax.set_xlabel("number of replicas n")
    ax.set_ylabel(name)
    ax.legend(frameon=False, fontsize=8)
    return ax


def _chi_square(given: object) -> None:
    if not isinstance(given, ChiSquare):
        refuse("chi_square", given, f"chi_square must be a ChiSquare, not {type(given).__name__}")
