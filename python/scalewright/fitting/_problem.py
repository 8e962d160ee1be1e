"""What a fit minimises: whitened residuals, and their exact derivative, as functions of its parameters.

The parameters are those of the shape, then those of corrections, then those of the theory, which move the map
to first order from the values it was built with. Where data are sums of rows the map is whitened once, and a
step costs one product; where they are ratios, or corrections have parameters, rows are predicted, combined
and whitened at each step.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any, Protocol

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats, show
from .._corrected.bound import Bound, Correction, checked
from .._corrected.selection import without_factor
from ..errors import InputError
from ..flavours import flavour_name
from ..grid import ChebyshevGrid
from ._shape import Shape, prior
from ._space import Space, product

__all__ = ["Distance", "Map", "Problem", "Theory"]

#: Theory parameters that a map may know the derivative by, and where it says what they were.
THEORY = ("alpha_s", "charm", "bottom")

Theory = Sequence[str] | Mapping[str, float]


class Map(Protocol):
    """What a fit asks of a forward map."""

    matrix: Floats
    flavours: tuple[int, ...]
    start_q2: float
    start_nf: int

    @property
    def grid(self) -> ChebyshevGrid:
        """Where x lives."""
        ...


class Distance(Protocol):
    """What a fit asks of a chi-square."""

    def residuals(self, prediction: ArrayLike) -> Floats:
        """Return W (value - prediction)."""
        ...

    def whiten(self, matrix: ArrayLike) -> Floats:
        """Return W times a matrix whose first axis is that of the data."""
        ...


class _Rows:
    """A map, and derivatives of it by theory parameters, flattened: (map, row, flavour x node).

    Corrections without parameters are part of the maps, and of what rows are without densities.
    """

    def __init__(self, fmap: Map, parameters: Sequence[str], corrections: Bound) -> None:
        maps = [fmap.matrix, *(_derivative(fmap, name) for name in parameters)]
        self.maps = [np.asarray(one, dtype=np.float64).reshape(len(fmap.matrix), -1) for one in maps]
        self.corrections, self.added = corrections, np.zeros(len(fmap.matrix))
        if corrections.parts and not corrections.names:
            factor, self.added = corrections.values(corrections.start)
            self.maps = [factor[:, np.newaxis] * one for one in self.maps]
        combination = getattr(fmap, "data", None)
        plain = combination is None or bool(getattr(combination, "is_identity", False))
        self.combination: Any = None if plain else combination

    @property
    def is_linear(self) -> bool:
        """Whether no datum is a ratio of rows, and no correction has parameters."""
        return not self.corrections.names and (self.combination is None or bool(self.combination.is_linear))

    def plain(self, values: Floats, moved: Floats) -> Floats:
        """Predict rows from x f(x), (flavour x node), and theory parameters counted from the map's."""
        result = product(self.maps[0], values)
        for change, one in zip(moved, self.maps[1:], strict=True):
            result = result + change * product(one, values)
        return result

    def rows(self, plain: Floats, q: Floats) -> Floats:
        """Return rows with corrections, of their parameters, from plain ones."""
        return self.corrections.corrected(plain, q) if self.corrections.names else plain + self.added

    def columns(self, plain: Floats, q: Floats, of_shape: Floats, of_theory: Floats) -> Floats:
        """Return the derivative of `rows`, (row, parameter), from that of plain ones."""
        if not self.corrections.names:
            return np.concatenate([of_shape, of_theory], axis=1)
        factor = self.corrections.values(q)[0][:, np.newaxis]
        between = self.corrections.jacobian(plain, q)
        return np.concatenate([factor * of_shape, between, factor * of_theory], axis=1)

    def data(self, rows: Floats) -> Floats:
        """Combine rows into data."""
        return rows if self.combination is None else np.asarray(self.combination.predict(rows))

    def tangent(self, rows: Floats, along: Floats) -> Floats:
        """Carry derivatives of rows, (row, ...), over to data."""
        return along if self.combination is None else np.asarray(self.combination.tangent(rows, along))


