"""What a command prints: lines and tables on standard output, how far it is on standard error."""

from __future__ import annotations

import sys
from collections.abc import Sequence

import numpy as np

from .._check import Floats
from .._progress import Line
from ..fitting.chi_square import ChiSquare

_SHOWN = 8  # tables and sources: more would not fit on a screen


class Report:
    """Where a command speaks.

    Parameters
    ----------
    quiet : bool
        Whether it keeps silent.
    """

    def __init__(self, quiet: bool) -> None:
        self._quiet = quiet

    def say(self, text: str = "") -> None:
        """Print one line or several."""
        if not self._quiet:
            print(text)

    def table(self, head: Sequence[str], rows: Sequence[Sequence[str]]) -> None:
        """Print a table: the first column to the left, the others to the right."""
        self.say(table(head, rows))

    def note(self, text: str) -> None:
        """Print a line on standard error, quiet or not: what a user must know of work that ended early."""
        print(f"scalewright: {text}", file=sys.stderr)

    def progress(self, label: str) -> Line | None:
        """Return what a long call reports to; nothing is drawn where standard error is no terminal."""
        return None if self._quiet else Line(label)


def table(head: Sequence[str], rows: Sequence[Sequence[str]]) -> str:
    """Return a table as text, the first column to the left, the others to the right.

    Examples
    --------
    >>> print(table(["what", "value"], [["a", "1.5"], ["bc", "12"]]))
      what  value
      a       1.5
      bc       12
    """
    lines = [head, *rows]
    widths = [max(len(line[i]) for line in lines) for i in range(len(head))]
    return "\n".join(
        "  "
        + "  ".join(
            word.rjust(n) if i else word.ljust(n)
            for i, (word, n) in enumerate(zip(line, widths, strict=True))
        ).rstrip()
        for line in lines
    )


def chi_square_summary(chi_square: ChiSquare, prediction: Floats, report: Report) -> None:
    """Print chi-square of each table and of all, and the sources that are pulled most.

    Parameters
    ----------
    chi_square : ChiSquare
    prediction : ndarray, (datum,)
    report : Report
        Where to print.
    """
    parts = chi_square.per_table(prediction)
    rows = [[part.title, str(part.data), f"{part.alone:.1f}", f"{part.share:.1f}"] for part in parts[:_SHOWN]]
    if len(parts) > _SHOWN:
        rest = parts[_SHOWN:]
        said = f"{len(rest)} more tables"
        rows.append([said, str(sum(p.data for p in rest)), "", f"{sum(p.share for p in rest):.1f}"])
    total = float(np.asarray(chi_square.value(prediction)))
    rows.append(["all", str(prediction.size), "", f"{total:.1f}"])
    report.table(["chi-square", "data", "alone", "share"], rows)
    shifts = chi_square.shifts(prediction)
    order = np.argsort(-abs(shifts))[:_SHOWN]
    if order.size:
        names = chi_square.names_of_sources
        report.say("  common sources at their best fit, in standard deviations:")
        words = [f"{names[k]} {shifts[k]:+.2f}" for k in order]
        report.say("\n".join(f"    {'; '.join(words[k : k + 3])}" for k in range(0, len(words), 3)))


def size(count: int) -> str:
    """Return a number of bytes in words.

    Examples
    --------
    >>> size(512), size(22_334_599)
    ('512 bytes', '22.3 MB')
    """
    if count < 1000:
        return f"{count} bytes"
    return f"{count / 1e3:.1f} kB" if count < 1_000_000 else f"{count / 1e6:.1f} MB"
