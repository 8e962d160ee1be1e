"""Cuts: which data stay, how many each cut removes, and why."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from .. import _check
from .._check import Floats, show
from ..errors import InputError
from .table import Table

__all__ = ["Cut", "Range", "apply_cuts", "in_range"]

Range: TypeAlias = tuple[float | None, float | None]


@dataclass(frozen=True)
class Cut:
    """What one cut did.

    Parameters
    ----------
    reason : str
        The condition that a datum had to meet.
    removed : int
        How many data did not, of those that earlier cuts had left.
    by_table : dict
        Title -> how many of them were in that table.
    """

    reason: str
    removed: int
    by_table: dict[str, int]

    def __str__(self) -> str:
        where = ", ".join(f"{count} of {title}" for title, count in self.by_table.items() if count)
        return f"{self.reason}: removed {self.removed}" + (f" ({where})" if where else "")


def in_range(name: str, given: object, values: Floats, place: Sequence[str]) -> tuple[str, NDArray[np.bool_]]:
    """Return the condition in words, and which of `values` meet it."""
    if not isinstance(given, tuple | list) or len(given) != 2:
        _check.refuse(name, given, f"{name} must be (least, most), one of them may be None")
    least, most = _limit(name, given[0], -np.inf), _limit(name, given[1], np.inf)
    if least is None and most is None:
        _check.refuse(name, tuple(given), f"{name} must be (least, most), one of them may be None")
    if least is not None and most is not None and least > most:
        _check.refuse(name, tuple(given), f"{name} must be (least, most): the first is above the second")
    for row in np.flatnonzero(np.isnan(values))[:1]:
        raise InputError(f"{place[row]}: {name} is not known, so it cannot be cut on")
    keep = np.ones(values.size, bool)
    if least is not None:
        keep &= values >= least
    if most is not None:
        keep &= values <= most
    low = "" if least is None else f"{show(least)} <= "
    high = "" if most is None else f" <= {show(most)}"
    return f"{low}{name}{high}", keep


def _limit(name: str, given: object, nowhere: float) -> float | None:
    """Return a limit, None where there is none: left out, or infinite on the side that excludes nothing."""
    if given is None or (isinstance(given, float) and given == nowhere):
        return None
    return _check.real(name, given)


def apply_cuts(
    tables: Sequence[Table], conditions: Mapping[str, NDArray[np.bool_]]
) -> tuple[list[Table], list[Cut]]:
    """Return the tables of what meets all conditions, (datum,) each, and what each condition removed."""
    owner = np.repeat(np.arange(len(tables)), [len(table) for table in tables])
    left = np.ones(owner.size, bool)
    cuts = []
    for reason, keep in conditions.items():
        gone = left & ~keep
        counts = np.bincount(owner[gone], minlength=len(tables)).tolist()
        by_table = {table.title: count for table, count in zip(tables, counts, strict=True)}
        cuts.append(Cut(reason, int(gone.sum()), by_table))
        left &= keep
    if not left.any():
        raise InputError(f"nothing left after cuts: {'; '.join(map(str, cuts))}")
    parts = [(table, left[owner == number]) for number, table in enumerate(tables)]
    return [table.kept(keep) for table, keep in parts if keep.any()], cuts
