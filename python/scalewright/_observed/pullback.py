"""Rows at a scale carried back to the input: the transpose of what operators do.

A row acts on the gluon, on q + qbar and on q - qbar of six quarks: axes (point, 13, node) in the order gluon,
plus 1 to 6, minus 1 to 6. Flavours that act alike along the whole route, the light ones, differ from their
mean by what evolves with the non-singlet blocks; so a row on them is split into its mean and what is left.

Which one when: `_core.Evolution.pull_back` does it for a live set of operators, many scales at once; the
functions here for blocks at hand.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from .._check import Floats

__all__ = ["CHANNELS", "GLUON", "MINUS", "PLUS", "flavour_rows", "pulled_back"]

GLUON, PLUS, MINUS = 0, slice(1, 7), slice(7, 13)
CHANNELS = 13
_HEAVY = {4: "charm", 5: "bottom", 6: "top"}


def pulled_back(rows: Floats, blocks: Mapping[str, Floats], light: int) -> Floats:
    """Return rows on the input from rows at the output of one scale.

    Parameters
    ----------
    rows : ndarray, (point, 13, node)
        At the output.
    blocks : mapping
        Name -> (node, node), as `Operators.block_names`.
    light : int
        Number of flavours that act alike.

    Returns
    -------
    ndarray, (point, 13, node)
    """
    result = np.zeros_like(rows)
    heavy = range(max(light + 1, 4), 7)
    for sign, part in (("+", PLUS), ("-", MINUS)):
        of_quarks = rows[:, part]
        mean = of_quarks[:, :light].mean(axis=1)
        rest = of_quarks[:, :light] - mean[:, np.newaxis]
        alone = blocks["ns+"] if sign == "+" else blocks.get("ns-", blocks["ns+"])
        own = blocks.get(f"light{sign}<-light{sign}", alone)
        outputs = {f"light{sign}": mean} | {f"{_HEAVY[h]}{sign}": of_quarks[:, h - 1] for h in heavy}
        if sign == "+":
            outputs["gluon"] = rows[:, GLUON]
        known = {**blocks, f"light{sign}<-light{sign}": own}
        result[:, part][:, :light] = rest @ alone + _through(outputs, f"light{sign}", known)[:, np.newaxis]
        for h in heavy:
            result[:, part][:, h - 1] = _through(outputs, f"{_HEAVY[h]}{sign}", known)
        if sign == "+":
            result[:, GLUON] = _through(outputs, "gluon", known)
    return result


def _through(outputs: Mapping[str, Floats], source: str, blocks: Mapping[str, Floats]) -> Floats:
    """Return the row on one input channel."""
    total = np.zeros_like(next(iter(outputs.values())))
    for channel, row in outputs.items():
        block = blocks.get(f"{channel}<-{source}")
        if block is not None:
            total += row @ block
    return total


def flavour_rows(rows: Floats, flavours: tuple[int, ...]) -> Floats:
    """Return rows on single flavours, (point, flavour, node), from rows on gluon, sums and differences."""
    result = np.empty((rows.shape[0], len(flavours), rows.shape[2]))
    for place, flavour in enumerate(flavours):
        if flavour == 21:
            result[:, place] = rows[:, GLUON]
        else:
            quark = abs(flavour)
            result[:, place] = rows[:, quark] + np.sign(flavour) * rows[:, 6 + quark]
    return result
