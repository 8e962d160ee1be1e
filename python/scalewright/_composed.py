"""Two sets of operators, one after the other; and the same set with fewer flavours taken together.

Where L flavours act alike, one of them, or the sum over some, goes by the same blocks as their sum. With ns
acting on what a flavour differs from the mean, and C on the sum over all L, the sum over l of them becomes
ns (q_l - l/L q_L) + l/L C q_L. So a set in which charm was one of the light flavours is written as one in
which charm stands alone, which is what a second set may need that crosses the charm threshold downwards.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

import numpy as np

from . import _flows
from ._check import Floats, show
from ._flows import HEAVY, into, ns_minus, own_row
from ._route import Held, Route, listed
from .errors import InputError

if TYPE_CHECKING:
    from .operators import Operators

Rows = Mapping[str, Floats]


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
        before, blocks = divided(before, blocks, light, second.light)
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


def divided(flows: Rows, blocks: Rows, light: int, fewer: int) -> tuple[dict[str, Floats], dict[str, Floats]]:
    """Return rows and blocks of a set with `fewer` flavours taken together.

    Parameters
    ----------
    flows : mapping of name to ndarray, (node,)
        Rows of what flows below x_min.
    blocks : mapping of name to ndarray, (node, node)
        Blocks at the same scale.
    light, fewer : int
        Numbers of flavours that act alike: those of the set, and those wanted, 3 at least.

    Returns
    -------
    dict, dict
        Rows and blocks.
    """
    alone = [HEAVY[flavour] for flavour in range(fewer + 1, light + 1)]
    made_blocks = {name: block for name, block in blocks.items() if "<-" not in name}
    made_blocks |= _split(blocks, "", "+", blocks["ns+"], alone, light)
    made_blocks |= _split(blocks, "", "-", ns_minus(blocks), alone, light)
    made_flows = {name: row for name, row in flows.items() if "<-" not in name}
    made_flows |= _split(flows, "number:", "-", own_row(flows), alone, light)
    momentum = into(flows, "momentum")
    momentum |= {f"{name}+": momentum["light+"] for name in alone}
    made_flows |= {f"momentum<-{source}": row for source, row in momentum.items()}
    return made_flows, made_blocks


def _split(
    items: Rows, prefix: str, sign: str, ns: Floats, alone: list[str], light: int
) -> dict[str, Floats]:
    """Return the items between combinations of one sign, the flavours of `alone` on their own."""
    together, singles = f"light{sign}", [f"{name}{sign}" for name in alone]
    share = (light - len(alone)) / light
    common = {together: ns} | into(items, f"{prefix}{together}")
    off_mean = common[together] - ns
    made = {}
    for source, item in common.items():
        rest = off_mean if source == together else item
        made[f"{prefix}{together}<-{source}"] = share * rest + (ns if source == together else 0.0)
        made |= {f"{prefix}{single}<-{source}": rest / light for single in singles}
    for source in singles:
        made[f"{prefix}{together}<-{source}"] = share * off_mean
        for single in singles:
            made[f"{prefix}{single}<-{source}"] = off_mean / light + (ns if single == source else 0.0)
    for name, item in items.items():
        target, _, source = name.removeprefix(prefix).partition("<-")
        if not name.startswith(prefix) or target == together or not _belongs(target, source, sign):
            continue
        made[name] = item
        if source == together:
            made |= {f"{prefix}{target}<-{single}": item for single in singles}
    return made


def _belongs(target: str, source: str, sign: str) -> bool:
    """Say whether an item stands between combinations of this sign; the gluon counts as plus."""
    signs = {word[-1] for word in (target, source) if word and word != "gluon"}
    return bool(source) and (signs == {sign} or (not signs and sign == "+"))
