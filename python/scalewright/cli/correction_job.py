"""Corrections as a job file has them: ``[[correction]]``, each with its kind.

=============== ======================================================================================
kind            keys besides target, current and name
=============== ======================================================================================
"known factor"  file: a table with columns x, factor and, if any, uncertainties
"higher twist"  form ("factor", "addition"), structure_function; polynomial or spline; fixed, bounds
"target factor" polynomial or spline; fixed, bounds
=============== ======================================================================================

``polynomial = { degree = 2, family = "chebyshev", a = 1.0, b = 0.0, free = ["a"], start = [0.1, 0, 0] }``,
``spline = { knots = [0.01, 0.1, 0.7], start = [0, 0, 0] }``: as the arguments of the classes in
`scalewright.corrections`. ``fixed = { c2 = 0.0 }``, ``bounds = { c0 = [-1, 1] }``.
"""

from __future__ import annotations

from typing import Any

from .. import _check
from .._measured.description import sections
from ..corrections import Correction, Curve, HigherTwist, KnownFactor, Polynomial, Spline, TargetFactor
from ..errors import InputError
from ..files import toml
from ..files.toml import Section
from ..files.whole import PathLike

_ALL = ("kind", "target", "current", "name")
_CURVE = ("polynomial", "spline", "fixed", "bounds")
_KEYS = {
    "known factor": (*_ALL, "file"),
    "higher twist": (*_ALL, *_CURVE, "form", "structure_function"),
    "target factor": (*_ALL, *_CURVE),
}


def read_corrections(path: PathLike, top: Section) -> list[Correction]:
    """Read the corrections of a job.

    Parameters
    ----------
    path : path-like
        The job; file names in it are relative to it.
    top : Section

    Returns
    -------
    list of Correction

    Raises
    ------
    InputError
        If a key is unknown, missing or wrong; file and key are named.
    StoreError
        If a table cannot be read.
    """
    return [_read(path, section) for section in sections(top, "correction")]


def _read(path: PathLike, section: Section) -> Correction:
    with section.blame():
        kind = _check.choice("kind", section.get("kind"), tuple(_KEYS))
    section.only(*_KEYS[kind])
    options: dict[str, Any] = {"targets": section.get("target")}
    options |= {key: section.text(key) for key in ("current", "name") if section.get(key, None) is not None}
    if kind == "known factor":
        file = toml.beside(path, section.text("file"))
        with section.blame():
            return KnownFactor.read(file, **options)
    curve = _curve(section)
    if kind == "target factor":
        with section.blame():
            return TargetFactor(curve, **options)
    keys = ("form", "structure_function")
    options |= {key: section.get(key) for key in keys if section.get(key, None) is not None}
    with section.blame():
        return HigherTwist(curve, **options)


def _curve(section: Section) -> Curve:
    """Return the one curve that is given."""
    given = [key for key in ("polynomial", "spline") if section.get(key, None) is not None]
    if len(given) != 1:
        raise InputError(f"{section.where()}: give one of polynomial and spline")
    part = section.section(given[0])
    curve: Curve
    if given[0] == "polynomial":
        part.only("degree", "family", "a", "b", "free", "start")
        degree = part.get("degree")
        with part.blame():
            curve = Polynomial(degree, **_given(part, "family", "a", "b", "free", "start"))
    else:
        part.only("knots", "start")
        knots = part.get("knots")
        with part.blame():
            curve = Spline(knots, **_given(part, "start"))
    fixed, bounds = (section.section(key, {}) for key in ("fixed", "bounds"))
    with section.blame():
        known = {name: fixed.get(name) for name in curve.names if fixed.get(name, None) is not None}
        limits = {name: bounds.get(name) for name in curve.names if bounds.get(name, None) is not None}
        fixed.only(*curve.names)
        bounds.only(*curve.names)
        return curve.restricted(fixed=known, bounds=limits) if known or limits else curve


def _given(section: Section, *keys: str) -> dict[str, Any]:
    return {key: section.get(key) for key in keys if section.get(key, None) is not None}