class Problem:
    """Residuals of a fit and their derivative.

    Parameters
    ----------
    fmap : ForwardMap
        Or anything with `matrix` (row, flavour, node), `flavours`, `grid`, `start_q2`, `start_nf`; optional
        `data`, from rows to data, and ``derivative(parameter)``.
    chi2 : ChiSquare
        Or anything with `residuals` and `whiten`.
    shape : Shape
    theory : sequence of names, or mapping
        Theory parameters, or those with the values that the map was built with.
    priors : mapping
        Name -> (value, standard deviation), besides those of the shape and of the corrections.
    corrections : sequence of Correction
        See `scalewright.corrections`.
    compressed : bool
        Whether residuals of the data may be replaced by fewer with the same sum of squares.

    Raises
    ------
    InputError
        If the parts do not fit each other.

    Attributes
    ----------
    count, rows : int
        Number of data, and of the residuals they make; those of the priors come after them.
    notes : tuple of str
        Deuterons and nuclei that nothing corrects.
    first_theory : int
        Place of the first theory parameter.
    """

    def __init__(
        self,
        fmap: Map,
        chi2: Distance,
        shape: Shape,
        theory: Theory = (),
        priors: Mapping[str, tuple[float, float]] | None = None,
        *,
        corrections: Sequence[Correction] | Correction = (),
        compressed: bool = True,
    ) -> None:
        if not isinstance(shape, Shape):
            _check.refuse("shape", shape, "shape must be a Shape: see scalewright.fitting.shapes")
        self.theory = getattr(fmap, "theory", None)
        self.shape, self._order = shape, _order(fmap, shape)
        self.reference = _reference(fmap, theory)
        self.q2, self.nf = float(fmap.start_q2), int(fmap.start_nf)
        self.corrections = Bound(corrections, fmap)
        targets = getattr(getattr(fmap, "points", None), "target", ())
        self.notes = tuple(without_factor(targets, checked(corrections)))
        self._source: _Rows | None = _Rows(fmap, list(self.reference), self.corrections)
        self._chi2: Distance | None = chi2
        at_zero = np.zeros(len(fmap.matrix))
        self._whitened: list[Floats] | None = None
        self._space: Space | None = None
        if self._source.is_linear:
            self.offset = chi2.residuals(self._source.data(self._source.added))
            along = (self._source.tangent(at_zero, one) for one in self._source.maps)
            self._whitened = [chi2.whiten(one) for one in along]
            self.rows = self.count = int(self.offset.size)
            if compressed:
                self._compress()
        else:
            source = self._source.combination
            self.rows = self.count = len(fmap.matrix) if source is None else int(source.data)
        self._lay_parameters(priors or {})

    def _lay_parameters(self, priors: Mapping[str, tuple[float, float]]) -> None:
        """Put parameters of shape, corrections and theory behind one another, with bounds and priors."""
        own = self.corrections
        self.names = (*self.shape.names, *own.names, *self.reference)
        for name in own.names:
            if self.names.count(name) > 1:
                _check.refuse("corrections", name, "the shape has a parameter of this name")
        self.first_theory = len(self.names) - len(self.reference)
        known = np.array(list(self.reference.values()))
        self.start: Floats = np.concatenate([self.shape.start, own.start, known])
        low, high = self.shape.bounds
        # a coupling and a mass are positive; how far the first order reaches, the user must judge
        self.low: Floats = np.concatenate([low, own.low, np.zeros(known.size)])
        self.high: Floats = np.concatenate([high, own.high, np.full(known.size, np.inf)])
        both = self.shape.priors | own.priors | {name: prior(name, pair) for name, pair in priors.items()}
        for name in both:
            if name not in self.names:
                near = _check.nearest(name, self.names)
                _check.refuse("priors", name, f"there is no free parameter of this name{near}")
        self.priors = both
        self._prior_place = [self.names.index(name) for name in both]
        self._prior_value = np.array([pair[0] for pair in both.values()])
        self._prior_width = np.array([pair[1] for pair in both.values()])

    def _compress(self) -> None:
        """Keep of the residuals what any density can move, and the length of the rest."""
        assert self._whitened is not None
        space = Space.of(self._whitened, self.offset)
        if space is not None:
            self._space, self.offset = space, space.projected(None)
            self._whitened = space.maps
            self.rows = self.offset.size

    def shift(self, whitened: Floats) -> Floats:
        """Return what moved data, whitened (datum,), add to the residuals of the data, (row,)."""
        if self._space is None:
            return whitened
        return self._space.projected(whitened) - self.offset

    def compact(self) -> Problem:
        """Return a copy without what only predictions need, for other processes."""
        made = Problem.__new__(Problem)
        made.__dict__.update(self.__dict__)
        if self._whitened is not None:
            made._source = made._chi2 = None
        return made

    def check_enough(self) -> None:
        """Refuse more parameters than data and priors together."""
        known = self.count + len(self.priors)
        if len(self.names) > known:
            has = f"{self.count} data and {len(self.priors)} priors"
            raise InputError(
                f"shape: {len(self.names)} parameters for {has}: fix some, tie some, or give priors"
            )

    # ---- residuals -------------------------------------------------------------------------------------

    def residuals(self, parameters: Floats, shift: Floats | None = None) -> Floats:
        """Return residuals of data, then of priors, (residual,); `shift`, of the same shape, is added."""
        with np.errstate(over="ignore", invalid="ignore"):  # a far step; what is not finite is not taken
            values, moved = self.values(parameters), self._moved(parameters)
            if self._whitened is not None:
                result = self.offset - product(self._whitened[0], values)
                for change, one in zip(moved, self._whitened[1:], strict=True):
                    result = result - change * product(one, values)
            else:
                source, chi2 = self._parts()
                rows = source.rows(source.plain(values, moved), self._of_corrections(parameters))
                result = chi2.residuals(source.data(rows))
        whole = np.concatenate([result, self._pulls(parameters)])
        return whole if shift is None else whole + shift

    def jacobian(self, parameters: Floats) -> Floats:
        """Return the derivative of `residuals`, (residual, parameter)."""
        moved, count = self._moved(parameters), len(self.shape.names)
        maps = self._whitened if self._whitened is not None else self._parts()[0].maps
        along = self.shape.jacobian(parameters[:count])[:, self._order].reshape(count, maps[0].shape[1])
        columns = product(maps[0], along)
        for change, one in zip(moved, maps[1:], strict=True):
            if change != 0.0:
                columns = columns + change * product(one, along)
        whole = columns
        if self._whitened is None or moved.size:
            values = self.values(parameters)
            of_theory = [np.zeros((len(columns), 0)), *(product(one, values)[:, None] for one in maps[1:])]
            whole = np.concatenate([columns, *of_theory], axis=1)
        if self._whitened is None:
            source, chi2 = self._parts()
            plain, q = source.plain(values, moved), self._of_corrections(parameters)
            along = source.columns(plain, q, columns, np.concatenate(of_theory, axis=1))
            whole = chi2.whiten(source.tangent(source.rows(plain, q), along))
        of_priors = np.zeros((len(self._prior_place), len(self.names)))
        of_priors[np.arange(len(self._prior_place)), self._prior_place] = 1.0 / self._prior_width
        return np.concatenate([-whole, of_priors])

    def values(self, parameters: Floats) -> Floats:
        """Return x f(x) in the order of the map, (flavour x node,)."""
        return np.ravel(self.shape(parameters[: len(self.shape.names)])[self._order])

    def prediction(self, parameters: Floats) -> Floats:
        """Return the data predicted, (datum,)."""
        source, _ = self._parts()
        plain = source.plain(self.values(parameters), self._moved(parameters))
        return source.data(source.rows(plain, self._of_corrections(parameters)))

    def _moved(self, parameters: Floats) -> Floats:
        """Return theory parameters counted from those of the map."""
        return parameters[self.first_theory :] - self.start[self.first_theory :]

    def _of_corrections(self, parameters: Floats) -> Floats:
        return parameters[len(self.shape.names) : self.first_theory]

    def _pulls(self, parameters: Floats) -> Floats:
        return np.asarray((parameters[self._prior_place] - self._prior_value) / self._prior_width)

    def _parts(self) -> tuple[_Rows, Distance]:
        """Return map and chi-square; only a compact problem, which predicts nothing, lacks them."""
        assert self._source is not None and self._chi2 is not None
        return self._source, self._chi2


