"""What each prediction is formally: the order of each part, how heavy quarks are treated, the regime.

An order is the highest power of a kept: LO a^0, NLO a^1, NNLO a^2. Massive parts are known to a^1 here, so
that charm and bottom are NLO under light quarks of any higher order.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from .. import _check
from .._display import count
from .._measured.combination import Combination
from ..kinematics import BOUNDARIES, Regimes, regimes
from .measures import FUNCTIONS
from .problem import Problem

__all__ = ["Orders", "orders_of"]

_QUARKS = {4: "charm", 5: "bottom"}
_F2, _FL, _XF3 = (FUNCTIONS.index(name) for name in ("F2", "FL", "xF3"))


@dataclass(frozen=True, eq=False)
class Orders:
    """Formal orders and regimes, one entry a row.

    Parameters
    ----------
    light : tuple of str
        Order of F2 (and xF3) of quarks without mass: "NNLO"; "" where neither enters or a heavy quark is
        tagged.
    heavy : tuple of str
        Treatment and order of charm and bottom: "massive NLO", "matched NLO", "massless NNLO", "absent".
    fl : tuple of str
        Highest power of a in FL of light quarks: "a^2"; "" where FL does not enter.
    regime : Regimes
        By the boundaries of `scalewright.kinematics.regimes`.
    """

    light: tuple[str, ...]
    heavy: tuple[str, ...]
    fl: tuple[str, ...]
    regime: Regimes

    def of_data(self, data: Combination) -> dict[str, list[str]]:
        """Return columns (datum,): words of the rows of a datum, each once, joined by " | "."""
        members: list[list[int]] = [[] for _ in range(data.data)]
        for sums in (data.numerator, data.denominator):
            for datum, row in zip(sums.datum.tolist(), sums.row.tolist(), strict=True):
                members[datum].append(row)
        columns = {
            "light F2": self.light,
            "heavy F2": self.heavy,
            "FL": self.fl,
            "regime": self.regime.name.tolist(),
        }
        return {
            name: [" | ".join(dict.fromkeys(words[row] for row in rows if words[row])) for rows in members]
            for name, words in columns.items()
        }

    def summary(self) -> list[tuple[str, str]]:
        """Return name and words for a report."""
        said = [
            ("light F2", _counted(self.light)),
            ("heavy F2", _counted(self.heavy)),
            ("FL", _counted(self.fl)),
        ]
        if any("massive" in word or "matched" in word for word in self.heavy):
            said += [
                ("", "massive parts are of order a: NLO for charm and bottom, whatever the light order"),
                ("", "heavy densities are taken as made by gluons and light quarks: none is intrinsic"),
            ]
        return [*said, ("regimes", str(self.regime))]


def orders_of(problem: Problem, boundaries: Mapping[str, float] | None = None) -> Orders:
    """Return the orders of the rows of a problem.

    Parameters
    ----------
    problem : Problem
    boundaries : mapping, optional
        Of the regimes: arguments of `scalewright.kinematics.regimes`.

    Raises
    ------
    InputError
        If a boundary is unknown or no number.
    """
    if boundaries is not None and not isinstance(boundaries, Mapping):
        _check.refuse("boundaries", boundaries, "boundaries must map names to numbers")
    given = dict(boundaries or {})
    for name in given:
        _check.choice("boundaries", name, BOUNDARIES)
    power = {name: problem.highest[name] + len(problem.further.get(name, ())) for name in FUNCTIONS}
    points, weights = problem.points, problem.factors
    has_f2 = (weights[:, _F2] != 0.0) | (weights[:, _XF3] != 0.0)
    light = [
        order_name(power["F2"]) if has and not tag else ""
        for has, tag in zip(has_f2, points.tag, strict=True)
    ]
    fl = [f"a^{power['FL']}" if weight else "" for weight in weights[:, _FL]]
    heavy = [_heavy(problem, row, order_name(power["F2"])) for row in range(len(points))]
    return Orders(tuple(light), tuple(heavy), tuple(fl), regimes(points.x, points.q2, **given))


def order_name(power: int) -> str:
    """Return LO, NLO, NNLO, N3LO ... of a power of a.

    Examples
    --------
    >>> [order_name(power) for power in range(4)]
    ['LO', 'NLO', 'NNLO', 'N3LO']
    """
    return ("LO", "NLO", "NNLO")[power] if power < 3 else f"N{power}LO"


def _heavy(problem: Problem, row: int, light: str) -> str:
    """Return treatment and order of the heavy quarks of a row."""
    tag = int(problem.points.tag[row])
    words = {name: _quark(problem, row, quark, light) for quark, name in _QUARKS.items() if tag in (0, quark)}
    if len(set(words.values())) == 1:
        return next(iter(words.values()))
    return ", ".join(f"{name} {word}" for name, word in words.items())


def _quark(problem: Problem, row: int, quark: int, light: str) -> str:
    """Return treatment and order of one heavy quark."""
    active, scheme = quark <= int(problem.nf[row]), problem.theory.heavy_quarks
    single = bool(problem.points.is_charged[row])
    if scheme == "massless" or (scheme == "massive" and active) or (single and quark != 4):
        return f"massless {light}" if active else "absent"
    massive = order_name(min(1, problem.highest["F2"]))
    if active:
        return f"matched {massive}"
    # a pair is made at order a, single charm at a^0
    return "absent" if massive == "LO" and not single else f"massive {massive}"


def _counted(words: Sequence[str]) -> str:
    return "; ".join(_counts(words)) or "none"


def _counts(words: Sequence[str]) -> Iterator[str]:
    """Yield each word with the number of rows it holds for, without it where that is all."""
    for word in dict.fromkeys(word for word in words if word):
        rows = sum(other == word for other in words)
        yield word if rows == len(words) else f"{word} ({count(rows, 'row')})"
