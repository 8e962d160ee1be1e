"""x^a (1-x)^b times a polynomial for several combinations at once: values, derivatives, moments.

All terms are rows of one array, shorter polynomials filled up with zeros: a fit asks for these functions at
every step, and one call for all terms costs little more than one for each.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from .. import _check
from .._check import Floats
from ..grid import ChebyshevGrid
from ._polynomials import FAMILIES, MOST, powers

__all__ = ["Term", "Terms"]


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


class Terms:
    """All terms on a grid, as functions of a, b and the coefficients of each, (term, own).

    Attributes
    ----------
    held : ndarray of bool, (term, own)
        Whether a term has this coefficient; what stands where it has not must be 0.
    """

    def __init__(self, terms: Sequence[Term], grid: ChebyshevGrid) -> None:
        counts = np.array([len(term.coefficients) for term in terms], dtype=np.int64)
        most = int(counts.max(initial=1))
        self.held = np.arange(2 + most) < 2 + counts[:, None]
        self._powers = np.zeros((len(terms), most, most))
        for place, (term, count) in enumerate(zip(terms, counts.tolist(), strict=True)):
            self._powers[place, :count, :count] = powers(term.polynomial, count - 1)
        step = np.array([1.0 if term.variable == "x" else 0.5 for term in terms])
        self._steps: Floats = step[:, None] * np.arange(
            float(most)
        )  # powers of x in the powers of y, (term, power)
        log_x = -np.asarray(grid.u)
        log_rest = np.log(-np.expm1(-grid.u))  # ln(1-x), exact near x = 1
        self._logarithms = np.stack([log_x, log_rest], axis=1)
        self._members = self._powers @ np.exp(self._steps[:, :, None] * log_x)
        self._edge = float(np.exp(-grid.u[-1]))

    def values(self, own: Floats) -> Floats:
        """Return F at the nodes, (term, node)."""
        return self._envelope(own) * self._polynomial(own)

    def derivatives(self, own: Floats) -> Floats:
        """Return dF by a, b and coefficients, (term, own, node)."""
        envelope = self._envelope(own)
        value = envelope * self._polynomial(own)
        result = np.empty((*own.shape, value.shape[1]))
        np.multiply(value[:, None], self._logarithms.T, out=result[:, :2])
        np.multiply(envelope[:, None], self._members, out=result[:, 2:])
        return result

    def weighted(self, own: Floats, weights: Floats) -> Floats:
        """Return `derivatives` summed over the nodes with weights (term, node), (term, own)."""
        weights = weights * self._envelope(own)
        by_coefficient = (self._members @ weights[:, :, None])[:, :, 0]
        weights *= self._polynomial(own)
        return np.concatenate([weights @ self._logarithms, by_coefficient], axis=1)

    def _envelope(self, own: Floats) -> Floats:
        return np.asarray(np.exp(own[:, :2] @ self._logarithms.T))

    def _polynomial(self, own: Floats) -> Floats:
        return np.asarray((own[:, None, 2:] @ self._members)[:, 0])

    def moments(self, own: Floats, s: float, which: Sequence[int] | slice, *, edge: bool = False) -> Floats:
        """Return integrals of x^(s-1) x^a (1-x)^b P_k from 0 to 1, or to x_min, of some terms, (term, k).

        Euler's integral: B(p, q) with p = a + s + j step, q = b + 1 for each power j.
        """
        from scipy.special import beta, betainc  # type: ignore[import-untyped]

        p, q = self._arguments(own[which], s, self._steps[which])
        whole = beta(p, q) * (betainc(p, q, self._edge) if edge else 1.0)
        return np.asarray((self._powers[which] @ whole[:, :, None])[:, :, 0])

    def moment_derivatives(self, own: Floats, s: float, which: Sequence[int] | slice) -> Floats:
        """Return d moment by a, b and coefficients of some terms, (term, own), the moment being that of F."""
        from scipy.special import beta, digamma

        p, q = self._arguments(own[which], s, self._steps[which])
        whole, both = beta(p, q), digamma(p + q)
        columns = np.stack([whole * (digamma(p) - both), whole * (digamma(q) - both), whole], axis=2)
        by_power = self._powers[which] @ columns  # (term, k, which derivative)
        along = (own[which][:, None, 2:] @ by_power[:, :, :2])[:, 0]
        return np.concatenate([along, by_power[:, :, 2]], axis=1)

    @staticmethod
    def _arguments(own: Floats, s: float, steps: Floats) -> tuple[Floats, Floats]:
        return own[:, :1] + s + steps, own[:, 1:2] + 1.0
