"""What a map says of itself: orders, regimes, and what it does not correct for."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from .._display import count, screen
from .._observed.orders import Orders
from .._observed.problem import Problem
from .selection import without_factor

__all__ = ["described"]


def described(problem: Problem, orders: Orders, title: str, corrections: Sequence[Any]) -> str:
    """Return one screen.

    Parameters
    ----------
    problem : Problem
    orders : Orders
    title : str
    corrections : sequence of Correction
        Those that go with the map.
    """
    lines = [("targets", _counted(problem.points.target)), *orders.summary()]
    lines.append(("target mass", "kept in light quarks" if problem.target_mass else "not kept"))
    lines += [("corrected", f"{one.name}: {_what(one)}") for one in corrections]
    lines += [("", word) for word in _missing(problem.points.target, corrections)]
    return screen(title, lines)


def _missing(targets: Sequence[str], corrections: Sequence[Any]) -> list[str]:
    """Say for which nuclei and powers there is no correction."""
    twists = {target for one in corrections if not one.corrects_target for target in one.targets}
    said = without_factor(targets, corrections)
    bare = [target for target in dict.fromkeys(targets) if target not in twists]
    if bare:
        said.append("no higher twist" + ("" if not twists else f" for {', '.join(bare)}"))
    return said


def _what(correction: Any) -> str:
    parameters = count(len(correction.names), "parameter")
    return f"{type(correction).__name__} for {', '.join(correction.targets)}, {parameters}"


def _counted(targets: Sequence[str]) -> str:
    return ", ".join(f"{name} ({_rows(targets, name)})" for name in dict.fromkeys(targets))


def _rows(targets: Sequence[str], name: str) -> str:
    return count(targets.count(name), "row")
