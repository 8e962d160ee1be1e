"""What every bench gives back: figures with the goal beside each, and how they are shown."""

from __future__ import annotations

import argparse
import json
from collections.abc import Callable, Iterable
from dataclasses import asdict, dataclass


@dataclass(frozen=True)
class Figure:
    """One measured figure.

    Attributes
    ----------
    what
        What was measured.
    value
        The figure as it is printed, with its unit.
    goal
        What was aimed at; empty if nothing was.
    """

    what: str
    value: str
    goal: str = ""


def table(figures: Iterable[Figure]) -> str:
    """Return a table for a document."""
    rows = [f"| {figure.what} | {figure.value} | {figure.goal} |" for figure in figures]
    return "\n".join(["| what | measured | goal |", "| --- | --- | --- |", *rows])


def show(measure: Callable[[bool], list[Figure]], description: str) -> None:
    """Run a bench as a command: `--small` once for its answer, `--json` for `run.py`."""
    parser = argparse.ArgumentParser(description=description)
    parser.add_argument("--small", action="store_true", help="a small case, for its answer and not its time")
    parser.add_argument("--json", action="store_true", help="print the figures as JSON")
    options = parser.parse_args()
    figures = measure(options.small)
    if options.json:
        print(json.dumps([asdict(figure) for figure in figures]))
    else:
        print(table(figures))


def check(what: str, deviation: float, tolerance: float) -> None:
    """Refuse to publish the time of a wrong answer."""
    if not deviation <= tolerance:
        raise SystemExit(f"wrong answer: {what} is off by {deviation:.3e}, allowed is {tolerance:.1e}")
