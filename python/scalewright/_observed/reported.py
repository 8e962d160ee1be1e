"""What a map says of itself: orders, regimes, and what it does not correct for."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from .._display import count, screen
from .orders import Orders
from .problem import Problem

__all__ = ["described"]

#: Targets that are no nuclei: of them nothing can be corrected.
_NUCLEONS = ("proton", "neutron", "isoscalar")


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
    lines += [("", word) for word in uncorrected(problem.points.target, corrections)]
    return screen(title, lines)


def uncorrected(targets: Sequence[str], corrections: Sequence[Any]) -> list[str]:
    """Say for which nuclei and powers there is no correction."""
    factors = {target for one in corrections if not hasattr(one, "form") for target in one.targets}
    twists = {target for one in corrections if hasattr(one, "form") for target in one.targets}
    said = []
    for target in dict.fromkeys(targets):
        if target not in _NUCLEONS and target not in factors:
            name = "the deuteron" if target == "deuteron" else f"the nucleus {target}"
            said.append(f"no correction for {name} ({_rows(targets, target)}): free protons and neutrons")
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
