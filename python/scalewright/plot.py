"""Pictures of densities; the only module that imports matplotlib.

Every function draws into the axes it is given, or makes new ones, and returns them; no setting of
matplotlib is changed.
"""

from __future__ import annotations

import io
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any, TypeAlias

import numpy as np
from numpy.typing import ArrayLike

from . import _check
from ._check import Floats, refuse, show
from .densities import Densities

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["plot_against_q2", "plot_densities"]

Flavours: TypeAlias = Sequence[int | str]

# Distinct for readers who do not tell red from green, and in print: M. Okabe and K. Ito, "Color universal
# design", 2008 (values recalled from memory).
COLOURS = ("#0072B2", "#D55E00", "#009E73", "#CC79A7", "#E69F00", "#56B4E9", "#000000")
LINES = ("-", "--", "-.", ":")
_POINTS = 300
_ONE_SIGMA = 68.27


def plot_densities(
    densities: Densities,
    flavours: Flavours = ("u_v", "d_v", "sea", "g"),
    *,
    q2: float | None = None,
    nf: int | None = None,
    scale_by: ArrayLike = 1.0,
    interval: float = _ONE_SIGMA,
    x: ArrayLike | None = None,
    ax: Axes | None = None,
) -> Axes:
    """Draw x f(x) against x: the median of the replicas and a central interval.

    Parameters
    ----------
    densities : Densities
        One replica or many.
    flavours : sequence of int or str
        PDG numbers or names of combinations, such as "u_v" or "dbar - ubar".
    q2 : float, optional
        Scale in GeV^2; needed where there are several.
    nf : int, optional
        Picks between the two values on a threshold; by default the one above.
    scale_by : float or one for each flavour
        Factor by which a curve is drawn, such as 0.1 for the gluon; the legend says so.
    interval : float
        Per cent of the replicas within the band, in (0, 100].
    x : array_like, optional
        Points; by default 300 from x_min to 1, even in ln x below 0.1 and even in x above.
    ax : matplotlib axes, optional
        Where to draw.

    Returns
    -------
    matplotlib axes

    Raises
    ------
    InputError, RangeError
        As `Densities.at`.
    ImportError
        If matplotlib is not installed.

    Examples
    --------
    >>> import scalewright as sw
    >>> from scalewright.plot import plot_densities
    >>> grid = sw.ChebyshevGrid(x_min=1e-4)
    >>> shape = lambda x: x**-0.1 * (1 - x) ** 5
    >>> ax = plot_densities(sw.Densities.sample(grid, q2=2.0, nf=3, functions={21: shape}), ["g"])
    >>> ax.get_xlabel()
    'x'
    """
    ax = new_axes(ax)
    points = curve_points(densities, x)
    factors = _factors(scale_by, flavours)
    q2 = float(np.ravel(densities.q2)[0]) if q2 is None and densities.scales == 1 else q2
    for place, (flavour, factor) in enumerate(zip(flavours, factors, strict=True)):
        values = factor * densities.at(q2, points, flavour, nf=nf)
        _band(ax, points, values, interval, place, _label(flavour, factor))
    ax.set_xscale("log")
    ax.set_xlim(points.min(), 1.0)
    ax.set_xlabel("x")
    ax.set_ylabel("x f(x)")
    ax.set_title(f"{show_number(q2)} GeV$^2$")
    ax.legend(frameon=False)
    return ax


def plot_against_q2(
    densities: Densities,
    flavour: int | str,
    x: ArrayLike,
    *,
    interval: float = _ONE_SIGMA,
    ax: Axes | None = None,
) -> Axes:
    """Draw x f(x) against the scale at some x: the median of the replicas and a central interval.

    Parameters
    ----------
    densities : Densities
        Of several scales.
    flavour : int or str
        PDG number or name of a combination.
    x : array_like, (point,)
        One curve each. Where a curve has two values on a threshold, it jumps.
    interval : float
        Per cent of the replicas within the band, in (0, 100].
    ax : matplotlib axes, optional
        Where to draw.

    Returns
    -------
    matplotlib axes

    Raises
    ------
    InputError, RangeError
        As `Densities.at`.
    ImportError
        If matplotlib is not installed.
    """
    ax = new_axes(ax)
    check_densities(densities)
    points = np.atleast_1d(_check.x_values("x", x))
    q2, nf = np.atleast_1d(densities.q2), np.atleast_1d(densities.nf)
    order = np.lexsort((nf, q2))
    values = densities.at(q2[order], points, flavour, nf=nf[order])
    for place, point in enumerate(points):
        _band(ax, q2[order], values[:, :, place].T, interval, place, f"x = {show_number(point)}")
    ax.set_xscale("log")
    ax.set_xlabel("$\\mu_f^2$ (GeV$^2$)")
    ax.set_ylabel(f"x f(x), {flavour}")
    ax.legend(frameon=False)
    return ax