def _derivative(fmap: Map, name: str) -> Floats:
    """Return the derivative of the map by a theory parameter."""
    derivative = getattr(fmap, "derivative", None)
    if derivative is None:
        _check.refuse("theory", name, "this map does not know its derivatives")
    matrix = _check.real_array(f"derivative by {name}", derivative(name))
    if matrix.shape != fmap.matrix.shape:
        _check.refuse(f"derivative by {name}", matrix, f"the shape must be {fmap.matrix.shape}")
    return matrix


def _reference(fmap: Map, theory: Theory) -> dict[str, float]:
    """Return theory parameters with the values that the map was built with."""
    if isinstance(theory, Mapping):
        return {str(name): _check.real(f"theory[{name}]", value) for name, value in theory.items()}
    if isinstance(theory, str):
        _check.refuse("theory", theory, "theory must be a list of names, or map names to values")
    found: dict[str, float] = {}
    for name in theory:
        _check.choice("theory", name, THEORY)
        assumed = getattr(fmap, "theory", None)
        if assumed is None:
            _check.refuse("theory", name, "this map does not say its value: give {name: value}")
        part = assumed.coupling if name == "alpha_s" else assumed.masses
        found[name] = float(getattr(part, name))
    return found


def _order(fmap: Map, shape: Shape) -> list[int]:
    """Return the place in the shape of each flavour of the map."""
    if shape.grid != fmap.grid:
        raise InputError(f"shape.grid = {shape.grid!r}: the map is for {fmap.grid!r}")
    wanted, held = tuple(fmap.flavours), shape.flavours
    absent = [flavour_name(number) for number in wanted if number not in held]
    if absent:
        raise InputError(f"shape has no flavour {', '.join(absent)}, active at nf = {fmap.start_nf}")
    foreign = [flavour_name(number) for number in held if number not in wanted]
    if foreign:
        words = f"the map, at nf = {fmap.start_nf}, does not take it"
        raise InputError(f"shape.flavours = {show(foreign[0])}: {words}")
    return [held.index(number) for number in wanted]
