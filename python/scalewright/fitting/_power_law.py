"""x^a (1-x)^b times a polynomial, for each combination of flavours, with sum rules in closed form.

The polynomial is a sum over coefficients, all of them linear, so that a sum rule is a linear equation for
one of them: it is solved, not fitted, and holds for whatever the other parameters are.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats
from ..grid import ChebyshevGrid
from ._basis import Basis
from ._polynomials import FAMILIES, MOST, powers
from ._shape import Shape

__all__ = ["PowerLaw", "Term"]

#: Where powers end by default: beyond, densities are below rounding or steeper than any that was measured.
_HIGHEST_POWER, _HIGHEST_FALL = 10.0, 30.0
#: Distance of default bounds from where an integral diverges.
_GAP = 0.01


@dataclass(frozen=True)
class Term:
    """One combination of flavours: x^power (1-x)^fall sum_k coefficients[k] P_k(y).

    Parameters
    ----------
    power, fall : float
        Where a fit begins.
    coefficients : sequence of float
        Where a fit begins; as many as there are members P_k, 1 to 9. What a sum rule determines is ignored.
    polynomial : {"plain", "chebyshev", "bernstein"}
        P_k = y^k; T_k(1 - 2y); binomial(n, k) y^k (1-y)^(n-k).
    variable : {"x", "sqrt x"}
        y.

    Raises
    ------
    InputError
        If a number is not finite, or there are too many coefficients.

    Examples
    --------
    >>> Term(0.5, 3.0, [1.0, -0.2], polynomial="chebyshev")
    Term(power=0.5, fall=3.0, coefficients=(1.0, -0.2), polynomial='chebyshev', variable='x')
    """

    power: float
    fall: float
    coefficients: Sequence[float] = (1.0,)
    polynomial: str = "plain"
    variable: str = "x"

    def __post_init__(self) -> None:
        object.__setattr__(self, "power", _check.real("power", self.power))
        object.__setattr__(self, "fall", _check.real("fall", self.fall))
        given = _check.real_array("coefficients", self.coefficients, ndim=1)
        if not 1 <= given.size <= MOST + 1:
            _check.refuse("coefficients", given, f"there must be 1 to {MOST + 1} coefficients")
        object.__setattr__(self, "coefficients", tuple(given.tolist()))
        _check.choice("polynomial", self.polynomial, FAMILIES)
        _check.choice("variable", self.variable, ("x", "sqrt x"))


class _Function:
    """One term on a grid: values, derivatives and moments from a, b and coefficients."""

    def __init__(self, term: Term, grid: ChebyshevGrid, first: int) -> None:
        self.size = 2 + len(term.coefficients)
        #: Places of a, b and coefficients among those of all terms.
        self.places = slice(first, first + self.size)
        self.lead = first + 2
        self._step = 1.0 if term.variable == "x" else 0.5
        self._powers = powers(term.polynomial, len(term.coefficients) - 1)
        self._log_x = -np.asarray(grid.u)
        self._log_rest = np.log(-np.expm1(-grid.u))  # ln(1-x), exact near x = 1
        y = np.exp(self._step * self._log_x)
        self._members = self._powers @ y ** np.arange(self.size - 2)[:, None]
        self._edge = float(np.exp(-grid.u[-1]))

    def value(self, own: Floats) -> Floats:
        """Return F at the nodes, (node,)."""
        return self._envelope(own) * (own[2:] @ self._members)

    def derivative(self, own: Floats) -> Floats:
        """Return dF by a, b and coefficients, (own, node)."""
        envelope = self._envelope(own)
        value = envelope * (own[2:] @ self._members)
        return np.concatenate([[self._log_x * value, self._log_rest * value], envelope * self._members])

    def _envelope(self, own: Floats) -> Floats:
        return np.asarray(np.exp(own[0] * self._log_x + own[1] * self._log_rest))

    def moments(self, own: Floats, s: float, *, edge: bool = False) -> Floats:
        """Return integrals of x^(s-1) x^a (1-x)^b P_k from 0 to 1, or to x_min, (k,).

        Euler's integral: B(p, q) with p = a + s + j step, q = b + 1 for each power j.
        """
        from scipy.special import beta, betainc  # type: ignore[import-untyped]

        p, q = self._arguments(own, s)
        whole = beta(p, q) * (betainc(p, q, self._edge) if edge else 1.0)
        return np.asarray(self._powers @ whole)

    def moment_derivatives(self, own: Floats, s: float) -> Floats:
        """Return d moment by a, b and coefficients, (own,), the moment being that of F."""
        from scipy.special import beta, digamma

        p, q = self._arguments(own, s)
        whole, both = beta(p, q), digamma(p + q)
        by_a = own[2:] @ (self._powers @ (whole * (digamma(p) - both)))
        by_b = own[2:] @ (self._powers @ (whole * (digamma(q) - both)))
        return np.concatenate([[by_a, by_b], self._powers @ whole])

    def _arguments(self, own: Floats, s: float) -> tuple[Floats, float]:
        return own[0] + s + self._step * np.arange(self.size - 2), float(own[1] + 1.0)


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
        self._functions: list[_Function] = []
        names: list[str] = []
        columns: list[tuple[float, ...]] = []  # start, lowest, highest, open limits
        for place, (name, term) in enumerate(terms.items()):
            function = _Function(term, grid, len(names))
            self._functions.append(function)
            count, bottom = len(term.coefficients), 0.0 if place in self._numbers else -1.0
            names += [f"{name}.power", f"{name}.fall", *(f"{name}.c{k}" for k in range(count))]
            columns.append((term.power, bottom + _GAP, _HIGHEST_POWER, bottom, np.inf))
            columns.append((term.fall, _GAP, _HIGHEST_FALL, 0.0, np.inf))
            columns += [(value, -np.inf, np.inf, -np.inf, np.inf) for value in term.coefficients]
        self._solved = [self._functions[place].lead for place in self._numbers]
        if self._carrier is not None:
            self._solved.append(self._functions[self._carrier].lead)
        kept = [place for place in range(len(names)) if place not in self._solved]
        self._selection = np.eye(len(names))[:, kept]
        start, low, high, least, most = np.array(columns)[kept].T
        chosen = [names[place] for place in kept]
        super().__init__(grid, self.basis.flavours, chosen, start, (low, high), (least, most))
        self._all_names = tuple(names)

    def __call__(self, parameters: ArrayLike) -> Floats:
        """Return x f(x) at the nodes, (flavour, node)."""
        full = self._full(self._given(parameters))
        return self.basis.matrix @ np.stack([one.value(full[one.places]) for one in self._functions])

    def jacobian(self, parameters: ArrayLike) -> Floats:
        """Return the derivative, (parameter, flavour, node)."""
        given = self._given(parameters)
        full = self._full(given)
        by = self._full_derivative(full)
        result = np.empty((given.size, len(self._functions), self.grid.nodes))
        for place, one in enumerate(self._functions):
            result[:, place] = by[one.places].T @ one.derivative(full[one.places])
        return np.ascontiguousarray(self.basis.matrix @ result)

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
        full = self._full(self._given(parameters))
        return {self._all_names[place]: float(full[place]) for place in self._solved}

    def below(self, parameters: ArrayLike) -> tuple[float, Floats]:
        """Return momentum and numbers of the six quarks below x_min; nan where an integral diverges."""
        full = self._full(self._given(parameters))
        momenta, numbers = np.zeros(len(self._functions)), np.zeros(len(self._functions))
        for place, one in enumerate(self._functions):
            own = full[one.places]
            momenta[place] = own[2:] @ one.moments(own, 1.0, edge=True)
            numbers[place] = own[2:] @ one.moments(own, 0.0, edge=True) if own[0] > 0.0 else np.nan
        counted = self.basis.numbers
        of_quarks = np.where(counted != 0.0, counted * numbers, 0.0).sum(axis=1)
        return float(self.basis.momentum @ momenta), of_quarks

    # ---- sum rules -------------------------------------------------------------------------------------

    def _full(self, given: Floats) -> Floats:
        """Return a, b and all coefficients of all terms: what is given, and what the sum rules determine."""
        full: Floats = self._selection @ given
        for place, value in self._numbers.items():
            one = self._functions[place]
            own = full[one.places]
            moments = one.moments(own, 0.0)
            full[one.lead] = (value - own[3:] @ moments[1:]) / moments[0]
        if self._carrier is not None:
            one, weight = self._functions[self._carrier], self.basis.momentum
            momenta = [f.moments(full[f.places], 1.0) for f in self._functions]
            rest = 1.0 - sum(
                weight[place] * (full[f.places][2:] @ momenta[place])
                for place, f in enumerate(self._functions)
            )  # the coefficient sought is 0 in it
            full[one.lead] = rest / (weight[self._carrier] * momenta[self._carrier][0])
        return full

    def _full_derivative(self, full: Floats) -> Floats:
        """Return d full by d given, (full, given): a solved coefficient follows from its equation."""
        by: Floats = self._selection.copy()
        for place in self._numbers:
            one = self._functions[place]
            slope = one.moment_derivatives(full[one.places], 0.0)
            by[one.lead] = -(slope @ by[one.places]) / slope[2]
        if self._carrier is not None:
            one, weight = self._functions[self._carrier], self.basis.momentum
            slopes = [f.moment_derivatives(full[f.places], 1.0) for f in self._functions]
            change = sum(
                weight[place] * (slopes[place] @ by[f.places]) for place, f in enumerate(self._functions)
            )
            by[one.lead] = -np.asarray(change) / (weight[self._carrier] * slopes[self._carrier][2])
        return by