def new_figure(width: float, height: float, layout: str | None = "constrained") -> Any:
    """Return a figure without window and global state, sides in inches: it works without a screen.

    `layout` None leaves margins to the caller: with many panels, finding them takes most of the time.

    Raises
    ------
    ImportError
        If matplotlib is not installed.
    """
    try:
        from matplotlib.figure import Figure
    except ImportError as error:
        raise ImportError("pictures need matplotlib: pip install 'scalewright[plot]'") from error
    chosen: Any = layout
    return Figure(figsize=(width, height), layout=chosen)


def png_of(figure: Any, dpi: int = 100) -> bytes:
    """Return a figure as PNG."""
    image = io.BytesIO()
    figure.savefig(image, format="png", dpi=dpi)
    return image.getvalue()


def svg_of(figure: Any) -> bytes:
    """Return a figure as SVG; equal pictures make equal bytes."""
    from matplotlib import rc_context

    image = io.BytesIO()
    with rc_context({"svg.hashsalt": "scalewright"}):
        figure.savefig(image, format="svg", metadata={"Date": None})
    return image.getvalue()


def new_axes(ax: Any) -> Any:
    """Return the axes to draw into: those given, or new ones; `ImportError` without matplotlib."""
    try:
        from matplotlib.axes import Axes
    except ImportError as error:
        raise ImportError("pictures need matplotlib: pip install 'scalewright[plot]'") from error
    if ax is None:
        import matplotlib.pyplot as plt

        return plt.subplots(layout="constrained")[1]
    if not isinstance(ax, Axes):
        refuse("ax", ax, f"ax must be matplotlib axes, not {type(ax).__name__}")
    return ax


def check_densities(densities: object) -> None:
    """Refuse what is not densities."""
    if not isinstance(densities, Densities):
        refuse("densities", densities, f"densities must be Densities, not {type(densities).__name__}")


def curve_points(densities: Densities, x: ArrayLike | None) -> Floats:
    """Return the points of a curve, rising."""
    check_densities(densities)
    if x is not None:
        return np.sort(np.atleast_1d(_check.x_values("x", x)))
    low = densities.grid.x_min
    small = np.geomspace(low, 0.1, _POINTS // 2, endpoint=False)
    small[0] = low  # geomspace misses it by a rounding
    return np.concatenate([small, np.linspace(0.1, 1.0, _POINTS - small.size)])


def _factors(scale_by: ArrayLike, flavours: Flavours) -> Floats:
    """Return one factor for each flavour."""
    if isinstance(flavours, str) or not len(flavours):
        refuse("flavours", flavours, "flavours must be a list of at least one flavour")
    factors = _check.real_array("scale_by", scale_by)
    if factors.shape not in ((), (len(flavours),)):
        refuse("scale_by", factors, f"scale_by must be one number or {len(flavours)} of them, one a flavour")
    return np.broadcast_to(factors, (len(flavours),))


def _band(ax: Any, x: Floats, values: Floats, interval: float, place: int, label: str) -> None:
    """Draw the median of (replica, point), and the central interval if there is more than one replica."""
    share = _check.real("interval", interval, above=0.0, most=100.0)
    colour, line = COLOURS[place % len(COLOURS)], LINES[place % len(LINES)]
    if values.shape[0] > 1:
        low, high = np.percentile(values, [50.0 - share / 2.0, 50.0 + share / 2.0], axis=0)
        ax.fill_between(x, low, high, color=colour, alpha=0.25, linewidth=0.0)
    ax.plot(x, np.median(values, axis=0), color=colour, linestyle=line, label=label)


def _label(flavour: int | str, factor: float) -> str:
    from .flavours import flavour_name

    name = flavour if isinstance(flavour, str) else flavour_name(flavour)
    return name if factor == 1.0 else f"{show(factor)} {name}"


def show_number(value: float | None) -> str:
    """Write a number as a title shows it: 2, 10000, 8315.18, 1e-05."""
    return f"{value:.6g}"
