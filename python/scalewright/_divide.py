"""The same operators with fewer flavours taken together.

Where L flavours act alike, one of them, or the sum over some, goes by the same blocks as their sum. With ns
acting on what a flavour differs from the mean, and C on the sum over all L, the sum over l of them becomes
ns (q_l - l/L q_L) + l/L C q_L. So a set in which charm was one of the light flavours is written as one in
which charm stands alone; a second set that needs it so can follow.
"""

from __future__ import annotations

from collections.abc import Mapping

from ._check import Floats
from ._flows import HEAVY, into, ns_minus, own_row

Rows = Mapping[str, Floats]


def divide(flows: Rows, blocks: Rows, light: int, fewer: int) -> tuple[dict[str, Floats], dict[str, Floats]]:
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
    made_blocks |= _divided(blocks, "", "+", blocks["ns+"], alone, light)
    made_blocks |= _divided(blocks, "", "-", ns_minus(blocks), alone, light)
    made_flows = {name: row for name, row in flows.items() if "<-" not in name}
    made_flows |= _divided(flows, "number:", "-", own_row(flows), alone, light)
    momentum = into(flows, "momentum")
    momentum |= {f"{name}+": momentum["light+"] for name in alone}
    made_flows |= {f"momentum<-{source}": row for source, row in momentum.items()}
    return made_flows, made_blocks


def _divided(
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
