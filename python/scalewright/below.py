"""What lies below the smallest x of a grid: the momentum and the quark numbers there.

On [x_min, 1] alone the sum rules are not kept: evolution carries momentum and quark number below x_min. What
was there at the start is known only where the input is a function; it is integrated here.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cache

import numpy as np

from . import _check
from ._check import Floats
from .errors import InputError

__all__ = ["Below"]

#: Length in u = ln(1/x) of one step of the integration, and the number of Gauss-Legendre nodes in it: a power
#: x^a with |a| <= 2 is integrated to rounding over such a step.
_STEP, _ORDER = 2.0, 16

#: The integration ends here at the latest: x = exp(-690) is the end of the normal floats.
_LAST_U = 690.0

#: A step that adds less than this part of the sum ends the integration.
_SMALL = 1e-14

#: Rounding of a difference q - qbar in parts of |q| + |qbar|: a function of a few operations is good to a few
#: units of 2^-53 = 1.1e-16.
_NOISE = 1e-15


@dataclass(frozen=True, eq=False)
class Below:
    """Momentum and quark numbers below x_min.

    Parameters
    ----------
    momentum : ndarray, (scale, replica)
        Sum over all flavours of the integral of x f(x) from 0 to x_min; nan where unknown.
    number : ndarray, (scale, replica, quark)
        Integral of q(x) - qbar(x) from 0 to x_min for the six quarks d u s c b t (PDG numbers 1 to 6); nan
        where unknown.

    Raises
    ------
    InputError
        If the shapes do not fit each other, or a number is infinite.
    """

    momentum: Floats
    number: Floats

    def __post_init__(self) -> None:
        for name in ("momentum", "number"):
            array = _check.real_array(name, getattr(self, name), unknown=True).copy()
            array.flags.writeable = False
            object.__setattr__(self, name, array)
        momentum, number = self.momentum.shape, self.number.shape
        if len(momentum) != 2 or number != (*momentum, 6):
            raise InputError(
                f"below: momentum has shape {momentum} and number {number}: "
                "they must be (scale, replica) and (scale, replica, 6)"
            )

    def scale(self, index: int) -> Below:
        """Return the part of one scale.

        Parameters
        ----------
        index : int
            Position in the axis of scales.

        Returns
        -------
        Below
            The axis of scales stays, of length one.
        """
        return Below(self.momentum[index : index + 1], self.number[index : index + 1])

    def __eq__(self, other: object) -> bool:
        """Say whether all numbers are the same, unknown ones included."""
        if not isinstance(other, Below):
            return NotImplemented
        return np.array_equal(self.momentum, other.momentum, equal_nan=True) and np.array_equal(
            self.number, other.number, equal_nan=True
        )

    __hash__ = None  # type: ignore[assignment]


def from_functions(functions: Mapping[int, Callable[[Floats], Floats]], u_min: float) -> Below:
    """Integrate functions below x_min = exp(-u_min).

    Parameters
    ----------
    functions : mapping
        PDG number -> checked function of an array x, returning x f(x).
    u_min : float
        ln(1/x_min).

    Returns
    -------
    Below
        Of one scale and one replica. An integral that does not converge is nan.

    Notes
    -----
    Gauss-Legendre in steps of u = ln(1/x) until a step adds nothing more. A quark number stops also where
    q - qbar drowns in the rounding of q and qbar; what is left out is below that rounding.
    """

    def momentum(x: Floats) -> tuple[Floats, Floats]:
        total = x * sum(function(x) for function in functions.values())
        return total, np.zeros_like(x)

    def number(quark: int) -> Callable[[Floats], tuple[Floats, Floats]]:
        pair = [(sign, functions[sign * quark]) for sign in (1, -1) if sign * quark in functions]

        def difference(x: Floats) -> tuple[Floats, Floats]:
            values = [(sign, function(x)) for sign, function in pair]
            noise = _NOISE * sum((abs(value) for _, value in values), np.zeros_like(x))
            return sum((sign * value for sign, value in values), np.zeros_like(x)), noise

        return difference

    numbers = [_integral(number(quark), u_min) for quark in range(1, 7)]
    return Below(np.array([[_integral(momentum, u_min)]]), np.array([[numbers]]))


@cache
def _rule() -> tuple[Floats, Floats]:
    """Return Gauss-Legendre nodes and weights on [0, 1]; made on first use, since it is slow to import."""
    nodes, weights = np.polynomial.legendre.leggauss(_ORDER)
    return 0.5 * (1.0 + nodes), 0.5 * weights


def _integral(integrand: Callable[[Floats], tuple[Floats, Floats]], u_min: float) -> float:
    """Integrate over u from `u_min` upwards; nan where that does not converge.

    The integrand returns values and their rounding.
    """
    nodes, weights = _rule()
    total, start = 0.0, u_min
    while start < _LAST_U:
        u = start + _STEP * nodes
        try:
            values, noise = integrand(np.exp(-u))
        except InputError:  # overflow of a function that is fine on the grid: x^-2 at 1e-290
            return float("nan")
        step = _STEP * float(weights @ values)
        total += step
        if abs(step) <= max(_SMALL * abs(total), _STEP * float(weights @ noise)):
            return total
        start += _STEP
    return float("nan")


def check(value: object, scales: int, replicas: int) -> Below | None:
    """Return `below` as given if it fits the densities, or refuse it."""
    if value is None:
        return None
    if not isinstance(value, Below):
        _check.refuse("below", value, f"below must be a Below or None, not {type(value).__name__}")
    if value.momentum.shape != (scales, replicas):
        allowed = f"below must have {scales} scales and {replicas} replicas, as values have"
        raise InputError(f"below of shape {value.momentum.shape}: {allowed}")
    return value
