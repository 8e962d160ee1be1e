"""Two sets of operators, one after the other."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from . import _flows
from ._check import Floats, show
from ._divide import divide
from ._route import Held, Route, listed
from .errors import InputError

if TYPE_CHECKING:
    from .operators import Operators


def composed(first: Operators, second: Operators) -> tuple[Route, Held]:
    """Return route and blocks of `second` after `first`.

    Parameters
    ----------
    first, second : Operators
        They must fit: same theory and grid, and the start of `second` a scale that `first` serves.

    Raises
    ------
    InputError
        If they do not fit.
    RangeError
        If `first` does not serve the start of `second`.
    """
    from . import _core

    _refuse_misfits(first, second)
    q2, nf = np.array([second.start_q2]), np.array([second.start_nf])
    blocks, flows = first._source.at(q2, nf, 0)
    middle = blocks[0]
    names, light, values = _core.compose(
        first_names=first.block_names,
        first_light=first.light,
        first_values=middle,
        second_names=second.block_names,
        second_light=second.light,
        second_values=second.blocks,
    )
    rows = _flows_of_both(first, second, flows[0], middle)
    route = Route(first.start_q2, first.start_nf, first.intrinsic, second.q2.copy(), second.nf.copy())
    error, steps = first.error + second.error, first.steps + second.steps
    below = np.stack(list(rows.values()), axis=1)
    return route, Held(route, tuple(names), light, values, tuple(rows), below, error, steps)


def _flows_of_both(first: Operators, second: Operators, flows: Floats, middle: Floats) -> dict[str, Floats]:
    """Return the rows of what both lose below x_min."""
    before = dict(zip(first._source.flow_names, flows, strict=True))
    blocks = dict(zip(first.block_names, middle, strict=True))
    light = first.light
    if second.light < light:
        before, blocks = divide(before, blocks, light, second.light)
        light = second.light
    after = dict(zip(second._source.flow_names, np.moveaxis(second._all()[1], 1, 0), strict=True))
    return _flows.compose(before, blocks, light, after, second.light)


def _refuse_misfits(first: Operators, second: Operators) -> None:
    """Refuse sets that are not about the same thing, or a second that cannot take all of the first."""
    if first.grid != second.grid:
        raise InputError(f"first.grid = {first.grid!r}: the second set is for {second.grid!r}")
    if first.theory != second.theory:
        raise InputError("first.theory differs from the theory of the second set: they must be the same")
    arriving = {abs(flavour) for flavour in listed((*range(1, first.start_nf + 1), *first.intrinsic))} - {21}
    taken = {*range(1, second.start_nf + 1), *second.intrinsic}
    lost = sorted(arriving - taken)
    if lost:
        place = f"{show(second.start_q2)} GeV^2 (nf = {second.start_nf})"
        raise InputError(
            f"flavour {lost[0]} arrives at {place} and the second set does not take it: "
            f"build it with intrinsic=({lost[0]},)"
        )
