"""What a map of first order neglects: checked by maps built one uncertainty away, in units of errors.

Replicas move the map linearly from where it is exact. Maps at plus and minus one uncertainty of a theory
parameter show how far the linear one is off there; a linear step of the fit turns that into the change of
each fitted parameter. For a parameter that lies n uncertainties away it is n^2 times that, to second order.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np

from .._check import Floats, show
from ..errors import InputError
from ._result import FitResult
from ._space import whitened_derivative

__all__ = ["notes"]


def notes(central: FitResult, chi2: Any) -> tuple[str, ...]:
    """Say for each theory parameter of a fit what its map neglects.

    Parameters
    ----------
    central : FitResult
        Of a fit with ``rebuild``.
    chi2 : ChiSquare

    Returns
    -------
    tuple of str
        One sentence a parameter.

    Raises
    ------
    InputError
        If the fit has no covariance.
    """
    if central.covariance is None:
        raise InputError(f"rebuild: the fit to the data has no covariance: {'; '.join(central.status)}")
    said = []
    for name in central._problem.reference:
        size = max(_moves(central, chi2, name), key=lambda move: float(np.nanmax(abs(move))))
        own, worst = abs(size[central.names.index(name)]), int(np.nanargmax(abs(size)))
        where = f"{name} moves the map to first order from {show(central.value(name))}"
        most = f"{central.names[worst]} by {abs(size[worst]):.1g} of its uncertainty"
        said.append(f"{where}; one uncertainty away what is neglected moves {name} by {own:.1g} and {most}")
    return tuple(said)


def _moves(central: FitResult, chi2: Any, name: str) -> Iterator[Floats]:
    """Yield the changes of all parameters in units of their errors, one uncertainty up and down."""
    problem, rebuild = central._problem, central._rebuild
    assert rebuild is not None
    assert central.covariance is not None
    error, place = central.error(name), central.names.index(name)
    if not np.isfinite(error):  # on a bound: it does not move
        yield np.zeros(len(central.names))
        return
    derivative = whitened_derivative(central)
    for sign in (1.0, -1.0):
        moved = central.parameters.copy()
        moved[place] += sign * error
        last = moved[len(moved) - len(problem.reference) :].tolist()
        exact = rebuild(dict(zip(problem.reference, last, strict=True)))
        off = chi2.whiten(exact.prediction(moved) - problem.prediction(moved))
        yield -(central.covariance / central.delta_chi2) @ (derivative.T @ off) / central.errors
