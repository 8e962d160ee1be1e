"""How objects show themselves: short numbers, one screen of text, one table of HTML.

Messages of bad input are another matter: they show numbers to the last digit, see `_check.show`.
"""

from __future__ import annotations

import html
from collections.abc import Iterable, Sequence

import numpy as np

Rows = Sequence[tuple[str, str]]


def brief(value: float) -> str:
    """Write a number with at most ten digits.

    Examples
    --------
    >>> brief(91.1876**2), brief(1e-7), brief(100000.0)
    ('8315.178394', '1e-07', '100000')
    """
    return f"{float(value):.10g}"


def brief_all(values: Iterable[float], most: int = 8) -> str:
    """Write a list of numbers, the middle left out when it is long."""
    words = [brief(value) for value in np.asarray(list(values))]
    return ", ".join(words if len(words) <= most else [*words[: most - 1], "...", words[-1]])


def count(number: int, noun: str) -> str:
    """Return "1 replica", "2 replicas"."""
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"


def screen(title: str, rows: Rows) -> str:
    """Return one screen: a title, then name and words in two columns."""
    width = max(len(name) for name, _ in rows)
    return "\n".join([title, *(f"  {name:<{width}}  {words}" for name, words in rows)])


def table(title: str, rows: Rows, more: str = "") -> str:
    """Return the same as an HTML table, for notebooks; `more` is text that stands folded below it."""
    cells = (
        f"<tr><th style='text-align:left'>{html.escape(name)}</th>"
        f"<td style='text-align:left'>{html.escape(words)}</td></tr>"
        for name, words in rows
    )
    made = f"<table><caption>{html.escape(title)}</caption>{''.join(cells)}</table>"
    if more:
        head, _, rest = more.partition("\n")
        made += f"<details><summary>{html.escape(head)}</summary><pre>{html.escape(rest)}</pre></details>"
    return made
