"""From combinations to flavours: what terms and relations say, solved for each flavour.

A term is a combination such as "u_v" that has a function of its own; a relation, such as "s = 0.5*dbar", says
that a combination vanishes. Together they must determine every flavour.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from .. import _check
from .._check import Floats
from ..errors import InputError
from ..flavours import combination, flavour_name

__all__ = ["Basis"]

#: Parts of the largest singular value below which an equation counts as missing: factors are of order one.
_SINGULAR = 1e-10


@dataclass(frozen=True, eq=False)
class Basis:
    """Terms, and the flavours they make.

    Parameters
    ----------
    terms : tuple of str
        Names of the combinations.
    flavours : tuple of int
        PDG numbers.
    matrix : ndarray, (flavour, term)
        f = matrix @ terms.
    weights : tuple of dict
        For each term, PDG number -> weight in it.
    """

    terms: tuple[str, ...]
    flavours: tuple[int, ...]
    matrix: Floats
    weights: tuple[dict[int, float], ...]

    @classmethod
    def of(cls, terms: Sequence[str], relations: Sequence[str], nf: int) -> Basis:
        """Solve terms and relations for the flavours.

        Parameters
        ----------
        terms : sequence of str
        relations : sequence of str
            "left = right", both sums of flavours.
        nf : int
            Number of active flavours; heavier ones may be named too.

        Returns
        -------
        Basis

        Raises
        ------
        InputError
            If they determine too little, too much, or contradict each other.

        Examples
        --------
        >>> basis = Basis.of(["g", "u_v", "d_v", "ubar", "dbar"], ["s = 0.5*dbar", "sbar = s"], nf=3)
        >>> basis.flavours
        (21, 1, -1, 2, -2, 3, -3)
        >>> basis.matrix[1]  # d = d_v + dbar
        array([0., 0., 1., 0., 1.])
        """
        count = _check.flavour_count("nf", nf)
        quarks = range(1, count + 1)
        if isinstance(relations, str):
            relations = (relations,)
        of_terms = [combination(name, quarks) for name in terms]
        rows = of_terms + [_relation(text, quarks) for text in relations]
        named = {abs(number) for row in rows for number in row} - {21}
        active = sorted({*quarks, *named})
        flavours = (21, *(sign * number for number in active for sign in (1, -1)))
        system = np.array([[row.get(number, 0.0) for number in flavours] for row in rows])
        _check_determined(system, flavours, [*terms, *relations])
        matrix = np.linalg.inv(system)[:, : len(terms)]
        matrix[abs(matrix) < 1e-14] = 0.0  # rounding of the inverse: weights are of order one
        return cls(tuple(terms), flavours, matrix, tuple(of_terms))

    @property
    def momentum(self) -> Floats:
        """How much the momentum of each term counts in that of all flavours, (term,)."""
        return np.asarray(self.matrix.sum(axis=0))

    @property
    def numbers(self) -> Floats:
        """How much each term counts in q - qbar of the six quarks, (quark, term)."""
        result = np.zeros((6, len(self.terms)))
        for place, number in enumerate(self.flavours):
            if number != 21:
                result[abs(number) - 1] += np.sign(number) * self.matrix[place]
        return result

    def numbered(self, numbers: Mapping[str, float]) -> dict[int, float]:
        """Return checked number sum rules, place of the term -> value.

        Raises
        ------
        InputError
            If a name is no term, or its number is not conserved.
        """
        found: dict[int, float] = {}
        for name, value in numbers.items():
            place = self.place("numbers", name)
            weights = self.weights[place]
            odd = all(weights.get(-number, 0.0) == -weight for number, weight in weights.items())
            if 21 in weights or not odd:
                _check.refuse("numbers", name, "only differences of quarks and antiquarks are conserved")
            found[place] = _check.real(f"numbers[{name}]", value)
        return found

    def carrier(self, momentum: str | None, numbered: Mapping[int, float]) -> int | None:
        """Return the place of the term that the momentum sum determines.

        Raises
        ------
        InputError
            If it has a number sum rule already or carries no momentum.
        """
        if momentum is None:
            return None
        place = self.place("momentum", momentum)
        if place in numbered:
            _check.refuse("momentum", momentum, "the term is determined by its number already")
        if abs(self.momentum[place]) < _SINGULAR:
            _check.refuse("momentum", momentum, "the term carries no momentum: its flavours cancel")
        return place

    def place(self, option: str, name: object) -> int:
        """Return the place of a term, or refuse its name."""
        if not isinstance(name, str) or name not in self.terms:
            known = f"must be a term: {_check.show_all(self.terms)}{_check.nearest(name, self.terms)}"
            _check.refuse(option, name, known)
        return self.terms.index(name)


def _relation(text: object, quarks: range) -> dict[int, float]:
    """Return left minus right as weights."""
    if not isinstance(text, str) or text.count("=") != 1:
        _check.refuse("relations", text, 'a relation must read "left = right"')
    left, right = (combination(side, quarks) for side in text.split("="))
    numbers = {number: left.get(number, 0.0) - right.get(number, 0.0) for number in {**left, **right}}
    if not any(numbers.values()):
        _check.refuse("relations", text, "both sides are the same")
    return numbers


def _check_determined(system: Floats, flavours: tuple[int, ...], texts: Sequence[str]) -> None:
    """Refuse too few, too many or dependent equations, naming what is free or doubled."""
    need = f"{len(flavours)} flavours need as many terms and relations, and there are {len(system)}"
    if len(system) == 0:
        raise InputError(f"terms: {need}")
    left, values, right = np.linalg.svd(system)
    rank = int((values > _SINGULAR * values[0]).sum())
    if rank < len(flavours):
        raise InputError(f"terms: {need}: nothing determines {_words(right[rank], flavours)}")
    if len(system) > len(flavours):
        doubled = abs(left[:, rank])
        most = [texts[place] for place in np.flatnonzero(doubled > 0.1 * doubled.max()).tolist()]
        raise InputError(f"terms: {need}: one too many among {_check.show_all(most)}")


def _words(direction: Floats, flavours: tuple[int, ...]) -> str:
    """Write a combination of flavours."""
    direction = direction / direction[np.argmax(abs(direction))]
    parts = [
        f"{weight:+.3g} {flavour_name(number)}"
        for weight, number in zip(direction, flavours, strict=True)
        if abs(weight) > 1e-6
    ]
    return " ".join(parts)
