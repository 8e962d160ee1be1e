"""What flows below x_min: momentum and numbers that leave the grid, linear in the input.

A flow is a row of one number a node: the row times the nodal values of a flavour combination is what has gone
below x_min since the start scale. Rows are named like the blocks: "momentum<-gluon", "number:charm-<-light-".
Combinations are the gluon; light+, the sum of q + qbar over the flavours that act alike; charm+ and so on;
and the same with minus for q - qbar. "number:ns-" acts on what one flavour differs from the mean of them;
where it is not held it equals "number:ns+", and where "number:light-<-light-" is not held it equals
"number:ns-".
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from ._check import Floats

HEAVY = {4: "charm", 5: "bottom", 6: "top"}

Rows = Mapping[str, Floats]


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
    return np.asarray(sum(row @ given.named(source).T for source, row in into(flows, "momentum").items()))


def number(flows: Rows, given: Input, quark: int, light: int) -> Floats | float:
    """Return the number of q - qbar that went below x_min, (scale, replica); parameters as for `momentum`."""
    if quark > light:
        rows = into(flows, f"number:{HEAVY[quark]}-")
        return sum((row @ given.named(source).T for source, row in rows.items()), 0.0)
    own, valence = own_row(flows), given.named("light-")
    gone: Floats = own @ (given.minus(quark) - valence / light).T
    for source, row in _common(flows).items():
        gone = gone + row @ given.named(source).T / light
    return gone


def compose(
    first: Rows, blocks: Rows, first_light: int, second: Rows, second_light: int
) -> dict[str, Floats]:
    """Return the rows of two steps, one after the other.

    Parameters
    ----------
    first : mapping of name to ndarray, (node,)
        Rows of the first step to its end.
    blocks : mapping of name to ndarray, (node, node)
        Blocks of the first step to its end.
    first_light : int
        Number of flavours that act alike in the first step.
    second : mapping of name to ndarray, (scale, node)
        Rows of the second step.
    second_light : int
        The same number in the second step; not less, see `_composed.divided`.

    Returns
    -------
    dict
        Rows of both, (scale, node).
    """
    made: dict[str, Floats] = {}
    for source, row in into(first, "momentum").items():
        made[f"momentum<-{source}"] = row + _momentum_after(blocks, source, second, second_light)
    made["number:ns+"] = first["number:ns+"] + second["number:ns+"] @ blocks["ns+"]
    if "number:ns-" in first or "number:ns-" in second:
        made["number:ns-"] = own_row(first) + own_row(second) @ ns_minus(blocks)
    if any(name.startswith(("number:light-", *_HEAVY_ROWS)) for name in (*first, *second)):
        sources = {source for rows in (blocks, first) for name in rows for source in _minus_source(name)}
        for source in sorted(sources | {"light-"}):
            made |= _numbers_after(first, blocks, first_light, second, second_light, source)
    return made


_HEAVY_ROWS = tuple(f"number:{name}-" for name in HEAVY.values())


def into(flows: Rows, target: str) -> dict[str, Floats]:
    """Return the rows of a target by their source."""
    start = f"{target}<-"
    return {name.removeprefix(start): row for name, row in flows.items() if name.startswith(start)}


def own_row(flows: Rows) -> Floats:
    """Return the row that acts on what one flavour differs from the mean."""
    return flows["number:ns-"] if "number:ns-" in flows else flows["number:ns+"]


def _common(flows: Rows) -> dict[str, Floats]:
    """Return the rows into the sum over the flavours that act alike."""
    return {"light-": own_row(flows)} | into(flows, "number:light-")


def ns_minus(blocks: Rows) -> Floats:
    """Return the block that acts on what q - qbar of one flavour differs from the mean."""
    return blocks["ns-"] if "ns-" in blocks else blocks["ns+"]


def _minus_source(name: str) -> list[str]:
    """Return the source of a block or row between minus combinations, if it is one."""
    target, _, source = name.partition("<-")
    return [source] if target.endswith("-") and source.endswith("-") else []


def _momentum_after(blocks: Rows, source: str, second: Rows, light: int) -> Floats:
    """Return what the second step loses of what the first made of `source`."""
    gone = second["momentum<-gluon"] @ blocks[f"gluon<-{source}"]
    alike = blocks[f"light+<-{source}"]
    for heavy, name in HEAVY.items():
        block = blocks.get(f"{name}+<-{source}")
        if block is None:
            continue
        if heavy <= light:
            alike = alike + block
        elif f"momentum<-{name}+" in second:
            gone = gone + second[f"momentum<-{name}+"] @ block
    return gone + second["momentum<-light+"] @ alike


def _numbers_after(
    first: Rows, blocks: Rows, light: int, second: Rows, alike: int, source: str
) -> dict[str, Floats]:
    """Return the rows of both steps into each number, from one source of the first step."""
    zero = np.zeros_like(blocks["ns+"])
    kept = blocks.get(f"light-<-{source}", ns_minus(blocks) if source == "light-" else zero)
    arriving = {h: blocks.get(f"{name}-<-{source}", zero) for h, name in HEAVY.items() if h > light}
    # What the second step takes for its sources.
    taken = {f"{HEAVY[h]}-": block for h, block in arriving.items() if h > alike}
    taken["light-"] = valence = kept + sum((b for h, b in arriving.items() if h <= alike), zero)
    own = own_row(second)
    common = sum(row @ taken[name] for name, row in _common(second).items()) / alike - own @ valence / alike
    made = {f"number:light-<-{source}": _common(first).get(source, 0.0) + own @ kept + light * common}
    for heavy, block in arriving.items():
        name = f"number:{HEAVY[heavy]}-<-{source}"
        later = own @ block + common
        if heavy > alike:
            rows = into(second, f"number:{HEAVY[heavy]}-")
            if not rows and name not in first:
                continue
            later = sum((row @ taken[of] for of, row in rows.items()), np.zeros_like(common))
        made[name] = first.get(name, 0.0) + later
    return made
