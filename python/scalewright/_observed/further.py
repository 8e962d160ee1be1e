"""Coefficient functions of one's own, beyond the order of the theory, in a form that can be compared."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any, TypeAlias

from .. import _check
from ..kernels import CoefficientFunction
from .light import COEFFICIENTS
from .measures import FUNCTIONS
from .own_functions import FurtherOrders

__all__ = ["Further", "checked_further"]

#: Structure function -> further orders.
Further: TypeAlias = Mapping[str, FurtherOrders]


def checked_further(given: Any) -> Further:
    """Return further coefficient functions, checked.

    Parameters
    ----------
    given : mapping or None
        Structure function -> sequence of mappings, one an order, name -> `CoefficientFunction`.

    Raises
    ------
    InputError
        If a name is unknown, a part is of the wrong kind, or xF3 is given a gluon or pure singlet.
    """
    if given is None:
        return {}
    if not isinstance(given, Mapping):
        _check.refuse("further", given, "must be a mapping of structure function to a list of orders")
    return {str(name): _orders(name, orders) for name, orders in given.items()}


def _orders(function: Any, given: Any) -> FurtherOrders:
    _check.choice("further", function, FUNCTIONS)
    if not isinstance(given, Sequence) or isinstance(given, str):
        _check.refuse(f"further[{function!r}]", given, "must be a list with one mapping an order")
    known = COEFFICIENTS[:2] if function == "xF3" else COEFFICIENTS
    orders = []
    for place, order in enumerate(given):
        where = f"further[{function!r}][{place}]"
        if not isinstance(order, Mapping):
            _check.refuse(where, order, "must be a mapping of name to CoefficientFunction")
        for name, kernel in order.items():
            _check.choice(where, name, known)
            if not isinstance(kernel, CoefficientFunction):
                _check.refuse(f"{where}[{name!r}]", kernel, "must be a CoefficientFunction")
        orders.append(tuple(order.items()))
    return tuple(orders)
