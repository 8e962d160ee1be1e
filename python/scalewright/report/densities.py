"""Sections of a report about the densities: curves with bands, and who carries how much momentum."""

from __future__ import annotations

import warnings

import numpy as np

from ..densities import Densities
from ..errors import ResolutionWarning
from ..fitting.functionals import Functional
from . import figures
from .page import Page
from .told import Told

_SHARES = ("g", "u_v", "d_v", "sea", "s+", "singlet")


def at_scales(page: Page, told: Told) -> None:
    """Draw densities with bands, at the start and at the largest other scale."""
    page.section("Densities")
    sets = _sets(told)
    if not told.pictures:
        page.say("Pictures are missing; the files of the fit hold the densities.")
        return
    words = "x f(x): median and 68 per cent of "
    words += "the replicas" if told.ensemble is not None else "samples of the covariance"
    page.figure(figures.densities_figure(sets), words)
    drawn = figures.ratios_figure(told.result, told.ensemble)
    page.figure(drawn, f"relative bands of 68 per cent at the start, {told.result.densities.q2:g} GeV^2")


def _sets(told: Told) -> list[tuple[Densities, float | None]]:
    start = figures.hessian_samples(told.result) or told.result.densities
    if told.ensemble is not None:
        start = told.ensemble.densities
    found: list[tuple[Densities, float | None]] = [(start, None)]
    if told.evolved is not None:
        found.append((told.evolved, float(np.max(told.evolved.q2))))
    return found


def momenta(page: Page, told: Told) -> None:
    """List momentum shares with uncertainties."""
    page.section("Momentum shares")
    densities, rows = told.result.densities, []
    for name in _SHARES:
        one = Functional(f"momentum({name})")
        value, error = one.of_fit(told.result)
        row = [name, f"{100 * value:.2f}", "" if np.isnan(error) else f"{100 * error:.2f}"]
        if told.ensemble is not None:
            shares = one.of_ensemble(told.ensemble)
            row += [f"{100 * shares.mean():.2f}", f"{100 * shares.std(ddof=1):.2f}"]
        rows.append(row)
    head = ["combination", "best fit", "uncertainty"]
    head += ["mean of replicas", "deviation"] if told.ensemble is not None else []
    page.table(head, rows, f"per cent of the momentum at {densities.q2:g} GeV^2, above x_min")
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", ResolutionWarning)  # said in words here
        total, above = float(densities.momentum()[0]), float(densities.momentum(part="above")[0])
    below = f"; {100 * (total - above):.3f} per cent lie below" if densities.below is not None else ""
    page.say(
        f"All flavours together: {100 * above:.3f} per cent above x_min = {densities.grid.x_min:g}{below}."
    )
