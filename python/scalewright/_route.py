"""Where a set of operators begins and ends, and where its blocks come from.

A `Live` source is the compiled core's own solution, dense in scale; a `Held` one is arrays, made, loaded
from a file or composed. Both answer the same questions.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, TypeAlias

import numpy as np

from ._check import Floats, Integers, show, show_all
from ._display import brief
from .errors import InputError, RangeError

if TYPE_CHECKING:
    from . import _core

# Two ways of writing one scale, 91.1876**2 and the product read from a file, may differ in the last digits.
SAME_SCALE = 1e-12


@dataclass(frozen=True, eq=False)
class Route:
    """Where a set of operators begins and ends.

    Parameters
    ----------
    start_q2 : float
        Scale of the input in GeV^2.
    start_nf : int
        Number of active flavours of the input.
    intrinsic : tuple of int
        Heavy flavours above `start_nf` whose input is allowed.
    q2, nf : ndarray, (scale,)
        Scales of the output in GeV^2 and their numbers of flavours.
    """

    start_q2: float
    start_nf: int
    intrinsic: tuple[int, ...]
    q2: Floats
    nf: Integers

    def __post_init__(self) -> None:
        for array in (self.q2, self.nf):
            array.flags.writeable = False

    @property
    def key(self) -> tuple[Any, ...]:
        """What makes two routes the same."""
        return self.start_q2, self.start_nf, self.intrinsic, self.q2.tobytes(), self.nf.tobytes()

    @property
    def active(self) -> tuple[int, ...]:
        """PDG numbers that an input must have."""
        return listed(range(1, self.start_nf + 1))

    @property
    def allowed(self) -> tuple[int, ...]:
        """PDG numbers that an input may have."""
        return listed((*range(1, self.start_nf + 1), *self.intrinsic))

    def made(self, nf: Integers) -> tuple[int, ...]:
        """Return the PDG numbers that an output with these numbers of flavours has."""
        return listed(sorted({*range(1, int(nf.max()) + 1), *range(1, self.start_nf + 1), *self.intrinsic}))

    @property
    def start_words(self) -> str:
        """Say where it begins."""
        heavy = f", intrinsic {show_all(self.intrinsic)}" if self.intrinsic else ""
        return f"{brief(self.start_q2)} GeV^2 (nf = {self.start_nf}{heavy})"

    @property
    def end_words(self) -> str:
        """Say where it ends."""
        if self.q2.size == 1:
            return f"{brief(self.q2[0])} GeV^2 (nf = {self.nf[0]})"
        least, most = brief(self.q2.min()), brief(self.q2.max())
        fewest, most_nf = self.nf.min(), self.nf.max()
        counts = f"{fewest}" if fewest == most_nf else f"{fewest} to {most_nf}"
        return f"{self.q2.size} scales from {least} to {most} GeV^2 (nf = {counts})"

    def __str__(self) -> str:
        """One line."""
        return f"{self.start_words} -> {self.end_words}"

    def find(self, q2: Floats, nf: Integers) -> list[int] | None:
        """Return where scales stand in the list; None if one does not."""
        places = []
        for scale, count in zip(q2, nf, strict=True):
            same = np.flatnonzero((np.abs(self.q2 - scale) <= SAME_SCALE * scale) & (self.nf == count))
            if same.size == 0:
                return None
            places.append(int(same[0]))
        return places


def listed(quarks: Sequence[int]) -> tuple[int, ...]:
    """Return the gluon, then each quark and its antiquark."""
    return (21, *(sign * quark for quark in quarks for sign in (1, -1)))


def _words(q2: Floats, nf: Integers) -> str:
    """Write scales for a message."""
    pairs = (f"{show(scale)} (nf = {count})" for scale, count in zip(q2, nf, strict=True))
    return show_all(pairs).replace("'", "")


class Live:
    """The solution as the core keeps it: any scale between the lowest and the highest built."""

    def __init__(self, evolution: _core.Evolution) -> None:
        self._evolution = evolution
        self.names, self.light = tuple(evolution.names), evolution.light
        self.flow_names = tuple(evolution.flow_names)
        self.error, self.steps = evolution.error, evolution.steps

    @property
    def evolution(self) -> _core.Evolution:
        """The compiled core's solution."""
        return self._evolution

    def refuse(self, q2: Floats, nf: Integers) -> None:
        """Raise a `RangeError` if a scale is not served."""
        ranges = self._evolution.ranges()
        for scale, count in zip(q2, nf, strict=True):
            slack = SAME_SCALE * scale
            if not any(n == count and low - slack <= scale <= high + slack for n, low, high in ranges):
                served = ", ".join(f"{show(low)} to {show(high)} (nf = {n})" for n, low, high in ranges)
                asked = f"q2 = {show(scale)} (nf = {count})"
                raise RangeError(f"{asked}: these operators serve {served} GeV^2; build them for more")

    def at(self, q2: Floats, nf: Integers, threads: int) -> tuple[Floats, Floats]:
        """Return blocks (scale, block, node, node) and flows (scale, flow, node)."""
        self.refuse(q2, nf)
        return self._evolution.values(q2, nf, threads)

    def derivative(self, parameter: str, threads: int) -> Live:
        """Return the source of derivatives, at the cost of a build."""
        return Live(self._evolution.derivative(parameter, threads))


@dataclass(frozen=True, eq=False)
class Held:
    """Blocks and flows as arrays: the scales of the route and no others."""

    route: Route
    names: tuple[str, ...]
    light: int
    values: Floats
    flow_names: tuple[str, ...]
    flow_values: Floats
    error: float
    steps: int

    def __post_init__(self) -> None:
        for array in (self.values, self.flow_values):
            array.flags.writeable = False

    def refuse(self, q2: Floats, nf: Integers) -> None:
        """Raise a `RangeError` if a scale is not served."""
        if self.route.find(q2, nf) is None:
            asked, at_hand = _words(q2, nf), _words(self.route.q2, self.route.nf)
            raise RangeError(f"q2 = {asked}: these operators hold {at_hand} GeV^2 only; build them for more")

    def at(self, q2: Floats, nf: Integers, threads: int) -> tuple[Floats, Floats]:
        """Return blocks (scale, block, node, node) and flows (scale, flow, node)."""
        self.refuse(q2, nf)
        places = self.route.find(q2, nf)
        if places == list(range(self.route.q2.size)):  # all of them in order: no copy
            return self.values, self.flow_values
        return self.values[places], self.flow_values[places]

    def derivative(self, parameter: str, threads: int) -> Live:
        """Raise an `InputError`: arrays do not know what they were made from."""
        raise InputError(
            f"parameter = {show(parameter)}: operators that were loaded, unpickled or composed have no "
            "derivatives; build them with build_operators"
        )


#: What blocks and flows come from.
Source: TypeAlias = Live | Held
