"""x^a (1-x)^b times a polynomial, for each combination of flavours, with sum rules in closed form.

The polynomial is a sum over coefficients, all of them linear, so that a sum rule is a linear equation for
one of them: it is solved, not fitted, and holds for whatever the other parameters are.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats
from ..grid import ChebyshevGrid
from ._basis import Basis
from ._shape import Pullback, Shape
from ._terms import Term, Terms

__all__ = ["PowerLaw", "Term"]

#: Where powers end by default: beyond, densities are below rounding or steeper than any that was measured.
_HIGHEST_POWER, _HIGHEST_FALL = 10.0, 30.0
#: Distance of default bounds from where an integral diverges.
_GAP = 0.01


class PowerLaw(Shape):
    """Power laws times polynomials for combinations of flavours, sum rules imposed exactly.

    Parameters
    ----------
    grid : ChebyshevGrid
        Where x lives.
    terms : mapping
        Combination ("g", "u_v", "dbar - ubar"; see `scalewright.flavours`) -> `Term`.
    nf : int
        Number of active flavours of the input.
    relations : sequence of str
        "left = right", such as "s = 0.5*dbar": with the terms they determine every flavour.
    momentum : str, optional
        The term whose coefficient c0 is determined by: all momentum is 1.
    numbers : mapping
        Term -> integral of it over dx/x x f: its c0 is determined by that, as {"u_v": 2, "d_v": 1}.

    Raises
    ------
    InputError
        If terms and relations do not determine every flavour, a sum rule is impossible, or a start lies where
        an integral diverges.

    Notes
    -----
    Parameters are named "u_v.power", "u_v.fall", "u_v.c0", "u_v.c1" ... Bounds by default: power from where a
    sum rule of the term diverges (0 with a number, -1 without) plus 0.01 to 10, fall from 0.01 to 30.
    Sum rules hold from x = 0 to 1, to rounding: 1e-13 with plain polynomials, 1e-9 at degree 8.

    Examples
    --------
    >>> import scalewright as sw
    >>> grid = sw.ChebyshevGrid(x_min=1e-4)
    >>> shape = PowerLaw(
    ...     grid,
    ...     {"g": Term(-0.1, 5), "u_v": Term(0.7, 3, [1, 0.5]), "d_v": Term(0.7, 4),
    ...      "ubar": Term(-0.1, 7, [0.2]), "dbar": Term(-0.1, 7, [0.2])},
    ...     nf=3, relations=["s = 0.5*dbar", "sbar = s"], momentum="g", numbers={"u_v": 2, "d_v": 1})
    >>> shape.names[:4]
    ('g.power', 'g.fall', 'u_v.power', 'u_v.fall')
    >>> start = shape.densities(shape.start, q2=2.0, nf=3)
    >>> start.momentum().round(6), start.number("u").round(6)
    (array([1.]), array([2.]))
    """

    def __init__(
        self,
        grid: ChebyshevGrid,
        terms: Mapping[str, Term],
        *,
        nf: int,
        relations: Sequence[str] = (),
        momentum: str | None = None,
        numbers: Mapping[str, float] | None = None,
    ) -> None:
        if not isinstance(grid, ChebyshevGrid):
            _check.refuse("grid", grid, f"grid must be a ChebyshevGrid, not {type(grid).__name__}")
        if not isinstance(terms, Mapping) or not all(isinstance(term, Term) for term in terms.values()):
            _check.refuse("terms", terms, "terms must map combinations of flavours to Term")
        self.basis = Basis.of(list(terms), relations, nf)
        self._numbers = self.basis.numbered(numbers or {})
        self._carrier = self.basis.carrier(momentum, self._numbers)
        self._counted, self._wanted = list(self._numbers), np.array(list(self._numbers.values()))
        self._terms = Terms(list(terms.values()), grid)
        names: list[str] = []
        columns: list[tuple[float, ...]] = []  # start, lowest, highest, open limits
        for place, (name, term) in enumerate(terms.items()):
            count, bottom = len(term.coefficients), 0.0 if place in self._numbers else -1.0
            names += [f"{name}.power", f"{name}.fall", *(f"{name}.c{k}" for k in range(count))]
            columns.append((term.power, bottom + _GAP, _HIGHEST_POWER, bottom, np.inf))
            columns.append((term.fall, _GAP, _HIGHEST_FALL, 0.0, np.inf))
            columns += [(value, -np.inf, np.inf, -np.inf, np.inf) for value in term.coefficients]
        carriers = [] if self._carrier is None else [self._carrier]
        self._solved = {f"{list(terms)[place]}.c0": place for place in (*self._numbers, *carriers)}
        kept = [place for place, name in enumerate(names) if name not in self._solved]
        # which parameter each of a, b and the coefficients is, (term, own, parameter)
        self._layout = np.zeros((*self._terms.held.shape, len(kept)))
        self._layout[self._terms.held] = np.eye(len(names))[:, kept]
        start, low, high, least, most = np.array(columns)[kept].T
        chosen = [names[place] for place in kept]
        super().__init__(grid, self.basis.flavours, chosen, start, (low, high), (least, most))

    def __call__(self, parameters: ArrayLike) -> Floats:
        """Return x f(x) at the nodes, (flavour, node)."""
        return self.basis.matrix @ self._terms.values(self._own(self._given(parameters)))

    def jacobian(self, parameters: ArrayLike) -> Floats:
        """Return the derivative, (parameter, flavour, node)."""
        own = self._own(self._given(parameters))
        by = self._own_derivative(own)
        of_terms = by.transpose(0, 2, 1) @ self._terms.derivatives(own)  # (term, parameter, node)
        return np.ascontiguousarray(self.basis.matrix @ of_terms.transpose(1, 0, 2))

    def with_pullback(self, parameters: ArrayLike) -> tuple[Floats, Pullback]:
        """Return x f(x), and what carries derivatives by it back to the parameters."""
        own = self._own(self._given(parameters))

        def pullback(weights: Floats) -> Floats:
            slopes = self._terms.weighted(own, self.basis.matrix.T @ weights)  # (term, own)
            return np.asarray(slopes.ravel() @ self._own_derivative(own).reshape(slopes.size, -1))

        return self.basis.matrix @ self._terms.values(own), pullback

    def solved(self, parameters: ArrayLike) -> dict[str, float]:
        """Return the coefficients that the sum rules determine.

        Parameters
        ----------
        parameters : array_like, (parameter,)

        Returns
        -------
        dict
            Name -> value.
        """
        own = self._own(self._given(parameters))
        return {name: float(own[place, 2]) for name, place in self._solved.items()}

    def below(self, parameters: ArrayLike) -> tuple[float, Floats]:
        """Return momentum and numbers of the six quarks below x_min; nan where an integral diverges."""
        own = self._own(self._given(parameters))
        momenta = (own[:, 2:] * self._terms.moments(own, 1.0, slice(None), edge=True)).sum(axis=1)
        finite = np.flatnonzero(own[:, 0] > 0.0).tolist()
        numbers = np.full(len(own), np.nan)
        numbers[finite] = (own[finite, 2:] * self._terms.moments(own, 0.0, finite, edge=True)).sum(axis=1)
        counted = self.basis.numbers
        of_quarks = np.where(counted != 0.0, counted * numbers, 0.0).sum(axis=1)
        return float(self.basis.momentum @ momenta), of_quarks

    # ---- sum rules -------------------------------------------------------------------------------------

    def _own(self, given: Floats) -> Floats:
        """Return a, b and coefficients of all terms, given and determined by sum rules, (term, own)."""
        own: Floats = self._layout @ given  # what is sought is 0 in it
        if self._counted:
            moments = self._terms.moments(own, 0.0, self._counted)
            known = (own[self._counted, 2:] * moments).sum(axis=1)
            own[self._counted, 2] = (self._wanted - known) / moments[:, 0]
        if self._carrier is not None:
            weight = self.basis.momentum
            moments = self._terms.moments(own, 1.0, slice(None))
            rest = 1.0 - weight @ (own[:, 2:] * moments).sum(axis=1)
            own[self._carrier, 2] = rest / (weight[self._carrier] * moments[self._carrier, 0])
        return own

    def _own_derivative(self, own: Floats) -> Floats:
        """Return the derivative of `_own`, (term, own, parameter)."""
        by: Floats = self._layout.copy()
        if self._counted:
            slopes = self._terms.moment_derivatives(own, 0.0, self._counted)
            change = (slopes[:, None] @ by[self._counted])[:, 0]  # the rows of what is sought are 0 in it
            by[self._counted, 2] = -change / slopes[:, 2:3]
        if self._carrier is not None:
            slopes = self.basis.momentum[:, None] * self._terms.moment_derivatives(own, 1.0, slice(None))
            by[self._carrier, 2] = -(slopes.ravel() @ by.reshape(slopes.size, -1)) / slopes[self._carrier, 2]
        return by
