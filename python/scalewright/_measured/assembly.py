"""Which lines of a table are rows, which are data, and how rows make data.

- Without more, a line is a row and the datum measured there.
- ``[combination]``: a line is one datum made of several rows that stand at its x and Q^2 and differ in the
  attributes that ``rows`` names: a deuteron over a proton, an asymmetry of beams.
- ``[[datum]]``: the line of that label is a datum made of other lines, by their labels: a bin average, a
  ratio of different points. A line without value is a row alone.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from .._check import Floats, nearest, show
from ..errors import InputError
from ..files.cells import Cells
from ..files.toml import Section
from .combination import Combination
from .description import sections
from .rows import ATTRIBUTES, Reader, Rows, rows_of

__all__ = ["Assembly", "assemble"]

Terms = list[tuple[int, float]]


@dataclass(frozen=True, eq=False)
class Assembly:
    """Rows and data of a table.

    Parameters
    ----------
    rows : Rows
    combination : Combination
    lines : tuple of int
        The line of each datum.
    needs : tuple of tuple of int
        All lines that each datum rests on, its own included.
    rows_of_datum : tuple of tuple of int
        The rows of each datum, in the order of numerator and denominator.
    x, q2, y : ndarray, (datum,)
        As printed in the line of the datum; y of its row, nan where the rows differ.
    """

    rows: Rows
    combination: Combination
    lines: tuple[int, ...]
    needs: tuple[tuple[int, ...], ...]
    rows_of_datum: tuple[tuple[int, ...], ...]
    x: Floats
    q2: Floats
    y: Floats

    def needed(self, keep: NDArray[np.bool_]) -> list[int]:
        """Return the lines that some of the data rest on, in their order."""
        return sorted({line for datum in np.flatnonzero(keep) for line in self.needs[datum]})


def assemble(section: Section, cells: Cells, columns: Mapping[str, str]) -> Assembly:
    """Make rows and data of the lines of a table."""
    if section.get("combination", None) is not None and section.get("datum", None) is not None:
        raise InputError(f"{section.where('datum')}: [combination] is there too: give one of the two")
    defaults = {key: section.get(key) for key in ATTRIBUTES if section.get(key, None) is not None}

    def where(key: str, inside: Mapping[str, Any] | None = None) -> str:
        return section.where(key) if inside is None else f"{section.where('combination')}: rows: {key}"

    reader = Reader(cells, columns, defaults, where)
    if section.get("combination", None) is not None:
        built = _by_name(section, cells, reader)
    else:
        built = _by_line(section, cells, columns, reader)
    _refuse_doubles(built, cells)
    return built


def _by_name(section: Section, cells: Cells, reader: Reader) -> Assembly:
    """Make one datum a line, of rows that differ in attributes."""
    combination = section.section("combination").only("rows", "numerator", "denominator")
    variants = combination.section("rows")
    names = list(combination.get("rows"))
    overrides = []
    for name in names:
        variants.section(name).only(*ATTRIBUTES)
        overrides.append(dict(variants.get(name)))
    top = _terms(combination, "numerator", {name: place for place, name in enumerate(names)})
    bottom = _terms(combination, "denominator", {name: place for place, name in enumerate(names)})
    for place, name in enumerate(names):
        if all(place != row for row, _ in top + bottom):
            raise InputError(f"{combination.where('rows')}: {show(name)} stands in no sum")
    count, lines = len(names), range(len(cells.rows))
    entries = [
        reader.row(line, changed, name)
        for line in lines
        for name, changed in zip(names, overrides, strict=True)
    ]
    tops = [[(line * count + row, weight) for row, weight in top] for line in lines]
    bottoms = [[(line * count + row, weight) for row, weight in bottom] for line in lines]
    return _assembly(entries, tops, bottoms, list(lines), [(line,) for line in lines])


def _by_line(section: Section, cells: Cells, columns: Mapping[str, str], reader: Reader) -> Assembly:
    """Make data of lines by their labels; without labels each line is its own datum."""
    parts = sections(section, "datum")
    labels = _labels(section, cells, columns) if parts else {}
    made: dict[int, Section] = {}
    for part in parts:
        label = part.only("label", "numerator", "denominator").text("label")
        if label not in labels:
            raise InputError(f"{part.where('label')} = {show(label)}: no such line{nearest(label, labels)}")
        if labels[label] in made:
            raise InputError(f"{part.where('label')} = {show(label)}: stands there twice")
        made[labels[label]] = part
    places = [line for line in range(len(cells.rows)) if line not in made]
    row_of = {line: row for row, line in enumerate(places)}
    targets = {label: row_of[line] for label, line in labels.items() if line in row_of}
    valued = cells.words(columns["value"])
    entries = [reader.row(line, {}) for line in places]
    lines = [line for line in range(len(cells.rows)) if valued[line]]
    tops, bottoms, needs = [], [], []
    for line in lines:
        of = made.get(line)
        tops.append([(row_of[line], 1.0)] if of is None else _terms(of, "numerator", targets))
        bottoms.append([] if of is None else _terms(of, "denominator", targets))
        needs.append(tuple(sorted({line, *(places[row] for row, _ in tops[-1] + bottoms[-1])})))
    used = {line for need in needs for line in need}
    for line in (*made, *row_of):
        if line not in used:
            cells.refuse(line, columns["value"], "no value, and no datum is made of this line")
    own = [(n, line) for n, line in enumerate(lines) if line in made]
    built = _assembly(entries, tops, bottoms, lines, needs)
    for datum, line in own:
        built.x[datum] = reader.x[line]
        built.q2[datum] = np.nan if reader.given_q2 is None else reader.given_q2[line]
    return built


def _assembly(
    entries: list[Any], tops: list[Terms], bottoms: list[Terms], lines: list[int], needs: list[Any]
) -> Assembly:
    """Put it together; x, q2 and y of a datum are those of its first row, y only where all rows agree."""
    rows = rows_of(entries)
    members = tuple(tuple(row for row, _ in top + bottom) for top, bottom in zip(tops, bottoms, strict=True))
    first = [rows_here[0] for rows_here in members]
    y = np.asarray([rows.y[m[0]] if len({rows.y[r] for r in m}) == 1 else np.nan for m in members])
    combination = Combination(tops, bottoms, len(rows))
    return Assembly(rows, combination, tuple(lines), tuple(needs), members, rows.x[first], rows.q2[first], y)


def _labels(section: Section, cells: Cells, columns: Mapping[str, str]) -> dict[str, int]:
    """Return label -> line; empty labels do not count."""
    if "label" not in columns:
        raise InputError(f"{section.where('datum')}: needs a label column: [columns] label")
    labels: dict[str, int] = {}
    for line, label in enumerate(cells.words(columns["label"])):
        if label in labels:
            first = cells.place(labels[label])
            cells.refuse(line, columns["label"], f"{show(label)} stands in {first} already")
        if label:
            labels[label] = line
    return labels


def _terms(section: Section, key: str, rows: Mapping[str, int]) -> Terms:
    """Return (row, weight) of a sum that is given as { label = weight }."""
    given = section.get(key, {}) if key == "denominator" else section.get(key)
    if not isinstance(given, Mapping) or (key == "numerator" and not given):
        raise InputError(f"{section.where(key)} = {show(given)}: must be weights by row, {{ name = 1.0 }}")
    terms = []
    for label, weight in given.items():
        if label not in rows:
            raise InputError(f"{section.where(key)}: no row {show(label)}{nearest(label, rows)}")
        if isinstance(weight, bool) or not isinstance(weight, int | float) or not np.isfinite(weight):
            raise InputError(f"{section.where(key)}: {label} = {show(weight)}: must be a finite number")
        terms.append((rows[label], float(weight)))
    return terms


def _refuse_doubles(built: Assembly, cells: Cells) -> None:
    """Refuse two data of one table that measure the same."""
    seen: dict[object, int] = {}
    top, bottom = built.combination.numerator, built.combination.denominator
    weights: list[list[object]] = [[] for _ in built.lines]
    for sums in (top, bottom):
        for datum, row, weight in zip(sums.datum, sums.row, sums.weight, strict=True):
            weights[datum].append((sums is bottom, built.rows.key(row), float(weight)))
    for datum, line in enumerate(built.lines):
        key = tuple(weights[datum])
        if key in seen:
            first = cells.place(built.lines[seen[key]])
            cells.refuse(line, None, f"measures the same at the same point as {first}")
        seen[key] = datum
