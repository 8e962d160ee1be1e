"""What a map of first order neglects: checked by maps built one uncertainty away, in units of errors.

Replicas move the map linearly from where it is exact. Maps at plus and minus one uncertainty of a theory
parameter show how far off, d (whitened), the linear one is there. In a replica n uncertainties away
predictions are then off by n^2 d, and their derivative by 2 n d in units of the uncertainty. The first moves
a fit by a linear step, n^2 times that of d. The second, times the residuals r that a fit leaves, moves the
parameter by 2 n d.r of its uncertainty: r is partly that of the data, partly drawn, of unit variance in all
directions but those that parameters move. Of second order: where the fit itself bends within its errors, a
factor of three either way was seen.
"""

from __future__ import annotations

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
    return tuple(_note(central, chi2, name) for name in central._problem.reference)


def _note(central: FitResult, chi2: Any, name: str) -> str:
    """Return the sentence about one theory parameter."""
    where = f"{name} moves the map to first order from {show(central.value(name))}"
    if not np.isfinite(central.error(name)):
        return f"{where}, where it lies on a bound"
    assert central.covariance is not None
    derivative, off = whitened_derivative(central), _off(central, chi2, name)
    root = central.covariance @ derivative.T / central.delta_chi2
    steps = [abs(root @ one / central.errors) for one in off]
    size = np.fmax(*steps)
    worst = int(np.nanargmax(size))
    even = 0.5 * (off[0] + off[1])
    inside = derivative @ np.linalg.lstsq(derivative, even, rcond=None)[0]
    drawn = 2.0 * float(np.hypot(even @ chi2.residuals(central.prediction), np.linalg.norm(even - inside)))
    own = f"{name} by {size[central.names.index(name)]:.1g}, {central.names[worst]} by {size[worst]:.1g}"
    near = "in a replica one uncertainty away what is neglected moves"
    return f"{where}; {near} {own} and, at random, {name} by {drawn:.1g} of its uncertainty"


def _off(central: FitResult, chi2: Any, name: str) -> list[Floats]:
    """Return how far predictions of first order are off, whitened, one uncertainty up and down."""
    problem, rebuild = central._problem, central._rebuild
    assert rebuild is not None
    made = []
    for sign in (1.0, -1.0):
        moved = central.parameters.copy()
        moved[central.names.index(name)] += sign * central.error(name)
        last = moved[len(moved) - len(problem.reference) :].tolist()
        exact = rebuild(dict(zip(problem.reference, last, strict=True)))
        made.append(chi2.whiten(exact.prediction(moved) - problem.prediction(moved)))
    return made
