"""What a map holds, and what follows from it alone: equality, copies, pickles and its one line.

`forward.ForwardMap` adds what one does with it.
"""

from __future__ import annotations

from dataclasses import fields
from typing import Any, NoReturn

import numpy as np

from .._check import Floats, show
from .._measured.combination import Combination
from ..electroweak import Electroweak
from ..grid import ChebyshevGrid
from ..theory import Theory
from .points import Points
from .problem import Problem

__all__ = ["HeldMap"]


class HeldMap:
    """The parts of a map, frozen; equal where theory, points, data and every bit of the matrix are the same.

    Where a point stands in a file does not count.
    """

    _problem: Problem
    start_q2: float
    start_nf: int
    flavours: tuple[int, ...]
    matrix: Floats
    data: Combination
    steps_error: float

    def __init__(
        self, problem: Problem, start_q2: float, start_nf: int, flavours: tuple[int, ...], matrix: Floats,
        data: Combination,
        steps_error: float,
    ) -> None:  # fmt: skip
        matrix.flags.writeable = False
        self.__dict__.update(
            _problem=problem, start_q2=start_q2, start_nf=start_nf, flavours=flavours, matrix=matrix,
            data=data, steps_error=steps_error,
        )  # fmt: skip

    @property
    def theory(self) -> Theory:
        """What was assumed."""
        return self._problem.theory

    @property
    def electroweak(self) -> Electroweak:
        """Electroweak inputs."""
        return self._problem.electroweak

    @property
    def grid(self) -> ChebyshevGrid:
        """Where x lives."""
        return self._problem.grid

    @property
    def points(self) -> Points:
        """What each row is."""
        return self._problem.points

    @property
    def weights(self) -> Floats:
        """Weights of F2, FL and xF3 in what each row is, (row, 3)."""
        return self._problem.factors

    def __setattr__(self, name: str, value: object) -> NoReturn:
        """Refuse: what was computed from one theory is not that of another."""
        raise AttributeError(f"a {type(self).__name__} is frozen: {name} cannot be set")

    def __delattr__(self, name: str) -> NoReturn:
        """Refuse."""
        raise AttributeError(f"a {type(self).__name__} is frozen: {name} cannot be deleted")

    def __reduce__(self) -> tuple[Any, ...]:
        """Pickle by the parts, so that the matrix is read-only again, and protocol 5 need not copy it."""
        start = self.start_q2, self.start_nf
        return type(self), (self._problem, *start, self.flavours, self.matrix, self.data, self.steps_error)

    def __copy__(self) -> HeldMap:
        """Return itself: it is frozen."""
        return self

    def __deepcopy__(self, memo: dict[int, Any]) -> HeldMap:
        """Return itself: it is frozen."""
        return self

    def __eq__(self, other: object) -> bool:
        """Say whether theory, points, data and every bit of the matrix are the same."""
        if not isinstance(other, HeldMap):
            return NotImplemented
        return self is other or (
            self._key() == other._key()
            and self._problem.further == other._problem.further
            and _same(self.points, other.points)
            and _same(self.data.numerator, other.data.numerator)
            and _same(self.data.denominator, other.data.denominator)
            and np.array_equal(self.matrix, other.matrix)
        )

    def __hash__(self) -> int:
        """Hash of theory, grid and start."""
        return hash(self._key())

    def _key(self) -> tuple[Any, ...]:
        problem = self._problem
        given = problem.theory, problem.grid, problem.electroweak, problem.target_mass, problem.subtraction
        return *given, self.start_q2, self.start_nf, self.flavours, self.matrix.shape, self.data.data

    def __repr__(self) -> str:
        """One line."""
        start = f"from {show(self.start_q2)} GeV^2 (nf = {self.start_nf})"
        return f"ForwardMap({self.theory.order}, {len(self.points)} rows, {self.data.data} data, {start})"


def _same(one: Any, other: Any) -> bool:
    """Compare dataclasses of arrays and tuples field by field; places in files do not count."""
    names = [field.name for field in fields(one) if field.name != "place"]
    return all(_equal(getattr(one, name), getattr(other, name)) for name in names)


def _equal(one: Any, other: Any) -> bool:
    if isinstance(one, np.ndarray):
        return np.array_equal(one, other, equal_nan=one.dtype.kind == "f")
    return bool(one == other)
