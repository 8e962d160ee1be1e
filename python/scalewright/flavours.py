"""Names of flavours and of their combinations, as sums over PDG numbers.

=================== =============================================================
name                meaning
=================== =============================================================
21, "g", "gluon"    gluon
1 to 6, "d" to "t"   quark (d u s c b t)
-1 to -6, "dbar"    antiquark (dbar ubar ...)
"u_v", "u-"         u - ubar, and so for each quark
"u+"                u + ubar, and so for each quark
"singlet"           sum of q + qbar over the quarks
"valence"           sum of q - qbar over the quarks
"sea"               2 times the sum of qbar over the quarks: singlet - valence
"dbar - ubar"       any sum of the above, with factors: "2*dbar + 2*ubar"
=================== =============================================================

"The quarks" of the last named combinations are those that are asked for: the active ones, and heavier ones
that are held as well.
"""

from __future__ import annotations

import re
from collections.abc import Iterable

from . import _check
from .errors import InputError

__all__ = ["combination", "flavour_name"]

QUARKS = ("d", "u", "s", "c", "b", "t")

_SINGLE = {"g": 21, "gluon": 21}
_SINGLE.update({name: number for number, name in enumerate(QUARKS, 1)})
_SINGLE.update({name + "bar": -number for number, name in enumerate(QUARKS, 1)})

#: Weight of quark and of antiquark in the combinations that sum over quarks.
_SUMS = {"singlet": (1.0, 1.0), "valence": (1.0, -1.0), "sea": (0.0, 2.0)}

_NAMES = (*_SINGLE, *(q + tail for tail in ("_v", "+", "-") for q in QUARKS), *_SUMS)

# One term: sign, factor, name. A plus or minus after a quark belongs to its name when no other name follows.
_TERM = re.compile(
    r"""\s*(?P<sign>[+-]?)\s*
        (?:(?P<factor>\d+(?:\.\d*)?|\.\d+)\s*\*?\s*)?
        (?P<name>[A-Za-z]+(?:_v)?(?:[+-](?=\s*(?:$|[+-])))?)\s*""",
    re.VERBOSE,
)


def combination(flavour: int | str, quarks: Iterable[int] = range(1, 7)) -> dict[int, float]:
    """Return a flavour or a combination as weights of PDG numbers.

    Parameters
    ----------
    flavour : int or str
        PDG number or name, as in the table at the head of this module.
    quarks : iterable of int
        The quarks that "singlet", "valence" and "sea" sum over.

    Returns
    -------
    dict
        PDG number -> weight; weights that cancel are left out.

    Raises
    ------
    InputError
        If the number or the name is unknown.

    Examples
    --------
    >>> combination("u_v")
    {2: 1.0, -2: -1.0}
    >>> combination("dbar - ubar")
    {-1: 1.0, -2: -1.0}
    >>> combination("sea", quarks=(1, 2, 3))
    {-1: 2.0, -2: 2.0, -3: 2.0}
    """
    if not isinstance(flavour, str):
        return {_number(flavour): 1.0}
    text = flavour.strip()
    if re.fullmatch(r"-?\d+", text):
        return {_number(int(text)): 1.0}
    weights: dict[int, float] = {}
    summed = tuple(quarks)
    for factor, name in _terms(text):
        for number, weight in _named(name, summed).items():
            weights[number] = weights.get(number, 0.0) + factor * weight
    return {number: weight for number, weight in weights.items() if weight != 0.0}


def flavour_name(number: int) -> str:
    """Return the name of a PDG number.

    Examples
    --------
    >>> flavour_name(-4), flavour_name(21)
    ('cbar', 'g')
    """
    number = _number(number)
    if number == 21:
        return "g"
    return QUARKS[abs(number) - 1] + ("bar" if number < 0 else "")


def quark(flavour: int | str) -> int:
    """Return the PDG number, 1 to 6, of a quark given by number or name."""
    weights = combination(flavour)
    number = next(iter(weights), 0)
    if len(weights) != 1 or weights[number] != 1.0 or not 1 <= number <= 6:
        _check.refuse("flavour", flavour, f"must be a quark: 1 to 6, or one of {', '.join(QUARKS)}")
    return number


def _number(value: object) -> int:
    """Return a PDG number, or refuse it."""
    number = _check.whole("flavour", value)
    if number not in _check.PARTONS:
        _check.refuse("flavour", number, "a PDG number must be 21 (gluon), 1 to 6 or -1 to -6")
    return number


def _terms(text: str) -> list[tuple[float, str]]:
    """Split a sum into factors and names."""
    terms: list[tuple[float, str]] = []
    position = 0
    while position < len(text) or not terms:
        match = _TERM.match(text, position)
        if match is None or (terms and not match["sign"]):
            where = "" if position == 0 else f" (from {text[position:]!r} on)"
            raise InputError(f"flavour = {_check.show(text)}: not a sum of flavours{where}")
        factor = float(match["factor"] or 1.0)
        terms.append((-factor if match["sign"] == "-" else factor, match["name"]))
        position = match.end()
    return terms


def _named(name: str, quarks: tuple[int, ...]) -> dict[int, float]:
    """Return the weights of one name."""
    if name in _SINGLE:
        return {_SINGLE[name]: 1.0}
    if name in _SUMS:
        both = [
            (sign * number, weight)
            for sign, weight in zip((1, -1), _SUMS[name], strict=True)
            for number in quarks
        ]
        return {number: weight for number, weight in both if weight != 0.0}
    base, tail = name.removesuffix("_v").rstrip("+-"), name[-1]
    if name in _NAMES:
        number = _SINGLE[base]
        return {number: 1.0, -number: 1.0 if tail == "+" else -1.0}
    known = (
        "a PDG number, g, d, u, s, c, b, t, dbar ..., u_v, u+, u-, singlet, valence, sea or a sum of these"
    )
    _check.refuse("flavour", name, f"must be {known}{_check.nearest(name, _NAMES)}")
