"""The reference of multiplicative errors: fixed during a fit, renewed between fits until nothing moves."""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats
from ..errors import InputError
from .chi_square import ChiSquare

__all__ = ["Settled", "settle_reference"]


class Settled(NamedTuple):
    """A fit whose reference has settled: its chi-square, its prediction, all chi-squares on the way."""

    chi_square: ChiSquare
    prediction: Floats
    history: tuple[float, ...]


def settle_reference(
    start: ChiSquare, fit: Callable[[ChiSquare], ArrayLike], *, tolerance: float = 0.1, most: int = 20
) -> Settled:
    """Fit, take the prediction as reference for multiplicative errors, fit again, until chi-square settles.

    Parameters
    ----------
    start : ChiSquare
        With its first reference, usually the data.
    fit : callable
        ChiSquare -> prediction (datum,) that minimises it.
    tolerance : float
        Ends when chi-square moves by less.
    most : int
        Fits at most.

    Returns
    -------
    Settled
        The last object fitted with, and what it gave.

    Raises
    ------
    InputError
        If it has not settled after `most` fits; the chi-squares are listed.

    Notes
    -----
    R. Ball et al., arXiv:0912.2276: a reference that is fixed during each fit keeps the best fit unbiased.
    """
    least, limit = _check.real("tolerance", tolerance, above=0.0), _check.whole("most", most, least=2)
    current, history = start, list[float]()
    for _ in range(limit):
        prediction = _check.real_array("prediction of fit", _check.raised("fit", fit, current), ndim=1)
        history.append(float(np.asarray(current.value(prediction))))
        if len(history) > 1 and abs(history[-1] - history[-2]) < least:
            return Settled(current, prediction, tuple(history))
        current = current.with_reference(prediction)
    said = ", ".join(f"{value:.4g}" for value in history[-4:])
    raise InputError(f"reference has not settled after {limit} fits: the last chi-squares are {said}")
