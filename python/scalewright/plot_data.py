"""Pictures of measured tables beside a prediction, by Q^2.

Which one when: `plot_data` shows values over many decades, all Q^2 of a table in one picture; `plot_ratio`
shows data over prediction at one Q^2, where one per cent can be seen. As in `plot`, every function draws into
the axes it is given, or makes new ones, and returns them; no setting of matplotlib is changed.
"""

from __future__ import annotations

import os
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from . import _check
from ._check import Floats, refuse, show_all
from .fitting.chi_square import ChiSquare
from .measurements import Measurements
from .plot import new_axes, new_figure, png_of

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["data_figure", "plot_data", "plot_ratio"]

_GREY = "0.55"
_COLUMNS = 5


def plot_data(
    measurements: Measurements,
    prediction: ArrayLike | None = None,
    *,
    table: str | int = 0,
    step: float = 2.0,
    ax: Axes | None = None,
) -> Axes:
    """Draw the values of one table against x, each Q^2 moved up by a factor, and the prediction as lines.

    Parameters
    ----------
    measurements : Measurements
    prediction : array_like, (datum,), optional
    table : str or int
        Title of the table, or its number.
    step : float
        Factor between neighbouring Q^2; the label at each line names the power.
    ax : matplotlib axes, optional
        Where to draw.

    Returns
    -------
    matplotlib axes

    Raises
    ------
    InputError
        If there is no such table, or there is not one finite number a datum.
    ImportError
        If matplotlib is not installed.
    """
    ax, chosen = new_axes(ax), _members(measurements, table)
    factor = _check.real("step", step, above=0.0)
    line = None if prediction is None else _prediction(measurements, prediction)
    sigma = np.sqrt(np.diagonal(measurements.covariance()))
    bins = np.unique(measurements.q2[chosen])
    for power, q2 in enumerate(bins[::-1]):
        points = _bin(measurements, chosen, float(q2))
        x, up = measurements.x[points], factor**power
        ax.errorbar(
            x, up * measurements.value[points], up * sigma[points],
            fmt="ok" if power % 2 else "sk", fillstyle="none" if power % 2 else "full", markersize=3,
            linewidth=0.8,
        )  # fmt: skip
        if line is not None:
            ax.plot(x, up * line[points], color=_GREY, linewidth=1.0, zorder=0)
        last = line[points][0] if line is not None else measurements.value[points][0]
        text = f"{q2:.6g} (${factor:g}^{{{power}}}$)  "
        ax.annotate(text, (x[0], up * last), ha="right", va="center", fontsize=7)
    ax.set_xscale("log")
    ax.set_yscale("log")
    low, high = ax.get_xlim()
    ax.set_xlim(low / 3.0, high)  # room for the labels on the left
    ax.set_xlabel("x")
    ax.set_ylabel(_quantity(measurements, chosen))
    ax.set_title(f"{_title(measurements, chosen)}: $Q^2$ in GeV$^2$ (factor)")
    return ax


def plot_ratio(
    measurements: Measurements,
    prediction: ArrayLike,
    *,
    q2: float,
    table: str | int = 0,
    chi_square: ChiSquare | None = None,
    ax: Axes | None = None,
) -> Axes:
    """Draw data over prediction against x at one Q^2, as measured and with common sources at their best fit.

    Parameters
    ----------
    measurements : Measurements
    prediction : array_like, (datum,)
        Not 0 where it is drawn.
    q2 : float
        Of the bin, in GeV^2.
    table : str or int
        Title of the table, or its number.
    chi_square : ChiSquare, optional
        With the reference of multiplicative errors that is in force; by default they multiply the data.
    ax : matplotlib axes, optional
        Where to draw.

    Returns
    -------
    matplotlib axes
        Open points and thin bars: as measured, with the whole uncertainty. Full points and thick bars: after
        the best-fit shifts of all common sources, with the uncertainty that each datum has for itself.

    Raises
    ------
    InputError
        If there is no such table or Q^2, or there is not one finite number a datum.
    ImportError
        If matplotlib is not installed.
    """
    line = _prediction(measurements, prediction)
    drawn = _Drawn.of(measurements, line, chi_square)
    return _ratio(measurements, drawn, _members(measurements, table), q2, new_axes(ax))


