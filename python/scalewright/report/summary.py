"""Sections of a report that say what was found in short, what was assumed, and whether the fit converged."""

from __future__ import annotations

import platform

import numpy as np

from . import figures
from .page import Page
from .told import Told

_MANY_FAILED = 0.01
#: What a fit or an ensemble says first of what must not be overlooked.
_WARNING = "WARNING: "


def overview(page: Page, told: Told) -> None:
    """Say in a few lines what was found, warnings first."""
    result, ensemble = told.result, told.ensemble
    page.section("In short")
    if not result.converged:
        page.warn(f"The fit to the data has not converged: {result.status[0]}")
    if ensemble is not None and len(ensemble.failed) > _MANY_FAILED * (
        ensemble.replicas + len(ensemble.failed)
    ):
        page.warn(f"{len(ensemble.failed)} fits to pseudo-data failed, more than 1 per cent: see Replicas")
    said = [*result.status, *(() if ensemble is None else ensemble.notes)]
    for line in said:
        if line.startswith(_WARNING):
            page.warn(line.removeprefix(_WARNING))
    if not told.pictures:
        page.warn("No pictures: matplotlib was not installed (pip install 'scalewright[plot]').")
    free = len(result.names) - len(result.at_bounds)
    lines = [
        f"chi-square {result.chi2:.1f} for {result.data} data and {free} free parameters",
        f"the fit {result.status[0]}",
    ]
    for name in result.map_at:
        lines.append(f"{name} = {result.value(name):.5g} +- {result.error(name):.2g}")
    if ensemble is not None:
        lost = f", {len(ensemble.failed)} failed" if ensemble.failed else ""
        lines.append(f"{ensemble.replicas} replicas{lost}")
    page.lines(lines)


def assumptions(page: Page, told: Told) -> None:
    """Say what was assumed."""
    page.section("What was assumed")
    if told.result.theory is not None:
        page.say("Theory, parameters that were fitted at their best values:")
        page.verbatim(told.result.theory.describe())
    densities = told.result.densities
    rows = [
        ["start of the shape", f"{densities.q2:g} GeV^2, nf = {densities.nf}"],
        ["grid", f"{densities.grid!r}"],
        ["chi-square", f"{told.chi_square!r}"],
        ["uncertainties stand for", f"a rise of chi-square by {told.result.delta_chi2:g}"],
        *([name, words] for name, words in told.notes.items()),
    ]
    page.table(["what", ""], rows, words=True)


def convergence(page: Page, told: Told) -> None:
    """Say in words whether the fit converged and what the data do not see."""
    result = told.result
    page.section("Convergence")
    page.lines(list(result.status))
    calls = f"{result.calls['residuals']} evaluations of residuals, {result.calls['jacobian']} of derivatives"
    page.say(f"{calls}; in this fit the map was built anew {result.rebuilt} times.")
    if told.history:
        steps = ", ".join(f"{value:.2f}" for value in told.history)
        page.say(f"Chi-square while the reference of multiplicative errors settled: {steps}.")
    values = result.singular_values
    if values.size:
        ratio = f"{values.max() / values.min():.3g}" if values.min() > 0.0 else "infinite"
        page.say(f"Largest over smallest singular value, parameters in units of their effect: {ratio}.")
    if told.pictures:
        for direction in result.blind:
            page.figure(figures.blind_figure(direction, result), f"not seen by the data: {direction}")


def origin(page: Page, told: Told) -> None:
    """Say what made this report."""
    page.section("Origin")
    versions = f"{_program()}, numpy {np.__version__}, Python {platform.python_version()}"
    page.say(f"Written by {versions}, {platform.system()} {platform.machine()}.")
    if told.ensemble is not None and told.ensemble.seed is not None:
        page.say(f"Pseudo-data of replica i are drawn from the seed ({told.ensemble.seed}, i) alone.")
    if told.job:
        page.say("The job:")
        page.verbatim(told.job)


def _program() -> str:
    from importlib import metadata

    try:
        return f"scalewright {metadata.version('scalewright')}"
    except metadata.PackageNotFoundError:  # run from a source tree
        return "scalewright"
