"""The description of a table: which keys there are, and what each uncertainty and covariance says."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from .._check import Floats, nearest, show
from ..errors import InputError
from ..files.cells import Cells
from ..files.toml import Section
from .rows import ATTRIBUTES
from .uncertainty import ASYMMETRIC, Uncertainty, symmetric

__all__ = ["KEYS", "choice", "columns_of", "number", "sections", "uncertainty_of"]

KEYS = (
    "title", "points", "unit", "note", *ATTRIBUTES, "columns", "uncertainty", "covariance", "combination",
    "datum",
)  # fmt: skip
_COLUMNS = ("x", "q2", "value", "y", "label", *ATTRIBUTES)
_UNCERTAINTY = (
    "name", "column", "size", "up", "down", "down_as", "asymmetric", "given_in", "scales_with", "shared_as",
    "correlated",
)  # fmt: skip


def sections(description: Section, key: str) -> list[Section]:
    """Return the tables of an array of tables, each knowing its place: ``[uncertainty 2]``."""
    given = description.get(key, [])
    if not isinstance(given, list) or not all(isinstance(entry, Mapping) for entry in given):
        raise InputError(f"{description.where(key)} = {show(given)}: must be an array of tables, [[{key}]]")
    file = description.where().rstrip(":")
    return [Section(entry, file, (f"{key} {place + 1}",)) for place, entry in enumerate(given)]


def choice(section: Section, key: str, allowed: tuple[str, ...], **default: Any) -> Any:
    """Return a value that must be one of some words."""
    value = section.get(key, **default)
    if value not in allowed and not (default and value == default["default"]):
        words = ", ".join(f'"{word}"' for word in allowed)
        raise InputError(
            f"{section.where(key)} = {show(value)}: must be one of {words}{nearest(value, allowed)}"
        )
    return value


def number(section: Section, key: str) -> float:
    """Return a value that must be a finite number."""
    value = section.get(key)
    if isinstance(value, bool) or not isinstance(value, int | float) or not np.isfinite(value):
        raise InputError(f"{section.where(key)} = {show(value)}: must be a finite number")
    return float(value)


def columns_of(description: Section, cells: Cells) -> dict[str, str]:
    """Return key -> name of its column; x, q2 and value need not be mapped if the columns are called so."""
    section = description.section("columns", {}).only(*_COLUMNS)
    columns = {key: section.text(key, None) for key in _COLUMNS}
    columns |= {key: key for key in ("x", "q2", "value") if columns[key] is None and key in cells.head}
    found = {key: name for key, name in columns.items() if name is not None}
    for key in ("x", "value"):
        if key not in found:
            raise InputError(f"{section.where(key)}: missing, and {cells.file} has no column {show(key)}")
    for key, name in found.items():
        with section.blame(key):
            cells.index(name)
        if key in ATTRIBUTES and description.get(key, None) is not None:
            raise InputError(f"{description.where(key)}: given both for all lines and as column {show(name)}")
    return found


def uncertainty_of(section: Section, cells: Cells, value: Floats, title: str) -> Uncertainty:
    """Return one uncertainty of the data.

    Parameters
    ----------
    section : Section
        Its description.
    cells : Cells
        The lines of the data alone.
    value : ndarray, (datum,)
        As printed.
    title : str
        Of the table, for the name of a source that is shared within it only.
    """
    section.only(*_UNCERTAINTY)
    forms = [key for key in ("column", "size", "up") if section.get(key, None) is not None]
    if len(forms) != 1:
        raise InputError(f"{section.where()}: give one of column, size, or up with down")
    percent = choice(section, "given_in", ("percent", "value")) == "percent"
    multiplicative = choice(section, "scales_with", ("nothing", "value")) == "value"
    printed, offset = _printed(section, cells, forms[0])
    name = section.text("name", None) or _default_name(section, forms[0])
    size = _scaled(printed, percent, multiplicative, value)
    bad = ~np.isfinite(size)
    for row in np.flatnonzero(bad)[:1]:
        raise InputError(f"{cells.place(row)}: {name} scales with the value, which is 0: give it in percent")
    return Uncertainty(
        name=name,
        size=size,
        offset=_scaled(offset, percent, False, value),
        multiplicative=multiplicative,
        source=_source(section, name, title),
    )


def _printed(section: Section, cells: Cells, form: str) -> tuple[Floats, Floats]:
    """Return size and offset in the units they are given in."""
    for key in () if form == "up" else ("down", "down_as", "asymmetric"):
        if section.get(key, None) is not None:
            raise InputError(f"{section.where(key)}: goes with up only")
    if form == "size":
        if section.get("name", None) is None:
            raise InputError(f"{section.where('name')}: missing: a size without column needs a name")
        return np.full(len(cells.rows), number(section, "size")), np.zeros(len(cells.rows))
    with section.blame(form):
        up = cells.numbers(section.text(form))
    if form == "column":
        return up, np.zeros_like(up)
    with section.blame("down"):
        down = cells.numbers(section.text("down"))
    if choice(section, "down_as", ("shift", "size"), default="shift") == "size":
        down = -down
    elif up.size and (up > 0.0).all() and (down > 0.0).all():
        what = 'every shift down is positive, as are those up: write the sign, or down_as = "size"'
        raise InputError(f"{section.where('down')}: {what}")
    return symmetric(up, down, choice(section, "asymmetric", ASYMMETRIC))


def _scaled(printed: Floats, percent: bool, multiplicative: bool, value: Floats) -> Floats:
    """Turn what is printed into units of the datum, or into fractions of it."""
    if percent:
        return printed / 100.0 if multiplicative else printed / 100.0 * value
    if not multiplicative:
        return printed
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.where(printed == 0.0, 0.0, printed / value)


def _default_name(section: Section, form: str) -> str:
    return str(section.text(form))


def _source(section: Section, name: str, title: str) -> str | None:
    """Return the nuisance parameter of an uncertainty, None if each datum has its own."""
    shared = section.text("shared_as", None)
    correlated = section.get("correlated", None)
    if correlated is not None and not isinstance(correlated, bool):
        raise InputError(f"{section.where('correlated')} = {show(correlated)}: must be true or false")
    if shared is not None:
        if correlated is False:
            raise InputError(f"{section.where('correlated')}: false, but shared_as names a common source")
        return str(shared)
    return f"{title}: {name}" if correlated else None
