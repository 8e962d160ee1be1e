"""Pictures that a report of a fit shows; each returns a figure of matplotlib."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from .._check import Floats
from ..densities import Densities
from ..fitting._answers import BlindDirection
from ..fitting.chi_square import ChiSquare
from ..fitting.ensemble import Ensemble
from ..fitting.least_squares import FitResult
from ..flavours import flavour_name
from ..plot import curve_points, new_figure, plot_densities
from ..plot_fit import (
    plot_convergence,
    plot_correlations,
    plot_distribution,
    plot_pulls,
    plot_ratios,
    plot_shifts,
)

FLAVOURS = ("u_v", "d_v", "sea", "g")
_FACTORS = (1.0, 1.0, 0.1, 0.1)
_RATIOS = ("g", "sea", "u_v", "d_v", "ubar", "dbar")
_PLACES = ((x, flavour) for flavour in ("g", "u_v", "d_v", "sea") for x in (0.01, 0.1, 0.3))
QUANTITIES = tuple(_PLACES)


def hessian_samples(result: FitResult, count: int = 1000) -> Densities | None:
    """Return densities drawn from the covariance of a fit, to first order; None where there is none."""
    if result.covariance is None:
        return None
    found = result.changes
    draws = np.random.default_rng(np.random.SeedSequence(0)).normal(size=(count, len(found)))
    best = result.densities
    values = best.values + np.tensordot(draws, found, axes=1)
    return Densities(best.grid, q2=best.q2, nf=best.nf, flavours=best.flavours, values=values)


def densities_figure(sets: Sequence[tuple[Densities, float | None]]) -> Any:
    """Draw x f(x) at one scale or two."""
    figure = new_figure(5.5 * len(sets), 4.4)
    panels = np.atleast_1d(figure.subplots(1, len(sets)))
    for (densities, q2), ax in zip(sets, panels, strict=True):
        x = np.geomspace(max(densities.grid.x_min, 1e-4), 0.95, 200)
        plot_densities(densities, FLAVOURS, q2=q2, scale_by=_FACTORS, x=x, ax=ax)
        top = np.median(densities.at(q2, x, FLAVOURS[0]), axis=0).max()
        ax.set_ylim(0.0, 1.7 * top)  # gluon and sea leave the frame at small x
    return figure


def ratios_figure(result: FitResult, ensemble: Ensemble | None) -> Any:
    """Draw relative bands of six combinations at the start: second derivatives, and replicas."""
    sets = {}
    samples = hessian_samples(result)
    if samples is not None:
        sets["second derivatives"] = samples
    if ensemble is not None and ensemble.replicas > 1:
        sets["replicas"] = ensemble.densities
    sets = sets or {"best fit": result.densities}
    names = [name for name in _RATIOS if _known(result.densities, name)]
    figure = new_figure(11.0, 6.0)
    panels = figure.subplots(2, 3).ravel()
    for name, ax in zip(names, panels, strict=False):
        points = curve_points(result.densities, None)
        plot_ratios(sets, name, x=points[points <= 0.8], ax=ax)
        ax.set_ylabel(f"{name} / median")
    for ax in panels[len(names) :]:
        ax.set_axis_off()
    return figure


def _known(densities: Densities, name: str) -> bool:
    """Say whether a combination varies at all: with dbar = ubar their difference is 0."""
    try:
        return bool(densities.combination(name).any())
    except ValueError:
        return False


def pulls_figure(chi_square: ChiSquare, prediction: Floats) -> Any:
    """Draw pulls, as measured and after shifts."""
    figure = new_figure(10.0, 3.6)
    for ax, shifted in zip(figure.subplots(1, 2), (False, True), strict=True):
        plot_pulls(chi_square, prediction, shifted=shifted, ax=ax)
    return figure


def shifts_figure(chi_square: ChiSquare, prediction: Floats) -> Any:
    """Draw the best fit of common sources."""
    count = min(20, len(chi_square.names_of_sources))
    figure = new_figure(7.0, 1.0 + 0.3 * count)
    plot_shifts(chi_square, prediction, ax=figure.subplots())
    return figure


def correlations_figure(matrix: Floats, names: Sequence[str]) -> Any:
    """Draw a matrix of correlations."""
    side = 2.2 + 0.36 * len(names)
    figure = new_figure(side, side)
    plot_correlations(matrix, names, ax=figure.subplots())
    return figure


def parameter_correlations(result: FitResult) -> tuple[Floats, tuple[str, ...]] | None:
    """Return correlations of the parameters that are not on a bound, or None where there is no covariance."""
    if result.covariance is None:
        return None
    kept = np.flatnonzero(np.isfinite(result.errors))
    size = result.errors[kept]
    names = tuple(result.names[k] for k in kept)
    return result.covariance[np.ix_(kept, kept)] / np.outer(size, size), names


def density_correlations(ensemble: Ensemble) -> tuple[Floats, tuple[str, ...]]:
    """Return correlations of densities at some x, and of theory parameters with them, over replicas."""
    names, columns = [], []
    for x, flavour in QUANTITIES:
        if x >= ensemble.densities.grid.x_min and _known(ensemble.densities, flavour):
            names.append(f"{flavour}({x:g})")
            columns.append(ensemble.at(x, flavour))
    for name in ("alpha_s", "charm", "bottom"):
        if name in ensemble.names:
            names.append(name)
            columns.append(ensemble.parameter(name))
    values = np.stack(columns, axis=1)
    matrix = ensemble.correlation(values[:, :, None], values[:, None, :]).value
    return np.clip(matrix, -1.0, 1.0), tuple(names)


def convergence_figure(ensemble: Ensemble, quantities: Sequence[tuple[str, Floats]]) -> Any:
    """Draw how mean and deviation settle with the number of replicas."""
    figure = new_figure(4.2 * len(quantities), 3.4)
    panels = np.atleast_1d(figure.subplots(1, len(quantities)))
    for (label, values), ax in zip(quantities, panels, strict=True):
        plot_convergence(ensemble, values, label, ax=ax)
    return figure


def distribution_figure(
    values: Floats, label: str, best: float, error: float, truth: float | None = None
) -> Any:
    """Draw a quantity over the replicas beside the best fit."""
    figure = new_figure(6.0, 3.6)
    plot_distribution(values, label, best=best, error=error, truth=truth, ax=figure.subplots())
    return figure


def chi_squares_figure(ensemble: Ensemble) -> Any:
    """Draw chi-square of each replica to its own pseudo-data and to the data, over the number of data."""
    figure = new_figure(6.0, 3.4)
    ax = figure.subplots()
    both = np.concatenate([ensemble.chi2, ensemble.chi2_data]) / ensemble.data
    edges = np.linspace(both.min(), both.max(), 31).tolist()
    for values, label, style in (
        (ensemble.chi2, "to its pseudo-data", {"color": "0.8", "edgecolor": "0.15"}),
        (ensemble.chi2_data, "to the data", {"histtype": "step", "color": "black", "linestyle": "--"}),
    ):
        ax.hist(values / ensemble.data, edges, label=label, **style)
    ax.set_xlabel("chi-square of a replica / number of data")
    ax.set_ylabel("replicas per bin")
    ax.legend(frameon=False)
    return figure


def blind_figure(direction: BlindDirection, result: FitResult) -> Any:
    """Draw how densities change along a direction that the data do not see."""
    figure = new_figure(6.0, 3.4)
    ax = figure.subplots()
    densities = result.densities
    x = densities.grid.x
    for place, (number, values) in enumerate(zip(densities.flavours, direction.values, strict=True)):
        if abs(values).max() > 1e-3:
            line = ("-", "--", "-.", ":")[place % 4]
            ax.plot(x, values, line, color=str(0.15 * (place % 5)), label=flavour_name(number))
    ax.set_xscale("log")
    ax.set_xlabel("x")
    ax.set_ylabel("change of x f(x), largest = 1")
    ax.legend(frameon=False, fontsize=8)
    return figure
