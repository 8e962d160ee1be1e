"""Which rows a correction is for, by target and current."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from .. import _check
from .._check import Integers
from .._display import count
from ..errors import InputError

__all__ = ["chosen_rows", "target_names", "without_factor"]

_NAMES = ("proton", "neutron", "deuteron", "isoscalar")
#: Targets that are no nuclei: of them nothing can be corrected.
_NUCLEONS = ("proton", "neutron", "isoscalar")


def target_names(given: Any) -> tuple[str, ...]:
    """Return names of targets as `Points.target` has them: one or a list, a nucleus as {"z": 26, "a": 56}."""
    several = list(given) if isinstance(given, list | tuple) and not hasattr(given, "z") else [given]
    if not several:
        _check.refuse("targets", given, "there must be at least one")
    return tuple(_name(one) for one in several)


def _name(given: Any) -> str:
    if isinstance(given, dict) and set(given) == {"z", "a"}:
        z, a = (_check.whole(f"targets.{key}", given[key], least=0) for key in ("z", "a"))
        return f"z={z} a={a}"
    if hasattr(given, "z") and hasattr(given, "a"):
        return f"z={given.z} a={given.a}"
    return _check.choice("targets", given, _NAMES)


def chosen_rows(
    points: Any, targets: tuple[str, ...], current: str | None, name: str, *, tagged: bool
) -> Integers:
    """Return the rows of these targets; refuse if there are none.

    Parameters
    ----------
    points : Points
    targets : tuple of str
    current : {"neutral", "charged"} or None
        None for both.
    name : str
        Of the correction, for messages.
    tagged : bool
        Whether rows with a tagged quark count.
    """
    mask = np.array([target in targets for target in points.target], dtype=bool)
    if current is not None:
        mask &= np.asarray(points.is_charged) == (current == "charged")
    if not tagged:
        mask &= np.asarray(points.tag) == 0
    if not mask.any():
        held = _check.show_all(sorted(set(points.target)))
        what = f"no row of the map has target {' or '.join(targets)}"
        what += "" if current is None else f" and a {current} current"
        raise InputError(f"corrections: {name}: {what}; there are {held}")
    return np.flatnonzero(mask)


def without_factor(targets: Sequence[str], corrections: Sequence[Any]) -> list[str]:
    """Say which deuterons and nuclei no factor corrects, one sentence each.

    Parameters
    ----------
    targets : sequence of str
        Of the rows.
    corrections : sequence of Correction
    """
    corrected = {target for one in corrections if one.corrects_target for target in one.targets}
    said = []
    for target in dict.fromkeys(targets):
        if target not in _NUCLEONS and target not in corrected:
            name = "the deuteron" if target == "deuteron" else f"the nucleus {target}"
            rows = count(list(targets).count(target), "row")
            said.append(f"no correction for {name} ({rows}): free protons and neutrons")
    return said