def data_figure(
    measurements: Measurements,
    prediction: ArrayLike,
    *,
    table: str | int = 0,
    chi_square: ChiSquare | None = None,
) -> Any:
    """Draw data over prediction of one table, a panel for each Q^2, into a new figure.

    Parameters
    ----------
    measurements : Measurements
    prediction : array_like, (datum,)
        Not 0.
    table : str or int
        Title of the table, or its number.
    chi_square : ChiSquare, optional
        With the reference of multiplicative errors that is in force; by default they multiply the data.

    Returns
    -------
    matplotlib figure

    Raises
    ------
    InputError
        As `plot_ratio`.
    ImportError
        If matplotlib is not installed.
    """
    chosen = _members(measurements, table)
    line = _prediction(measurements, prediction)
    drawn = _Drawn.of(measurements, line, chi_square)
    bins = np.unique(measurements.q2[chosen])
    rows = -(-bins.size // _COLUMNS)
    width, height = 2.6 * _COLUMNS, 1.2 + 1.7 * rows
    figure = new_figure(width, height, layout=None)
    panels = figure.subplots(rows, _COLUMNS, sharex=True, squeeze=False)
    figure.subplots_adjust(
        left=1.0 / width, right=1.0 - 0.15 / width, bottom=0.65 / height, top=1.0 - 0.75 / height,
        wspace=0.3, hspace=0.42,
    )  # fmt: skip
    for q2, panel in zip(bins, panels.flat, strict=False):
        _ratio(measurements, drawn, chosen, float(q2), panel)
        panel.set(xlabel="", ylabel="")
        panel.set_title(f"{q2:.6g} GeV$^2$", fontsize=9)
        panel.tick_params(labelsize=8)
        panel.minorticks_off()  # a hundred logarithmic ticks in each of many panels take seconds
    for panel in panels.flat[bins.size :]:
        panel.set_axis_off()
    for panel in panels.flat[max(bins.size - _COLUMNS, 0) :]:  # lowest of their columns
        panel.tick_params(labelbottom=True)
    figure.supxlabel("x")
    figure.supylabel("data / prediction")
    figure.suptitle(
        f"{_title(measurements, chosen)}: open as measured, full after the best-fit shifts of common sources"
    )
    return figure


def data_picture(
    measurements: Measurements,
    prediction: ArrayLike,
    path: str | os.PathLike[str],
    *,
    table: str | int = 0,
    chi_square: ChiSquare | None = None,
) -> None:
    """Write what `data_figure` draws as PNG.

    Parameters
    ----------
    measurements, prediction, table, chi_square
        As for `data_figure`.
    path : path-like
        Where to write.
    """
    from .files.whole import write_whole

    figure = data_figure(measurements, prediction, table=table, chi_square=chi_square)
    write_whole(path, png_of(figure, 110))


@dataclass(frozen=True)
class _Drawn:
    """What is drawn of each datum: prediction, value after shifts, whole and own uncertainty."""

    line: Floats
    moved: Floats
    whole: Floats
    own: Floats

    @classmethod
    def of(cls, measurements: Measurements, line: Floats, chi_square: ChiSquare | None) -> _Drawn:
        in_force = ChiSquare(measurements) if chi_square is None else chi_square
        own, shifts = measurements.nuisance(in_force.reference)
        moved = measurements.value
        if shifts.shape[1]:
            moved = moved - shifts @ in_force.shifts(line)
        return cls(line, moved, np.sqrt(np.diagonal(in_force.covariance)), own)


def _ratio(measurements: Measurements, drawn: _Drawn, chosen: NDArray[np.intp], q2: float, ax: Axes) -> Axes:
    """Draw one bin."""
    points, line = _bin(measurements, chosen, q2), drawn.line
    zero = line[points] == 0.0
    _check.refuse_where("prediction", line[points], zero, "prediction must not be 0")
    x, scale = measurements.x[points], line[points]
    whole, own, moved = drawn.whole[points], drawn.own[points], drawn.moved[points]
    ax.axhline(1.0, color=_GREY, linewidth=1.0, zorder=0)
    ax.errorbar(
        x, measurements.value[points] / scale, whole / abs(scale),
        fmt="o", color=_GREY, markersize=4, fillstyle="none", linewidth=0.8, label="as measured",
    )  # fmt: skip
    # a little to the right, so that the two bars of a datum do not hide each other
    ax.errorbar(
        1.08 * x, moved / scale, own / abs(scale),
        fmt="o", color="black", markersize=3, linewidth=1.6, label="after shifts",
    )  # fmt: skip
    ax.set_xscale("log")
    ax.set_xlabel("x")
    ax.set_ylabel("data / prediction")
    ax.set_title(f"{_title(measurements, chosen)}, {q2:.6g} GeV$^2$")
    return ax


def _members(measurements: Measurements, table: str | int) -> NDArray[np.intp]:
    """Return the places of the data of one table, rising in x."""
    if not isinstance(measurements, Measurements):
        what = f"measurements must be Measurements, not {type(measurements).__name__}"
        refuse("measurements", measurements, what)
    titles = measurements.tables
    if isinstance(table, str):
        _check.choice("table", table, titles)
        number = titles.index(table)
    else:
        number = _check.whole("table", table, least=0, most=len(titles) - 1)
    places = np.flatnonzero(measurements.table_of == number)
    return places[np.argsort(measurements.x[places], kind="stable")]


def _bin(measurements: Measurements, chosen: NDArray[np.intp], q2: float) -> NDArray[np.intp]:
    """Return the places of one Q^2."""
    scale = _check.scale("q2", q2)
    held = measurements.q2[chosen]
    points: NDArray[np.intp] = chosen[held == scale]
    if not points.size:
        refuse("q2", scale, f"the table has {show_all(np.unique(held).tolist())} GeV^2")
    return points


def _prediction(measurements: Measurements, prediction: ArrayLike) -> Floats:
    return _check.real_array("prediction", prediction, shape=(len(measurements),))


def _title(measurements: Measurements, chosen: NDArray[np.intp]) -> str:
    return measurements.tables[int(measurements.table_of[chosen[0]])]


def _quantity(measurements: Measurements, chosen: NDArray[np.intp]) -> str:
    """Return what is measured, with its unit, if it is one thing; else say only that it is data."""
    if not measurements.data.is_identity:
        return "value"
    found = {measurements.rows.measure[place] for place in chosen}
    unit = {"d2sigma_dx_dq2": " (pb/GeV$^2$)", "d2sigma_dx_dy": " (pb)"}
    names = [name.replace("_", " ") + unit.get(name, "") for name in sorted(found)]
    return ", ".join(names)
