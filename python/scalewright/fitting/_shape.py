"""What every shape is: parameters in, x f(x) at the nodes of a grid out, with the derivative.

`Restricted` is a shape with some parameters of another one fixed, tied, bounded or given a prior.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Callable, Mapping, Sequence

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats, show
from ..below import Below
from ..densities import Densities
from ..errors import InputError
from ..grid import ChebyshevGrid

__all__ = ["Pullback", "Restricted", "Shape"]

Limits = tuple[Floats, Floats]
Pullback = Callable[[Floats], Floats]


class Shape(ABC):
    """x f(x) at the nodes of a grid as a function of parameters, with derivative.

    Attributes
    ----------
    grid : ChebyshevGrid
        Where x lives.
    flavours : tuple of int
        PDG numbers of the flavour axis.
    names : tuple of str
        Names of the parameters.
    start : ndarray, (parameter,)
        Where a fit begins.
    bounds : tuple of two ndarrays, (parameter,)
        Lowest and highest values, infinite where there are none.
    limits : tuple of two ndarrays, (parameter,)
        Open limits outside which the shape has no meaning; bounds lie inside.
    priors : dict
        Name -> (value, standard deviation) of parameters known from elsewhere.
    exact_jacobian : bool
        Whether `jacobian` is exact, not made of differences.
    """

    exact_jacobian = True

    def __init__(
        self,
        grid: ChebyshevGrid,
        flavours: Sequence[int],
        names: Sequence[str],
        start: ArrayLike,
        bounds: Limits,
        limits: Limits | None = None,
    ) -> None:
        if not isinstance(grid, ChebyshevGrid):
            _check.refuse("grid", grid, f"grid must be a ChebyshevGrid, not {type(grid).__name__}")
        self.grid, self.flavours, self.names = grid, tuple(flavours), tuple(names)
        for place, name in enumerate(self.names):
            if name in self.names[:place]:
                _check.refuse("names", name, f"stands at index {self.names.index(name)} already", index=place)
        self.start = _frozen(_check.real_array("start", start, shape=(len(self.names),)))
        everywhere = (np.full(len(self.names), -np.inf), np.full(len(self.names), np.inf))
        self.limits: Limits = everywhere if limits is None else (_frozen(limits[0]), _frozen(limits[1]))
        self.bounds: Limits = (_frozen(bounds[0]), _frozen(bounds[1]))
        self.priors: dict[str, tuple[float, float]] = {}
        self._check_bounds()

    @abstractmethod
    def __call__(self, parameters: ArrayLike) -> Floats:
        """Return x f(x) at the nodes, (flavour, node)."""

    @abstractmethod
    def jacobian(self, parameters: ArrayLike) -> Floats:
        """Return the derivative, (parameter, flavour, node)."""

    def with_pullback(self, parameters: ArrayLike) -> tuple[Floats, Pullback]:
        """Return x f(x) and what carries derivatives by it back to the parameters.

        Parameters
        ----------
        parameters : array_like, (parameter,)

        Returns
        -------
        values : ndarray, (flavour, node)
        pullback : callable
            Weights (flavour, node) -> derivative of the sum of weights times x f(x), (parameter,). Costs less
            than the whole Jacobian where a shape can do without it.
        """
        return self(parameters), lambda weights: np.tensordot(self.jacobian(parameters), weights, axes=2)

    def below(self, parameters: ArrayLike) -> tuple[float, Floats] | None:
        """Return momentum and numbers of the six quarks below x_min, or None where they are unknown."""
        return None

    def densities(self, parameters: ArrayLike, *, q2: float, nf: int) -> Densities:
        """Return densities, one replica for each set of parameters.

        Parameters
        ----------
        parameters : array_like, (parameter,) or (replica, parameter)
        q2 : float
            Scale in GeV^2.
        nf : int
            Number of active flavours.

        Returns
        -------
        Densities

        Raises
        ------
        InputError
            If a number is wrong.
        """
        sets = np.atleast_2d(_check.real_array("parameters", parameters))
        if sets.ndim != 2 or sets.shape[1] != len(self.names):
            _check.refuse("parameters", sets, f"the last axis must have {len(self.names)} parameters")
        values = np.stack([self(one) for one in sets]) if len(sets) else np.zeros((0, *self._shape))
        lower = [self.below(one) for one in sets]
        known = [part for part in lower if part is not None]
        below = None
        if known and len(known) == len(lower):
            momentum = np.asarray([[part[0] for part in known]])
            below = Below(momentum, np.stack([part[1] for part in known])[np.newaxis])
        return Densities(self.grid, q2=q2, nf=nf, flavours=self.flavours, values=values, below=below)

    def restricted(
        self,
        *,
        fixed: Sequence[str] | Mapping[str, float] = (),
        tied: Mapping[str, str | tuple[str, float]] | None = None,
        bounds: Mapping[str, tuple[float, float]] | None = None,
        priors: Mapping[str, tuple[float, float]] | None = None,
        start: Mapping[str, float] | None = None,
    ) -> Restricted:
        """Return the shape with some parameters fixed, tied, bounded or known.

        Parameters
        ----------
        fixed : sequence of names, or mapping
            Parameters that do not move: from their start, or at the values given.
        tied : mapping
            Name -> name of the parameter it equals, or (name, factor) for that many times it.
        bounds : mapping
            Name -> (lowest, highest).
        priors : mapping
            Name -> (value, standard deviation), added to chi-square as ((p - value)/deviation)^2.
        start : mapping
            Name -> where the fit begins.

        Returns
        -------
        Restricted

        Raises
        ------
        InputError
            If a name is unknown, is restricted in two ways, or a value lies outside what is allowed.
        """
        return Restricted(self, fixed, tied or {}, bounds or {}, priors or {}, start or {})

    def solved(self, parameters: ArrayLike) -> dict[str, float]:
        """Return what sum rules determine, as name -> value.

        Parameters
        ----------
        parameters : array_like, (parameter,)

        Returns
        -------
        dict
        """
        return {}

    @property
    def _shape(self) -> tuple[int, int]:
        return len(self.flavours), self.grid.nodes

    def _given(self, parameters: ArrayLike) -> Floats:
        """Return checked parameters."""
        return _check.real_array("parameters", parameters, shape=(len(self.names),))

    def _check_bounds(self) -> None:
        """Refuse bounds that cross, lie outside the limits, or leave the start outside."""
        (low, high), (least, most) = self.bounds, self.limits
        for place, name in enumerate(self.names):
            pair = (float(low[place]), float(high[place]))
            if not pair[0] < pair[1]:
                _check.refuse(f"bounds[{name}]", pair, "the first bound must lie below the second")
            inside = (pair[0] > least[place] or least[place] == -np.inf) and (
                pair[1] < most[place] or most[place] == np.inf
            )
            if not inside:
                limit = f"({show(float(least[place]))}, {show(float(most[place]))})"
                _check.refuse(f"bounds[{name}]", pair, f"both must lie in {limit}")
            if not pair[0] <= self.start[place] <= pair[1]:
                limit = f"the start must lie in [{show(pair[0])}, {show(pair[1])}]"
                _check.refuse(f"start[{name}]", self.start[place], limit)

    def __repr__(self) -> str:
        """One line."""
        kind = type(self).__name__
        return f"{kind}({len(self.names)} parameters, {len(self.flavours)} flavours, {self.grid!r})"


class Restricted(Shape):
    """A shape with some parameters of another fixed, tied, bounded or known; made by `Shape.restricted`.

    All parameters of the other shape are matrix times free parameters plus constant.

    Parameters
    ----------
    shape : Shape
    fixed, tied, bounds, priors, start
        As for `Shape.restricted`.

    Examples
    --------
    >>> import scalewright as sw
    >>> from scalewright.fitting.shapes import FunctionShape
    >>> grid = sw.ChebyshevGrid(x_min=1e-4)
    >>> line = FunctionShape(grid, [21], lambda x, p: p[0] + p[1] * x, start=[1, 2], names=["a", "b"])
    >>> half = line.restricted(tied={"b": ("a", 0.5)})
    >>> half.names, half.full([3.0])
    (('a',), array([3. , 1.5]))
    """

    def __init__(
        self,
        shape: Shape,
        fixed: Sequence[str] | Mapping[str, float],
        tied: Mapping[str, str | tuple[str, float]],
        bounds: Mapping[str, tuple[float, float]],
        priors: Mapping[str, tuple[float, float]],
        start: Mapping[str, float],
    ) -> None:
        self.shape, self.exact_jacobian = shape, shape.exact_jacobian
        self._lay(fixed, tied)
        free = [shape.names[place] for place in self._free]
        for option, given in (("bounds", bounds), ("priors", priors), ("start", start)):
            for name in given:
                self._known(option, name)
                if name not in free:
                    _check.refuse(option, name, "the parameter is fixed or tied")
        low, high = (np.array(side[self._free]) for side in shape.bounds)
        begin = np.array(shape.start[self._free])
        for name, pair in bounds.items():
            low[free.index(name)], high[free.index(name)] = _pair(f"bounds[{name}]", pair)
        for name, value in start.items():
            begin[free.index(name)] = _check.real(f"start[{name}]", value)
        limits = (shape.limits[0][self._free], shape.limits[1][self._free])
        super().__init__(shape.grid, shape.flavours, free, begin, (low, high), limits)
        for name in shape.priors:
            if name in tied:  # it would be forgotten without a word
                _check.refuse("tied", name, "it has a prior: tie the other one to it, or leave the prior out")
        self.priors = {name: pair for name, pair in shape.priors.items() if name in free}
        self.priors |= {name: prior(name, pair) for name, pair in priors.items()}
        self._check_limits()

    def full(self, parameters: ArrayLike) -> Floats:
        """Return all parameters of the shape from the free ones, in the order of ``shape.names``."""
        return self._matrix @ self._given(parameters) + self._constant

    def __call__(self, parameters: ArrayLike) -> Floats:
        """Return x f(x) at the nodes, (flavour, node)."""
        return self.shape(self.full(parameters))

    def jacobian(self, parameters: ArrayLike) -> Floats:
        """Return the derivative by the free parameters, (parameter, flavour, node)."""
        inner = self.shape.jacobian(self.full(parameters))
        return np.tensordot(self._matrix, inner, axes=(0, 0))

    def with_pullback(self, parameters: ArrayLike) -> tuple[Floats, Pullback]:
        """Return x f(x), and what carries derivatives by it back to the free parameters."""
        values, inner = self.shape.with_pullback(self.full(parameters))
        return values, lambda weights: inner(weights) @ self._matrix

    def below(self, parameters: ArrayLike) -> tuple[float, Floats] | None:
        """Return momentum and numbers of the six quarks below x_min, or None where they are unknown."""
        return self.shape.below(self.full(parameters))

    def solved(self, parameters: ArrayLike) -> dict[str, float]:
        """Return what sum rules determine, as name -> value."""
        return self.shape.solved(self.full(parameters))

    def _known(self, option: str, name: object) -> int:
        """Return the place of a parameter."""
        if not isinstance(name, str) or name not in self.shape.names:
            near = _check.nearest(name, self.shape.names)
            known = _check.show_all(self.shape.names)
            _check.refuse(option, name, f"no parameter of this name; there are {known}{near}")
        return self.shape.names.index(name)

    def _lay(
        self, fixed: Sequence[str] | Mapping[str, float], tied: Mapping[str, str | tuple[str, float]]
    ) -> None:
        """Write all parameters as matrix times free ones plus constant."""
        if isinstance(fixed, str):
            _check.refuse("fixed", fixed, "fixed must be a list of names, or map names to values")
        held = {self._known("fixed", name): name for name in fixed}
        ties = {self._known("tied", name): _tie(name, to) for name, to in tied.items()}
        for place, (name, _) in ties.items():
            if place in held or self._known("tied", name) in {*held, *ties}:
                _check.refuse("tied", self.shape.names[place], f"it or {name} is fixed or tied itself")
        count = len(self.shape.names)
        self._free = [place for place in range(count) if place not in held and place not in ties]
        self._matrix, self._constant = np.zeros((count, len(self._free))), np.zeros(count)
        for column, place in enumerate(self._free):
            self._matrix[place, column] = 1.0
        for place, name in held.items():
            given = fixed[name] if isinstance(fixed, Mapping) else self.shape.start[place]
            self._constant[place] = _check.real(f"fixed[{name}]", given)
        for place, (name, factor) in ties.items():
            self._matrix[place, self._free.index(self.shape.names.index(name))] = factor

    def _check_limits(self) -> None:
        """Refuse fixed values, and ties at the bounds of their parameter, where the shape has no meaning."""
        least, most = self.shape.limits
        for corner in self.bounds:
            reached = self._constant.copy()
            for place, column in np.argwhere(self._matrix != 0.0):  # a tie follows one parameter only
                reached[place] = self._matrix[place, column] * corner[column]
            for place in np.flatnonzero((reached <= least) | (reached >= most)):
                if np.isfinite(reached[place]):
                    limit = f"({show(float(least[place]))}, {show(float(most[place]))})"
                    name = self.shape.names[place]
                    _check.refuse(name, float(reached[place]), f"fixed or tied, it must lie in {limit}")


def prior(name: str, given: object) -> tuple[float, float]:
    """Return a checked (value, standard deviation)."""
    value, deviation = _pair(f"priors[{name}]", given)
    if not (np.isfinite(value) and np.isfinite(deviation) and deviation > 0.0):
        _check.refuse(f"priors[{name}]", given, "must be a finite value and a standard deviation above 0")
    return value, deviation


def _pair(name: str, given: object) -> tuple[float, float]:
    """Return two numbers, infinite ones allowed."""
    try:
        array = np.asarray(given, dtype=np.float64)
    except (TypeError, ValueError):
        array = np.full(2, np.nan)
    if array.shape != (2,) or np.isnan(array).any():
        raise InputError(f"{name} = {show(given)}: must be two numbers")
    return float(array[0]), float(array[1])


def _tie(name: str, to: object) -> tuple[str, float]:
    """Return the parameter that another one follows, and the factor."""
    if isinstance(to, str):
        return to, 1.0
    if not isinstance(to, tuple | list) or len(to) != 2:
        raise InputError(f"tied[{name}] = {show(to)}: must be a name, or a name and a factor")
    factor = _check.real(f"tied[{name}]", to[1])
    if factor == 0.0:
        _check.refuse(f"tied[{name}]", factor, "the factor must not be 0: fix the parameter instead")
    return str(to[0]), factor


def _frozen(values: ArrayLike) -> Floats:
    """Return a copy that cannot be changed."""
    array: Floats = np.array(values, dtype=np.float64)
    array.flags.writeable = False
    return array
