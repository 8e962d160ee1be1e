"""What reading a table understood, in words."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from .._check import Floats, show
from .cuts import Cut
from .table import Table

__all__ = ["describe"]


def describe(tables: Sequence[Table], cuts: Sequence[Cut]) -> str:
    """Return one paragraph a table, then the cuts."""
    lines = [line for table in tables for line in _table(table)]
    if cuts:
        lines += ["Cuts", *(f"  {cut}" for cut in cuts)]
    return "\n".join(lines)


def _table(table: Table) -> list[str]:
    """Return the lines of one table."""
    rows, combination = table.assembly.rows, table.assembly.combination
    facts = [
        ("data", f"{len(table)}, values from {show(table.value.min())} to {show(table.value.max())}"),
        ("unit", table.unit),
    ]
    if not combination.is_identity:
        facts.append(("made of", f"{len(rows)} rows, {'sums' if combination.is_linear else 'ratios'}"))
    facts += [(name, _range(getattr(rows, name))) for name in ("x", "q2", "y", "s")]
    words = ("measure", "current", "exchange", "beam", "target", "tagged")
    facts += [(name, _words(getattr(rows, name))) for name in words]
    facts.append(("polarisation", _range(rows.polarisation)))
    facts += [("uncertainty", _uncertainty(table, number)) for number in range(len(table.uncertainties))]
    facts += [("correlated", _matrix(table, number)) for number in range(len(table.correlated))]
    if table.unused:
        facts.append(("unused columns", ", ".join(table.unused)))
    return [table.title, *(f"  {name:<15}{value}" for name, value in facts if value)]


def _range(values: Floats) -> str:
    """Return "0.1 to 0.5", one number if there is only one, nothing if none is known."""
    known = values[~np.isnan(values)]
    if known.size == 0:
        return ""
    low, high = f"{known.min():.6g}", f"{known.max():.6g}"
    text = low if low == high else f"{low} to {high}"
    return text if known.size == values.size else f"{text}, not known for {values.size - known.size}"


def _words(values: Sequence[object]) -> str:
    """Return each word once; with counts where there are several."""
    counts = {value: values.count(value) for value in dict.fromkeys(values)}
    if len(counts) == 1:
        return "" if values[0] is None else str(values[0])
    return ", ".join(f"{'none' if word is None else word} ({count})" for word, count in counts.items())


def _uncertainty(table: Table, number: int) -> str:
    """Return kind and median size of an uncertainty."""
    part = table.uncertainties[number]
    kind = "multiplicative" if part.multiplicative else "additive"
    shared = "independent" if part.source is None else f"one source, {show(part.source)}"
    size = f"{100.0 * np.median(np.abs(part.size)):.3g} per cent"
    if not part.multiplicative:
        size = f"{np.median(np.abs(part.size)):.3g}"
    moved = int(np.count_nonzero(part.offset))
    return f"{part.name}: {kind}, {shared}, median {size}" + (f", moves {moved} values" if moved else "")


def _matrix(table: Table, number: int) -> str:
    """Return kind of a matrix, and what a repair did."""
    part = table.correlated[number]
    kind = "multiplicative" if part.multiplicative else "additive"
    return f"{part.name}: {kind}" + (
        f", repaired: an eigenvalue moved by {part.moved:.3g}" if part.moved else ""
    )
