"""The report of a fit: which sections there are, and in which order."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from importlib.util import find_spec
from typing import Any

from .. import _check
from ..densities import Densities
from ..files.whole import PathLike, write_whole
from ..fitting.chi_square import ChiSquare
from ..fitting.ensemble import Ensemble
from ..fitting.functionals import Functional
from ..fitting.least_squares import FitResult
from .page import Page
from .told import Told

__all__ = ["fit_report"]


def fit_report(
    path: PathLike,
    result: FitResult,
    chi_square: ChiSquare,
    *,
    ensemble: Ensemble | None = None,
    evolved: Densities | None = None,
    truth: Mapping[str, float] | None = None,
    title: str = "A fit of parton densities",
    history: Sequence[float] = (),
    notes: Mapping[str, str] | None = None,
    job: str = "",
) -> None:
    """Write one HTML file that says all about a fit; it needs nothing outside itself.

    Parameters
    ----------
    path : path-like
        The file.
    result : FitResult
        As fitted, or read again.
    chi_square : ChiSquare
        What was minimised; it knows the data.
    ensemble : Ensemble, optional
        Replicas of the same fit.
    evolved : Densities, optional
        At other scales, to be shown.
    truth : mapping, optional
        "alpha_s", "momentum(g)", "u_v(0.3)" ... -> value, where the law behind the data is known.
    title : str
    history : sequence of float
        Chi-squares while the reference of multiplicative errors settled.
    notes : mapping, optional
        What else was assumed: name -> words.
    job : str
        Text of the job file, to be kept with the answer.

    Raises
    ------
    InputError
        If the parts do not belong together.
    StoreError
        If the file cannot be written.

    Notes
    -----
    Without matplotlib the report has no pictures and says so.
    """
    for name, given, kind in (("result", result, FitResult), ("chi_square", chi_square, ChiSquare)):
        if not isinstance(given, kind):
            _check.refuse(name, given, f"{name} must be a {kind.__name__}, not {type(given).__name__}")
    if len(chi_square.measurements) != result.data:
        have = len(chi_square.measurements)
        _check.refuse("chi_square", chi_square, f"it has {have} data, the fit {result.data}")
    if ensemble is not None:
        _check_ensemble(ensemble, result)
    known = {Functional(text): _check.real(text, value) for text, value in (truth or {}).items()}
    told = Told(
        result, chi_square, ensemble, evolved, known, tuple(history), dict(notes or {}), job,
        find_spec("matplotlib") is not None,
    )  # fmt: skip
    write_whole(path, _page(told, title).text().encode("utf-8"))


def _check_ensemble(ensemble: object, result: FitResult) -> None:
    """Refuse replicas of another fit, and weighted ones: pictures count each alike."""
    if not isinstance(ensemble, Ensemble):
        _check.refuse("ensemble", ensemble, f"ensemble must be an Ensemble, not {type(ensemble).__name__}")
    if ensemble.names != result.names:
        have, want = _check.show_all(ensemble.names), _check.show_all(result.names)
        _check.refuse("ensemble", ensemble, f"its parameters are {have}, those of the fit {want}")
    if ensemble.replicas < 2 or ensemble.weights.min() != ensemble.weights.max():
        _check.refuse("ensemble", ensemble, "there must be at least two replicas, of equal weight")


def _page(told: Told, title: str) -> Page:
    from . import data, densities, summary, uncertainties

    page = Page(title)
    sections: list[Any] = [
        summary.overview, summary.assumptions, data.tables, summary.convergence, uncertainties.parameters,
        densities.at_scales, densities.momenta, data.against_prediction, data.pulls,
        uncertainties.correlations, uncertainties.coupling, uncertainties.replicas, uncertainties.truth,
        summary.origin,
    ]  # fmt: skip
    for section in sections:
        section(page, told)
    return page
