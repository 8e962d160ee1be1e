"""What flows below x_min: momentum and numbers that leave the grid, linear in the input.

A flow is a row of one number a node: the row times the nodal values of a flavour combination is what has
gone below x_min since the start scale. Rows are named like the blocks, "momentum<-gluon" or
"number:charm-<-light-"; combinations are the gluon, light+ = sum of q + qbar over the flavours that act
alike, charm+, and the same with minus for q - qbar.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from ._check import Floats

HEAVY = {4: "charm", 5: "bottom", 6: "top"}

Rows = Mapping[str, Floats]


def name_of(flavour: int) -> str:
    """Return the name of a heavy flavour, as the blocks have it."""
    return HEAVY[flavour]


class Input:
    """Flavour combinations of an input.

    Parameters
    ----------
    values : ndarray, (replica, flavour, node)
        x f(x).
    flavours : sequence of int
        PDG numbers of the middle axis; what is absent is zero.
    light : int
        Number of flavours that act alike.
    """

    def __init__(self, values: Floats, flavours: Sequence[int], light: int) -> None:
        self._values, self._at, self._light = values, {f: i for i, f in enumerate(flavours)}, light
        self._zero = np.zeros((values.shape[0], values.shape[2]))

    def one(self, flavour: int) -> Floats:
        """Return x f(x) of one flavour, (replica, node)."""
        return self._values[:, self._at[flavour]] if flavour in self._at else self._zero

    def minus(self, quark: int) -> Floats:
        """Return q - qbar, (replica, node)."""
        return self.one(quark) - self.one(-quark)

    def named(self, name: str) -> Floats:
        """Return "gluon", "light+", "light-", "charm+", ... (replica, node)."""
        if name == "gluon":
            return self.one(21)
        sign = -1.0 if name[-1] == "-" else 1.0
        quarks = [h for h, word in HEAVY.items() if word == name[:-1]] or range(1, self._light + 1)
        total = self._zero
        for quark in quarks:
            total = total + self.one(quark) + sign * self.one(-quark)
        return total


def momentum(flows: Rows, given: Input) -> Floats:
    """Return the momentum that went below x_min, (scale, replica).

    Parameters
    ----------
    flows : mapping of name to ndarray, (scale, node)
        The rows.
    given : Input
        The input.
    """
    gone = [
        np.einsum("sn,rn->sr", row, given.named(name.removeprefix("momentum<-")))
        for name, row in flows.items()
        if name.startswith("momentum<-")
    ]
    return np.asarray(np.sum(gone, axis=0))


def number(flows: Rows, given: Input, quark: int, light: int) -> Floats:
    """Return the number of q - qbar that went below x_min, (scale, replica); parameters as for `momentum`."""
    valence = given.named("light-")
    if quark > light:
        row = flows.get(f"number:{name_of(quark)}-<-light-")
        own = flows.get(f"number:{name_of(quark)}-<-{name_of(quark)}-")
        shape = (next(iter(flows.values())).shape[0], valence.shape[0])
        gone = np.zeros(shape)
        if row is not None:
            gone += row @ valence.T
        if own is not None:
            gone += own @ given.minus(quark).T
        return gone
    own = flows["number:ns-"]
    common = flows.get("number:light-<-light-", own)
    return own @ (given.minus(quark) - valence / light).T + common @ (valence / light).T


def compose(
    first: Rows, first_blocks: Rows, first_light: int, second: Rows, second_light: int
) -> dict[str, Floats]:
    """Return the rows of two steps, one after the other.

    Parameters
    ----------
    first : mapping of name to ndarray, (node,)
        Rows of the first step to its end.
    first_blocks : mapping of name to ndarray, (node, node)
        Blocks of the first step to its end.
    first_light : int
        Number of flavours that act alike in the first step.
    second : mapping of name to ndarray, (scale, node)
        Rows of the second step.
    second_light : int
        The same number in the second step, not less than that of the first.

    Returns
    -------
    dict
        Rows of both, (scale, node).
    """
    made: dict[str, Floats] = {}
    for name, row in first.items():
        if name.startswith("momentum<-"):
            made[name] = row + _momentum_after(
                first_blocks, name.removeprefix("momentum<-"), second, second_light
            )
    ns = first_blocks.get("ns-", first_blocks["ns+"])
    made["number:ns-"] = first["number:ns-"] + second["number:ns-"] @ ns
    made |= _numbers_after(first, first_blocks, first_light, second, second_light)
    return made


def _heavies(least: int, most: int = 6) -> list[int]:
    return [h for h in HEAVY if least < h <= most]


def _momentum_after(blocks: Rows, source: str, second: Rows, light: int) -> Floats:
    """Return what the second step loses of what the first made of `source`."""
    gone = second["momentum<-gluon"] @ blocks[f"gluon<-{source}"]
    alike = blocks[f"light+<-{source}"]
    for heavy in HEAVY:
        block = blocks.get(f"{name_of(heavy)}+<-{source}")
        if block is None:
            continue
        if heavy <= light:
            alike = alike + block
        elif f"momentum<-{name_of(heavy)}+" in second:
            gone = gone + second[f"momentum<-{name_of(heavy)}+"] @ block
    return gone + second["momentum<-light+"] @ alike


def _numbers_after(first: Rows, blocks: Rows, light: int, second: Rows, alike: int) -> dict[str, Floats]:
    """Return the rows that act on the valence of the first step."""
    ns = blocks.get("ns-", blocks["ns+"])
    own, common = second["number:ns-"], second.get("number:light-<-light-", second["number:ns-"])
    kept = blocks.get("light-<-light-", ns)
    heavy_blocks = {h: blocks.get(f"{name_of(h)}-<-light-") for h in HEAVY}
    valence = kept
    for heavy in _heavies(light, alike):
        block = heavy_blocks[heavy]
        valence = valence if block is None else valence + block
    made = {}
    if "number:light-<-light-" in first or "number:light-<-light-" in second or "light-<-light-" in blocks:
        share = light / alike
        before = first.get("number:light-<-light-", first["number:ns-"])
        made["number:light-<-light-"] = before + own @ (kept - share * valence) + share * common @ valence
    for heavy in _heavies(light):
        block, name = heavy_blocks[heavy], f"number:{name_of(heavy)}-<-light-"
        parts = [first[name]] if name in first else []
        if heavy <= alike:
            share_of_one = valence / alike
            alone = -share_of_one if block is None else block - share_of_one
            parts.append(own @ alone + common @ share_of_one)
        elif name in second:
            parts.append(second[name] @ valence)
        if parts:
            made[name] = np.asarray(sum(parts))
    return made
