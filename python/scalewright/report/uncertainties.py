"""Sections of a report about parameters, correlations, alpha_s, replicas, and a truth where it is known."""

from __future__ import annotations

import numpy as np

from ..fitting.ensemble import Ensemble
from ..fitting.functionals import Functional
from . import figures
from .page import Page
from .told import Told

_OF_REPLICAS = ["mean of replicas", "deviation", "68 per cent", "95 per cent"]
_UNITS = {"charm": " (GeV)", "bottom": " (GeV)"}


def parameters(page: Page, told: Told) -> None:
    """List parameters with uncertainties."""
    result, ensemble = told.result, told.ensemble
    page.section("Parameters")
    head = ["parameter", "best fit", "uncertainty"] + (_OF_REPLICAS if ensemble else [])
    rows = []
    for name in result.names:
        bound, error = result.at_bounds.get(name), result.error(name)
        said = f"on its {bound} bound" if bound else ("unknown" if np.isnan(error) else f"{error:.3g}")
        row = [f"{name}{_UNITS.get(name, '')}", f"{result.value(name):.5g}", said]
        if ensemble is not None:
            values = ensemble.parameter(name)
            row += [f"{values.mean():.5g}", f"{values.std(ddof=1):.3g}"]
            row += [_interval(ensemble, name, level) for level in (0.6827, 0.95)]
        rows.append(row)
    rest = [""] * len(_OF_REPLICAS) if ensemble is not None else []
    rows += [[name, f"{value:.5g}", "by its sum rule", *rest] for name, value in result.solved.items()]
    page.table(head, rows)


def _interval(ensemble: Ensemble, name: str, level: float) -> str:
    """Return the ends of an interval, or that replicas are too few for it."""
    low, high = ensemble.interval(name, level)
    known = np.isfinite(low.error) and np.isfinite(high.error)
    return f"{low.value:.5g} to {high.value:.5g}" if known else "too few replicas"


def correlations(page: Page, told: Told) -> None:
    """Draw correlations of parameters, and of densities over the replicas."""
    page.section("Correlations")
    found = figures.parameter_correlations(told.result)
    if found is None:
        page.say("There is no covariance of the parameters: see Convergence.")
    elif told.pictures:
        page.figure(figures.correlations_figure(*found), "parameters, by second derivatives of chi-square")
    if told.ensemble is not None and told.pictures and told.ensemble.replicas > 2:
        matrix, names = figures.density_correlations(told.ensemble)
        error = 1.0 / np.sqrt(told.ensemble.effective_replicas)
        words = f"x f(x) at the start and theory parameters, over replicas; sampling error up to {error:.2f}"
        page.figure(figures.correlations_figure(matrix, names), words)


def coupling(page: Page, told: Told) -> None:
    """Say what was found of theory parameters."""
    free = list(told.result.map_at)
    page.section("alpha_s and masses")
    if not free:
        page.say("No parameter of the theory was fitted.")
        return
    theory = told.result.theory
    for name in free:
        value, error = told.result.value(name), told.result.error(name)
        where = ""
        if name == "alpha_s" and theory is not None:
            where = f" at mu_r^2 = {theory.coupling.q2:.6g} GeV^2 with nf = {theory.coupling.nf}"
        page.say(f"{name}{where}: {value:.5g} +- {error:.2g}{_UNITS.get(name, '')} from the fit to the data.")
        if told.ensemble is None:
            continue
        mean, spread = told.ensemble.mean(name), told.ensemble.std(name)
        page.say(
            f"Over {told.ensemble.replicas} replicas: mean {mean.value:.5g} (sampling error {mean.error:.1g})"
            f", deviation {spread.value:.2g} (sampling error {spread.error:.1g})."
        )
        if told.pictures:
            known = told.truth.get(Functional(name))
            label = name + _UNITS.get(name, "")
            drawn = figures.distribution_figure(told.ensemble.parameter(name), label, value, error, known)
            page.figure(drawn, f"{name} over the replicas")


def replicas(page: Page, told: Told) -> None:
    """Say how many replicas there are, which failed, and how statistics settle with their number."""
    page.section("Replicas")
    ensemble = told.ensemble
    if ensemble is None:
        page.say("There are none: uncertainties are those of the second derivatives alone.")
        return
    page.verbatim(str(ensemble))
    if ensemble.failed:
        rows = [[str(index), reason] for index, reason in ensemble.failed.items()]
        page.table(["replica", "why it failed"], rows, "failed fits, left out of all statistics", words=True)
    else:
        page.say("No fit failed.")
    if not told.pictures or ensemble.replicas < 3:
        return
    quantities = [(name, ensemble.parameter(name)) for name in told.result.map_at][:1]
    for text in ("momentum(g)", "g(0.1)", "u_v(0.3)"):
        quantities.append((text, Functional(text).of_ensemble(ensemble)))
    page.figure(figures.convergence_figure(ensemble, quantities[:3]), "convergence with their number")
    if np.isfinite(ensemble.chi2).all() and ensemble.data:
        page.figure(figures.chi_squares_figure(ensemble), "chi-squares of the replicas")


def truth(page: Page, told: Told) -> None:
    """Compare with the law behind the data, where it is known."""
    if not told.truth:
        return
    page.section("Against the law behind the data")
    rows = []
    for one, exact in told.truth.items():
        value, error = one.of_fit(told.result)
        row = [one.text, f"{exact:.5g}", f"{value:.5g}", f"{error:.2g}", f"{(value - exact) / error:+.2f}"]
        if told.ensemble is not None:
            values = one.of_ensemble(told.ensemble)
            row.append(f"{(values.mean() - exact) / values.std(ddof=1):+.2f}")
        rows.append(row)
    head = ["quantity", "law", "best fit", "uncertainty", "pull"]
    page.table([*head, "pull of the replicas"] if told.ensemble is not None else head, rows)
